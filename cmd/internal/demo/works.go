package demo

import (
	"math"
	"strconv"
)

// drain returns the section and roughness of the main drain's common form, members of a reach.
func (p *pen) drain(bottom, side, manning float64) []string {
	return []string{
		"section", object("kind", `"trapezoidal"`, "bottom_width", p.length(bottom), "side_slope", fixed(side, 2)),
		"roughness", object("manning", fixed(manning, 3)),
	}
}

// lined returns those of a rectangular lined channel.
func (p *pen) lined(width, manning float64) []string {
	return []string{
		"section", object("kind", `"rectangular"`, "bottom_width", p.length(width)),
		"roughness", object("manning", fixed(manning, 3)),
	}
}

// reach writes a reach: its name, length and slope, its section and roughness, and what more it has.
func (p *pen) reach(id string, length, slope float64, channel []string, more ...string) string {
	pairs := append([]string{"id", strconv.Quote(id), "length", p.length(length), "bed_slope", digits(slope, 3)}, channel...)
	return object(append(pairs, more...)...)
}

func (p *pen) depth(metres float64) string { return object("depth", p.length(metres)) }
func (p *pen) level(metres float64) string { return object("level", p.length(metres)) }
func (p *pen) gate(opening float64) string {
	return object("gate", object("opening", p.length(opening)))
}
func control(name string) string { return object("control", strconv.Quote(name)) }

const (
	mainWidth = 6.0 // m, the main drain's bottom
	mainSide  = 2.0
	gravity   = 9.80665 // m/s2
)

func backwater(p *pen) []string {
	return []string{
		"discharge", p.discharge(p.between(7, 9)),
		"reaches", list(p.reach("main drain", 12000, 0.0003, p.drain(mainWidth, mainSide, 0.03))),
		"downstream", p.level(p.size(p.between(1.6, 1.9), 0.05)),
		"datum", p.length(-1.2),
		"report", object("spacing", p.length(1000)),
		"geometry", object("type", `"LineString"`, "coordinates", list("[4120,2860]", "[4890,3420]", "[5970,3310]", "[7060,4180]", "[8440,4350]", "[9120,4930]")),
	}
}

func drawdown(p *pen) []string {
	return []string{
		"discharge", p.discharge(p.between(7, 9)),
		"reaches", list(p.reach("main drain", 1500, 0.0003, p.drain(mainWidth, mainSide, 0.03))),
		"downstream", control("free_overfall"),
		"datum", p.length(-1.4),
	}
}

func uniform(p *pen) []string {
	return []string{
		"discharge", p.discharge(p.between(3, 5)),
		"reaches", list(p.reach("main drain", 2500, 0.0003, p.drain(mainWidth, mainSide, 0.03))),
		"downstream", control("normal"),
		"datum", p.length(-1.2),
	}
}

func sluice(p *pen) []string {
	return []string{
		"discharge", p.discharge(p.between(5, 5.5)),
		"reaches", list(p.reach("stilling reach", 180, 0.0008, p.lined(4, 0.018))),
		"upstream", p.gate(p.size(p.between(0.29, 0.33), 0.01)),
		"downstream", object("weir", object("kind", `"broad_crested"`, "crest_height", p.length(0.4), "crest_width", p.length(4))),
		"datum", p.length(3.1),
	}
}

func chute(p *pen) []string {
	return []string{
		"discharge", p.discharge(p.between(2.5, 3)),
		"reaches", list(p.reach("chute", 60, 0.08, p.lined(2, 0.016))),
		"downstream", p.level(p.size(p.between(14.9, 15.1), 0.05)),
		"datum", p.length(12.4),
		"report", object("spacing", p.length(5)),
	}
}

func chuteGate(p *pen) []string {
	return []string{
		"discharge", p.discharge(p.between(3.6, 4)),
		"reaches", list(p.reach("chute", 40, 0.03, p.lined(2, 0.018))),
		"upstream", p.gate(0.35),
		"downstream", control("free_overfall"),
		"datum", p.length(20),
	}
}

// criticalSlope returns the bed slope, the sine of its angle, at which a rectangular channel's normal depth is critical.
func criticalSlope(width, manning, discharge float64) float64 {
	slope := 0.005
	for range 60 {
		cosine := math.Sqrt(1 - slope*slope)
		q := discharge / width
		depth := math.Cbrt(q * q / (gravity * cosine))
		area := width * depth
		radius := area / (width + 2*depth)
		cbrt := math.Cbrt(radius)
		root := discharge * manning / (area * cbrt * cbrt)
		slope = root * root
	}
	return slope
}

func millFlume(p *pen) []string {
	width, n := 1.8, 0.017
	discharge := p.size(p.between(2.2, 2.6), 0.1)
	slope := criticalSlope(width, n, discharge)
	return []string{
		"discharge", p.discharge(discharge),
		"reaches", list(object(append([]string{"id", `"mill flume"`, "length", p.length(80), "bed_slope", digits(slope, 12)}, p.lined(width, n)...)...)),
		"upstream", p.gate(0.35),
		"downstream", p.depth(p.size(p.between(1.1, 1.2), 0.05)),
		"datum", p.length(8.2),
	}
}

