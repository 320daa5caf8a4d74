package wire

// LiningKind names a kind of lining.
type LiningKind string

// The kinds of lining.
const (
	ShearLimited LiningKind = "shear_limited"
	BareSoil     LiningKind = "bare_soil"
	Vegetation   LiningKind = "vegetation"
	Riprap       LiningKind = "riprap"
	Gravel       LiningKind = "gravel"
	Earth        LiningKind = "earth"
)

// ChannelLining is what protects a channel against its flow: the union of the members of all kinds. After Decode exactly those of its Kind can
// be given. Of those that may be left out some are needed to judge the lining; what is missing then is said in the finding.
type ChannelLining struct {
	Kind LiningKind `json:"kind" validate:"required,oneof=shear_limited bare_soil vegetation riprap gravel earth"`

	// PermissibleShear is in N/m2.
	PermissibleShear Number `json:"permissible_shear" quantity:"stress" in:"shear_limited?" validate:"omitempty,gte=1e-9,lte=1e9"`

	// SoilGroup is that of a cohesive soil by ASTM D2487; PlasticityIndex is in percent of water, as soil laboratories give it.
	SoilGroup       string `json:"soil_group" in:"bare_soil? vegetation?" validate:"omitempty,oneof=silty_gravel clayey_gravel silty_sand clayey_sand silt lean_clay elastic_silt fat_clay"`
	PlasticityIndex Number `json:"plasticity_index" in:"bare_soil? vegetation?" validate:"omitempty,gte=0,lte=1e3"`
	VoidRatio       Number `json:"void_ratio" in:"bare_soil? vegetation?" validate:"omitempty,gte=1e-3,lte=1e3"`
	// GrainSize in m is that than which three quarters of a non-cohesive soil, by weight, are finer.
	GrainSize Number `json:"grain_size" quantity:"length" in:"bare_soil? vegetation?" validate:"omitempty,gte=1e-9,lte=1e3"`

	// StemHeight of the vegetation is in m.
	StemHeight Number `json:"stem_height" quantity:"length" in:"vegetation" validate:"omitempty,gte=1e-6,lte=1e3"`
	Condition  string `json:"condition" in:"vegetation" validate:"omitempty,oneof=excellent very_good good fair poor"`
	GrowthForm string `json:"growth_form" in:"vegetation?" validate:"omitempty,oneof=sod bunch mixed"`

	// StoneSize in m is that than which half of the stone, by weight, is finer.
	StoneSize       Number `json:"stone_size" quantity:"length" in:"riprap gravel" validate:"omitempty,gte=1e-6,lte=1e3"`
	SpecificGravity Number `json:"specific_gravity" in:"riprap? gravel?" validate:"omitempty,gte=1.01,lte=100"`
	// AngleOfRepose is in degrees.
	AngleOfRepose Number `json:"angle_of_repose" quantity:"angle" in:"riprap? gravel?" validate:"omitempty,gte=1,lte=89"`
	// KinematicViscosity is in m2/s.
	KinematicViscosity Number `json:"kinematic_viscosity" quantity:"kinematic_viscosity" in:"riprap? gravel?" validate:"omitempty,gte=1e-9,lte=1"`

	// Soil is an earth of Fortier and Scobey's table, WaterCarries what the water of its canal carries.
	Soil         string `json:"soil" in:"earth?" validate:"omitempty,oneof=fine_sand sandy_loam silt_loam alluvial_silt firm_loam volcanic_ash stiff_clay colloidal_alluvial_silt shale_or_hardpan fine_gravel loam_to_cobbles silt_to_cobbles coarse_gravel cobbles"`
	WaterCarries string `json:"water_carries" in:"earth?" validate:"omitempty,oneof=nothing colloidal_silt sand_or_gravel"`

	Given bool `json:"-"`
}

func (l *ChannelLining) variant() string { return string(l.Kind) }

// HasRoughness reports whether the lining has a roughness of its own, which follows from it and from the flow.
func (l *ChannelLining) HasRoughness() bool {
	switch l.Kind {
	case Vegetation, Riprap, Gravel:
		return true
	}
	return false
}
