package demo

import (
	"bufio"
	"fmt"
	"io"
	"math/rand/v2"
	"strings"
)

// Run is one request for the `profile` operation: the main drain of Ostermere in one of its states, or one of the works along it.
type Run struct {
	Line int    // its line in the file, from 1
	ID   string // its id as a JSON literal
	Told string // what it shows
	Text string // the request: one JSON object, without a line feed

	// Story is what the answer must tell, from upstream to downstream: the curves in order, "full" where a barrel runs full, "free" where a stretch
	// between surveyed stations bears no curve's name, and "jump" where one stands. A word that repeats stands once.
	Story    string
	Controls string   // the kinds of the controls, from upstream to downstream
	Status   int      // 200, or that of the problem of a run that is wrong on purpose
	Pointers []string // the places of the faults in that problem
}

// Runs returns the runs in the order of the file.
func Runs() []Run {
	r := rand.New(rand.NewPCG(1887, 42)) // any fixed pair will do; changing it changes the runs
	list := make([]Run, 0, len(drafts))
	for i, d := range drafts {
		place := parishes[0]
		for _, p := range parishes {
			if p.code == d.parish {
				place = p
			}
		}
		run := Run{Line: i + 1, ID: fmt.Sprintf(`"%s-PF-%02d"`, d.parish, i+1), Told: d.told, Story: d.story, Controls: d.controls, Status: 200}
		if d.pointers != "" {
			run.Status, run.Pointers = 422, strings.Fields(d.pointers)
		}
		units := ""
		if place.feet {
			units = `"us"`
		}
		members := d.draw(&pen{Rand: r, parish: place})
		run.Text = object(append([]string{"id", run.ID, "units", units}, members...)...)
		list = append(list, run)
	}
	return list
}

// WriteRuns writes the runs as NDJSON. Its error is the writer's.
func WriteRuns(w io.Writer) error {
	b := bufio.NewWriter(w)
	for _, r := range Runs() {
		b.WriteString(r.Text)
		b.WriteByte('\n')
	}
	return b.Flush()
}

// A draft is a run to be drawn: draw returns the members of its request, names and JSON values in turn.
type draft struct {
	parish          string
	told            string
	story, controls string
	pointers        string
	draw            func(*pen) []string
}

// drafts are the runs. Sizes vary with the seed within bounds in which the story stays the same.
var drafts = []draft{
	{parish: "OST", told: "high water at the sea sluice backs up the main drain", story: "M1", controls: "level", draw: backwater},
	{parish: "OST", told: "the pumps draw the main drain down to their sump", story: "M2", controls: "free_overfall", draw: drawdown},
	{parish: "OST", told: "the main drain runs at its normal depth", story: "uniform", controls: "normal", draw: uniform},
	{parish: "SAL", told: "a sluice half open shoots onto a mild bed, and the jump stands before the pool of a weir", story: "M3 jump M1",
		controls: "gate broad_crested", draw: sluice},
	{parish: "MAR", told: "the chute down the scarp, from its pool to the drain at its foot", story: "S2 jump S1", controls: "critical level", draw: chute},
	{parish: "MAR", told: "a gate on the chute lets out less than the depth that the chute would have", story: "S3", controls: "gate", draw: chuteGate},
	{parish: "SAL", told: "the flume of the old mill was laid at critical slope", story: "C3 jump C1", controls: "gate depth", draw: millFlume},
	{parish: "QUE", told: "a level apron between a gate and a fall", story: "H3 jump H2", controls: "gate free_overfall", draw: levelApron},
	{parish: "QUE", told: "a reach that has settled, so that its bed rises downstream", story: "A3 jump A2", controls: "gate free_overfall", draw: settledReach},
	{parish: "OST", told: "the abutments of a farm bridge choke the drain in flood", story: "M1 M2 uniform", controls: "critical normal", draw: farmBridge},
	{parish: "OST", told: "a sill for cattle to cross chokes the drain", story: "M1 H2 uniform", controls: "critical normal", draw: cattleSill},
	{parish: "SAL", told: "two box barrels under the road, drowned at their outlet and free at their inlet", story: "M1 S1 full M1", controls: "depth", draw: roadCulvert},
	{parish: "MAR", told: "a steep pipe whose outlet is drowned runs full below a jump", story: "S2 jump full", controls: "critical level", draw: drownedPipe},
	{parish: "OST", told: "a sharp-crested weir where the district gauges its flow", story: "M1", controls: "sharp_crested", draw: gaugingWeir},
	{parish: "OST", told: "a check gate holds water for the summer", story: "M1", controls: "gate", draw: checkGate},
	{parish: "OST", told: "a side drain comes in, field drains seep in along the way, and the gauge at the end has a rating", story: "M1", controls: "rating", draw: confluence},
	{parish: "MAR", told: "a stepped drain: drops between short reaches", story: "M2 M3 jump M2 M3 jump M2 M1", controls: "critical critical critical depth", draw: steps},
	{parish: "OST", told: "a surveyed stretch of the main drain, banks rougher than the bed", story: "free", controls: "level", draw: surveyedStretch},
	{parish: "AIR", told: "the airfield's drain, from drawings in feet", story: "S2 jump S1 full M1", controls: "critical level", draw: airfieldDrain},
	{parish: "MAR", told: "the whole main drain from the plateau down the scarp to the fen", story: "M2 S2 M3 jump M1", controls: "critical level", draw: wholeDrain},
	{parish: "OST", told: "wrong on purpose: a reach has no roughness, and its length was never measured", pointers: "/reaches/1/length /reaches/1/roughness", draw: unmeasured},
	{parish: "OST", told: "wrong on purpose: the rating at the end stops short of this flow", pointers: "/downstream/rating", draw: shortRating},
}
