package wire

import (
	"strconv"
	"unicode/utf8"

	"github.com/go-json-experiment/json/jsontext"
)

// pair reads a list of two numbers.
func (w *walk) pair(f *field, into *Pair) {
	into.Given = true
	w.tuple(f, into.Values[:])
}

// named reads an object of numbers under names of the caller's. It returns a list of its own, never nil.
func (w *walk) named(f *field) []NamedNumber {
	out := []NamedNumber{}
	if w.decoder.PeekKind() != '{' {
		w.wrongType(f.wanted())
		return out
	}
	w.delimiter()
	limitName := f.limit
	if limitName == "" {
		limitName = "array_items"
	}
	limit := w.limits.named(limitName)
	for !w.stop() && w.decoder.PeekKind() != '}' {
		name := string(w.memberName())
		if w.decoder.PeekKind() == 'n' {
			w.skip()
			continue
		}
		switch {
		case utf8.RuneCountInString(name) > MaxNameCharacters:
			w.fault(codeTooLong, func() string { return "A name in " + f.name + " may have at most 256 characters." })
			w.skip()
			continue
		case len(out) == limit:
			w.size = true
			w.fault(codeTooManyItems, func() string {
				return f.name + " has more than " + strconv.Itoa(limit) + " members, the limit `" + limitName + "` of this service (GET /v1/limits)."
			})
			w.skip()
			continue
		}
		at := w.enter(name)
		out = append(out, NamedNumber{name, w.number(f, 0)})
		w.leave(at)
	}
	w.closeList(f, len(out))
	return out
}

// texts reads a list of strings. It returns a list of its own, never nil.
func (w *walk) texts(f *field) []string {
	out := []string{}
	if !w.openList(f) {
		return out
	}
	for i := 0; !w.stop() && w.decoder.PeekKind() != ']'; i++ {
		at := w.enterItem(i)
		out = append(out, w.text(f))
		w.leave(at)
	}
	w.closeList(f, len(out))
	return out
}

func (w *walk) text(f *field) string {
	if w.decoder.PeekKind() != '"' {
		w.wrongType("a string")
		return ""
	}
	raw := w.next()
	if len(raw) > MaxNameCharacters+2 && characters(raw) > MaxNameCharacters {
		w.fault(codeTooLong, func() string { return "A string in " + f.name + " may have at most 256 characters." })
		return ""
	}
	text, _ := jsontext.AppendUnquote(nil, raw) // cannot fail: the scanner has read it
	return string(text)
}
