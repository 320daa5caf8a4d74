package serve

import (
	"mime"
	"net/http"
	"strings"

	"leat/api/wire"
)

const (
	mediaJSON   = "application/json"
	mediaNDJSON = "application/x-ndjson"
	mediaHTML   = "text/html"
	mediaYAML   = "application/yaml"
)

// checkMedia refuses a request body that is not of the wanted media type, is not in UTF-8, or is encoded. The headers that it
// sets in the answer say the same to programs (RFC 9110, 15.5.16).
func checkMedia(request, answer http.Header, want string) *wire.Problem {
	given := strings.Join(request["Content-Type"], ", ")
	media, parameters, err := mime.ParseMediaType(given)
	if err != nil || media != want {
		answer["Accept"] = []string{want}
		return wrongMedia(given, want)
	}
	if charset, found := parameters["charset"]; found && !strings.EqualFold(charset, "utf-8") {
		return wrongCharset(charset)
	}
	if coding := strings.Join(request["Content-Encoding"], ", "); coding != "" && !strings.EqualFold(coding, "identity") {
		answer["Accept-Encoding"] = []string{"identity"}
		return wrongCoding(coding)
	}
	return nil
}
