package record

import (
	"slices"

	"leat/api/wire"
)

// A method is one thing that was done, by which equation, from which source.
type method struct{ Subject, Equation, Source string }

const chow = "V. T. Chow (1959), Open-Channel Hydraulics, "

var states = []method{
	{"Energy", "E = y cos θ + α Q²/(2 g A²)", chow + "sections 3-1 to 3-3"},
	{"Froude number", "F² = α Q² T/(g A³ cos θ)", chow + "section 3-3"},
	{"Specific force", "M = β Q²/(g A) + cos θ A z", chow + "section 3-6"},
}

var (
	normal   = method{"Uniform flow and normal depth", "Q = K √S0, solved for the depth, every root", chow + "sections 6-1 and 6-4"}
	critical = method{"Critical depth", "dE/dy = 0, F = 1, every minimum of E", chow + "chapter 4; M. E. Blalock and T. W. Sturm (1981) for compound sections"}
)

var ofOperation = map[string][]method{
	"section": states,
	"depths": append(slices.Clone(states), normal, critical,
		method{"Classes of slope, names of curves", "normal against critical depth", "B. A. Bakhmeteff (1932); " + chow + "section 9-3"},
		method{"Sequent and alternate depths", "equal M; equal E", chow + "section 3-6"}),
	"rating": append(slices.Clone(states), normal, critical),
	"profile": append(slices.Clone(states), normal, critical,
		method{"Gradually varied flow", "dy/dx = (S0 − Sf − 2 β Q q/(g A²))/(cos θ (1 − F²))", chow + "sections 9-1 and 12-2"},
		method{"Integration", "collocation at Gauss nodes, in panels", "J. C. Butcher (1964); E. Hairer and G. Wanner, section IV.5"},
		method{"Hydraulic jump", "equal M on both sides; form and length by Froude number", "A. J. Peterka (1958), USBR Engineering Monograph 25; W. H. Hager (1992)"},
		method{"Balances", "energy and momentum integrated anew over every piece, with more points than the solver's", "definition"}),
	"appraisal": append(slices.Clone(states), normal, critical,
		method{"Capacity and freeboard", "most Q in uniform flow up to bank or crown; bank less depth", chow + "section 6-4"}),
}

// byMember are methods that a member of the request brings with it, wherever it stands.
var byMember = []struct {
	member string
	method
}{
	{"strickler", method{"Strickler's law", "K = k A R^(2/3)", "A. Strickler (1923)"}},
	{"chezy", method{"Chezy's law", "K = C A R^(1/2)", "A. de Chezy (1768)"}},
	{"manning", method{"Manning's law", "K = A R^(2/3)/n, in SI", "R. Manning (1891)"}},
	{"manning_by_depth", method{"Manning's law, n by depth", "K = A R^(2/3)/n(y), n linear between the depths given", "R. Manning (1891)"}},
	{"sand_roughness", method{"Colebrook and White's law", "1/√f = −2 log10(ks/(3.7 D) + 2.51/(Re √f)), D = 4R, K = Q/√Sf", "C. F. Colebrook (1939); ASCE Task Force (1963)"}},
	{"zones", method{"Zones of roughness", "by the rule of combine; divided: K = ΣKi, α = Σ(Ki³/Ai²) A²/K³, β = Σ(Ki²/Ai) A/K²", "G. K. Lotter (1933), N. N. Pavlovskii (1931), R. E. Horton (1933), H. A. Einstein (1934); " + chow + "sections 2-7 and 6-5"}},
	{"bed", method{"Bed and sides", "one n by the rule of combine", "R. E. Horton (1933), H. A. Einstein (1934), N. N. Pavlovskii (1931); " + chow + "section 6-5"}},
	{"weir", method{"Weir at the end", "discharge by head over the crest", chow + "section 3-8; T. Rehbock (1929), ISO 1438"}},
	{"bend", method{"Rise in a bend; shear in a bend", "C V² T/(g r)", "US Army Corps of Engineers, EM 1110-2-1601, table 2-4; FHWA HEC-15, third edition, chapter 3"}},
	{"lining", method{"Linings", "greatest shear on bed and sides against what the lining stands; n of grass and stones by the flow", "FHWA HEC-15, third edition (R. T. Kilgore and G. K. Cotton 2005), chapters 3, 4 and 6; E. W. Lane (1955)"}},
	{"freeboard_rule", method{"Freeboard by rule", "canal: √(C y); chute: 2 + 0.025 V d^(1/3) in ft", "US Bureau of Reclamation; " + chow + "section 7-5"}},
	{"greatest_vedernikov_number", method{"Vedernikov number", "(A/K dK/dA − 1) F", "V. V. Vedernikov (1945); " + chow + "section 8-8"}},
}

