package wire

import (
	"reflect"
	"strconv"
	"strings"
	"unicode/utf8"

	"github.com/go-json-experiment/json/jsontext"
)

// This file holds the sentences of faults in members: what is wrong, where, and what would be accepted.

// wrongType notes a value of another type than the member wants, and passes over it.
func (w *walk) wrongType(wanted string) {
	kind := w.decoder.PeekKind()
	var raw jsontext.Value
	if kind == '"' {
		raw = w.next()
	} else {
		w.skip()
	}
	w.fault(codeWrongType, func() string {
		detail := "This must be " + wanted + ", not " + kindText(kind) + "."
		switch {
		case kind != '"':
		case strings.HasPrefix(wanted, "a list"):
			detail += stringForListAdvice(raw)
		case strings.HasSuffix(wanted, "number"):
			detail += stringForNumberAdvice(raw)
		case wanted == "true or false":
			detail += stringForTruthAdvice(raw)
		}
		if kind == 'n' {
			detail = "This must be " + wanted + ": null stands for an absent member, but a list has no absent items."
		}
		return detail
	})
}

func kindText(kind jsontext.Kind) string {
	switch kind {
	case '"':
		return "a string"
	case '0':
		return "a number"
	case 't', 'f':
		return "true or false"
	case '{':
		return "an object"
	case '[':
		return "a list"
	case 'n':
		return "null"
	}
	return "anything else"
}

// notAnObject notes a value that stands where an object is wanted, and passes over it.
func (w *walk) notAnObject() {
	kind := w.decoder.PeekKind()
	w.skip()
	w.fault(codeNotAnObject, func() string {
		return "This must be an object, not " + kindText(kind) + "." + notAnObjectAdvice(w.at, kind)
	})
}

// unknownMember notes a member that the object, read into v as far as it goes, does not have.
func (w *walk) unknownMember(p *plan, v reflect.Value, name string) {
	w.failed = true
	if !w.collect {
		return
	}
	detail := "There is no member " + clip(name) + " here." + unknownMemberAdvice(name, p.names, p.accepted(v))
	if len(name) > longestShownName {
		w.fault(codeUnknownMember, func() string { return detail })
		return
	}
	w.faultAt(name, codeUnknownMember, func() string { return detail })
}

// accepted returns the names of the members that an object may have: those of its variant where that is known by now, else all.
func (p *plan) accepted(v reflect.Value) []string {
	if p.variants == nil {
		return p.names
	}
	at, known := find(p.variant, v.Addr().Interface().(varied).variant())
	if !known {
		return p.names
	}
	var names []string
	for i := range p.fields {
		if p.variants[at].allowed&(1<<i) != 0 {
			names = append(names, p.fields[i].name)
		}
	}
	return names
}

func missingText(f *field, variant string) string {
	var detail string
	if variant == "" {
		detail = f.name + " is missing: give " + f.wanted() + "."
	} else {
		detail = f.name + " is missing: " + variantText(variant) + " needs " + f.wanted() + " there."
	}
	return detail
}

// wanted describes the values that a field accepts.
func (f *field) wanted() string {
	switch f.shape {
	case shapeNumber:
		if unit := SI.Unit(f.quantity[0]); unit != "" && f.quantity[0] != QuantityManning && f.quantity[0] != QuantityStrickler {
			return "a number in " + unit + " (" + US.Unit(f.quantity[0]) + " in US units)"
		}
		return "a number"
	case shapeWhole:
		return "a whole number"
	case shapeBool:
		return "true or false"
	case shapeName:
		return "one of " + quotedList(f.enum)
	case shapeID:
		return "a string or a number"
	case shapeObject:
		if example, known := objectExamples[f.name]; known {
			return "an object such as " + example
		}
		return "an object"
	case shapePair:
		return f.tupleWanted()
	case shapeNamed:
		if example, known := objectExamples[f.name]; known {
			return "an object of numbers such as " + example
		}
		return "an object of numbers"
	case shapeRaw:
		return "a value"
	}
	return f.listType()
}

// listType describes a list that the field accepts.
func (f *field) listType() string {
	switch f.shape {
	case shapePairs, shapeRows, shapePositions:
		return "a list of lists" + f.tupleType()[len("a list"):]
	case shapeObjects:
		return "a list of objects"
	case shapeTexts:
		return "a list of strings"
	}
	return "a list of numbers"
}

// tupleType describes one item of a list of tuples.
func (f *field) tupleType() string {
	switch f.shape {
	case shapeRows:
		return "a list of four numbers"
	case shapePositions:
		return "a list of two to four numbers"
	}
	return "a list of two numbers"
}

// tupleWanted is tupleType with an example, where there is one.
func (f *field) tupleWanted() string {
	if example, known := objectExamples[f.name]; known && f.shape == shapePair {
		return f.tupleType() + " such as " + example
	}
	return f.tupleType()
}

func wrongLengthText(f *field, n int) string {
	return "This must be " + f.tupleType() + ", not of " + strconv.Itoa(n) + "."
}

// variantText names a kind or law in a sentence.
func variantText(variant string) string {
	switch variant {
	case string(BedAndSides):
		return "roughness by bed and sides"
	case string(Manning), string(Strickler), string(Chezy), string(SandRoughness), string(Zones), string(ManningByDepth):
		return "roughness by " + variant
	case "depth", "level", "control", "gate", "weir", "rating":
		return "a boundary by " + variant
	case "spacing", "at":
		return "a report by " + variant
	case string(ShearLimited), string(BareSoil), string(Vegetation), string(Riprap), string(Gravel), string(Earth):
		return "a lining of kind " + variant
	}
	return "a section of kind " + variant
}

func foreignText(p *plan, f *field, chosen string) string {
	var own []string
	at, _ := find(p.variant, chosen)
	for i := range p.fields {
		if p.fields[i].variants != nil && p.variants[at].allowed&(1<<i) != 0 {
			own = append(own, p.fields[i].name)
		}
	}
	return f.name + " does not belong to " + variantText(chosen) + ", whose members are " + list(own, "and") + "; leave it out or give null."
}

func unknownValueText(f *field, given string) string {
	choice := "one of "
	if len(f.enum) == 1 {
		choice = ""
	}
	return f.name + " must be " + choice + quotedList(f.enum) + ", not " + strconv.Quote(clip(given)) + "." + unknownValueAdvice(given, f.enum)
}

func quotedList(names []string) string {
	quoted := make([]string, len(names))
	for i, name := range names {
		quoted[i] = strconv.Quote(name)
	}
	return list(quoted, "and")
}

// list joins names as a sentence does.
func list(names []string, last string) string {
	switch len(names) {
	case 0:
		return "none"
	case 1:
		return names[0]
	}
	return strings.Join(names[:len(names)-1], ", ") + " " + last + " " + names[len(names)-1]
}

// clip shortens what a caller sent, for a sentence.
func clip(text string) string {
	const most = 60
	if utf8.RuneCountInString(text) <= most {
		return text
	}
	runes := []rune(text)
	return string(runes[:most]) + "…"
}
