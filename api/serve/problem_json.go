package serve

import (
	"github.com/go-json-experiment/json"
	"github.com/go-json-experiment/json/jsontext"

	"leat/api/wire"
)

func appendProblem(dst []byte, p *wire.Problem) []byte {
	b, err := json.Marshal(map[string]any{"type": p.Type, "title": p.Title, "status": p.Status, "detail": p.Detail, "instance": p.Instance}, json.Deterministic(true), jsontext.AllowInvalidUTF8(true))
	if err != nil {
		panic(err)
	}
	return append(dst, b...)
}
