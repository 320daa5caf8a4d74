package operation

import (
	"errors"
	"slices"

	"leat/api/wire"
	"leat/compute"
	"leat/compute/flow"
	"leat/compute/friction"
	"leat/compute/section"
)

// inputs are the members from which every operation builds its channel.
type inputs struct {
	common    *wire.Common
	barrels   wire.Whole
	section   *wire.Section
	roughness *wire.Roughness
	bedSlope  wire.Number
}

// channel builds the channel that a request describes, or tells every fault of its section and roughness.
func (in inputs) channel() (flow.Channel, *wire.Problem) {
	c, faults := in.build("", nil)
	if len(faults) > 0 {
		return flow.Channel{}, wire.InvalidRequest(faults...)
	}
	return c, nil
}

// build builds the channel that the members at a place of the request describe, and adds the faults of section and roughness.
func (in inputs) build(place string, faults []wire.Fault) (flow.Channel, []wire.Fault) {
	c := flow.Channel{
		Slope:               in.bedSlope.Or(0),
		Gravity:             in.common.Gravity.Or(compute.StandardGravity),
		Barrels:             in.barrels.Or(1),
		EnergyCoefficient:   in.common.EnergyCoefficient.Or(0),
		MomentumCoefficient: in.common.MomentumCoefficient.Or(0),
		Bank:                in.section.BankHeight.Or(0),
	}
	built, err := newSection(in.section)
	err = asGiven(in.section, err)
	faults = gather(faults, place, "/section", err)
	if err == nil {
		c.Section = built
		if c.Bank > c.Section.Height() {
			faults = append(faults, wire.Fault{Pointer: place + "/section/bank_height", Code: "above_section",
				Detail: "bank_height lies above the section's greatest depth; leave it out, or give one not above the last row."})
		}
	}
	if in.roughness.Given && err == nil {
		law, err := newLaw(in.roughness, c.Section, c.Gravity)
		faults = gather(faults, place, "/roughness", err)
		c.Law = law
	}
	return c, faults
}

// gather adds the faults of a constructor of compute under the pointer of what was being built: a member at a place of the request.
func gather(all []wire.Fault, place, member string, err error) []wire.Fault {
	if err == nil {
		return all // before faults, which escapes, is made
	}
	var faults compute.Faults
	if errors.As(err, &faults) {
		return append(all, wire.FaultsUnder(place+member, faults)...)
	}
	return all
}

// asGiven returns the faults of a section under the members that the request gives: where one member stands for both sides, those of
// its two sides are one fault of that member.
func asGiven(s *wire.Section, err error) error {
	if err == nil {
		return nil // before faults, which escapes, is made
	}
	var faults compute.Faults
	if !errors.As(err, &faults) {
		return err
	}
	both := map[string]string{}
	if s.SideSlope.Given {
		both["left_side_slope"], both["right_side_slope"] = "side_slope", "side_slope"
	}
	if s.BenchWidth.Given {
		both["left_bench_width"], both["right_bench_width"] = "bench_width", "bench_width"
	}
	var out compute.Faults
	for _, fault := range faults {
		if given, ok := both[fault.Member]; ok {
			fault.Member = given
		}
		if !slices.Contains(out, fault) {
			out = append(out, fault)
		}
	}
	return out
}

// newSection compiles a section. The error is compute.Faults.
func newSection(s *wire.Section) (section.Section, error) {
	left, right := s.LeftSideSlope.Or(s.SideSlope.Value), s.RightSideSlope.Or(s.SideSlope.Value)
	switch s.Kind {
	case wire.Rectangular:
		return section.NewRectangular(s.BottomWidth.Value)
	case wire.Trapezoidal:
		return section.NewTrapezoidal(s.BottomWidth.Value, left, right)
	case wire.Triangular:
		return section.NewTriangular(left, right)
	case wire.Parabolic:
		return section.NewParabolic(s.TopWidth.Value, s.Height.Value)
	case wire.UShaped:
		return section.NewUShaped(s.Width.Value)
	case wire.Circular:
		return section.NewCircular(s.Diameter.Value)
	case wire.Box:
		return section.NewBox(s.Width.Value, s.Height.Value, s.Haunch.Value)
	case wire.Elliptical:
		return section.NewElliptical(s.Width.Value, s.Height.Value)
	case wire.Egg:
		return section.NewEgg(s.Height.Value, s.Inverted)
	case wire.Horseshoe:
		return section.NewHorseshoe(s.Height.Value)
	case wire.Gutter:
		return section.NewGutter(s.CrossSlope.Value, s.CurbHeight.Value, s.GutterWidth.Value, s.GutterSlope.Value)
	case wire.TwoStage:
		return section.NewTwoStage(section.TwoStage{
			BottomWidth: s.BottomWidth.Value, LeftSideSlope: left, RightSideSlope: right, BenchHeight: s.BenchHeight.Value,
			LeftBenchWidth: s.LeftBenchWidth.Or(s.BenchWidth.Value), RightBenchWidth: s.RightBenchWidth.Or(s.BenchWidth.Value),
			UpperSideSlope: s.UpperSideSlope.Value,
		})
	case wire.Surveyed:
		return section.NewSurveyed(s.Points)
	case wire.Tabulated:
		return section.NewTabulated(s.Rows)
	}
	return nil, compute.Faults{{Member: "kind", Code: "unknown_value", Detail: "This kind of section is not known; the contract lists those that are."}}
}

// waterViscosity is the kinematic viscosity in m2/s of water at 15 degrees C, for which the contract stands unless told otherwise.
const waterViscosity = 1.14e-6

// combinations are compute's names of the rules of combination.
var combinations = map[wire.Combine]friction.Combination{
	wire.Divided: friction.Divided, wire.HortonEinstein: friction.HortonEinstein, wire.Lotter: friction.Lotter, wire.Pavlovskii: friction.Pavlovskii,
}

// newLaw binds a roughness to a section. The error is compute.Faults.
func newLaw(r *wire.Roughness, s section.Section, gravity float64) (friction.Law, error) {
	switch r.Law {
	case wire.Manning:
		return friction.NewManning(r.Manning.Value)
	case wire.Strickler:
		return friction.NewStrickler(r.Strickler.Value)
	case wire.Chezy:
		return friction.NewChezy(r.Chezy.Value)
	case wire.SandRoughness:
		return friction.NewSandRoughness(r.SandRoughness.Value, r.KinematicViscosity.Or(waterViscosity), gravity)
	case wire.ManningByDepth:
		return friction.NewManningByDepth(r.ManningByDepth)
	case wire.BedAndSides:
		bedded, ok := s.(section.Bedded)
		if !ok {
			return nil, compute.Faults{{Member: "bed", Code: "no_distinct_bed",
				Detail: "This kind of section has no bed distinct from its sides; give one roughness for all."}}
		}
		return friction.NewBedAndSides(bedded, r.Bed.Manning.Value, r.Sides.Manning.Value, combinations[r.Combine])
	case wire.Zones:
		zoned, ok := s.(section.Zoned)
		if !ok {
			return nil, compute.Faults{{Member: "zones", Code: "no_zones",
				Detail: "Zones are for surveyed and two_stage sections; give one roughness for all."}}
		}
		var untils, n []float64
		for i, zone := range r.Zones {
			if i < len(r.Zones)-1 || zone.Until.Given {
				untils = append(untils, zone.Until.Value)
			}
			n = append(n, zone.Manning.Value)
		}
		return friction.NewZones(zoned, untils, n, combinations[r.Combine])
	}
	return nil, compute.Faults{{Code: "unknown_law", Detail: "This friction law is not known; the contract lists those that are."}}
}
