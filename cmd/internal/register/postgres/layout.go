package postgres

import (
	"fmt"
	"slices"
	"strings"

	"leat/cmd/internal/register/row"
	"leat/cmd/internal/register/store"
)

// Each table of ours says in its comment whose it is, and nothing without these words is ever written to.
const (
	resultsMark  = "Results of leat register"
	problemsMark = "Problems of leat register"
	runsMark     = "Runs of leat register"
	batchesMark  = "Batches of leat register"
)

// A tableColumn is a column of a table of ours.
type tableColumn struct {
	name, kind string // kind is a type as the database spells it
	rest       string // of its definition
	comment    string
}

// A definition is a table of ours.
type definition struct {
	table   table
	mark    string // with which its comment begins
	comment string
	columns []tableColumn
	indexes []string // expressions in parentheses
	field   string   // of the mapping file
}

var kinds = map[row.Kind]string{row.Null: "text", row.Int: "bigint", row.Float: "double precision", row.Bool: "boolean", row.Text: "text", row.Bytes: "bytea", row.Time: "timestamp with time zone"}

// kindOfKey is the type of the keys.
func (t *target) kindOfKey() string { return kinds[t.keyKind] }

// geometryTypes are those of the simple features standard that PostGIS has by the same name.
var geometryTypes = []string{"GEOMETRY", "POINT", "LINESTRING", "POLYGON", "MULTIPOINT", "MULTILINESTRING", "MULTIPOLYGON", "GEOMETRYCOLLECTION", "CIRCULARSTRING", "COMPOUNDCURVE", "CURVEPOLYGON", "MULTICURVE", "MULTISURFACE"}

// typeOf is the type of a column of the results.
func (t *target) typeOf(column *store.ResultColumn) string {
	if column.Kind != row.Bytes || t.postGIS == "" || column.Geometry != "ewkb" && column.Geometry != "geopackage" {
		return kinds[column.Kind]
	}
	plain := quote(t.postGIS, "geometry")
	spatial := column.Spatial
	if spatial == nil || spatial.Z > 1 || spatial.M > 1 || !slices.Contains(geometryTypes, spatial.Type) || spatial.System.Code < 0 || spatial.System.Code > 999999 ||
		column.Geometry == "geopackage" && spatial.System.ID != spatial.System.Code { // the geometries bear the number of their own file
		return plain
	}
	name := spatial.Type
	if spatial.Z == 1 {
		name += "Z"
	}
	if spatial.M == 1 {
		name += "M"
	}
	return fmt.Sprintf("%s(%s, %d)", plain, name, spatial.System.Code)
}

