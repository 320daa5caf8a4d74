package serve

import (
	"bytes"
	"errors"
	"fmt"
	"regexp"

	"github.com/go-json-experiment/json/jsontext"
	"github.com/goccy/go-yaml/ast"
	"github.com/goccy/go-yaml/parser"
	"github.com/goccy/go-yaml/token"
)

// yamlToJSON turns a YAML document into JSON with the order of its members and the spelling of its numbers kept. It takes what
// JSON can say: no anchors, no tags, numbers written as in JSON.
func yamlToJSON(document []byte) ([]byte, error) {
	file, err := parser.ParseBytes(document, 0)
	if err != nil {
		return nil, err
	}
	if len(file.Docs) != 1 || file.Docs[0].Body == nil {
		return nil, errors.New("not one YAML document")
	}
	var b bytes.Buffer
	encoder := jsontext.NewEncoder(&b, jsontext.WithIndent("  "))
	if err := writeNode(encoder, file.Docs[0].Body); err != nil {
		return nil, err
	}
	return b.Bytes(), nil
}

// jsonNumber is a number as JSON spells it. The parser takes those without a point but with an exponent for text.
var jsonNumber = regexp.MustCompile(`^-?(0|[1-9][0-9]*)(\.[0-9]+)?([eE][-+]?[0-9]+)?$`)

func writeNode(encoder *jsontext.Encoder, node ast.Node) error {
	switch n := node.(type) {
	case *ast.MappingNode:
		return writeMapping(encoder, n.Values)
	case *ast.MappingValueNode:
		return writeMapping(encoder, []*ast.MappingValueNode{n})
	case *ast.SequenceNode:
		if err := encoder.WriteToken(jsontext.BeginArray); err != nil {
			return err
		}
		for _, item := range n.Values {
			if err := writeNode(encoder, item); err != nil {
				return err
			}
		}
		return encoder.WriteToken(jsontext.EndArray)
	case *ast.LiteralNode:
		return encoder.WriteToken(jsontext.String(n.Value.Value))
	case *ast.StringNode:
		plain := n.Token.Type != token.SingleQuoteType && n.Token.Type != token.DoubleQuoteType
		if plain && jsonNumber.MatchString(n.Value) {
			return encoder.WriteValue(jsontext.Value(n.Value))
		}
		return encoder.WriteToken(jsontext.String(n.Value))
	case *ast.IntegerNode, *ast.FloatNode:
		text := node.GetToken().Value
		if !jsonNumber.MatchString(text) {
			return fmt.Errorf("line %d: %s is no number that JSON can spell", node.GetToken().Position.Line, text)
		}
		return encoder.WriteValue(jsontext.Value(text))
	case *ast.BoolNode:
		return encoder.WriteToken(jsontext.Bool(n.Value))
	case *ast.NullNode:
		return encoder.WriteToken(jsontext.Null)
	}
	return fmt.Errorf("line %d: %s has no form in JSON", node.GetToken().Position.Line, node.Type())
}

func writeMapping(encoder *jsontext.Encoder, pairs []*ast.MappingValueNode) error {
	if err := encoder.WriteToken(jsontext.BeginObject); err != nil {
		return err
	}
	for _, pair := range pairs {
		// The token rather than the value: a status code without quotes is a number to YAML, and a name to JSON.
		if err := encoder.WriteToken(jsontext.String(pair.Key.GetToken().Value)); err != nil {
			return err
		}
		if err := writeNode(encoder, pair.Value); err != nil {
			return err
		}
	}
	return encoder.WriteToken(jsontext.EndObject)
}
