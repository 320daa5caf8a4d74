package serve

import (
	"mime"
	"net/http"
	"slices"
	"strings"

	"leat/api/wire"
)

const (
	mediaJSON   = "application/json"
	mediaNDJSON = "application/x-ndjson"
	mediaHTML   = "text/html"
	mediaYAML   = "application/yaml"
)

// checkMedia refuses a request body that is of none of the wanted media types, is not in UTF-8, or is encoded, and returns the one it is of. The
// headers that it sets in the answer say the same to programs (RFC 9110, 15.5.16).
func checkMedia(request, answer http.Header, wanted ...string) (media string, problem *wire.Problem) {
	given := strings.Join(request["Content-Type"], ", ")
	media, parameters, err := mime.ParseMediaType(given)
	if err != nil || !slices.Contains(wanted, media) {
		answer["Accept"] = []string{strings.Join(wanted, ", ")}
		return "", wrongMedia(given, wanted)
	}
	if charset, found := parameters["charset"]; found && !strings.EqualFold(charset, "utf-8") {
		return "", wrongCharset(charset)
	}
	if strings.EqualFold(parameters["header"], "absent") {
		return "", wire.UnsupportedMediaType("The request's Content-Type says that the header line is absent, which names the columns; send it as the first line.")
	}
	if coding := strings.Join(request["Content-Encoding"], ", "); coding != "" && !strings.EqualFold(coding, "identity") {
		answer["Accept-Encoding"] = []string{"identity"}
		return "", wrongCoding(coding)
	}
	return media, nil
}
