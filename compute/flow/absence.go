package flow

// Absence is the physical reason why a depth does not exist.
type Absence uint8

const (
	Present      Absence = iota
	Horizontal           // the bed does not fall: nothing drives uniform flow
	Adverse              // the bed rises downstream
	BeyondCrown          // the closed section carries less than the discharge at every free surface
	BeyondTable          // the last row of a table carries less than the discharge
	NoConveyance         // the law gives no conveyance at any depth
	Jumped               // the conveyance jumps past the discharge at a depth where perimeter is added at once
	LawChanges           // the friction law jumps past the discharge at a depth where one of its formulas gives way to another
	FillsFirst           // the flow is supercritical at every free surface: the crown or last row is reached before critical depth
	Kinked               // the specific energy has its only minimum at a kink, where dE/ddepth jumps from below to above 0
	Above                // the depth would lie above the crown or the last row
	Filled               // the section is full: there is no free surface
	NoMinimum            // the specific energy of no discharge has a minimum at the depth
	Coincides            // the depth given is itself the turning point
	Unsolved             // the search did not converge: never given as an answer
)

var absences = [...]struct{ code, detail string }{
	Present:      {"", ""},
	Horizontal:   {"horizontal_bed", "The bed is horizontal, so that no depth makes its slope balance friction."},
	Adverse:      {"adverse_bed", "The bed rises downstream, so that no depth makes its slope balance friction."},
	BeyondCrown:  {"beyond_crown", "The discharge is more than the section carries with a free surface at any depth below its crown."},
	BeyondTable:  {"beyond_table", "The discharge is more than the section carries at any depth up to its last row."},
	NoConveyance: {"no_conveyance", "The roughness is so large against the hydraulic radius that the friction law gives no conveyance."},
	Jumped:       {"conveyance_jumps", "The conveyance jumps past the discharge at a depth where wetted perimeter is added at once, so that no depth balances friction."},
	LawChanges:   {"friction_law_changes", "The friction law jumps past the discharge at a depth where one of its formulas gives way to another, so that no depth balances friction."},
	FillsFirst:   {"fills_first", "The flow stays supercritical up to the crown or the last row, so that the specific energy has no minimum below it."},
	Kinked:       {"minimum_at_kink", "The specific energy has its minimum at a kink of the section or its roughness, where its derivative jumps past zero."},
	Above:        {"above_section", "It would lie above the crown or the last row."},
	Filled:       {"full", "The section is full at this depth, without a free surface."},
	NoMinimum:    {"no_minimum", "The specific energy has its minimum at this depth for no discharge."},
	Coincides:    {"at_the_minimum", "The depth given is where the curve turns, so that the two depths coincide."},
	Unsolved:     {"not_converged", "The solver did not converge."},
}

// Code returns a stable name in snake_case, empty for Present.
func (a Absence) Code() string { return absences[a].code }

// String returns the reason as a sentence, empty for Present.
func (a Absence) String() string { return absences[a].detail }
