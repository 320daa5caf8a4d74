// Package openapi holds the contract of the service as an OpenAPI 3.1 document, and the examples that it shows.
// It imports nothing of the module, so that whatever serves or checks the contract can import it.
package openapi

import "embed"

// YAML is the contract itself, as it is served at /openapi.yaml.
//
//go:embed openapi.yaml
var YAML []byte

// Examples holds the requests and answers that YAML shows, as files of their own under "examples": for each operation
// NAME.request.json and NAME.answer.json, for bulk NAME.request.ndjson and NAME.answer.ndjson. Tests execute them
// and hold them equal to the document.
//
//go:embed examples
var Examples embed.FS
