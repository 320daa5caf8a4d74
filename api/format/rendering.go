package format

import (
	"leat/api/operation"
	"leat/api/wire"
)

// A Rendering is a form, beside JSON, of the answer to one request. It is immutable and safe for concurrent use.
type Rendering struct {
	// MediaType is what Accept names.
	MediaType string
	// ContentType is MediaType with its parameters.
	ContentType string
	// Policy is the Content-Security-Policy of this form, where it is not that of all answers.
	Policy string
	// Append appends the answer in this form. On failure it returns dst unchanged and the problem that says why this answer cannot be given so.
	Append func(dst []byte, solved *operation.Solved) ([]byte, *wire.Problem)
}

// Renderings returns the forms that the answers of an operation can have, by what its Form can tell.
func Renderings(op *operation.Operation) []Rendering {
	var out []Rendering
	if _, ok := op.Form.(wire.Tabular); ok {
		out = append(out, Rendering{MediaType: "text/csv", ContentType: "text/csv; charset=utf-8; header=present", Append: appendTable})
	}
	if _, ok := op.Form.(wire.Placed); ok {
		out = append(out, Rendering{MediaType: "application/geo+json", ContentType: "application/geo+json", Append: appendPlaces})
	}
	return out
}
