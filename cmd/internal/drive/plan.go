package drive

import (
	"errors"
	"fmt"
	"os"
	"strings"

	"github.com/go-json-experiment/json"
	"github.com/go-json-experiment/json/jsontext"
)

// A Plan says what load to make and what must hold under it. It comes from a JSON file.
type Plan struct {
	// About says in a sentence what the plan is for.
	About string `json:"about"`
	// Requests are mixed by their shares.
	Requests []Request `json:"requests"`
	// Capacity, where given, is found out first: what the service answers when so many callers each send as soon as they have an answer.
	Capacity *Capacity `json:"capacity"`
	Stages   []Stage   `json:"stages"`
	Probes   *Probes   `json:"probes"`
	Streams  []Stream  `json:"streams"`

	Thresholds Thresholds `json:"thresholds"`
}

// A Request is one kind of request in the mix.
type Request struct {
	Name  string         `json:"name"`
	Share float64        `json:"share"` // relative to the others
	Path  string         `json:"path"`
	Body  jsontext.Value `json:"body"`
	// Expect are numbers of the answer by their JSON Pointers, right to 1e-9 of their size. Beside that every answer must have the bytes of the first.
	Expect map[string]float64 `json:"expect"`
	// TakeSeconds, in place of Body, makes a profile of the drain of Ostermere with as many surveyed stations as take so long to solve.
	TakeSeconds float64 `json:"take_seconds"`
}

// Capacity is the closed loop that finds out what the service can do.
type Capacity struct {
	Seconds float64 `json:"seconds"`
	AtOnce  int     `json:"at_once"`
}

// A Stage is an open loop.
type Stage struct {
	Name    string  `json:"name"`
	Seconds float64 `json:"seconds"`
	// Rate is in requests a second; TimesCapacity, in its place, is relative to the measured capacity.
	Rate          float64 `json:"rate"`
	TimesCapacity float64 `json:"times_capacity"`
	// FromRate, where given, is the rate at the beginning; it then goes evenly to Rate.
	FromRate float64 `json:"from_rate"`
}

// Probes are sent beside, each over a connection of its own.
type Probes struct {
	Paths        []string `json:"paths"`
	EverySeconds float64  `json:"every_seconds"`
}

// A Stream is a bulk stream of equal lines that is sent at a steady pace, and begun anew when it has ended.
type Stream struct {
	Path           string         `json:"path"`
	AtOnce         int            `json:"at_once"`
	Lines          int            `json:"lines"`
	LinesPerSecond float64        `json:"lines_per_second"`
	Record         jsontext.Value `json:"record"`
}

// Thresholds are what must hold in every stage; one that is not given is not judged. What is never allowed needs no threshold: wrong answers, statuses other
// than 200, 429 and 503, refusals without Retry-After, broken connections, streams that end wrong.
type Thresholds struct {
	// GoodputOfPeak is the least share of the best goodput of all stages and of the capacity.
	GoodputOfPeak float64 `json:"goodput_of_peak"`
	// AcceptedInTime is the least share of accepted requests that took no longer than queue_wait_seconds of the service and twice their normal time.
	AcceptedInTime float64 `json:"accepted_in_time"`
	// AcceptedSeconds and RefusedSeconds are the greatest 99th percentiles.
	AcceptedSeconds float64 `json:"accepted_seconds"`
	RefusedSeconds  float64 `json:"refused_seconds"`
	// RefusedShare is the greatest share of refusals.
	RefusedShare *float64 `json:"refused_share"`
	// ProbeSeconds is the longest that any probe may take.
	ProbeSeconds float64 `json:"probe_seconds"`
}

// Bounds of what a plan may ask for: this is for staging, not for attacks.
const (
	mostRate    = 50_000
	mostSeconds = 2 * 3600
	mostFlights = 20_000 // requests under way at once
)

// Load reads a plan. Its error tells every mistake.
func Load(name string) (*Plan, error) {
	text, err := os.ReadFile(name)
	if err != nil {
		return nil, err
	}
	p := new(Plan)
	if err := json.Unmarshal(text, p, json.RejectUnknownMembers(true)); err != nil {
		return nil, fmt.Errorf("%s: %w", name, err)
	}
	if err := p.check(); err != nil {
		return nil, fmt.Errorf("%s: %w", name, err)
	}
	return p, nil
}

func (p *Plan) check() error {
	var mistakes []error
	wrong := func(format string, values ...any) { mistakes = append(mistakes, fmt.Errorf(format, values...)) }
	if len(p.Requests) == 0 || len(p.Stages) == 0 {
		wrong("a plan needs requests and stages")
	}
	for i, r := range p.Requests {
		if r.Name == "" || !(r.Share > 0) || !strings.HasPrefix(r.Path, "/") {
			wrong("request %d needs a name, a share greater than 0 and a path", i+1)
		}
		if (len(r.Body) == 0) == (r.TakeSeconds == 0) || r.TakeSeconds < 0 || r.TakeSeconds > 1 {
			wrong("request %d needs either a body or take_seconds, up to 1", i+1)
		}
	}
	if c := p.Capacity; c != nil && (!(c.Seconds > 0) || c.Seconds > mostSeconds || c.AtOnce < 1 || c.AtOnce > 1000) {
		wrong("capacity needs seconds and at_once, from 1 to 1000")
	}
	for i, s := range p.Stages {
		if !(s.Seconds > 0) || s.Seconds > mostSeconds {
			wrong("stage %d needs seconds, up to %d", i+1, mostSeconds)
		}
		if (s.Rate == 0) == (s.TimesCapacity == 0) || !(s.Rate >= 0 && s.Rate <= mostRate) || !(s.TimesCapacity >= 0 && s.TimesCapacity <= 100) {
			wrong("stage %d needs either a rate, up to %d, or times_capacity, up to 100", i+1, mostRate)
		}
		if s.TimesCapacity > 0 && p.Capacity == nil {
			wrong("stage %d has times_capacity, and the plan no capacity", i+1)
		}
		if !(s.FromRate >= 0 && s.FromRate <= mostRate) || s.FromRate > 0 && s.TimesCapacity > 0 {
			wrong("stage %d: from_rate goes with rate, up to %d", i+1, mostRate)
		}
	}
	if b := p.Probes; b != nil && (len(b.Paths) == 0 || !(b.EverySeconds >= 0.01 && b.EverySeconds <= 60)) {
		wrong("probes need paths and every_seconds, from 0.01 to 60")
	}
	for i, s := range p.Streams {
		if !strings.HasPrefix(s.Path, "/") || s.AtOnce < 1 || s.AtOnce > 100 || s.Lines < 1 || !(s.LinesPerSecond > 0) || len(s.Record) == 0 {
			wrong("stream %d needs a path, at_once up to 100, lines, lines_per_second and a record", i+1)
		}
	}
	return errors.Join(mistakes...)
}
