package profile

import (
	"errors"
	"strconv"
)

// Unsolved is a search that did not converge. It is no answer and no physics: a fault of the solver.
type Unsolved struct{ What string }

func (u *Unsolved) Error() string { return "the search for " + u.What + " did not converge" }

func unsolved(what string) error { return &Unsolved{what} }

// noConveyance is the reason of a run with flow so shallow that its friction law gives no conveyance.
var noConveyance = &NoSolution{Code: "no_conveyance", Detail: "The flow is so shallow against its roughness that the friction law gives no conveyance; give a smaller sand roughness or a deeper boundary."}

// at names the reach or station that a reason without a member comes from, in a leg at its upstream or its downstream end.
func (c *chain) at(l *leg, end float64, err error) error {
	var reason *NoSolution
	if !errors.As(err, &reason) || reason.Member != "" {
		return err
	}
	named := *reason
	named.Member = "reaches/" + strconv.Itoa(l.reach)
	if len(c.run.Stations) > 0 {
		station := l.reach
		if end == downstream {
			station++
		}
		named.Member = "stations/" + strconv.Itoa(station)
	}
	switch reason.Code {
	case aboveLastRow.Code, noCriticalDepth.Code:
		named.Member += "/section"
	case noConveyance.Code, noJump.Code:
		named.Member += "/roughness"
	}
	return &named
}

// lower returns the end of a leg whose section ends at the lesser height.
func (l *leg) lower() float64 {
	a, b := l.side(0), l.side(l.length)
	if b.channel.Section.Height() < a.channel.Section.Height() {
		return downstream
	}
	return upstream
}

// noSteadyFlow is the reason of a run whose supercritical flow comes to critical depth where nothing subcritical meets it.
var noSteadyFlow = &NoSolution{Code: "no_steady_flow", Detail: "Supercritical flow reaches critical depth inside a reach where no subcritical flow meets it; give other boundaries, or look for an error in the section or the roughness."}

// noJump is the reason of a run whose coefficients alpha and beta disagree on which flow holds.
var noJump = &NoSolution{Code: "no_jump", Detail: "Supercritical flow reaches critical depth although subcritical flow meets it: where their forces are equal a jump would gain energy, since the energy and the momentum coefficient do not go together; give energy_coefficient and momentum_coefficient that do, both 1 perhaps, or combine zones by another rule."}

// noCriticalDepth is the reason of a run whose section has no critical depth.
var noCriticalDepth = &NoSolution{Code: "no_critical_depth", Detail: "A section on the way has no critical depth at this discharge, so that it cannot be told which flow it lets through; give another section there, or another discharge."}
