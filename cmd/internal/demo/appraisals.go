package demo

import (
	"bufio"
	"io"
	"math/rand/v2"
	"strconv"
)

// Appraisals returns, for each asset of the register in its order, a request for the operation `appraisal`: the asset under several named flows, held to the
// criteria of its class, with its lining and its bend where it has some. The rows of AppraisalMistakes are wrong on purpose; an asset whose row in the register is
// wrong was surveyed anew.
func Appraisals() []Asset {
	r := rand.New(rand.NewPCG(1887, 43)) // any fixed pair will do; changing it changes the appraisals
	wrong := make(map[int]Mistake, len(AppraisalMistakes))
	for _, m := range AppraisalMistakes {
		wrong[m.Line] = m
	}
	register := Register()
	for i := range register {
		a := &register[i]
		if a.Place == "" {
			a.laid = lay(r, parishOf(a.ID), classOf(a.ID))
			a.Place = a.laid.parish.name
		}
		a.Text = a.laid.appraisal(r, a.ID)
		if m, ok := wrong[a.Line]; ok {
			a.ID, a.Place, a.Text = m.ID, "", m.Text
		}
	}
	return register
}

// WriteAppraisals writes the appraisals as NDJSON. Its error is the writer's.
func WriteAppraisals(w io.Writer) error {
	b := bufio.NewWriter(w)
	for _, a := range Appraisals() {
		b.WriteString(a.Text)
		b.WriteByte('\n')
	}
	return b.Flush()
}

// parishOf returns the parish that an id in quotes begins with.
func parishOf(id string) parish {
	for _, p := range parishes {
		if id[1:4] == p.code {
			return p
		}
	}
	return parishes[0]
}

// classOf returns the class that an id in quotes names.
func classOf(id string) class {
	for _, c := range classes {
		if id[5:7] == c.code {
			return c
		}
	}
	return classes[0]
}

// A brief is what a class of assets is held to. Texts are JSON, empty for what is left out.
type brief struct {
	flows    string
	criteria string
	about    string // criterion_flows
	lining   string
	bend     string
	rough    bool // the lining has a roughness of its own
}

// appraisal writes the request for the appraisal of an asset.
func (l *laid) appraisal(r *rand.Rand, id string) string {
	b := briefs[l.class.code](&pen{Rand: r, parish: l.parish}, l)
	roughness := l.roughness
	if b.rough {
		roughness = ""
	}
	return object(
		"id", id,
		"units", l.units,
		"section", l.section,
		"barrels", l.barrels,
		"roughness", roughness,
		"bed_slope", l.slope,
		"flows", b.flows,
		"depth", l.seen,
		"energy_coefficient", l.alpha,
		"momentum_coefficient", l.beta,
		"criteria", b.criteria,
		"criterion_flows", b.about,
		"lining", b.lining,
		"bend", b.bend,
	)
}

// briefs are those of the classes, by their codes. The limits are such as local codes set (common practice).
var briefs = map[string]func(*pen, *laid) brief{
	"RD": roadsideBrief, "MD": mainDrainBrief, "LC": linedBrief, "SW": sewerBrief, "CU": culvertBrief, "GU": gutterBrief, "FL": flumeBrief, "SG": swaleBrief,
}

// flow writes a flow that is a share of what the asset was laid out for.
func (l *laid) flow(p *pen, share float64) string { return p.discharge(l.discharge * share) }

// velocity writes a velocity in m/s in the asset's units.
func (p *pen) velocity(v float64) string {
	if p.parish.feet {
		return fixed(v/foot, 1)
	}
	return fixed(v, 2)
}

// shear writes a shear stress in N/m2 in the asset's units.
func (p *pen) shear(tau float64) string {
	if p.parish.feet {
		return digits(tau/47.88, 2) // lbf/ft2, near enough for a limit
	}
	return digits(tau, 2)
}

// bend draws a bend of so many times a width, for some.
func (p *pen) bend(percent int, width float64) string {
	if !p.chance(percent) {
		return ""
	}
	return object("radius", fixed(p.inFeet(p.between(6, 30)*width), 0))
}

// inFeet returns a length in metres in the asset's units.
func (p *pen) inFeet(metres float64) float64 {
	if p.parish.feet {
		return metres / foot
	}
	return metres
}

// names writes a list of names.
func names(list ...string) string {
	out := "["
	for i, name := range list {
		if i > 0 {
			out += ","
		}
		out += strconv.Quote(name)
	}
	return out + "]"
}

func roadsideBrief(p *pen, l *laid) brief {
	b := brief{
		flows: object("two_year", l.flow(p, 0.55), "ten_year", l.flow(p, 1), "hundred_year", l.flow(p, 1.6)),
		about: object("least_freeboard", names("ten_year")),
	}
	criteria := []string{"least_freeboard", p.length(p.pick(0.1, 0.15, 0.2)), "greatest_velocity", p.velocity(p.pick(1.2, 1.5, 1.8))}
	switch {
	case p.chance(25):
		b.lining = object("kind", `"bare_soil"`, "soil_group", p.pickText(`"clayey_sand"`, `"lean_clay"`, `"silty_sand"`), "plasticity_index", fixed(p.between(10, 24), 0),
			"void_ratio", fixed(p.between(0.3, 0.8), 2))
		criteria = append(criteria, "least_lining_safety", "1")
	case p.chance(18):
		b.lining = object("kind", `"gravel"`, "stone_size", p.length(p.pick(0.025, 0.04, 0.05)), "angle_of_repose", fixed(p.between(36, 42), 0))
		b.rough = true
		criteria = append(criteria, "least_lining_safety", "1.1")
	case p.chance(10): // asked for, and nobody knows what lies there
		criteria = append(criteria, "least_lining_safety", "1")
	}
	b.criteria = object(criteria...)
	b.bend = p.bend(10, 2)
	return b
}

