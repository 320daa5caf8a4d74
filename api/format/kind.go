package format

// A Kind is a form of bulk bodies, in which requests come or answers go.
type Kind uint8

// The kinds of bulk bodies.
const (
	NDJSON    Kind = iota // one JSON object a line
	JSONArray             // one array of objects
	GeoJSON               // a FeatureCollection (RFC 7946)
	CSV                   // a header line and one row a record (RFC 4180)
)

// Kinds are all of them.
var Kinds = []Kind{NDJSON, JSONArray, GeoJSON, CSV}

var mediaTypes = [...]string{NDJSON: "application/x-ndjson", JSONArray: "application/json", GeoJSON: "application/geo+json", CSV: "text/csv"}

// MediaType is what Content-Type and Accept say of the kind.
func (k Kind) MediaType() string { return mediaTypes[k] }

// ContentType is MediaType with the parameters that an answer's header has.
func (k Kind) ContentType() string {
	if k == CSV {
		return "text/csv; charset=utf-8; header=present"
	}
	return mediaTypes[k]
}

// Framed reports whether an unfinished body of the kind can be taken for a whole one, since its text has no end that says so. Such an answer is told of
// in headers or trailers, and broken off where it cannot be finished.
func (k Kind) Framed() bool { return k != NDJSON }

// KindOf returns the kind that a media type names.
func KindOf(media string) (Kind, bool) {
	for _, k := range Kinds {
		if k.MediaType() == media {
			return k, true
		}
	}
	return 0, false
}
