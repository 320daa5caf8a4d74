package record

import (
	"encoding/json"
	"slices"
	"strconv"

	"leat/api/wire"
)

// A cell is one value of the answer: Exact is its literal where it is a number.
type cell struct{ Text, Exact string }

// A grid is a table of results; Head holds names with their units.
type grid struct {
	Title string
	Head  []string
	Rows  [][]cell
}

// apart are members of answers that have a place of their own on the record.
var apart = []string{"id", "units", "fingerprint", "warnings", "geometry", "notice", "length"}

// results lays out an answer in tables: plain values first, then each list in as many tables as its columns need on A4.
func results(answer node, system wire.System) []grid {
	var out []grid
	addObject(&out, "Results", answer, system, apart)
	return out
}

func addObject(out *[]grid, title string, n node, system wire.System, leave []string) {
	all, _ := n.value.(members)
	g := grid{Title: title, Head: []string{"what", "value", "unit"}}
	for _, m := range all {
		if slices.Contains(leave, m.key) || !plain(m) {
			continue
		}
		of := ""
		if _, isNumber := m.value.(json.Number); isNumber {
			of = unit(system, m.key, -1)
		}
		g.Rows = append(g.Rows, []cell{{Text: words(m.key)}, cellOf(m), {Text: of}})
	}
	if len(g.Rows) > 0 {
		*out = append(*out, g)
	}
	for _, m := range all {
		if slices.Contains(leave, m.key) || plain(m) {
			continue
		}
		name := words(m.key)
		if title != "Results" {
			name = title + ": " + name
		}
		list, isList := m.value.(items)
		if !isList {
			addObject(out, name, m, system, nil)
			continue
		}
		addList(out, name, list, system)
	}
}

// The columns that name a row, and how many stand beside them on one table.
var leads = []string{"chainage", "id", "criterion"}

const columnsBeside = 6

func addList(out *[]grid, title string, list items, system wire.System) {
	if len(list) == 0 {
		*out = append(*out, grid{Title: title, Head: []string{"none"}})
		return
	}
	var names []string
	for _, row := range list {
		all, _ := row.value.(members)
		for _, m := range all {
			if !slices.Contains(names, m.key) {
				names = append(names, m.key)
			}
		}
	}
	var lead []string
	if i := slices.IndexFunc(names, func(n string) bool { return slices.Contains(leads, n) }); i >= 0 {
		lead = []string{names[i]}
		names = slices.Delete(names, i, i+1)
	}
	for part := range slices.Chunk(names, columnsBeside) {
		columns := append(slices.Clone(lead), part...)
		g := grid{Title: title, Head: []string{"no."}}
		if part[0] != names[0] {
			g.Title += ", continued"
		}
		for _, name := range columns {
			head := words(name)
			if u := unit(system, name, -1); u != "" {
				head += " (" + u + ")"
			}
			g.Head = append(g.Head, head)
		}
		for i, row := range list {
			cells := []cell{{Text: strconv.Itoa(i + 1)}}
			for _, name := range columns {
				m, _ := row.get(name)
				cells = append(cells, cellOf(m))
			}
			g.Rows = append(g.Rows, cells)
		}
		*out = append(*out, g)
	}
}

func plain(n node) bool {
	switch n.value.(type) {
	case members, items:
		return false
	}
	return true
}

func cellOf(n node) cell {
	if literal, isNumber := n.value.(json.Number); isNumber {
		return cell{Text: shownLiteral(literal), Exact: literal.String()}
	}
	if n.value == nil {
		return cell{Text: "–"}
	}
	if text, isText := n.value.(string); isText && n.key != "id" && n.key != "reach" { // those are the caller's own
		return cell{Text: words(text)}
	}
	return cell{Text: n.text()}
}
