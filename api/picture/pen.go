package picture

// A pen is how a kind of thing looks on light and on dark paper. Its name is its class in SVG. Colours are #rrggbb, empty for none.
type pen struct {
	name                 string
	stroke, fill         string // on light paper
	darkStroke, darkFill string
	width                float64
	dash                 []float64
}

// The pens. Lines that may lie side by side differ in dash too; their colours keep apart in lightness for eyes that do not tell hues.
var (
	paper      = &pen{name: "paper", fill: "#fbfaf6", darkFill: "#13191f"}
	ink        = &pen{name: "ink", fill: "#1b2530", darkFill: "#eaf0f5"}
	soft       = &pen{name: "soft", fill: "#4a5763", darkFill: "#afbcc8"}
	grid       = &pen{name: "grid", stroke: "#dcdcd6", darkStroke: "#2a343d", width: 0.8}
	frame      = &pen{name: "frame", stroke: "#7d8790", darkStroke: "#75828e", width: 1}
	leader     = &pen{name: "leader", stroke: "#7d8790", darkStroke: "#75828e", width: 0.7}
	ground     = &pen{name: "ground", fill: "#e2d3b8", darkFill: "#3d3427"}
	bedLine    = &pen{name: "bed", stroke: "#5d4524", darkStroke: "#cfb389", width: 2.2}
	lining     = &pen{name: "wall", stroke: "#5d4524", darkStroke: "#cfb389", width: 3}
	bankLine   = &pen{name: "bank", stroke: "#5d4524", darkStroke: "#cfb389", width: 1.3, dash: []float64{1.5, 3}}
	crownLine  = &pen{name: "crown", stroke: "#5d4524", darkStroke: "#cfb389", width: 1.3, dash: []float64{1.5, 3}}
	divide     = &pen{name: "zone", stroke: "#4a5763", darkStroke: "#afbcc8", width: 0.9, dash: []float64{4, 4}}
	water      = &pen{name: "water", fill: "#c3e0ec", darkFill: "#193f52"}
	waterLine  = &pen{name: "water-line", stroke: "#0a5f94", darkStroke: "#6cc6f3", width: 2}
	normalLine = &pen{name: "normal", stroke: "#00694f", darkStroke: "#4fd6ae", width: 1.7, dash: []float64{9, 4}}
	critical   = &pen{name: "critical", stroke: "#b23a07", darkStroke: "#ff9d63", width: 1.7, dash: []float64{3, 3}}
	energyLine = &pen{name: "energy", stroke: "#6f3390", darkStroke: "#d7aef5", width: 1.6, dash: []float64{11, 3, 2, 3}}
	givenLine  = &pen{name: "given", stroke: "#1b2530", darkStroke: "#eaf0f5", width: 1.4}
	alternate  = &pen{name: "alternate", stroke: "#6f3390", darkStroke: "#d7aef5", width: 1.4, dash: []float64{6, 2, 1, 2, 1, 2}}
	sequent    = &pen{name: "sequent", stroke: "#0a5f94", darkStroke: "#6cc6f3", width: 1.4, dash: []float64{2, 2}}
	curve      = &pen{name: "curve", stroke: "#1b2530", darkStroke: "#eaf0f5", width: 1.8}
	jumpLine   = &pen{name: "jump", stroke: "#b23a07", darkStroke: "#ff9d63", width: 2.4}
	station    = &pen{name: "station", stroke: "#0a5f94", darkStroke: "#6cc6f3", fill: "#fbfaf6", darkFill: "#13191f", width: 1.2}
	meets      = &pen{name: "meets", stroke: "#00694f", darkStroke: "#4fd6ae", width: 2.2}
	fallsShort = &pen{name: "falls-short", stroke: "#b23a07", darkStroke: "#ff9d63", width: 2.2}
	unjudged   = &pen{name: "undetermined", stroke: "#4a5763", darkStroke: "#afbcc8", width: 2.2}
)

// marked are the pens that have markers.
var marked = []*pen{normalLine, critical, givenLine, alternate, sequent, curve}

// markers are the pens of markers: outlined on paper, or full for what was given and for points of a table.
var markers = func() map[*pen]*pen {
	out := map[*pen]*pen{}
	for _, p := range marked {
		m := &pen{name: p.name + "-mark", stroke: p.stroke, darkStroke: p.darkStroke, fill: paper.fill, darkFill: paper.darkFill, width: 1.8}
		if p == givenLine || p == curve {
			m.fill, m.darkFill = p.stroke, p.darkStroke
		}
		out[p] = m
	}
	return out
}()

// pens are all of them, in the order in which the style of an SVG names them.
var pens = func() []*pen {
	all := []*pen{paper, ink, soft, grid, frame, leader, ground, bedLine, lining, bankLine, crownLine, divide, water, waterLine, normalLine, critical,
		energyLine, givenLine, alternate, sequent, curve, jumpLine, station, meets, fallsShort, unjudged}
	for _, p := range marked {
		all = append(all, markers[p])
	}
	return all
}()