func levelApron(p *pen) []string {
	return []string{
		"discharge", p.discharge(p.between(5.5, 6)),
		"reaches", list(p.reach("apron", 90, 0, p.lined(4, 0.02))),
		"upstream", p.gate(0.4),
		"downstream", control("free_overfall"),
		"datum", p.length(-1.8),
	}
}

func settledReach(p *pen) []string {
	return []string{
		"discharge", p.discharge(p.between(5.5, 6)),
		"reaches", list(p.reach("settled reach", 70, -p.size(p.between(0.0015, 0.0025), 0.0005), p.lined(4, 0.02))),
		"upstream", p.gate(0.4),
		"downstream", control("free_overfall"),
		"datum", p.length(-1.6),
	}
}

func farmBridge(p *pen) []string {
	return []string{
		"discharge", p.discharge(p.between(15, 17)),
		"reaches", list(
			p.reach("above", 1500, 0.0006, p.drain(mainWidth, mainSide, 0.028), "loss_coefficient", "0.1"),
			p.reach("bridge", 8, 0.0006, p.lined(p.size(p.between(3, 3.2), 0.1), 0.02), "loss_coefficient", "0.3"),
			p.reach("below", 800, 0.0006, p.drain(mainWidth, mainSide, 0.028))),
		"downstream", control("normal"),
		"datum", p.length(1.1),
	}
}

func cattleSill(p *pen) []string {
	high := p.length(p.size(p.between(0.75, 0.85), 0.05))
	return []string{
		"discharge", p.discharge(p.between(5, 6)),
		"reaches", list(
			p.reach("above", 900, 0.001, p.lined(4, 0.025), "drop", "-"+high),
			p.reach("sill", 6, 0, p.lined(4, 0.02), "drop", high),
			p.reach("below", 400, 0.001, p.lined(4, 0.025))),
		"downstream", control("normal"),
		"datum", p.length(1.6),
	}
}

func roadCulvert(p *pen) []string {
	barrel := []string{
		"section", object("kind", `"box"`, "width", p.length(1.5), "height", p.length(1.2), "haunch", p.length(0.15)),
		"barrels", "2",
		"roughness", object("manning", "0.014"),
	}
	return []string{
		"discharge", p.discharge(p.between(3.6, 4)),
		"reaches", list(
			p.reach("above", 400, 0.002, p.drain(3, 1.5, 0.03), "loss_coefficient", "0.1"),
			p.reach("barrels", 60, 0.008, barrel, "entry_loss_coefficient", "0.4", "loss_coefficient", "0.6"),
			p.reach("below", 100, 0.001, p.drain(3, 1.5, 0.03))),
		"downstream", p.depth(p.size(p.between(1.45, 1.55), 0.05)),
		"datum", p.length(5.3),
	}
}

func drownedPipe(p *pen) []string {
	pipe := []string{
		"section", object("kind", `"circular"`, "diameter", p.length(0.9)),
		"roughness", object("sand_roughness", "0.0006"),
	}
	return []string{
		"discharge", p.discharge(p.between(0.89, 0.94)),
		"reaches", list(p.reach("pipe", 80, 0.03, pipe)),
		"downstream", p.level(p.size(p.between(19.7, 19.9), 0.1)),
		"datum", p.length(18),
	}
}

func gaugingWeir(p *pen) []string {
	return []string{
		"discharge", p.discharge(p.between(1.2, 1.6)),
		"reaches", list(p.reach("approach", 600, 0.0004, p.lined(3, 0.025))),
		"downstream", object("weir", object("kind", `"sharp_crested"`, "crest_height", p.length(0.9), "crest_width", p.length(3))),
		"datum", p.length(0.8),
	}
}

func checkGate(p *pen) []string {
	return []string{
		"discharge", p.discharge(p.between(2.5, 3)),
		"reaches", list(p.reach("summer reach", 3000, 0.0003, p.drain(3, mainSide, 0.03))),
		"downstream", object("gate", object("opening", p.length(p.size(p.between(0.18, 0.22), 0.01)), "contraction_coefficient", "0.63")),
		"datum", p.length(0.4),
		"report", object("at", list("0", "1000", "2000", "2900", "3000")),
	}
}

func confluence(p *pen) []string {
	var rating []string
	for i := range 8 { // the gauge's rating, as a power of the depth
		depth := 0.4 * float64(i+1)
		rating = append(rating, list(p.length(depth), fixed(2.3*depth*math.Sqrt(depth), 2)))
	}
	return []string{
		"discharge", p.discharge(p.between(3, 3.5)),
		"reaches", list(
			p.reach("upper", 1200, 0.0005, p.drain(3, mainSide, 0.03)),
			p.reach("middle", 800, 0.0005, p.drain(3, mainSide, 0.03), "inflow", p.discharge(p.between(1.2, 1.6))),
			p.reach("lower", 1500, 0.0004, p.drain(4, mainSide, 0.03), "lateral_inflow", "0.0004")),
		"downstream", object("rating", list(rating...)),
		"datum", p.length(0.2),
	}
}

