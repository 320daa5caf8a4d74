package appraise

import (
	"leat/compute/friction"
	"leat/compute/section"
)

// Earth is a soil of Fortier and Scobey's table.
type Earth uint8

const (
	NoEarth Earth = iota
	FineSand
	SandyLoam
	SiltLoam
	AlluvialSilt
	FirmLoam
	VolcanicAsh
	StiffClay
	ColloidalAlluvialSilt
	ShaleOrHardpan
	FineGravel
	LoamToCobbles
	SiltToCobbles
	CoarseGravel
	Cobbles
	earths = iota
)

var earthNames = [earths]string{"", "fine_sand", "sandy_loam", "silt_loam", "alluvial_silt", "firm_loam", "volcanic_ash", "stiff_clay", "colloidal_alluvial_silt",
	"shale_or_hardpan", "fine_gravel", "loam_to_cobbles", "silt_to_cobbles", "coarse_gravel", "cobbles"}

// String returns the soil's name in snake_case.
func (e Earth) String() string { return earthNames[e] }

// Load is what the water of a channel carries.
type Load uint8

const (
	NoLoad        Load = iota // not said
	ClearWater                // no detritus
	ColloidalSilt             // colloidal silts
	SandOrGravel              // silts that are not colloidal, sands, gravels or rock fragments
	loads         = iota
)

var loadNames = [loads]string{"", "nothing", "colloidal_silt", "sand_or_gravel"}

// String returns the load's name in snake_case.
func (l Load) String() string { return loadNames[l] }

// permissibleVelocity holds the greatest mean velocities in ft/s that canals in earth stood after aging, by soil and by load (S. Fortier and F. C. Scobey 1926, Permissible
// canal velocities, Transactions of the ASCE 89; V. T. Chow 1959, table 7-3).
var permissibleVelocity = [earths][loads]float64{
	FineSand:              {ClearWater: 1.50, ColloidalSilt: 2.50, SandOrGravel: 1.50},
	SandyLoam:             {ClearWater: 1.75, ColloidalSilt: 2.50, SandOrGravel: 2.00},
	SiltLoam:              {ClearWater: 2.00, ColloidalSilt: 3.00, SandOrGravel: 2.00},
	AlluvialSilt:          {ClearWater: 2.00, ColloidalSilt: 3.50, SandOrGravel: 2.00},
	FirmLoam:              {ClearWater: 2.50, ColloidalSilt: 3.50, SandOrGravel: 2.25},
	VolcanicAsh:           {ClearWater: 2.50, ColloidalSilt: 3.50, SandOrGravel: 2.00},
	StiffClay:             {ClearWater: 3.75, ColloidalSilt: 5.00, SandOrGravel: 3.00},
	ColloidalAlluvialSilt: {ClearWater: 3.75, ColloidalSilt: 5.00, SandOrGravel: 3.00},
	ShaleOrHardpan:        {ClearWater: 6.00, ColloidalSilt: 6.00, SandOrGravel: 5.00},
	FineGravel:            {ClearWater: 2.50, ColloidalSilt: 5.00, SandOrGravel: 3.75},
	LoamToCobbles:         {ClearWater: 3.75, ColloidalSilt: 5.00, SandOrGravel: 5.00},
	SiltToCobbles:         {ClearWater: 4.00, ColloidalSilt: 5.50, SandOrGravel: 5.00},
	CoarseGravel:          {ClearWater: 4.00, ColloidalSilt: 6.00, SandOrGravel: 6.50},
	Cobbles:               {ClearWater: 5.00, ColloidalSilt: 5.50, SandOrGravel: 6.50},
}

// PermissibleVelocity returns Fortier and Scobey's velocity in m/s; known is false where soil or load are not said.
func PermissibleVelocity(soil Earth, load Load) (velocity float64, known bool) {
	if soil == NoEarth || load == NoLoad || soil >= earths || load >= loads {
		return 0, false
	}
	return permissibleVelocity[soil][load] * foot, true
}

// shallow is the depth in m up to which the table holds as it stands, 3 ft. In deeper water it is on the safe side: half a foot
// a second more is common practice.
const shallow = 3 * foot

// EarthChannel is an unlined channel judged by its velocity.
type EarthChannel struct {
	soil Earth
	load Load
}

// NewEarthChannel returns a channel in earth from its soil and what its water carries, either of which may be missing. It fails with compute.Faults.
func NewEarthChannel(soil Earth, load Load) (Lining, error) {
	var c check
	if soil >= earths {
		c.add("soil", "unknown_value", "The soil must be one of the soils of the table of permissible velocities.")
	}
	if load >= loads {
		c.add("water_carries", "unknown_value", "water_carries must be nothing, colloidal_silt or sand_or_gravel.")
	}
	if err := c.err(); err != nil {
		return nil, err
	}
	return EarthChannel{soil, load}, nil
}

// Roughness implements Lining: it sets none.
func (l EarthChannel) Roughness(section.Section, float64) (friction.Law, error) { return nil, nil }

func (l EarthChannel) resist(a attack, s LiningState) (LiningState, Reason) {
	switch {
	case l.soil == NoEarth && l.load == NoLoad:
		return s, missing("soil", "water_carries")
	case l.soil == NoEarth:
		return s, missing("soil")
	case l.load == NoLoad:
		return s, missing("water_carries")
	}
	s.PermissibleVelocity, _ = PermissibleVelocity(l.soil, l.load)
	if a.bend {
		return s, Reason{"bend_not_covered", "The permissible velocities of earth were found in straight channels; in bends less is permissible."}
	}
	s.Safety = s.PermissibleVelocity / a.velocity
	if a.geometry.Depth > shallow {
		return s, Reason{"beyond_table_depth",
			"The flow is deeper than that for which the permissible velocities were found; in deeper water a little more is permissible, so that they are on the safe side."}
	}
	return s, Reason{}
}
