package wire

import (
	"bytes"
	"math"
	"os"
	"path/filepath"
	"reflect"
	"strconv"
	"strings"
	"testing"
	"unicode/utf8"

	"github.com/go-json-experiment/json/jsontext"
)

// seed adds the corpus, as it is and as values, and some sound requests.
func seed(f *testing.F) {
	files, _ := filepath.Glob(filepath.Join(corpus, "test_parsing", "*.json"))
	if len(files) == 0 {
		f.Fatal("no corpus")
	}
	for _, file := range files {
		data, err := os.ReadFile(file)
		if err != nil {
			f.Fatal(err)
		}
		if len(data) < 10_000 {
			f.Add(data)
			f.Add(asNumber(data))
			f.Add(asList(data))
		}
	}
	for _, body := range []string{trapezoidDepths, surveyedSection,
		`{"units":"us","section":{"kind":"two_stage","bottom_width":3,"side_slope":2,"bench_height":2,"left_bench_width":5,"right_bench_width":4,"upper_side_slope":2,"bank_height":4},"roughness":{"bed":{"manning":0.03},"sides":{"manning":0.05},"combine":"pavlovskii"},"bed_slope":-0.001,"discharge":30,"depth":2,"barrels":2,"gravity":32.2}`,
		`{"section":{"kind":"tabulated","rows":[[1,2,3,4],[2,6,6,4]]},"roughness":{"manning_by_depth":[[0,0.05],[1,0.04]]},"bed_slope":0.01,"kind":"uniform","from_depth":0.5,"to_depth":1.5,"count":10}`,
		`{"section":{"kind":"gutter","cross_slope":0.02,"curb_height":0.15,"gutter_width":0.6,"gutter_slope":0.08},"roughness":{"sand_roughness":0.001,"kinematic_viscosity":1e-6},"bed_slope":0.01,"kind":"critical","discharges":[1,2,3],"energy_coefficient":1.1}`,
		drainProfile, surveyedProfile, appraisedDitch,
	} {
		f.Add([]byte(body))
	}
}

// FuzzScan holds the scanner against the JSON library's own reading of I-JSON: it must never accept more, and where it
// refuses for a reason that both know, the library must refuse too.
func FuzzScan(f *testing.F) {
	seed(f)
	f.Fuzz(func(t *testing.T, data []byte) {
		limits := Limits{ArrayItems: 20, Points: 30, Reaches: 10, Stations: 10, ReportPoints: 25, Flows: 6}
		var s scanner
		accepted := s.scan(data, &limits)
		library := jsontext.Value(data).IsValid() // refuses duplicate names and bad UTF-8 too
		if accepted {
			if !library {
				t.Fatalf("accepted, but no I-JSON: %q", data)
			}
			checkNumbers(t, data)
			return
		}
		if s.fault.offset < 0 || s.fault.offset > len(data) || s.fault.detail == "" {
			t.Fatalf("%+v", s.fault)
		}
		if s.fault.pointer != "" && s.fault.pointer[0] != '/' {
			t.Fatalf("no pointer: %q", s.fault.pointer)
		}
		switch s.fault.code {
		case codeNestingTooDeep, codeTooManyItems, codeNumberTooLong, codeNumberOutOfRange, codeNumberUnderflow:
		default:
			if library {
				t.Fatalf("refused as %+v, but I-JSON: %q", s.fault, data)
			}
		}
		p := s.fault.problem(data)
		if !jsontext.Value(p.AppendJSON(nil)).IsValid() || !utf8.ValidString(p.Errors[0].Detail) {
			t.Fatalf("%q", p.AppendJSON(nil))
		}
	})
}

// checkNumbers holds the contract's bounds on numbers and nesting in a body that was accepted.
func checkNumbers(t *testing.T, data []byte) {
	d := jsontext.NewDecoder(bytes.NewReader(data))
	for {
		token, err := d.ReadToken()
		if err != nil {
			return
		}
		if d.StackDepth() > MaxNesting {
			t.Fatalf("nested too deep: %q", data)
		}
		if token.Kind() != '0' {
			continue
		}
		literal := token.String()
		v, err := strconv.ParseFloat(literal, 64)
		if size := math.Abs(v); err != nil || len(literal) > MaxNumberCharacters || size != 0 && !(size >= 1e-100 && size <= 1e100) {
			t.Fatalf("number %s accepted", literal)
		}
		if v == 0 && strings.ContainsAny(strings.FieldsFunc(literal, func(r rune) bool { return r == 'e' || r == 'E' })[0], "123456789") {
			t.Fatalf("number %s became 0", literal)
		}
	}
}

// FuzzDecode holds the two walks against each other: what the fast one accepts the second finds no fault in, nor the
// validator; what it refuses has a fault. Problems are I-JSON, and the id that comes back is one.
func FuzzDecode(f *testing.F) {
	seed(f)
	f.Fuzz(func(t *testing.T, data []byte) {
		limits := Limits{ArrayItems: 20, Points: 30, Reaches: 10, Stations: 10, ReportPoints: 25, Flows: 6}
		original := bytes.Clone(data)
		for _, into := range []Request{new(SectionRequest), new(DepthsRequest), new(RatingRequest), new(ProfileRequest), new(AppraisalRequest)} {
			for _, system := range []System{SI, US} {
				p := Decode(data, system, &limits, into)
				if id := into.common().ID; id != nil && !jsontext.Value(id).IsValid() {
					t.Fatalf("id %q", id)
				}
				if p == nil {
					checkAccepted(t, data, system, &limits, into)
					continue
				}
				if p.Status != 400 && p.Status != 413 && p.Status != 422 || len(p.Errors) == 0 {
					t.Fatalf("%T %q: %+v", into, data, p)
				}
				if !jsontext.Value(p.AppendJSON(nil)).IsValid() {
					t.Fatalf("%T %q: %q", into, data, p.AppendJSON(nil))
				}
				for _, fault := range p.Errors {
					if fault.Code == codeSyntaxError && p.Status != 400 {
						t.Fatalf("%q: the library refuses what the scanner accepts: %+v", data, fault)
					}
				}
			}
		}
		if !bytes.Equal(data, original) {
			t.Fatal("the body was changed")
		}
	})
}

func checkAccepted(t *testing.T, data []byte, system System, limits *Limits, into Request) {
	if faults := Check(into); faults != nil {
		t.Fatalf("%T %q: accepted, but the validator finds %+v", into, data, faults)
	}
	again := reflect.New(reflect.TypeOf(into).Elem())
	d := newDecoding()
	d.walk.start(data, into.common().System, limits, true)
	d.walk.object(plans[again.Elem().Type()], again.Elem())
	if d.walk.failed || len(d.walk.faults) > 0 {
		t.Fatalf("%T %q: accepted, but the second walk finds %+v", into, data, d.walk.faults)
	}
	again.Interface().(Request).common().System = into.common().System
	if !reflect.DeepEqual(again.Interface(), into) {
		t.Fatalf("%q: the walks read %+v and %+v", data, into, again.Interface())
	}
}
