// Package appraise judges whether a channel is good enough for its flows: it holds the uniform flow of each against criteria and
// gathers the findings into a verdict. Criteria come from published rules, each named where it stands; local codes and the engineer in charge decide.
//
// Depths are normal to the bed, discharges that cross the package's face are totals of all barrels, as in package flow.
package appraise

import (
	"math"
	"math/bits"

	"leat/compute"
)

// A Criterion is a rule that a channel can be held to.
type Criterion uint8

const (
	LeastFreeboard           Criterion = iota // freeboard, less the rise in a bend, in m
	FreeboardRule                             // the same, against a published rule
	GreatestFill                              // normal depth over bank height
	LeastVelocity                             // mean velocity, m/s
	GreatestVelocity                          //
	LeastShear                                // mean boundary shear stress rho*g*R*S, N/m2 (self-cleansing)
	GreatestShear                             //
	CriticalBand                              // Froude number, which has to lie outside a band about 1
	GreatestVedernikovNumber                  // above 1 roll waves form
	LeastLiningSafety                         // the least ratio of permissible to occurring shear stress or velocity
	criteria                 = iota
)

var criterionNames = [criteria]string{"least_freeboard", "freeboard_rule", "greatest_fill", "least_velocity", "greatest_velocity", "least_shear",
	"greatest_shear", "critical_band", "greatest_vedernikov_number", "least_lining_safety"}

// String returns the criterion's name in snake_case.
func (c Criterion) String() string { return criterionNames[c] }

// Criteria returns all criteria in their order.
func Criteria() []Criterion {
	all := make([]Criterion, criteria)
	for i := range all {
		all[i] = Criterion(i)
	}
	return all
}

// A Set is a set of criteria; the zero value is empty.
type Set uint16

// All holds every criterion.
const All Set = 1<<criteria - 1

// Of returns the set of some criteria.
func Of(some ...Criterion) (s Set) {
	for _, c := range some {
		s |= 1 << c
	}
	return s
}

// With returns the set and a criterion.
func (s Set) With(c Criterion) Set { return s | 1<<c }

// Has reports whether a criterion is in the set.
func (s Set) Has(c Criterion) bool { return s&(1<<c) != 0 }

// Len returns the number of criteria in the set.
func (s Set) Len() int { return bits.OnesCount16(uint16(s)) }

// Rule is a published rule of freeboard.
type Rule uint8

const (
	NoRule Rule = iota
	Canal       // CanalFreeboard
	Chute       // ChuteFreeboard
	rules  = iota
)

var ruleNames = [rules]string{"", "canal", "chute"}

// String returns the rule's name in snake_case.
func (r Rule) String() string { return ruleNames[r] }

// Limits are the criteria that a channel is held to. Only those in Given count.
type Limits struct {
	Given Set

	LeastFreeboard           float64 // m, 0 or more
	FreeboardRule            Rule
	GreatestFill             float64
	LeastVelocity            float64 // m/s, 0 or more
	GreatestVelocity         float64 // m/s
	LeastShear               float64 // N/m2, 0 or more
	GreatestShear            float64 // N/m2
	CriticalBand             [2]float64
	GreatestVedernikovNumber float64
	LeastLiningSafety        float64
}

// Check returns nil, or compute.Faults whose members are the names of the criteria.
func (l *Limits) Check() error {
	var faults compute.Faults
	if l.Given == 0 {
		faults = append(faults, compute.Fault{Code: "empty", Detail: "At least one criterion must be given."})
	}
	for _, row := range [...]struct {
		criterion Criterion
		value     float64
		zero      bool // 0 is allowed
	}{
		{LeastFreeboard, l.LeastFreeboard, true}, {GreatestFill, l.GreatestFill, false}, {LeastVelocity, l.LeastVelocity, true},
		{GreatestVelocity, l.GreatestVelocity, false}, {LeastShear, l.LeastShear, true}, {GreatestShear, l.GreatestShear, false},
		{GreatestVedernikovNumber, l.GreatestVedernikovNumber, false}, {LeastLiningSafety, l.LeastLiningSafety, false},
	} {
		if !l.Given.Has(row.criterion) {
			continue
		}
		switch name := row.criterion.String(); {
		case math.IsNaN(row.value) || math.IsInf(row.value, 0):
			faults = append(faults, compute.Fault{Member: name, Code: "not_finite", Detail: name + " must be a finite number."})
		case row.zero && row.value < 0:
			faults = append(faults, compute.Fault{Member: name, Code: "negative", Detail: name + " must be 0 or more."})
		case !row.zero && row.value <= 0:
			faults = append(faults, compute.Fault{Member: name, Code: "not_positive", Detail: name + " must be greater than 0."})
		}
	}
	if l.Given.Has(FreeboardRule) && l.FreeboardRule != Canal && l.FreeboardRule != Chute {
		faults = append(faults, compute.Fault{Member: "freeboard_rule", Code: "unknown_value", Detail: "freeboard_rule must be canal or chute."})
	}
	if low, high := l.CriticalBand[0], l.CriticalBand[1]; l.Given.Has(CriticalBand) && !(low > 0 && low < high && !math.IsInf(high, 1)) {
		faults = append(faults, compute.Fault{Member: "critical_band", Code: "not_rising",
			Detail: "critical_band must be two Froude numbers greater than 0, the lower one first."})
	}
	if len(faults) > 0 {
		return faults
	}
	return nil
}
