package wire

// Quantity is what a number measures; it decides the unit in each system.
type Quantity uint8

// The quantities of the contract.
const (
	Dimensionless Quantity = iota
	QuantityLength
	QuantityArea
	QuantityVolume // first moments of area and specific force
	QuantityDischarge
	QuantityDischargePerLength
	QuantityVelocity
	QuantityAcceleration
	QuantityStress
	QuantityPowerPerArea
	QuantityKinematicViscosity
	QuantityChezy
	QuantityManning   // s/m^(1/3) in both systems, by custom
	QuantityStrickler // m^(1/3)/s in both systems
	QuantityAngle     // degree in both systems
	QuantityTold      // what the member unit beside the number tells
	quantities        // their number
)

// Exact by definition: the international foot and pound (1959) and standard gravity.
const (
	foot            = 0.3048                           // m
	pound           = 0.45359237                       // kg
	standardGravity = 9.80665                          // m/s2
	rootFoot        = 0.552086949673690439425820580144 // m^(1/2), the square root of 0.3048
)

// A unit is one row of the table of quantities.
type unit struct {
	name           string  // of the quantity, as in struct tags
	si, us         string  // as people write them
	siUCUM, usUCUM string  // UCUM codes; empty where UCUM has none (it knows whole powers only)
	inSI           float64 // one US unit in SI units
}

var units = [quantities]unit{
	Dimensionless:              {name: "dimensionless", si: "", us: "", siUCUM: "1", usUCUM: "1", inSI: 1},
	QuantityLength:             {name: "length", si: "m", us: "ft", siUCUM: "m", usUCUM: "[ft_i]", inSI: foot},
	QuantityArea:               {name: "area", si: "m2", us: "ft2", siUCUM: "m2", usUCUM: "[sft_i]", inSI: foot * foot},
	QuantityVolume:             {name: "volume", si: "m3", us: "ft3", siUCUM: "m3", usUCUM: "[cft_i]", inSI: foot * foot * foot},
	QuantityDischarge:          {name: "discharge", si: "m3/s", us: "ft3/s", siUCUM: "m3/s", usUCUM: "[cft_i]/s", inSI: foot * foot * foot},
	QuantityDischargePerLength: {name: "discharge_per_length", si: "m2/s", us: "ft2/s", siUCUM: "m2/s", usUCUM: "[sft_i]/s", inSI: foot * foot},
	QuantityVelocity:           {name: "velocity", si: "m/s", us: "ft/s", siUCUM: "m/s", usUCUM: "[ft_i]/s", inSI: foot},
	QuantityAcceleration:       {name: "acceleration", si: "m/s2", us: "ft/s2", siUCUM: "m/s2", usUCUM: "[ft_i]/s2", inSI: foot},
	QuantityStress:             {name: "stress", si: "N/m2", us: "lbf/ft2", siUCUM: "N/m2", usUCUM: "[lbf_av]/[sft_i]", inSI: pound * standardGravity / (foot * foot)},
	QuantityPowerPerArea:       {name: "power_per_area", si: "W/m2", us: "ft.lbf/(s.ft2)", siUCUM: "W/m2", usUCUM: "[ft_i].[lbf_av]/(s.[sft_i])", inSI: pound * standardGravity / foot},
	QuantityKinematicViscosity: {name: "kinematic_viscosity", si: "m2/s", us: "ft2/s", siUCUM: "m2/s", usUCUM: "[sft_i]/s", inSI: foot * foot},
	QuantityChezy:              {name: "chezy", si: "m^(1/2)/s", us: "ft^(1/2)/s", inSI: rootFoot},
	QuantityManning:            {name: "manning", si: "s/m^(1/3)", us: "s/m^(1/3)", inSI: 1},
	QuantityStrickler:          {name: "strickler", si: "m^(1/3)/s", us: "m^(1/3)/s", inSI: 1},
	QuantityAngle:              {name: "angle", si: "degrees", us: "degrees", siUCUM: "deg", usUCUM: "deg", inSI: 1},
	QuantityTold:               {name: "told", si: "told_beside_it", us: "told_beside_it", inSI: 1},
}

// String returns the name of the quantity.
func (q Quantity) String() string { return units[q].name }

// quantityNamed returns the quantity that a struct tag names.
func quantityNamed(name string) (Quantity, bool) {
	for q := range units {
		if units[q].name == name {
			return Quantity(q), true
		}
	}
	return 0, false
}
