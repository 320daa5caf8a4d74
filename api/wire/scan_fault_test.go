package wire

import (
	"strings"
	"testing"
)

// TestSyntaxFaults holds the place and advice of each fault of syntax.
func TestSyntaxFaults(t *testing.T) {
	deep := func(n int) string { return strings.Repeat("[", n) + strings.Repeat("]", n) }
	many := func(n int) string { return "[" + strings.TrimSuffix(strings.Repeat("0,", n), ",") + "]" }
	for _, c := range []struct {
		body, code, pointer, detail string
	}{
		{``, codeEmptyBody, ``, `Column 1 (byte 0): There is no JSON value`},
		{" \n ", codeEmptyBody, ``, `Line 2, column 2 (byte 3)`},
		{"\xef\xbb\xbf{}", codeByteOrderMark, ``, `byte order mark`},
		{`{"a":1}{"b":2}`, codeTrailingData, ``, `Column 8 (byte 7): Another JSON value follows the first; exactly one is accepted, and in bulk one a line (curl`},
		{"{\"a\":1}\n{\"b\":2}", codeTrailingData, ``, `Line 2, column 1 (byte 8): Another JSON value`},
		{`"a": 1,`, codeTrailingData, ``, `Column 4 (byte 3): There is something after the end of the JSON value; exactly one is accepted, and in bulk each whole on one line`},
		{`{"a":1};`, codeTrailingData, ``, `exactly one is accepted.`},
		{"{\"a\":NaN}\r\n", codeNotFinite, `/a`, `Column 6 (byte 5): JSON has no NaN`},
		{"{\"a\":NaN,\n\"b\":1}", codeNotFinite, `/a`, `Line 1, column 6 (byte 5): JSON has no NaN`},
		{"{\"a\":1,\n \"é\":x}", codeSyntaxError, `/é`, `Line 2, column 6 (byte 14): A JSON value is expected, not the character 'x'`},
		{`{"a":NaN}`, codeNotFinite, `/a`, `leave the member out or give null`},
		{`{"a":[1,-Infinity]}`, codeNotFinite, `/a/1`, `leave the member out or give null`},
		{`{"a":inf}`, codeNotFinite, `/a`, ``},
		{`{"a":None}`, codeSyntaxError, `/a`, `as null`},
		{`{"a":True}`, codeSyntaxError, `/a`, `small letters`},
		{`{"a":'x'}`, codeSyntaxError, `/a`, `single quotes`},
		{`{'a':1}`, codeSyntaxError, ``, `single quotes`},
		{`{"a":+1}`, codeSyntaxError, `/a`, `plus sign`},
		{`{"a":.5}`, codeSyntaxError, `/a`, `before the decimal point`},
		{`{"a":5.}`, codeSyntaxError, `/a`, `after its decimal point`},
		{`{"a":-}`, codeSyntaxError, `/a`, `after its minus sign`},
		{`{"a":1e}`, codeSyntaxError, `/a`, `in its exponent`},
		{`{"a":012}`, codeSyntaxError, `/a`, `superfluous 0`},
		{`{"a":1,}`, codeSyntaxError, ``, `comma before the closing brace`},
		{`{"a":[1,]}`, codeSyntaxError, `/a/1`, `comma before the closing bracket`},
		{`{"a":1 // width`, codeSyntaxError, `/a`, `no comments`},
		{`{"a" 1}`, codeSyntaxError, `/a`, `colon`},
		{`{"a":1 "b":2}`, codeSyntaxError, `/a`, `comma or the object's closing brace`},
		{`{"a":[1 2]}`, codeSyntaxError, `/a/0`, `comma or the array's closing bracket`},
		{`{"a":"x`, codeSyntaxError, `/a`, `ends inside a string`},
		{`{"a":{`, codeSyntaxError, `/a`, `ends inside an object`},
		{`{"a":[`, codeSyntaxError, `/a/0`, `ends where a value is expected`},
		{"{\"a\":\"x\ty\"}", codeSyntaxError, `/a`, `control character`},
		{`{"a":"\x"}`, codeSyntaxError, `/a`, `escape`},
		{`{"a":"\u12g4"}`, codeSyntaxError, `/a`, `four hexadecimal digits`},
		{`{"a":"\ud800"}`, codeLoneSurrogate, `/a`, `surrogate`},
		{`{"a":"\ud800\u0041"}`, codeLoneSurrogate, `/a`, `surrogate`},
		{"{\"a\":\"\xff\"}", codeInvalidUTF8, `/a`, `UTF-8`},
		{`{"a":1,"b":{"c/d":1,"c\/d":2}}`, codeDuplicateMember, `/b/c~1d`, `twice`},
		{`{"a":1,"\u0061":2}`, codeDuplicateMember, `/a`, `twice`},
		{`{"a":1e101}`, codeNumberOutOfRange, `/a`, `1e100`},
		{`{"a":1e-101}`, codeNumberUnderflow, `/a`, `1e-100`},
		{`{"a":` + strings.Repeat("1", 129) + `}`, codeNumberTooLong, `/a`, `128`},
		{deep(33), codeNestingTooDeep, strings.Repeat("/0", 32), `32`},
		{strings.Repeat("[", 1<<20), codeNestingTooDeep, strings.Repeat("/0", 32), `32`},
		{`{"points":` + many(6) + `}`, codeTooManyItems, `/points`, "more than 5 items, the limit `points`"},
		{`{"depths":` + many(4) + `}`, codeTooManyItems, `/depths`, "more than 3 items, the limit `array_items`"},
	} {
		var r DepthsRequest
		p := Decode([]byte(c.body), SI, &Limits{ArrayItems: 3, Points: 5}, &r)
		if p == nil || len(p.Errors) != 1 {
			t.Errorf("%.40q: %v, want one fault", c.body, p)
			continue
		}
		status := 400
		if c.code == codeTooManyItems {
			status = 413
		}
		if f := p.Errors[0]; f.Code != c.code || f.Pointer != c.pointer || !strings.Contains(f.Detail, c.detail) || p.Status != status {
			t.Errorf("%.40q:\n got %d %s %q %q\nwant %d %s %q %q", c.body, p.Status, f.Code, f.Pointer, f.Detail, status, c.code, c.pointer, c.detail)
		}
	}
	// What is just within the bounds is no fault of syntax.
	for _, body := range []string{deep(32), `{"points":` + many(5) + `}`, `{"depths":` + many(3) + `}`, `{"a":"\uffff\ufdd0` + "\uffff" + `"}`, `{"a":"\ud83c\udf0a"}`, ` {"a":1} ` + "\r\n\t"} {
		var r DepthsRequest
		if p := Decode([]byte(body), SI, &Limits{ArrayItems: 3, Points: 5}, &r); p == nil || p.Status != 422 {
			t.Errorf("%.40q: %v, want 422", body, p)
		}
	}
}

// TestManyNames looks for duplicates beyond the number of names that are compared one with another.
func TestManyNames(t *testing.T) {
	var b strings.Builder
	limits := DefaultLimits()
	for i := range 300 {
		if i > 0 {
			b.WriteByte(',')
		}
		b.WriteString(`"` + strings.Repeat("x", i+1) + `":{"x":1}`)
	}
	var s scanner
	if !s.scan([]byte("{"+b.String()+"}"), &limits) {
		t.Error(s.fault)
	}
	for _, n := range []int{1, fewNames, fewNames + 1, 300} {
		if s.scan([]byte("{"+b.String()+`,"`+strings.Repeat("x", n)+`":1}`), &limits) || s.fault.code != codeDuplicateMember {
			t.Errorf("name %d given twice: %v", n, s.fault)
		}
	}
}
