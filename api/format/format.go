package format

import (
	"io"

	"leat/api/stream"
)

// A Format is one way to send requests in bulk and to get their answers, bound to an operation. It is the Solver of any
// number of runs at once; Reader and Writer make one each for a run.
type Format interface {
	stream.Solver
	// MediaType is what Content-Type says of it.
	MediaType() string
	// Reader finds the requests of a body.
	Reader(body io.Reader) stream.Reader
	// Writer frames the answers.
	Writer() stream.Writer
}