// ofKind are the equations of sections that can be followed by hand; m is a side slope, b the bottom width, d the diameter.
var ofKind = map[string]method{
	"rectangular": {"Rectangle", "A = b y, P = b + 2 y, T = b", chow + "table 2-1"},
	"trapezoidal": {"Trapezoid", "A = (b + (m1 + m2) y/2) y, P = b + y (√(1 + m1²) + √(1 + m2²)), T = b + (m1 + m2) y", chow + "table 2-1"},
	"triangular":  {"Triangle", "A = (m1 + m2) y²/2, P = y (√(1 + m1²) + √(1 + m2²)), T = (m1 + m2) y", chow + "table 2-1"},
	"circular":    {"Circle", "φ = 2 arccos(1 − 2 y/d), A = d² (φ − sin φ)/8, P = φ d/2, T = d sin(φ/2)", chow + "table 2-1"},
	"earth":       {"Permissible velocity of earth", "table of soils", "S. Fortier and F. C. Scobey (1926); " + chow + "table 7-3"},
}

// methods lists what was done for an answer, with the laws that its request uses.
func methods(name string, request node) []method {
	section := method{"Section", "A, P, T and z of the kind by geometry, exact for its shape", chow + "section 2-3 and table 2-1"}
	out := []method{section, {"Hydraulic radius and depth", "R = A/P, D = A/T", chow + "section 2-3"}}
	held := map[string]bool{}
	each(request, func(n node) {
		if n.value != nil {
			held[n.key] = true
		}
	})
	each(request, func(n node) {
		kind, _ := n.value.(string)
		if m, known := ofKind[kind]; known && n.key == "kind" && !slices.Contains(out, m) {
			out = append(out, m)
		}
	})
	for _, row := range byMember {
		if held[row.member] {
			out = append(out, row.method)
		}
	}
	out = append(out, ofOperation[name]...)
	return append(out, method{"Shear and stream power", "τ = ρ g R Sf, ω = τ V", "definition"})
}

// An assumption is what the method takes for granted, and what this answer says of it.
type assumption struct{ Text, Check string }

func assumptions(name string, answer node, warnings []wire.Warning) []assumption {
	steady := assumption{"The flow is steady, of one direction, of clear water, between walls and a bed that do not move.", "For the reviewer to judge."}
	hydrostatic := assumption{"Pressure is hydrostatic across the flow; depth is measured normal to the bed.", "cos θ is kept in every equation, so steep beds count."}
	out := []assumption{steady, hydrostatic}
	switch name {
	case "profile":
		check := "No balance is told."
		if balance, ok := answer.get("balance"); ok {
			check = "The largest residuals when the answer is integrated anew: "
			if all, ok := balance.value.(members); ok {
				for i, m := range all {
					if i > 0 {
						check += ", "
					}
					check += words(m.key) + " " + cellOf(m).Text
				}
			}
			check += "."
		}
		out = append(out, assumption{"Depth varies gradually between jumps, drops and joints; friction is that of uniform flow at the same depth.", check})
	case "section":
		out = append(out, assumption{"Each depth given occurs there.", "Friction slope and Froude number in the tables say what flow it would be."})
	default:
		out = append(out, assumption{"The reach is long and even enough for uniform flow at its normal depth.", "Where normal depths are listed, their uniform discharge beside the discharge shows that the equation closes."})
	}
	check := "Nothing was warned of."
	if len(warnings) > 0 {
		check = "See Warnings."
	}
	return append(out, assumption{"Inputs lie within what the laws were made for.", check})
}
