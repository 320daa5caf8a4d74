package operation

import (
	"math"

	"leat/api/wire"
	"leat/compute"
	"leat/compute/appraise"
)

// newLining returns the lining that a request gives, nil where it gives none. The error is compute.Faults.
func newLining(l *wire.ChannelLining) (appraise.Lining, error) {
	if !l.Given {
		return nil, nil
	}
	nan := math.NaN()
	soil := appraise.Soil{Group: soilGroups[l.SoilGroup], PlasticityIndex: l.PlasticityIndex.Or(nan), VoidRatio: l.VoidRatio.Or(nan), GrainSize: l.GrainSize.Or(nan)}
	switch l.Kind {
	case wire.ShearLimited:
		return appraise.NewShearLimited(l.PermissibleShear.Or(nan))
	case wire.BareSoil:
		return appraise.NewBareSoil(soil)
	case wire.Vegetation:
		return appraise.NewVegetation(appraise.Grass{StemHeight: l.StemHeight.Or(nan), Condition: conditions[l.Condition], GrowthForm: growthForms[l.GrowthForm], Soil: soil})
	case wire.Riprap, wire.Gravel:
		return appraise.NewRiprap(appraise.Rock{StoneSize: l.StoneSize.Or(nan), SpecificGravity: l.SpecificGravity.Or(nan), AngleOfRepose: l.AngleOfRepose.Or(nan), Viscosity: l.KinematicViscosity.Or(nan)})
	case wire.Earth:
		return appraise.NewEarthChannel(soils[l.Soil], loads[l.WaterCarries])
	}
	return nil, compute.Faults{{Member: "kind", Code: "unknown_value", Detail: "This kind of lining is not known; the contract lists those that are."}}
}

// The choices of linings by the contract's names, which are theirs.
var (
	soilGroups = byName(appraise.SiltyGravel, appraise.ClayeyGravel, appraise.SiltySand, appraise.ClayeySand, appraise.Silt, appraise.LeanClay,
		appraise.ElasticSilt, appraise.FatClay)
	conditions  = byName(appraise.Excellent, appraise.VeryGood, appraise.Good, appraise.Fair, appraise.Poor)
	growthForms = byName(appraise.Sod, appraise.Bunch, appraise.Mixed)
	soils       = byName(appraise.FineSand, appraise.SandyLoam, appraise.SiltLoam, appraise.AlluvialSilt, appraise.FirmLoam, appraise.VolcanicAsh, appraise.StiffClay,
		appraise.ColloidalAlluvialSilt, appraise.ShaleOrHardpan, appraise.FineGravel, appraise.LoamToCobbles, appraise.SiltToCobbles, appraise.CoarseGravel, appraise.Cobbles)
	loads = byName(appraise.ClearWater, appraise.ColloidalSilt, appraise.SandOrGravel)
)

// byName returns choices by their names. No name is the zero value: not said.
func byName[T interface{ String() string }](choices ...T) map[string]T {
	m := make(map[string]T, len(choices))
	for _, c := range choices {
		m[c.String()] = c
	}
	return m
}
