package format

import (
	"strconv"

	"github.com/go-json-experiment/json/jsontext"

	"leat/api/wire"
)

// appendProblem appends a problem as it stands in bulk: without an instance.
func appendProblem(dst []byte, p *wire.Problem) []byte {
	dst = append(dst, `{"type":`...)
	dst = appendString(dst, p.Type)
	dst = append(dst, `,"title":`...)
	dst = appendString(dst, p.Title)
	dst = append(dst, `,"status":`...)
	dst = strconv.AppendInt(dst, int64(p.Status), 10)
	dst = append(dst, `,"detail":`...)
	dst = appendString(dst, p.Detail)
	if len(p.Errors) > 0 {
		dst = append(dst, `,"errors":`...)
		for i, fault := range p.Errors {
			separator := byte(',')
			if i == 0 {
				separator = '['
			}
			dst = append(dst, separator)
			dst = appendFault(dst, fault)
		}
		dst = append(dst, ']')
	}
	return append(dst, '}')
}

func appendFault(dst []byte, fault wire.Fault) []byte {
	place, name := fault.Pointer, `{"pointer":`
	if fault.Parameter != "" {
		place, name = fault.Parameter, `{"parameter":`
	} else if fault.Column != "" {
		place, name = fault.Column, `{"column":`
	}
	dst = append(dst, name...)
	dst = appendString(dst, place)
	dst = append(dst, `,"code":`...)
	dst = appendString(dst, fault.Code)
	dst = append(dst, `,"detail":`...)
	dst = appendString(dst, fault.Detail)
	return append(dst, '}')
}

// appendString quotes a string; what is not UTF-8 in it is replaced.
func appendString(dst []byte, s string) []byte {
	dst, _ = jsontext.AppendQuote(dst, s)
	return dst
}
