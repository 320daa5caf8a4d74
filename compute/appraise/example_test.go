package appraise_test

import (
	"fmt"
	"math"

	"leat/compute/appraise"
	"leat/compute/flow"
	"leat/compute/section"
)

// A grass-lined roadside ditch: FHWA HEC-15, third edition (2005), example 4.1 (from memory: 0.5 m3/s runs about 0.21 m deep at an n of 0.032).
func Example() {
	ditch, err := section.NewTrapezoidal(0.9, 3, 3)
	if err != nil {
		panic(err)
	}
	grass, err := appraise.NewVegetation(appraise.Grass{StemHeight: 0.075, Condition: appraise.Good, GrowthForm: appraise.Sod,
		Soil: appraise.Soil{Group: appraise.ClayeySand, PlasticityIndex: 16, VoidRatio: 0.5, GrainSize: math.NaN()}})
	if err != nil {
		panic(err)
	}
	law, err := grass.Roughness(ditch, 9.81)
	if err != nil {
		panic(err)
	}
	asset := appraise.Asset{Channel: flow.Channel{Section: ditch, Law: law, Slope: 0.03, Gravity: 9.81}, Lining: grass}
	limits := appraise.Limits{Given: appraise.Of(appraise.LeastFreeboard, appraise.LeastLiningSafety), LeastFreeboard: 0.15, LeastLiningSafety: 1}

	var room flow.Room
	depths := asset.Channel.Depths(0.5, &room)
	judgement := asset.Judge(0.5, &depths, &limits, appraise.All, nil)
	fmt.Printf("depth %.2f, n %.3f\n", depths.Normal[0], judgement.Lining.Roughness)
	for _, f := range judgement.Findings {
		fmt.Printf("%v: %v %q\n", f.Criterion, f.Met, f.Reason.Code)
	}
	var overall appraise.Overall
	overall.Add(0, judgement.Findings)
	fmt.Println(overall.Verdict())
	// Output:
	// depth 0.21, n 0.032
	// least_freeboard: unknown "missing_bank_height"
	// least_lining_safety: yes ""
	// undetermined
}
