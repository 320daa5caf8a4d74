package operation

import (
	"strconv"

	"leat/api/wire"
)

// A usual range of a member, in SI units, beyond which a wrong unit or a mistaken quantity is likelier than the value. Nothing is refused for it.
type usual struct {
	least, greatest float64
	hint            string
}

// The ranges are wide round what tables list (V. T. Chow 1959, table 5-6: n from 0.009 to 0.2; Strickler's and Chezy's follow from it at hydraulic radii of 0.1 to
// 10 m), the sizes round what is built (common practice).
var (
	usualManning   = usual{0.005, 0.5, "outside 0.005 to 0.5, while tables list 0.009 to 0.2; check that it is Manning's n and not its reciprocal"}
	usualStrickler = usual{2, 200, "outside 2 to 200 m^(1/3)/s, while 1/n of tables is 5 to 110; check that it is Strickler's coefficient and not Manning's n"}
	usualChezy     = usual{3, 200, "outside 3 to 200 m^(1/2)/s (5 to 360 ft^(1/2)/s); check its unit"}
	usualSand      = usual{0, 1, "more than 1 m (3.3 ft); check its unit, which is not the millimetre"}
	usualConduit   = usual{0.02, 30, "outside 0.02 to 30 m (0.07 to 98 ft) for a closed section; check its unit, which is not the millimetre"}
	usualBottom    = usual{0, 300, "more than 300 m (980 ft); check its unit, which is not the millimetre"}
	usualBank      = usual{0, 30, "more than 30 m (98 ft); check its unit, which is not the millimetre"}
	usualSide      = usual{0, 20, "more than 20; side slopes are horizontal per unit vertical, no degrees and no percentage"}
	usualFreeboard = usual{0, 5, "more than 5 m (16 ft); check its unit"}
	usualVelocity  = usual{0.01, 30, "outside 0.01 to 30 m/s (0.03 to 98 ft/s); check its unit"}
	usualStone     = usual{0, 2, "more than 2 m (6.6 ft); check its unit, which is not the millimetre"}
	usualStem      = usual{0, 3, "more than 3 m (9.8 ft); check its unit, which is not the millimetre"}
	usualGrain     = usual{0, 0.3, "more than 0.3 m (1 ft); check its unit, which is not the millimetre"}
	usualRepose    = usual{20, 50, "outside 20 to 50 degrees, while loose stone rests at 30 to 43; check that it is an angle in degrees"}
	usualFall      = usual{-0.2, 0.2, "more than 0.2 in size: 20 m of fall in 100 m; check that it is no percentage and no per mille"}
)

// doubt adds a warning for each value of a section and its roughness that is so far from what occurs that its unit is to be doubted. base is the pointer
// of the object that holds both.
func (w *warnings) doubt(base string, in *inputs) {
	look := func(pointer, name string, n wire.Number, u usual) { w.look(base+pointer, name, n, u) }
	if s := in.section; s != nil {
		look("/section/bottom_width", "bottom_width", s.BottomWidth, usualBottom)
		look("/section/bank_height", "bank_height", s.BankHeight, usualBank)
		look("/section/side_slope", "side_slope", s.SideSlope, usualSide)
		look("/section/left_side_slope", "left_side_slope", s.LeftSideSlope, usualSide)
		look("/section/right_side_slope", "right_side_slope", s.RightSideSlope, usualSide)
		look("/section/upper_side_slope", "upper_side_slope", s.UpperSideSlope, usualSide)
		switch s.Kind {
		case wire.Circular:
			look("/section/diameter", "diameter", s.Diameter, usualConduit)
		case wire.Box, wire.Elliptical:
			look("/section/width", "width", s.Width, usualConduit)
			look("/section/height", "height", s.Height, usualConduit)
		case wire.Egg, wire.Horseshoe:
			look("/section/height", "height", s.Height, usualConduit)
		}
	}
	if r := in.roughness; r != nil && r.Given {
		look("/roughness/manning", "manning", r.Manning, usualManning)
		look("/roughness/strickler", "strickler", r.Strickler, usualStrickler)
		look("/roughness/chezy", "chezy", r.Chezy, usualChezy)
		look("/roughness/sand_roughness", "sand_roughness", r.SandRoughness, usualSand)
		look("/roughness/bed/manning", "manning", r.Bed.Manning, usualManning)
		look("/roughness/sides/manning", "manning", r.Sides.Manning, usualManning)
		for i := range r.Zones {
			look("/roughness/zones/"+strconv.Itoa(i)+"/manning", "manning", r.Zones[i].Manning, usualManning)
		}
	}
	look("/bed_slope", "bed_slope", in.bedSlope, usualFall)
}

// doubtAppraisal does the same for the criteria and the lining of an appraisal.
func (w *warnings) doubtAppraisal(r *wire.AppraisalRequest) {
	w.look("/criteria/least_freeboard", "least_freeboard", r.Criteria.LeastFreeboard, usualFreeboard)
	w.look("/criteria/least_velocity", "least_velocity", r.Criteria.LeastVelocity, usualVelocity)
	w.look("/criteria/greatest_velocity", "greatest_velocity", r.Criteria.GreatestVelocity, usualVelocity)
	w.look("/lining/stone_size", "stone_size", r.Lining.StoneSize, usualStone)
	w.look("/lining/stem_height", "stem_height", r.Lining.StemHeight, usualStem)
	w.look("/lining/grain_size", "grain_size", r.Lining.GrainSize, usualGrain)
	w.look("/lining/angle_of_repose", "angle_of_repose", r.Lining.AngleOfRepose, usualRepose)
}

// look doubts one value.
func (w *warnings) look(pointer, name string, n wire.Number, u usual) {
	if n.Given && (n.Value < u.least || n.Value > u.greatest) {
		w.add("unusual_value", pointer, name+" is "+u.hint+".")
	}
}
