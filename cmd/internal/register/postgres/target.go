package postgres

import (
	"context"
	"fmt"
	"strings"

	"github.com/jackc/pgx/v5/pgxpool"

	"leat/cmd/internal/register/row"
	"leat/cmd/internal/register/store"
)

// target is a table of results with those that belong to it.
type target struct {
	pool *pgxpool.Pool
	spec store.TargetSpec

	results, problems, runs, batches table

	layout   *store.Layout
	keyKind  row.Kind
	postGIS  string // schema of the type geometry; empty without PostGIS
	columns  []copyColumn
	problem  []copyColumn
	order    string // by what the assets are ordered, in results and problems alike
	compared string // how a key is spelled beside it, with %d for the parameter's number

	upsert      string // from the staging table
	fingerprint string // quoted names of columns
	copied      string

	run   string
	owner string // of the run's row: a word of this process
	count int64  // batches committed
	write *writer
}

// OpenTarget opens a table of results for writing, without changing anything. A fault of the specification is a *store.Misfit. The target is a store.Sharing.
func OpenTarget(ctx context.Context, spec *store.TargetSpec) (store.Target, error) {
	pool, err := connect(ctx, &spec.Database)
	if err != nil {
		return nil, err
	}
	t := &target{pool: pool, spec: *spec}
	if err := t.open(ctx); err != nil {
		pool.Close()
		return nil, err
	}
	return t, nil
}

func (t *target) open(ctx context.Context) error {
	schema := t.spec.Schema
	err := again(ctx, func() error {
		var found bool
		if t.spec.Schema == "" {
			if err := t.pool.QueryRow(ctx, "select coalesce(current_schema(), '')").Scan(&schema); err != nil {
				return err
			}
			found = schema != ""
		} else if err := t.pool.QueryRow(ctx, "select exists (select from pg_namespace where nspname = $1)", schema).Scan(&found); err != nil {
			return err
		}
		if !found {
			return &store.Misfit{Field: "schema", Detail: fmt.Sprintf("There is no schema %q in this database; somebody with the right to create schemas must make it first.", schema)}
		}
		return t.pool.QueryRow(ctx, "select coalesce((select n.nspname from pg_type t join pg_namespace n on n.oid = t.typnamespace where t.typname = 'geometry' and t.typtype = 'b' limit 1), '')").Scan(&t.postGIS)
	})
	if err != nil {
		return err
	}
	problems, field := t.spec.Problems, "problems"
	if problems == "" {
		problems, field = t.spec.Table+"_problems", "table"
	}
	for _, name := range []struct {
		table *table
		name  string
		field string
	}{{&t.results, t.spec.Table, "table"}, {&t.problems, problems, field}, {&t.runs, t.spec.Table + "_runs", "table"}, {&t.batches, t.spec.Table + "_batches", "table"}} {
		if err := checkName(name.field, name.name); err != nil {
			return err
		}
		*name.table = table{schema, name.name}
	}
	if t.problems.name == t.results.name || t.problems.name == t.runs.name || t.problems.name == t.batches.name {
		return &store.Misfit{Field: "problems", Detail: fmt.Sprintf("The table of problems cannot have the name %q, which another table of this target has.", t.problems.name)}
	}
	return nil
}

// use takes over a layout.
func (t *target) use(layout *store.Layout) error {
	if len(layout.Columns) == 0 || layout.Columns[0].Role != store.RoleAsset {
		return fmt.Errorf("the layout of the results does not begin with the asset")
	}
	t.layout = layout
	t.keyKind = layout.Columns[0].Kind
	t.order, t.compared = quote(layout.Columns[0].Name), "$%d::bigint"
	if t.keyKind != row.Int {
		t.keyKind = row.Text
		t.order, t.compared = t.order+` collate "C"`, "$%d::text"
	}
	t.columns = t.columns[:0]
	seen := map[string]bool{}
	names := make([]string, len(layout.Columns))
	var updates []string
	for i, column := range layout.Columns {
		if err := checkName("columns", column.Name); err != nil {
			return err
		}
		if seen[column.Name] {
			return &store.Misfit{Field: "columns", Detail: fmt.Sprintf("The results would have two columns of the name %q; a prefix keeps ours apart from those that are copied.", column.Name)}
		}
		seen[column.Name] = true
		names[i] = quote(column.Name)
		c := copyColumn{name: column.Name, kind: column.Kind}
		if column.Kind == row.Bytes && t.postGIS != "" {
			c.geometry = column.Geometry
		}
		t.columns = append(t.columns, c)
		if i > 0 {
			updates = append(updates, names[i]+" = excluded."+names[i])
		}
		switch column.Role {
		case store.RoleFingerprint:
			t.fingerprint = names[i]
		case store.RoleCopiedHash:
			t.copied = names[i]
		}
	}
	list := strings.Join(names, ", ")
	t.upsert = "insert into " + t.results.quoted() + " (" + list + ") select " + list + " from " + staging + " on conflict (" + names[0] + ") do nothing"
	if len(updates) > 0 {
		t.upsert = strings.TrimSuffix(t.upsert, "nothing") + "update set " + strings.Join(updates, ", ")
	}
	t.problem = []copyColumn{{name: "run", kind: row.Text}, {name: "asset", kind: t.keyKind}, {name: "line", kind: row.Int}, {name: "column", kind: row.Text}, {name: "pointer", kind: row.Text},
		{name: "code", kind: row.Text}, {name: "text", kind: row.Text}}
	return nil
}

func (t *target) Close() error {
	if t.write != nil {
		t.write.close()
	}
	t.pool.Close()
	return nil
}
