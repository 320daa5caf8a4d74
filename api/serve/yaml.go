package serve

import (
	"bytes"
	"fmt"

	"github.com/go-json-experiment/json"
	"github.com/go-json-experiment/json/jsontext"
	"github.com/goccy/go-yaml"
)

// yamlToJSON turns a YAML document into JSON with the order of its members kept.
func yamlToJSON(document []byte) ([]byte, error) {
	var v any
	if err := yaml.UnmarshalWithOptions(document, &v, yaml.UseOrderedMap()); err != nil {
		return nil, err
	}
	var b bytes.Buffer
	encoder := jsontext.NewEncoder(&b, jsontext.WithIndent("  "))
	if err := writeYAML(encoder, v); err != nil {
		return nil, err
	}
	return b.Bytes(), nil
}

func writeYAML(encoder *jsontext.Encoder, v any) error {
	switch v := v.(type) {
	case yaml.MapSlice:
		if err := encoder.WriteToken(jsontext.BeginObject); err != nil {
			return err
		}
		for _, item := range v {
			// A status code that is written without quotes is a number to YAML, and a name to JSON.
			if err := encoder.WriteToken(jsontext.String(fmt.Sprint(item.Key))); err != nil {
				return err
			}
			if err := writeYAML(encoder, item.Value); err != nil {
				return err
			}
		}
		return encoder.WriteToken(jsontext.EndObject)
	case []any:
		if err := encoder.WriteToken(jsontext.BeginArray); err != nil {
			return err
		}
		for _, item := range v {
			if err := writeYAML(encoder, item); err != nil {
				return err
			}
		}
		return encoder.WriteToken(jsontext.EndArray)
	default:
		return json.MarshalEncode(encoder, v)
	}
}