func steps(p *pen) []string {
	reach := func(id string, more ...string) string { return p.reach(id, 25, 0.002, p.lined(1.5, 0.016), more...) }
	return []string{
		"discharge", p.discharge(p.between(1.1, 1.3)),
		"reaches", list(
			reach("first", "drop", p.length(0.4), "loss_coefficient", "0.2"),
			reach("second", "drop", p.length(0.4), "loss_coefficient", "0.2"),
			reach("third", "drop", p.length(0.6), "loss_coefficient", "0.2"),
			reach("last")),
		"downstream", p.depth(p.size(p.between(0.85, 0.95), 0.05)),
		"datum", p.length(24.5),
	}
}

func surveyedStretch(p *pen) []string {
	var stations []string
	at, bed := 0.0, 0.35
	for i := range 7 {
		s := drainSurvey(p, 2.4)
		points, left, right := s.placed(p, bed)
		stations = append(stations, object(
			"chainage", p.length(at),
			"section", object("kind", `"surveyed"`, "points", points),
			"roughness", object("zones", list(
				object("until", p.length(left), "manning", "0.05"),
				object("until", p.length(right), "manning", "0.028"),
				object("manning", "0.05"))),
		))
		at += p.size(p.between(120, 260), 10)
		bed -= p.between(0.03, 0.09) * float64(1+i%2)
	}
	return []string{
		"discharge", p.discharge(p.between(5, 6)),
		"stations", list(stations...),
		"downstream", p.level(1.35),
	}
}

// placed writes the points of a survey with its lowest at a bed level, and where its banks begin.
func (s *survey) placed(p *pen, bed float64) (points string, left, right float64) {
	low := math.Inf(1)
	for _, y := range s.level {
		low = min(low, y)
	}
	texts := make([]string, len(s.offset))
	for i := range s.offset {
		texts[i] = list(fixed(math.Round(s.offset[i]*100)/100, 2), p.length(bed+s.level[i]-low))
	}
	return list(texts...), math.Round(s.left*100) / 100, math.Round(s.right*100) / 100
}

func airfieldDrain(p *pen) []string {
	pipe := []string{
		"section", object("kind", `"circular"`, "diameter", "4"),
		"roughness", object("manning", "0.013"),
	}
	return []string{
		"discharge", p.discharge(p.between(1.1, 1.3)),
		"reaches", list(
			p.reach("runway pipe", 120, 0.012, pipe, "loss_coefficient", "0.5"),
			p.reach("open drain", 600, 0.0008, p.drain(p.size(1.5, 0.1), 2, 0.03))),
		"downstream", p.level(p.size(p.between(5.3, 5.4), 0.05)),
		"datum", p.length(3.4),
	}
}

func wholeDrain(p *pen) []string {
	twoStage := []string{
		"section", object("kind", `"two_stage"`, "bottom_width", p.length(3), "side_slope", "1.5", "bench_height", p.length(0.9), "bench_width", p.length(3), "upper_side_slope", "2"),
		"roughness", object("zones", list(
			object("until", p.length(-2.85), "manning", "0.045"), object("until", p.length(2.85), "manning", "0.028"), object("manning", "0.045"))),
	}
	return []string{
		"discharge", p.discharge(p.between(3.6, 4)),
		"reaches", list(
			p.reach("plateau", 2200, 0.001, p.drain(2, 1.5, 0.03)),
			p.reach("scarp", 90, 0.06, p.lined(2, 0.017)),
			p.reach("foot", 160, 0.002, p.lined(3, 0.022), "loss_coefficient", "0.2"),
			p.reach("meadows", 1800, 0.0006, twoStage),
			p.reach("fen", 3000, 0.0003, p.drain(mainWidth, mainSide, 0.03), "inflow", p.discharge(p.between(2, 2.5)))),
		"downstream", p.level(p.size(p.between(1.2, 1.4), 0.05)),
		"datum", p.length(-0.6),
		"geometry", object("type", `"LineString"`, "coordinates", list("[880,5210]", "[2310,4760]", "[2900,4210]", "[3050,4070]", "[4120,2860]", "[6200,3350]", "[7060,4180]")),
	}
}

func unmeasured(p *pen) []string {
	return []string{
		"discharge", p.discharge(p.between(3, 4)),
		"reaches", list(
			p.reach("upper", 400, 0.0005, p.drain(3, mainSide, 0.03)),
			object("id", `"lower"`, "length", "0", "bed_slope", "0.0005", "section", p.drain(3, mainSide, 0.03)[1])),
		"downstream", control("normal"),
	}
}

func shortRating(p *pen) []string {
	return []string{
		"discharge", p.discharge(p.between(9, 10)),
		"reaches", list(p.reach("main drain", 1500, 0.0004, p.drain(4, mainSide, 0.03))),
		"downstream", object("rating", "[[0.4,1.01],[0.8,2.86],[1.2,5.26],[1.6,8.1]]"),
	}
}
