package serve

import (
	"mime"
	"net/http"
	"strconv"
	"strings"
)

// negotiate chooses one of the offered media types by the Accept header (RFC 9110, 12.5.1): the one of greatest quality, of equals
// the first. It is the first offer where the header is absent or empty, and false where every offer is refused.
// Media ranges that cannot be read are passed over.
func negotiate(h http.Header, offers ...string) (string, bool) {
	accept := strings.Join(h["Accept"], ",")
	if strings.Trim(accept, " \t,") == "" {
		return offers[0], true
	}
	best, bestQuality := "", 0.0
	for _, offer := range offers {
		quality, precision := 0.0, -1
		for text := range strings.SplitSeq(accept, ",") {
			media, q, err := parseRange(text)
			if err != nil {
				continue
			}
			// The most precise range that covers an offer decides about it.
			if p := precisionOf(media, offer); p > precision || p >= 0 && p == precision && q > quality {
				precision, quality = p, q
			}
		}
		if quality > bestQuality {
			best, bestQuality = offer, quality
		}
	}
	return best, best != ""
}

// parseRange reads one media range and its quality.
func parseRange(text string) (media string, quality float64, err error) {
	media, parameters, err := mime.ParseMediaType(text)
	if err != nil {
		return "", 0, err
	}
	q, given := parameters["q"]
	if !given {
		return media, 1, nil
	}
	quality, err = strconv.ParseFloat(q, 64)
	if err == nil && !(quality >= 0 && quality <= 1) {
		err = strconv.ErrRange
	}
	return media, quality, err
}

// precisionOf says how precisely a media range names an offer: 2 the type itself, 1 its family, 0 anything, -1 not at all.
func precisionOf(media, offer string) int {
	switch {
	case media == offer:
		return 2
	case media == "*/*":
		return 0
	case strings.HasSuffix(media, "/*") && strings.HasPrefix(offer, strings.TrimSuffix(media, "*")):
		return 1
	}
	return -1
}
