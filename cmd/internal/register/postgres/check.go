package postgres

import (
	"context"
	"errors"
	"fmt"
	"strings"

	"github.com/jackc/pgx/v5"

	"leat/cmd/internal/register/store"
)

func (t *target) Check(ctx context.Context, layout *store.Layout) error {
	if err := t.use(layout); err != nil {
		return err
	}
	missing := false
	for _, d := range t.definitions(true) {
		there, err := t.checkTable(ctx, &d)
		if err != nil {
			return err
		}
		missing = missing || !there
	}
	if !missing {
		return nil
	}
	var may bool
	err := again(ctx, func() error {
		return t.pool.QueryRow(ctx, "select has_schema_privilege($1::text, 'create')", t.results.schema).Scan(&may)
	})
	if err != nil {
		return fmt.Errorf("looking at the schema %s: %w", t.results.schema, err)
	}
	if !may {
		return &store.Misfit{Field: "schema", Detail: fmt.Sprintf("The user of the database may not create tables in the schema %q, which the results need.", t.results.schema)}
	}
	return nil
}

// checkTable makes sure that a table is not there, or is ours and has our columns.
func (t *target) checkTable(ctx context.Context, d *definition) (there bool, err error) {
	var oid uint32
	var kind, comment string
	var may bool
	err = again(ctx, func() error {
		return t.pool.QueryRow(ctx, `select c.oid, c.relkind::text, coalesce(obj_description(c.oid, 'pg_class'), ''), case when c.relkind = 'r' then
  has_table_privilege(c.oid, 'select') and has_table_privilege(c.oid, 'insert') and has_table_privilege(c.oid, 'update') and has_table_privilege(c.oid, 'delete') else true end
from pg_class c join pg_namespace n on n.oid = c.relnamespace where n.nspname = $1 and c.relname = $2`, d.table.schema, d.table.name).Scan(&oid, &kind, &comment, &may)
	})
	if errors.Is(err, pgx.ErrNoRows) {
		return false, nil
	}
	if err != nil {
		return false, fmt.Errorf("looking for the table %s: %w", d.table, err)
	}
	if kind != "r" || !strings.HasPrefix(comment, d.mark) {
		return true, &store.Misfit{Field: d.field, Detail: fmt.Sprintf("There is already something of the name %s, and it is not ours (the comment of a table of ours begins with %q). "+
			"Nothing of it was touched; another name is needed.", d.table, d.mark)}
	}
	if !may {
		return true, &store.Misfit{Field: d.field, Detail: fmt.Sprintf("The user of the database may not read, insert, update and delete in %s.", d.table)}
	}
	found, err := t.typesOf(ctx, oid)
	if err != nil {
		return true, err
	}
	for _, column := range d.columns {
		have, is := found[column.name]
		switch {
		case !is:
			return true, &store.Misfit{Field: d.field, Detail: fmt.Sprintf("The table %s of an earlier run has no column %q. Another name, or removing that table and those beside it, begins anew.", d.table, column.name)}
		case !sameType(have, column.kind):
			return true, &store.Misfit{Field: d.field, Detail: fmt.Sprintf("The column %q of the table %s of an earlier run is of the type %s, and %s is needed. Another name, or removing that table and those beside it, begins anew.",
				column.name, d.table, have, column.kind)}
		}
	}
	return true, nil
}

// sameType compares a type as the database spells it with one as we do.
func sameType(have, wanted string) bool {
	plain := func(s string) string {
		s = strings.ToLower(strings.NewReplacer(`"`, "", " ", "").Replace(s))
		if _, after, found := strings.Cut(s, ".geometry"); found {
			s = "geometry" + after
		}
		return s
	}
	return plain(have) == plain(wanted)
}

func (t *target) typesOf(ctx context.Context, oid uint32) (map[string]string, error) {
	found := map[string]string{}
	err := again(ctx, func() error {
		rows, err := t.pool.Query(ctx, "select attname, format_type(atttypid, atttypmod) from pg_attribute where attrelid = $1 and attnum > 0 and not attisdropped", oid)
		if err != nil {
			return err
		}
		var name, kind string
		_, err = pgx.ForEachRow(rows, []any{&name, &kind}, func() error {
			found[name] = kind
			return nil
		})
		return err
	})
	if err != nil {
		return nil, fmt.Errorf("reading the columns of a table: %w", err)
	}
	return found, nil
}
