package record

import (
	"fmt"
	"strings"

	"leat/api/wire"
	"leat/compute"
)

// A step is one equation with the numbers of a state in it, in SI. It is for following by hand: the result is the answer's, and nothing is computed here.
type step struct{ Name, Symbol, Equation, Numbers, Result, Unit string }

// worked is one state of the answer with its steps.
type worked struct {
	Title string
	Steps []step
}

// mostWorked bounds how many states are worked through; the tables hold all of them.
const mostWorked = 12

// A setting is what the steps of a state need beside the state.
type setting struct {
	request   node
	place     node // where roughness and slope stand: the request, or a reach
	alpha     string
	beta      string
	gravity   string
	system    wire.System
	barrels   string
	profile   bool
	discharge string
}

// workThrough works through the states of an answer, which is told in SI.
func workThrough(answer, request node, system wire.System, kind wire.Answer) (out []worked, all int) {
	s := setting{request: request, place: request, alpha: "1", beta: "1", gravity: shown(compute.StandardGravity), system: system, barrels: "1"}
	_, s.profile = kind.(*wire.ProfileAnswer)
	s.gravity = s.orSI(request, "gravity", s.gravity)
	if zoned(request) {
		s.alpha, s.beta = "", ""
	}
	s.alpha = s.orSI(request, "energy_coefficient", s.alpha)
	s.beta = s.orSI(request, "momentum_coefficient", s.beta)
	s.discharge = s.orSI(request, "discharge", "")
	var walk func(n node, title string, s setting)
	walk = func(n node, title string, s setting) {
		switch v := n.value.(type) {
		case members:
			if own, ok := n.number("discharge"); ok {
				s.discharge = shown(own)
			}
			if _, isState := n.number("hydraulic_radius"); isState {
				if all++; len(out) < mostWorked {
					out = append(out, s.state(n, title))
				}
				return
			}
			for _, m := range v {
				name := title
				if m.key != "states" && m.key != "stations" {
					name = strings.TrimPrefix(title+", "+words(m.key), ", ")
				}
				if m.key != "capacity" {
					walk(m, name, s)
				}
			}
		case items:
			for i := range v {
				walk(v[i], strings.TrimSpace(fmt.Sprintf("%s no. %d", title, i+1)), s)
			}
		}
	}
	walk(answer, "", s)
	return out, all
}

// orSI returns a number that an object gives, in SI and as it is shown, or another text.
func (s *setting) orSI(of node, member, other string) string {
	v, given := of.number(member)
	if !given {
		return other
	}
	q, known := quantityOf(member, -1)
	if known {
		v = s.system.ToSI(q, v)
	}
	return shown(v)
}

// placeOf returns where a station's roughness and slope stand.
func (s *setting) placeOf(state node) node {
	reach, ok := state.get("reach")
	if !ok {
		return s.request
	}
	list, _ := s.request.get("reaches")
	all, _ := list.value.(items)
	for i, r := range all {
		id, named := r.get("id")
		if named && id.text() == reach.text() || !named && fmt.Sprint(i) == reach.text() {
			return r
		}
	}
	return node{}
}

func (s setting) state(n node, title string) worked {
	s.place = s.placeOf(n)
	s.barrels = s.orSI(s.place, "barrels", "1")
	value := func(name string) string {
		v, ok := n.number(name)
		if !ok {
			return ""
		}
		return shown(v)
	}
	depth := value("depth")
	title += ": depth " + depth + " m"
	if chainage := value("chainage"); chainage != "" {
		title += " at chainage " + chainage + " m"
	}
	if s.discharge != "" {
		title += ", discharge " + s.discharge + " m³/s"
	}
	w := worked{Title: strings.TrimPrefix(title, ": ")}
	add := func(member, symbol, equation, format string, terms ...string) {
		result := value(member)
		if result == "" {
			return
		}
		numbers := ""
		values := make([]any, len(terms))
		for i, t := range terms {
			values[i] = t
			if t == "" {
				format = "" // a term that the answer does not tell
			}
		}
		if format != "" {
			numbers = fmt.Sprintf(format, values...)
		}
		w.Steps = append(w.Steps, step{words(member), symbol, equation, numbers, result, unit(wire.SI, member, -1)})
	}
	area, radius, top := value("area"), value("hydraulic_radius"), value("top_width")
	add("area", "A", "geometry of the section at this depth", "")
	add("wetted_perimeter", "P", "geometry of the section at this depth", "")
	add("top_width", "T", "geometry of the section at this depth", "")
	add("centroid_depth", "z", "depth of the centroid of A below the surface", "")
	add("hydraulic_radius", "R", "A / P", "%s / %s", area, value("wetted_perimeter"))
	add("hydraulic_depth", "D", "A / T", "%s / %s", area, top)
	s.conveyance(add, area, radius)
	slope := s.orSI(s.place, "bed_slope", "")
	add("uniform_discharge", "Qu", "N K √S0, N barrels", "%s × %s × √%s", s.barrels, value("conveyance"), slope)
	add("velocity", "V", "Q / (N A), N barrels", "%s / (%s × %s)", s.discharge, s.barrels, area)
	velocity := value("velocity")
	add("velocity_head", "h", "α V² / (2 g)", "%s × %s² / (2 × %s)", s.alpha, velocity, s.gravity)
	cosine := "√(1 − " + slope + "²)"
	if slope == "" {
		cosine = ""
		if _, sloped := s.place.get("section"); sloped {
			cosine = "1"
		}
	}
	if zoned(s.request) {
		add("froude_number", "F", "from dE/dy = cos θ (1 − F²), with α at every depth", "")
	} else {
		add("froude_number", "F", "√(α V² T / (g A cos θ)), cos θ = √(1 − S0²)", "√(%s × %s² × %s / (%s × %s × %s))", s.alpha, velocity, top, s.gravity, area, cosine)
	}
	add("specific_energy", "E", "y cos θ + α V² / (2 g)", "%s × %s + %s", depth, cosine, value("velocity_head"))
	add("specific_force", "M", "β V² A / g + cos θ A z", "%s × %s² × %s / %s + %s × %s × %s", s.beta, velocity, area, s.gravity, cosine, area, value("centroid_depth"))
	add("friction_slope", "Sf", "(Q / (N K))²", "(%s / (%s × %s))²", s.discharge, s.barrels, value("conveyance"))
	add("bed_shear_stress", "τ", "ρ g R Sf", "%s × %s × %s × %s", shown(compute.WaterDensity), s.gravity, radius, value("friction_slope"))
	add("stream_power", "ω", "τ V", "%s × %s", value("bed_shear_stress"), velocity)
	add("water_level", "", "bed level + y cos θ", "%s + %s × %s", value("bed_level"), depth, cosine)
	add("energy_level", "", "bed level + E", "%s + %s", value("bed_level"), value("specific_energy"))
	return w
}

// conveyance adds the step of the friction law in force.
func (s *setting) conveyance(add func(member, symbol, equation, format string, terms ...string), area, radius string) {
	rough, _ := s.place.get("roughness")
	for _, law := range []struct{ member, equation, format string }{
		{"manning", "A R^(2/3) / n", "%[2]s × %[3]s^(2/3) / %[1]s"},
		{"strickler", "k A R^(2/3)", "%[1]s × %[2]s × %[3]s^(2/3)"},
		{"chezy", "C A √R", "%[1]s × %[2]s × √%[3]s"},
	} {
		if coefficient := s.orSI(rough, law.member, ""); coefficient != "" {
			add("conveyance", "K", law.equation, law.format, coefficient, area, radius)
			return
		}
	}
	add("conveyance", "K", "by the friction law under Method, at this depth", "")
}