// definitions are the tables of a run.
func (t *target) definitions(shared bool) []definition {
	results := definition{table: t.results, mark: resultsMark, field: "table",
		comment: fmt.Sprintf("%s: one row for each asset. Its runs are in %s, the assets that could not be computed in %s.", resultsMark, t.runs, t.problems)}
	for i := range t.layout.Columns {
		column := &t.layout.Columns[i]
		c := tableColumn{name: column.Name, kind: t.typeOf(column), comment: column.Description}
		if i == 0 {
			c.rest = "primary key"
		}
		if column.Unit != "" {
			c.comment = strings.TrimSuffix(strings.TrimSpace(column.Description), ".")
			if c.comment != "" {
				c.comment += ", "
			}
			c.comment += "in " + column.Unit
		}
		results.columns = append(results.columns, c)
	}
	if t.keyKind == row.Text {
		results.indexes = []string{"(" + t.order + ")"}
	}
	problemIndex := `("asset")`
	if t.keyKind == row.Text {
		problemIndex = `("asset" collate "C")`
	}
	problems := definition{table: t.problems, mark: problemsMark, field: "problems",
		comment: fmt.Sprintf("%s: what is wrong with the assets that have no row in %s.", problemsMark, t.results),
		columns: []tableColumn{
			{name: "run", kind: "text", rest: "not null", comment: "The run that found it"},
			{name: "asset", kind: t.kindOfKey(), comment: "Key of the asset"},
			{name: "line", kind: "bigint", comment: "Line of the file, where the register is one"},
			{name: "column", kind: "text", comment: "Column of the register"},
			{name: "pointer", kind: "text", comment: "Place in the request (RFC 6901)"},
			{name: "code", kind: "text", rest: "not null", comment: "Kind of the problem"},
			{name: "text", kind: "text", rest: "not null", comment: "What is wrong and what would be accepted"},
		}, indexes: []string{problemIndex}}
	runs := definition{table: t.runs, mark: runsMark, field: "table",
		comment: fmt.Sprintf("%s that wrote %s, the newest with the greatest number.", runsMark, t.results),
		columns: []tableColumn{
			{name: "number", kind: "bigint", rest: "generated always as identity"},
			{name: "run", kind: "text", rest: "primary key"},
			{name: "started_at", kind: "timestamp with time zone", rest: "not null"},
			{name: "finished_at", kind: "timestamp with time zone", comment: "Null while it is not finished"},
			{name: "layout", kind: "text", rest: "not null", comment: "Hash of what a row of the results looks like"},
			{name: "engine_version", kind: "text", rest: "not null"},
			{name: "mapping", kind: "text", rest: "not null", comment: "Hash of the mapping file"},
			{name: "fresh", kind: "boolean", rest: "not null", comment: "Whether every asset is computed anew"},
			{name: "shared", kind: "boolean", rest: "not null", comment: "Whether several processes take part"},
			{name: "mark", kind: "text", comment: "Key of the last asset whose batch is written"},
			{name: "batches", kind: "bigint", rest: "not null default 0", comment: "Number of batches written"},
			{name: "owner", kind: "text", rest: "not null", comment: "A word of the process that may write"},
			{name: "resumed_at", kind: "timestamp with time zone", comment: "When it was gone on with; what was written before is looked at once more"},
		}}
	for _, name := range countNames {
		runs.columns = append(runs.columns, tableColumn{name: name, kind: "bigint", rest: "not null default 0", comment: countComments[name]})
	}
	out := []definition{results, problems, runs}
	if shared {
		batches := definition{table: t.batches, mark: batchesMark, field: "table",
			comment: fmt.Sprintf("%s that processes share; those of the state failed are given up, with the reason.", batchesMark),
			columns: []tableColumn{
				{name: "run", kind: "text", rest: "not null"},
				{name: "batch", kind: "bigint", rest: "not null"},
				{name: "after", kind: "text", comment: "Its assets have keys after this one"},
				{name: "until", kind: "text", comment: "and up to this one"},
				{name: "job", kind: "bigint", comment: "Number of its job"},
				{name: "state", kind: "text", rest: "not null", comment: "waiting, done, or failed (given up for good)"},
				{name: "error", kind: "text", comment: "Why it failed"},
				{name: "worker", kind: "text", comment: "Who did it"},
				{name: "done_at", kind: "timestamp with time zone"},
			}, indexes: []string{`("run", "batch")`}}
		for _, name := range countNames {
			batches.columns = append(batches.columns, tableColumn{name: name, kind: "bigint", rest: "not null default 0", comment: countComments[name]})
		}
		out = append(out, batches)
	}
	return out
}

// countNames are the columns of store.Counts, in the order of countValues.
var countNames = []string{"read", "computed", "unchanged", "bad", "removed", "problems"}

var countComments = map[string]string{"read": "Assets read", "computed": "Assets computed and written", "unchanged": "Assets whose result stood already", "bad": "Assets with problems", "removed": "Results removed",
	"problems": "Problems, of which an asset may have several"}

func countValues(c *store.Counts) []any {
	return []any{c.Read, c.Computed, c.Unchanged, c.Bad, c.Removed, c.Problems}
}

func countPlaces(c *store.Counts) []any {
	return []any{&c.Read, &c.Computed, &c.Unchanged, &c.Bad, &c.Removed, &c.Problems}
}

// countColumns spells the columns of counts, each through spell, joined by commas.
func countColumns(spell func(i int, quoted string) string) string {
	texts := make([]string, len(countNames))
	for i, name := range countNames {
		texts[i] = spell(i, quote(name))
	}
	return strings.Join(texts, ", ")
}
