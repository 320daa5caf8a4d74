// Package run carries a register through a mapping: rows become requests, requests answers, answers results, with all cores at
// work and in the order of the rows.
package run

import (
	"crypto/sha256"
	"encoding/hex"
	"fmt"
	"slices"
	"strings"

	"leat/api/operation"
	"leat/api/wire"
	"leat/cmd/internal/register/mapping"
	"leat/cmd/internal/register/row"
	"leat/cmd/internal/register/store"
)

// A plan is what all workers of a run share.
type plan struct {
	file    *mapping.File
	mapping *mapping.Mapping
	table   *wire.FlatTable
	layout  *store.Layout
	answers []int // of table, those that are written
}

// notAnswers are the columns of flat answers that results have in other places.
var notAnswers = []string{"id", "line", "problem", "fingerprint"}

// ofGivenDepth reports whether a column of depths tells of the depth that a request may give: without one it is always empty.
func ofGivenDepth(op *operation.Operation, name string) bool {
	return op == &operation.Depths && (strings.HasPrefix(name, "given_") || slices.Contains([]string{"alternate_depth", "sequent_depth", "curve"}, name))
}

// newPlan lays out the results. columns are those of the source's table. The error is mapping.Faults.
func newPlan(file *mapping.File, m *mapping.Mapping, columns []row.Column) (*plan, error) {
	p := &plan{file: file, mapping: m, table: wire.FlatTableOf(file.Operation.Form)}
	flat := p.table.Columns()
	if file.Target.Columns == nil {
		for i := range flat {
			if !slices.Contains(notAnswers, flat[i].Name) && (m.Feeds("depth") || !ofGivenDepth(file.Operation, flat[i].Name)) {
				p.answers = append(p.answers, i)
			}
		}
	}
	for _, name := range file.Target.Columns {
		i, found := p.table.Find(name)
		switch {
		case !found:
			return nil, file.Place("target", &store.Misfit{Field: "columns", Detail: unknownAnswer(name, file.Operation.Name, flat)})
		case slices.Contains(notAnswers, name):
			return nil, file.Place("target", &store.Misfit{Field: "columns", Detail: fmt.Sprintf("%s is in the results in any case or in the table of problems; leave it out.", name)})
		case slices.Contains(p.answers, i):
			return nil, file.Place("target", &store.Misfit{Field: "columns", Detail: fmt.Sprintf("%s is chosen twice.", name)})
		}
		p.answers = append(p.answers, i)
	}
	p.layout = &store.Layout{}
	if err := p.lay(columns, flat); err != nil {
		return nil, err
	}
	return p, nil
}

func unknownAnswer(name, operation string, flat []wire.FlatColumn) string {
	var names []string
	for i := range flat {
		if !slices.Contains(notAnswers, flat[i].Name) {
			names = append(names, flat[i].Name)
		}
	}
	if near, found := wire.Nearest(name, names); found {
		return fmt.Sprintf("An answer of %s has no column %q; did you mean %q?", operation, name, near)
	}
	return fmt.Sprintf("An answer of %s has no column %q; it has %s.", operation, name, strings.Join(names, ", "))
}

// lay fills the layout.
func (p *plan) lay(columns []row.Column, flat []wire.FlatColumn) error {
	system := p.file.System
	add := func(name string, role store.Role, kind row.Kind, q wire.Quantity, description string) {
		c := store.ResultColumn{Column: row.Column{Name: p.file.Target.Prefix + name, Kind: kind}, Role: role, Description: description}
		if role == store.RoleAnswer && q != wire.QuantityTold {
			c.Unit, c.UCUM = system.Unit(q), system.UCUM(q)
		}
		p.layout.Columns = append(p.layout.Columns, c)
	}
	find := func(name string) row.Column {
		return columns[slices.IndexFunc(columns, func(c row.Column) bool { return c.Name == name })]
	}
	key := find(p.mapping.Columns[0]).Kind
	if key != row.Int {
		key = row.Text
	}
	add("asset", store.RoleAsset, key, wire.Dimensionless, "Key of the asset in the register.")
	for _, at := range p.mapping.Copied {
		p.layout.Columns = append(p.layout.Columns, store.ResultColumn{Column: find(p.mapping.Columns[at]), Role: store.RoleCopied})
	}
	for _, i := range p.answers {
		kind := row.Text
		switch flat[i].Type {
		case wire.FlatNumber:
			kind = row.Float
		case wire.FlatWhole:
			kind = row.Int
		case wire.FlatTruth:
			kind = row.Bool
		}
		add(flat[i].Name, store.RoleAnswer, kind, flat[i].Quantity, title(flat[i].Name))
	}
	add("run", store.RoleRun, row.Text, wire.Dimensionless, "Run that computed the row.")
	add("fingerprint", store.RoleFingerprint, row.Text, wire.Dimensionless, "SHA-256 of the operation, the engine's version and the request.")
	if len(p.mapping.Copied) > 0 {
		add("copied_hash", store.RoleCopiedHash, row.Int, wire.Dimensionless, "Hash of the columns copied from the register.")
	}
	add("engine_version", store.RoleEngineVersion, row.Text, wire.Dimensionless, "Version of the numbers.")
	add("computed_at", store.RoleComputedAt, row.Time, wire.Dimensionless, "When the row was computed (UTC).")

	hash := sha256.New()
	fmt.Fprintf(hash, "%s\n%s\n", p.file.Operation.Name, system)
	seen := map[string]bool{}
	for _, c := range p.layout.Columns {
		// Some databases do not tell capitals from small letters.
		if plain := strings.ToLower(c.Name); !seen[plain] {
			seen[plain] = true
		} else {
			return p.file.Place("target", &store.Misfit{Field: "copy", Detail: fmt.Sprintf("The results would have two columns %q: one copied from the register and one of ours; give ours a prefix.", c.Name)})
		}
		fmt.Fprintf(hash, "%q %d %d %s\n", c.Name, c.Role, c.Kind, c.Unit)
	}
	p.layout.Hash = hex.EncodeToString(hash.Sum(nil))
	return nil
}

// title makes a line for people of a name.
func title(name string) string {
	text := strings.ReplaceAll(name, "_", " ")
	return strings.ToUpper(text[:1]) + text[1:] + "."
}
