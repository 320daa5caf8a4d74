package appraise

import (
	"math"

	"leat/compute/flow"
)

// Met says whether a criterion is met.
type Met uint8

const (
	Unknown Met = iota
	Yes
	No
)

// String returns "unknown", "yes" or "no".
func (m Met) String() string { return [...]string{"unknown", "yes", "no"}[m] }

// A Reason says why a criterion could not be judged or does not apply, or what is to be known of a judgement. The zero value is none.
type Reason struct {
	Code   string // stable, in snake_case
	Detail string // a sentence
}

// The reasons that are not those of flow.Absence.
var (
	NotApplicable  = Reason{"not_applicable", "The criterion does not apply to this kind of section."}
	Surcharged     = Reason{"surcharged", "The discharge is more than the closed section carries with a free surface, so that it runs full."}
	Overtopped     = Reason{"overtopped", "The water stands above the bank."}
	FlowsFull      = Reason{"full", "The section runs full, without a free surface, so that there is no Froude number."}
	MissingBank    = Reason{"missing_bank_height", "No bank height is known: bank_height is missing."}
	MissingLaw     = Reason{"missing_roughness", "No roughness is known: roughness is missing."}
	MissingLining  = Reason{"missing_lining", "No lining is known: lining is missing."}
	NoFroudeNumber = Reason{"froude_number_absent", "The energy coefficient rises so fast with depth that there is no Froude number."}
	SeveralDepths  = Reason{"several_normal_depths",
		"The lining's roughness changes so with depth that the discharge flows uniformly at several depths; the lowest is shown."}
	DepthsDisagree = Reason{"several_normal_depths",
		"The lining's roughness changes so with depth that the discharge flows uniformly at several depths, of which some meet the criterion and some do not."}
	BendInClosed     = Reason{"bend_in_closed_section", "The effect of a bend is known for open channels only."}
	TightBend        = Reason{"bend_too_tight", "The bend's radius is less than half the width of the water surface."}
	BelowRecommended = Reason{"below_recommended_safety", "The limit is met, but the lining is less safe than the source of its rules recommends for such flow; see recommended_safety."}
	OutOfRange       = Reason{"not_a_number", "The value is too large or too small to be computed."}
)

// absent returns the reason for a normal depth that does not exist.
func absent(a flow.Absence) Reason { return Reason{a.Code(), a.String()} }

// A Finding is one criterion judged for one flow.
type Finding struct {
	Criterion Criterion
	Value     float64    // NaN where it could not be computed
	Limit     float64    // of a band the edge nearer to the value; NaN where it could not be computed
	Band      [2]float64 // of CriticalBand, both edges
	Met       Met
	Reason    Reason // why it is unknown, or what is to be known of it
}

// Applies reports whether the finding counts: whether its criterion applies to the kind of section.
func (f *Finding) Applies() bool { return f.Reason.Code != NotApplicable.Code }

// Distance returns how far the value lies from its limit, as a share of the limit: |value - limit|/|limit|, which is +Inf for a limit of 0 that is not
// exactly met. An unmet criterion without a value counts as infinitely far beyond, a met one does not occur.
func (f *Finding) Distance() float64 {
	gap := math.Abs(f.Value - f.Limit)
	switch {
	case gap == 0:
		return 0
	case math.IsNaN(gap) || f.Limit == 0:
		return math.Inf(1)
	}
	return gap / math.Abs(f.Limit)
}
