package record

import (
	"bytes"
	"encoding/json"
	"strconv"
	"strings"
)

// A node is a JSON value with its members in the order in which they came and its numbers as they were written.
type node struct {
	key   string // of a member
	value any    // json.Number, string, bool, nil, members or items
}

type (
	members []node
	items   []node
)

// read reads a JSON value that the decoder or an answer has already been through.
func read(text []byte) (node, error) {
	d := json.NewDecoder(bytes.NewReader(text))
	d.UseNumber()
	return readValue(d)
}

func readValue(d *json.Decoder) (node, error) {
	token, err := d.Token()
	if err != nil {
		return node{}, err
	}
	delimiter, isDelimiter := token.(json.Delim)
	if !isDelimiter {
		return node{value: token}, nil
	}
	var all []node
	for d.More() {
		key := ""
		if delimiter == '{' {
			name, err := d.Token()
			if err != nil {
				return node{}, err
			}
			key, _ = name.(string)
		}
		n, err := readValue(d)
		if err != nil {
			return node{}, err
		}
		n.key = key
		all = append(all, n)
	}
	if _, err := d.Token(); err != nil {
		return node{}, err
	}
	if delimiter == '{' {
		return node{value: members(all)}, nil
	}
	return node{value: items(all)}, nil
}

// get returns a member that is there and not null.
func (n node) get(name string) (node, bool) {
	all, _ := n.value.(members)
	for _, m := range all {
		if m.key == name {
			return m, m.value != nil
		}
	}
	return node{}, false
}

// number returns a member that is a number as float64.
func (n node) number(name string) (float64, bool) {
	m, _ := n.get(name)
	literal, isNumber := m.value.(json.Number)
	if !isNumber {
		return 0, false
	}
	v, err := literal.Float64()
	return v, err == nil
}

// text returns a scalar as people read it.
func (n node) text() string {
	switch v := n.value.(type) {
	case json.Number:
		return v.String()
	case string:
		return v
	case bool:
		return strconv.FormatBool(v)
	case items:
		parts := make([]string, len(v))
		for i := range v {
			parts[i] = v[i].text()
		}
		return "[" + strings.Join(parts, ", ") + "]"
	case members:
		parts := make([]string, len(v))
		for i := range v {
			parts[i] = words(v[i].key) + " " + v[i].text()
		}
		return strings.Join(parts, ", ")
	}
	return "none"
}

var spelt = strings.NewReplacer("_", " ", "froude", "Froude", "vedernikov", "Vedernikov")

// words returns a name as people read it.
func words(name string) string { return spelt.Replace(name) }
