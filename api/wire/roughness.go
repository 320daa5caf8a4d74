package wire

// Law names the friction law that a Roughness stands for: the member that chose it.
type Law string

// The friction laws.
const (
	Manning        Law = "manning"
	Strickler      Law = "strickler"
	Chezy          Law = "chezy"
	SandRoughness  Law = "sand_roughness"
	Zones          Law = "zones"
	ManningByDepth Law = "manning_by_depth"
	BedAndSides    Law = "bed"
)

// Combine names the rule by which roughnesses of parts of a section become one.
type Combine string

// The rules of combination.
const (
	Divided        Combine = "divided"
	HortonEinstein Combine = "horton_einstein"
	Lotter         Combine = "lotter"
	Pavlovskii     Combine = "pavlovskii"
)

// Roughness is the union of all friction laws. After Decode, Law says which one it is and only its members are given;
// Combine holds the law's default where the request names none (empty where the law combines nothing). The tag `in` names the
// laws a member belongs to; a question mark says that it may be left out there.
type Roughness struct {
	// Law is empty where the request has no roughness.
	Law Law `json:"-"`

	// Manning is n in s/m^(1/3), in both systems of units.
	Manning Number `json:"manning" quantity:"manning" in:"manning" validate:"omitempty,gte=1e-6,lte=1e3"`
	// Strickler is 1/n in m^(1/3)/s, in both systems of units.
	Strickler Number `json:"strickler" quantity:"strickler" in:"strickler" validate:"omitempty,gte=1e-3,lte=1e6"`
	// Chezy is C in m^(1/2)/s.
	Chezy Number `json:"chezy" quantity:"chezy" in:"chezy" validate:"omitempty,gte=1e-3,lte=1e6"`
	// SandRoughness is the equivalent sand roughness in m.
	SandRoughness Number `json:"sand_roughness" quantity:"length" in:"sand_roughness" validate:"omitempty,gte=1e-12,lte=1e4"`
	// KinematicViscosity is in m2/s.
	KinematicViscosity Number `json:"kinematic_viscosity" quantity:"kinematic_viscosity" in:"sand_roughness?" validate:"omitempty,gte=1e-9,lte=1"`
	// Zones go from left to right; every one but the last has Until.
	Zones []Zone `json:"zones" in:"zones" validate:"omitempty,min=1,dive"`
	// ManningByDepth are pairs of depth in m and Manning's n.
	ManningByDepth [][2]float64 `json:"manning_by_depth" quantity:"length manning" in:"manning_by_depth" validate:"omitempty,min=1,dive,columns=0:1e9 1e-6:1e3"`
	Bed            Lining       `json:"bed" in:"bed" validate:"omitempty"`
	Sides          Lining       `json:"sides" in:"bed" validate:"omitempty"`
	Combine        Combine      `json:"combine" in:"zones? bed?" validate:"omitempty,oneof=divided horton_einstein lotter pavlovskii"`

	// Given reports whether the request has this object.
	Given bool `json:"-"`
}

// Zone is a part of a section's width with one roughness.
type Zone struct {
	// Until is the offset in m at which the zone ends; not given for the last.
	Until Number `json:"until" quantity:"length" validate:"omitempty,gte=-1e9,lte=1e9"`
	// Manning is n in s/m^(1/3).
	Manning Number `json:"manning" quantity:"manning" validate:"required,gte=1e-6,lte=1e3"`
}

// Lining is the roughness of the bed or of the sides.
type Lining struct {
	// Manning is n in s/m^(1/3).
	Manning Number `json:"manning" quantity:"manning" validate:"required,gte=1e-6,lte=1e3"`
	Given   bool   `json:"-"`
}
