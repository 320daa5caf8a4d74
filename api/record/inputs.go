package record

import (
	"encoding/json"
	"fmt"
	"slices"
	"strings"

	"leat/api/wire"
	"leat/compute"
)

// An input is one line of what the request says: as it was given, and as it was used.
type input struct{ Name, Given, GivenUnit, Used, UsedUnit string }

// inputs lists the members of a request, and after them what it leaves to defaults.
func inputs(request node, system wire.System, profile bool) []input {
	var out []input
	listInputs(&out, "", "", request, system)
	absent := func(member, used, unit string) {
		if _, given := request.get(member); !given {
			out = append(out, input{words(member), "not given", "", used, unit})
		}
	}
	absent("units", "si in the calculation; the request counts as "+system.String(), "")
	absent("gravity", shown(compute.StandardGravity), unit(wire.SI, "gravity", -1))
	coefficient := "1"
	if zoned(request) {
		coefficient = "computed from the zones at every depth"
	}
	absent("energy_coefficient", coefficient, "")
	absent("momentum_coefficient", coefficient, "")
	if !profile {
		absent("barrels", "1", "")
		if rough, ok := request.get("roughness"); ok {
			out = append(out, lawDefaults(rough)...)
		}
	} else {
		absent("datum", "0 (unless stations have levels)", unit(wire.SI, "datum", -1))
		out = append(out, input{"barrels, where a reach or station names none", "not given", "", "1", ""})
	}
	return append(out, input{"density of water", "a constant", "", shown(compute.WaterDensity), "kg/m³"})
}

// lawDefaults are what a friction law takes where the request does not say.
func lawDefaults(rough node) []input {
	var out []input
	_, sand := rough.get("sand_roughness")
	_, viscosity := rough.get("kinematic_viscosity")
	if sand && !viscosity {
		out = append(out, input{"kinematic viscosity", "not given", "", "1.14e-6 (water at 15 °C)", "m²/s"})
	}
	_, rule := rough.get("combine")
	if _, zones := rough.get("zones"); zones && !rule {
		out = append(out, input{"combine", "not given", "", "divided", ""})
	}
	if _, bed := rough.get("bed"); bed && !rule {
		out = append(out, input{"combine", "not given", "", "horton_einstein", ""})
	}
	return out
}

// listInputs adds the numbers and words below a value. place is where it stands, parent the member that holds it.
func listInputs(out *[]input, place, parent string, n node, system wire.System) {
	switch v := n.value.(type) {
	case members:
		for _, m := range v {
			if m.value == nil {
				continue
			}
			name := words(m.key)
			if place != "" {
				name = place + " / " + name
			}
			member := m.key
			if _, isList := m.value.(items); !isList {
				if _, known := quantityOf(member, -1); !known {
					if _, above := quantityOf(parent, -1); above {
						member = parent // a number under a name of the caller's own, as a flow has
					}
				}
			}
			listInputs(out, name, member, m, system)
		}
	case items:
		if len(v) > 0 {
			if _, rows := v[0].value.(items); rows {
				for i := range v {
					*out = append(*out, rowInput(fmt.Sprintf("%s %d", place, i+1), parent, v[i].value, system))
				}
				return
			}
			if _, objects := v[0].value.(members); objects {
				for i := range v {
					listInputs(out, fmt.Sprintf("%s %d", place, i+1), parent, v[i], system)
				}
				return
			}
			*out = append(*out, rowInput(place, parent, v, system))
		}
	case json.Number:
		given := input{Name: place, Given: v.String(), GivenUnit: unit(system, parent, -1)}
		given.Used, given.UsedUnit = used(parent, -1, v, system), unit(wire.SI, parent, -1)
		*out = append(*out, given)
	default:
		*out = append(*out, input{Name: place, Given: n.text(), Used: n.text()})
	}
}

// rowInput is a list of numbers or words on one line. Its numbers have the unit of the list, or each that of its column.
func rowInput(place, member string, list any, system wire.System) input {
	in := input{Name: place}
	all, _ := list.(items)
	var givenUnits, usedUnits []string
	for i, n := range all {
		at := -1
		if _, tuple := quantityOf(member, i); tuple {
			at = i
		}
		given, inSI := n.text(), n.text()
		if literal, isNumber := n.value.(json.Number); isNumber {
			inSI = used(member, at, literal, system)
		}
		if i > 0 {
			in.Given += "; "
			in.Used += "; "
		}
		in.Given += given
		in.Used += inSI
		if _, isNumber := n.value.(json.Number); isNumber {
			givenUnits = append(givenUnits, unit(system, member, at))
			usedUnits = append(usedUnits, unit(wire.SI, member, at))
		}
	}
	in.GivenUnit = strings.Join(once(givenUnits), "; ")
	in.UsedUnit = strings.Join(once(usedUnits), "; ")
	return in
}

// once returns one unit where all are the same.
func once(units []string) []string {
	if len(units) > 1 && !slices.ContainsFunc(units, func(u string) bool { return u != units[0] }) {
		return units[:1]
	}
	return units
}

// used returns a number of the request in SI.
func used(member string, at int, literal json.Number, system wire.System) string {
	q, known := quantityOf(member, at)
	v, err := literal.Float64()
	if system == wire.SI || !known || err != nil {
		return literal.String()
	}
	return shown(system.ToSI(q, v))
}

// zoned says whether zones of a roughness set the coefficients of energy and momentum.
func zoned(request node) bool {
	found := false
	each(request, func(n node) {
		rough, _ := n.get("roughness")
		if _, zones := rough.get("zones"); zones {
			rule, given := rough.get("combine")
			found = found || !given || rule.value == "divided" || rule.value == "lotter"
		}
	})
	return found
}

// each visits a value and all below it.
func each(n node, visit func(node)) {
	visit(n)
	var below []node
	switch v := n.value.(type) {
	case members:
		below = v
	case items:
		below = v
	}
	for _, m := range below {
		each(m, visit)
	}
}
