// Command client makes one call with the client generated from the contract (package leat beside it). It compiles only if the
// generated types fit what is sent and read, and fails unless the service answers what the arithmetic below says.
package main

import (
	"context"
	"fmt"
	"log"
	"math"
	"net/http"
	"os"

	"client/leat"
)

func main() {
	log.SetFlags(0)
	if len(os.Args) != 2 {
		log.Fatal("usage: client ADDRESS")
	}
	client, err := leat.NewClientWithResponses(os.Args[1])
	if err != nil {
		log.Fatal(err)
	}
	// A rectangle's critical depth is (q^2/(g cos))^(1/3) for a discharge q per unit width on a bed with that cosine (the energy's minimum,
	// common practice); with q^2 = g cos it is 1 m.
	const width, gravity, slope = 2.0, 9.80665, 0.001
	unitDischarge := math.Sqrt(gravity * math.Sqrt(1-slope*slope))
	var section leat.Section
	must(section.FromRectangularSection(leat.RectangularSection{Kind: leat.Rectangular, BottomWidth: width}))
	var roughness leat.Roughness
	must(roughness.FromManningRoughness(leat.ManningRoughness{Manning: 0.02}))
	brief := leat.ComputeDepthsParamsDetail("brief")
	answer, err := client.ComputeDepthsWithResponse(context.Background(), &leat.ComputeDepthsParams{Detail: &brief}, leat.DepthsRequest{
		Section: section, Roughness: roughness, BedSlope: slope, Discharge: width * unitDischarge,
	})
	must(err)
	if answer.JSON200 == nil {
		log.Fatalf("%s: %s", answer.Status(), answer.Body)
	}
	critical := answer.JSON200.CriticalDepth
	if critical == nil || !(math.Abs(*critical-1) <= 1e-9) {
		log.Fatalf("critical depth is %v, want 1: %s", critical, answer.Body)
	}

	var pipe leat.Section
	must(pipe.FromCircularSection(leat.CircularSection{Kind: leat.Circular, Diameter: 0.6}))
	depth := 0.7
	refused, err := client.ComputeSectionWithResponse(context.Background(), nil, leat.SectionRequest{Section: pipe, Depth: &depth})
	must(err)
	if refused.StatusCode() != http.StatusUnprocessableEntity || refused.ApplicationproblemJSON422 == nil {
		log.Fatalf("a depth above the crown was not refused: %s %s", refused.Status(), refused.Body)
	}
	fmt.Println("Go client: critical depth", *critical, "m; refusal:", refused.ApplicationproblemJSON422.Title)
}

func must(err error) {
	if err != nil {
		log.Fatal(err)
	}
}
