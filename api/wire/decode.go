package wire

import (
	"reflect"
	"strings"
	"sync"

	"github.com/go-json-experiment/json/jsontext"
)

// A decoding is what one call of Decode works with; it is used again and again.
type decoding struct {
	scanner scanner
	walk    walk
}

var decodings = sync.Pool{New: func() any { return newDecoding() }}

func newDecoding() *decoding {
	d := new(decoding)
	d.walk.decoder = jsontext.NewDecoder(&d.walk.buffer)
	return d
}

// Decode reads one request object into a struct and checks it: I-JSON first, then every rule that the types' tags and
// their own methods say. units is the system of the call, in force unless the request names one; afterwards all values
// are in SI. On failure it returns the problem (400, 413 or 422) with every fault it found, and into must not be used
// save its ID, which is set wherever the body could be read that far. into is overwritten as a whole; its ID is a part of body.
func Decode(body []byte, units System, limits *Limits, into Request) *Problem {
	d := decodings.Get().(*decoding)
	problem := d.decode(body, units, limits, into)
	d.scanner.release()
	d.walk.release()
	decodings.Put(d)
	return problem
}

// Scan judges whether a body is JSON as the contract accepts it, without reading it as a request, and returns the system of units in
// force in it: that of the call, or the one that it names. What Decode accepts, Scan accepts.
func Scan(body []byte, units System, limits *Limits) (System, *Problem) {
	d := decodings.Get().(*decoding)
	var problem *Problem
	if d.scanner.scan(body, limits) {
		units = d.scanner.system(units)
	} else {
		problem = d.scanner.fault.problem(body)
	}
	d.scanner.release()
	decodings.Put(d)
	return units, problem
}

func (d *decoding) decode(body []byte, units System, limits *Limits, into Request) *Problem {
	v := reflect.ValueOf(into).Elem()
	p := plans[v.Type()]
	v.SetZero()
	common := into.common()
	common.System = units
	if !d.scanner.scan(body, limits) {
		common.ID = d.scanner.topID()
		return d.scanner.fault.problem(body)
	}
	units = d.scanner.system(units)
	d.walk.start(body, units, limits, false)
	d.walk.object(p, v)
	common.System = units
	if !d.walk.failed {
		return tooMuchWork(into, limits)
	}
	return d.explain(body, units, limits, into, p, v)
}

// explain is the second walk: it collects all faults of a body that the first one refused.
func (d *decoding) explain(body []byte, units System, limits *Limits, into Request, p *plan, v reflect.Value) *Problem {
	v.SetZero()
	d.walk.start(body, units, limits, true)
	d.walk.object(p, v)
	common := into.common()
	common.System = units
	if common.ID == nil {
		common.ID = d.scanner.topID()
	}
	faults := d.walk.faults
	structural := len(faults)
	for _, f := range Check(into) {
		if len(faults) == MaxFaults {
			break
		}
		if !covered(faults[:structural], f.Pointer) {
			faults = append(faults, f)
		}
	}
	if len(faults) == 0 { // the two walks disagree: a fault of this program, which a fuzz target looks for
		return Internal("The request was refused without a reason; please report it.")
	}
	if d.walk.size {
		return TooLarge(faults...)
	}
	return InvalidRequest(faults...)
}

// covered reports whether a fault was found at a place or above it already.
func covered(faults []Fault, pointer string) bool {
	for i := range faults {
		if rest, below := strings.CutPrefix(pointer, faults[i].Pointer); below && (rest == "" || rest[0] == '/') {
			return true
		}
	}
	return false
}

// system returns the system of units in force in what was scanned: the one given, unless the top names another.
func (s *scanner) system(units System) System {
	switch named := s.units.in(s.data); {
	case string(named) == `"si"`:
		return SI
	case string(named) == `"us"`:
		return US
	case len(named) > 4: // perhaps escaped
		if name, err := jsontext.AppendUnquote(nil, named); err == nil {
			if system, known := SystemNamed(string(name)); known {
				return system
			}
		}
	}
	return units
}

// topID returns the id that the scanner has come across, if it is one.
func (s *scanner) topID() ID {
	raw := s.id.in(s.data)
	if len(raw) == 0 {
		return nil
	}
	switch c := raw[0]; {
	case c == '"' && characters(raw) <= MaxIDCharacters, c == '-', '0' <= c && c <= '9':
		return ID(raw)
	}
	return nil
}
