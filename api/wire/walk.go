package wire

import (
	"bytes"
	"math/bits"
	"reflect"
	"slices"

	"github.com/go-json-experiment/json/jsontext"
)

// A walk reads one scanned body into a struct by its plan. The fast walk stops at the first fault and tells nothing of it; the
// second one goes on and collects all faults. Both are this one code, so that they cannot differ in what they accept,
// save for the rules of value, which the fast walk judges by the compiled bounds and the second leaves to Check.
type walk struct {
	decoder *jsontext.Decoder
	buffer  bytes.Buffer
	system  System
	limits  *Limits

	numbers []float64 // room for a list whose length is not known yet
	pairs   [][2]float64
	rows    [][4]float64

	failed  bool
	dead    bool // the decoder cannot go on
	collect bool
	faults  []Fault
	at      pointer // of the value being read; kept only when collecting
	size    bool    // a fault is one of size
}

// The scanner has seen to duplicates and UTF-8 already.
var readOptions = jsontextOptions()

// start makes the walk ready to read data.
func (w *walk) start(data []byte, system System, limits *Limits, collect bool) {
	w.buffer = *bytes.NewBuffer(data)
	w.decoder.Reset(&w.buffer, readOptions)
	w.system, w.limits = system, limits
	w.failed, w.dead, w.collect, w.faults, w.at, w.size = false, false, collect, nil, "", false
}

// release forgets what belongs to the call. The decoder goes on knowing the body until its next one, or until the pool lets it go.
func (w *walk) release() {
	w.limits, w.faults = nil, nil
}

// stop reports whether the walk is over.
func (w *walk) stop() bool { return w.failed && !w.collect || w.dead || len(w.faults) >= MaxFaults }

// fault notes a fault at the value being read. detail is called only when faults are collected.
func (w *walk) fault(code string, detail func() string) {
	w.failed = true
	if w.collect && !w.stop() && !covered(w.faults, string(w.at)) {
		w.faults = append(w.faults, Fault{Pointer: string(w.at), Code: code, Detail: detail()})
	}
}

// faultAt is fault at a member of the object being read.
func (w *walk) faultAt(member, code string, detail func() string) {
	at := w.at
	w.at = at.member(member)
	w.fault(code, detail)
	w.at = at
}

// enter makes a member's value the one being read and returns what leave needs.
func (w *walk) enter(name string) pointer {
	at := w.at
	if w.collect {
		w.at = at.member(name)
	}
	return at
}

func (w *walk) enterItem(i int) pointer {
	at := w.at
	if w.collect {
		w.at = at.index(i)
	}
	return at
}

func (w *walk) leave(at pointer) { w.at = at }

// skip passes over the next value.
func (w *walk) skip() {
	if w.decoder.SkipValue() != nil {
		w.broken()
	}
}

// next returns the next value as it stands; nil after an error.
func (w *walk) next() []byte {
	v, err := w.decoder.ReadValue()
	if err != nil {
		w.broken()
		return nil
	}
	return v
}

// delimiter reads the bracket or brace that begins or ends an array or object.
func (w *walk) delimiter() {
	if _, err := w.decoder.ReadToken(); err != nil {
		w.broken()
	}
}

// broken notes that the decoder refused what the scanner let through, which ends the walk: there is nothing to go on with.
// No input is known that does so.
func (w *walk) broken() {
	if !w.dead {
		w.fault(codeSyntaxError, func() string { return "The body cannot be read as JSON." })
	}
	w.dead = true
}

// object reads an object into the struct v.
func (w *walk) object(p *plan, v reflect.Value) {
	if p.given != nil {
		v.Field(p.given[0]).SetBool(true)
	}
	if w.decoder.PeekKind() != '{' {
		w.notAnObject()
		return
	}
	w.delimiter()
	var present uint64
	for !w.stop() {
		kind := w.decoder.PeekKind()
		if kind == '}' {
			break
		}
		name := w.memberName()
		i, known := find(p.index, name)
		null := w.decoder.PeekKind() == 'n'
		switch {
		case null:
			w.skip()
		case !known:
			w.unknownMember(p, v, string(name))
			w.skip()
		default:
			present |= 1 << i
			f := &p.fields[i]
			at := w.enter(f.name)
			if len(f.at) == 1 {
				w.value(f, v.Field(f.at[0]))
			} else {
				w.value(f, v.FieldByIndex(f.at))
			}
			w.leave(at)
		}
	}
	if w.stop() {
		return
	}
	w.delimiter()
	w.complete(p, v, present)
}

// memberName reads a member's name.
func (w *walk) memberName() []byte {
	raw := w.next()
	if len(raw) < 2 {
		return nil
	}
	if bytes.IndexByte(raw, '\\') < 0 {
		return raw[1 : len(raw)-1]
	}
	name, _ := jsontext.AppendUnquote(nil, raw) // cannot fail: the scanner has read it
	return name
}

// complete judges which members an object has: those required, those of its variant, and what the struct's own rules say.
func (w *walk) complete(p *plan, v reflect.Value, present uint64) {
	if missing := p.required &^ present; missing != 0 {
		w.missing(p, missing, "")
	}
	if p.variants != nil {
		name := v.Addr().Interface().(varied).variant()
		if at, known := find(p.variant, name); known {
			chosen := p.variants[at]
			if foreign := present &^ chosen.allowed; foreign != 0 {
				w.foreign(p, foreign, name)
			}
			if missing := chosen.required &^ present; missing != 0 {
				w.missing(p, missing, name)
			}
		}
	}
	if p.ruled {
		v.Addr().Interface().(ruled).rules(w)
	}
}

// A ruled struct has rules of its own about its members together, beyond what tags can say. They are judged after
// its members have been read.
type ruled interface{ rules(*walk) }

// missing notes the members that ought to be there.
func (w *walk) missing(p *plan, set uint64, variant string) {
	w.failed = true
	if !w.collect {
		return
	}
	for ; set != 0; set &= set - 1 {
		f := &p.fields[bits.TrailingZeros64(set)]
		w.faultAt(f.name, codeMissingMember, func() string { return missingText(f, variant) })
	}
}

// foreign notes the members that belong to other variants.
func (w *walk) foreign(p *plan, set uint64, variant string) {
	w.failed = true
	if !w.collect {
		return
	}
	for ; set != 0; set &= set - 1 {
		f := &p.fields[bits.TrailingZeros64(set)]
		// What is wrong with its value does not matter: whoever mended that would be told next to leave it out.
		if own := []Fault{{Pointer: string(w.at.member(f.name))}}; !w.size {
			w.faults = slices.DeleteFunc(w.faults, func(found Fault) bool { return covered(own, found.Pointer) })
		}
		w.faultAt(f.name, codeForeignMember, func() string { return foreignText(p, f, variant) })
	}
}