func mainDrainBrief(p *pen, l *laid) brief {
	b := brief{
		flows: object("summer", l.flow(p, 0.15), "ten_year", l.flow(p, 1), "hundred_year", l.flow(p, 1.5)),
		about: object("least_freeboard", names("hundred_year"), "least_velocity", names("ten_year")),
	}
	criteria := []string{"least_freeboard", p.length(0.3), "least_velocity", p.velocity(0.3)}
	if p.chance(60) {
		load := p.pickText(`"nothing"`, `"colloidal_silt"`, `"sand_or_gravel"`)
		if p.chance(8) { // never asked
			load = ""
		}
		b.lining = object("kind", `"earth"`, "soil", p.pickText(`"firm_loam"`, `"stiff_clay"`, `"silt_loam"`, `"alluvial_silt"`, `"fine_gravel"`), "water_carries", load)
		criteria = append(criteria, "least_lining_safety", "1")
	}
	b.criteria = object(criteria...)
	b.bend = p.bend(25, 12)
	return b
}

func linedBrief(p *pen, l *laid) brief {
	b := brief{flows: object("ten_year", l.flow(p, 0.8), "hundred_year", l.flow(p, 1.2))}
	if l.steep {
		b.criteria = object("freeboard_rule", `"chute"`, "greatest_velocity", p.velocity(6), "greatest_vedernikov_number", "1", "critical_band", "[0.86,1.13]")
		return b
	}
	criteria := []string{"freeboard_rule", `"canal"`, "greatest_velocity", p.velocity(p.pick(2.5, 3, 6)), "critical_band", "[0.86,1.13]"}
	if p.chance(30) { // mats and blocks, as their makers tell
		b.lining = object("kind", `"shear_limited"`, "permissible_shear", p.shear(p.pick(100, 150, 300)))
		criteria = append(criteria, "least_lining_safety", "1.5")
	} else { // joints that open
		criteria = append(criteria, "greatest_shear", p.shear(p.pick(80, 150)))
	}
	b.criteria = object(criteria...)
	b.bend = p.bend(20, 3)
	return b
}

func sewerBrief(p *pen, l *laid) brief {
	return brief{
		flows:    object("dry_weather", l.flow(p, 0.06), "two_year", l.flow(p, 0.7), "thirty_year", l.flow(p, 1.3)),
		criteria: object("greatest_fill", p.pickText("0.8", "0.85"), "least_velocity", p.velocity(0.6), "least_shear", p.shear(p.pick(1, 1.5)), "greatest_velocity", p.velocity(6)),
		about:    object("greatest_fill", names("two_year"), "least_velocity", names("two_year"), "least_shear", names("dry_weather", "two_year")),
	}
}

func culvertBrief(p *pen, l *laid) brief {
	return brief{
		flows:    object("ten_year", l.flow(p, 0.8), "hundred_year", l.flow(p, 1.2)),
		criteria: object("greatest_fill", "0.9", "least_freeboard", p.length(0.1), "greatest_velocity", p.velocity(p.pick(3, 4)), "freeboard_rule", p.pickText("", "", "", `"canal"`)),
		about:    object("greatest_fill", names("ten_year"), "least_freeboard", names("ten_year")),
	}
}

func gutterBrief(p *pen, l *laid) brief {
	return brief{
		flows:    object("two_year", l.flow(p, 0.8), "ten_year", l.flow(p, 1.3)),
		criteria: object("least_freeboard", p.length(0.02), "greatest_vedernikov_number", "1"),
	}
}

func flumeBrief(p *pen, l *laid) brief {
	return brief{
		flows:    object("ordinary", l.flow(p, 0.5), "greatest", l.flow(p, 1)),
		criteria: object("least_freeboard", p.length(0.1), "greatest_fill", "0.85", "critical_band", p.pickText("[0.86,1.13]", "[0.8,1.2]")),
	}
}

func swaleBrief(p *pen, l *laid) brief {
	b := brief{flows: object("two_year", l.flow(p, 0.5), "ten_year", l.flow(p, 1))}
	criteria := []string{"least_freeboard", p.length(0.05), "greatest_velocity", p.velocity(1.5)}
	if p.chance(75) {
		b.rough = true
		soil := []string{"soil_group", p.pickText(`"clayey_sand"`, `"lean_clay"`), "plasticity_index", fixed(p.between(10, 22), 0), "void_ratio", fixed(p.between(0.4, 0.7), 2)}
		if p.chance(25) {
			soil = []string{"grain_size", p.length(p.pick(0.002, 0.005, 0.01))}
		}
		b.lining = object(append([]string{"kind", `"vegetation"`, "stem_height", p.length(p.pick(0.075, 0.1, 0.15, 0.2)), "condition", p.pickText(`"good"`, `"good"`, `"very_good"`, `"fair"`, `"poor"`),
			"growth_form", p.pickText(`"sod"`, `"bunch"`, `"mixed"`)}, soil...)...)
		criteria = append(criteria, "least_lining_safety", "1")
	} else if p.chance(50) {
		b.rough = true
		b.lining = object("kind", `"riprap"`, "stone_size", p.length(p.pick(0.075, 0.1, 0.15)), "specific_gravity", p.pickText("", "2.5", "2.7"), "angle_of_repose", fixed(p.between(38, 42), 0))
		criteria = append(criteria, "least_lining_safety", "1.1")
	}
	b.criteria = object(criteria...)
	b.bend = p.bend(15, 3)
	return b
}
