package postgres

import (
	"context"
	"fmt"

	"github.com/jackc/pgx/v5/pgxpool"

	"leat/cmd/internal/register/row"
	"leat/cmd/internal/register/store"
)

// A column is one of a table that is read.
type column struct {
	row.Column
	// expression reads it so that decode understands its binary form.
	expression string
	decode     decoder
	// order is by what rows are ordered where this is the key, and parameter how a key is compared with it: empty where it can be none.
	order     string
	parameter string // with %d for the parameter's number
	numeric   bool   // compared by value as a number
	notNull   bool
}

// Object identifiers of the types that have a decoder of their own; they are fixed in every server.
const (
	oidBool        = 16
	oidBytea       = 17
	oidName        = 19
	oidInt8        = 20
	oidInt2        = 21
	oidInt4        = 23
	oidText        = 25
	oidFloat4      = 700
	oidFloat8      = 701
	oidVarchar     = 1043
	oidTimestamptz = 1184
	oidNumeric     = 1700
	oidUUID        = 2950
)

// findTable finds a table, view or foreign table; with no schema, where the search path leads. field is where the name stands in the mapping file.
func findTable(ctx context.Context, pool *pgxpool.Pool, schema, name, field string) (table, uint32, error) {
	if err := checkName(field, name); err != nil {
		return table{}, 0, err
	}
	path := quote(name)
	if schema != "" {
		path = quote(schema, name)
	}
	var found table
	var oid uint32
	var kind string
	err := again(ctx, func() error {
		found, oid = table{}, 0
		rows, err := pool.Query(ctx, `select n.nspname, c.relname, c.oid, c.relkind::text from pg_class c join pg_namespace n on n.oid = c.relnamespace where c.oid = to_regclass($1)`, path)
		if err != nil {
			return err
		}
		defer rows.Close()
		for rows.Next() {
			if err := rows.Scan(&found.schema, &found.name, &oid, &kind); err != nil {
				return err
			}
		}
		return rows.Err()
	})
	switch {
	case err != nil:
		return table{}, 0, fmt.Errorf("looking for the table %s: %w", path, err)
	case oid == 0:
		return table{}, 0, &store.Misfit{Field: field, Detail: fmt.Sprintf("There is no table or view %s in this database. Names are taken as they are written, capitals included; "+
			"a table outside the search path needs its schema.", path)}
	case kind != "r" && kind != "v" && kind != "m" && kind != "f" && kind != "p":
		return table{}, 0, &store.Misfit{Field: field, Detail: fmt.Sprintf("%s is neither a table nor a view.", path)}
	}
	return found, oid, nil
}

// readColumns describes the columns of a table in their order.
func readColumns(ctx context.Context, pool *pgxpool.Pool, t table, oid uint32) ([]column, error) {
	var columns []column
	err := again(ctx, func() error {
		columns = columns[:0]
		// The type below domains decides how a value is read.
		rows, err := pool.Query(ctx, `
with recursive base as (
  select a.attnum, a.attname, a.attnotnull, a.atttypid as declared, a.atttypmod as modifier, a.atttypid as type, a.atttypmod as base_modifier
  from pg_attribute a where a.attrelid = $1 and a.attnum > 0 and not a.attisdropped
  union all
  select b.attnum, b.attname, b.attnotnull, b.declared, b.modifier, t.typbasetype, t.typtypmod
  from base b join pg_type t on t.oid = b.type where t.typtype = 'd'
)
select b.attname, b.attnotnull, format_type(b.declared, b.modifier), t.oid, t.typname, b.base_modifier
from base b join pg_type t on t.oid = b.type where t.typtype <> 'd' order by b.attnum`, oid)
		if err != nil {
			return err
		}
		defer rows.Close()
		for rows.Next() {
			var name, declared, typeName string
			var notNull bool
			var typeOID uint32
			var modifier int32
			if err := rows.Scan(&name, &notNull, &declared, &typeOID, &typeName, &modifier); err != nil {
				return err
			}
			c := describe(name, declared, typeOID, typeName, modifier)
			c.notNull = notNull
			columns = append(columns, c)
		}
		return rows.Err()
	})
	if err != nil {
		return nil, fmt.Errorf("reading the columns of %s: %w", t, err)
	}
	for i := range columns {
		if columns[i].Spatial != nil {
			if err := describeSystem(ctx, pool, &columns[i].Spatial.System); err != nil {
				return nil, err
			}
		}
	}
	return columns, nil
}

// describe says how values of a type are read.
func describe(name, declared string, oid uint32, typeName string, modifier int32) column {
	quoted := quote(name)
	c := column{Column: row.Column{Name: name, Declared: declared}, expression: quoted}
	switch oid {
	case oidInt2, oidInt4, oidInt8:
		c.Kind, c.decode, c.numeric = row.Int, decodeInt, true
		c.order, c.parameter = quoted, "$%d::bigint"
	case oidFloat4:
		c.Kind, c.decode, c.numeric = row.Float, decodeFloat4, true
	case oidFloat8:
		c.Kind, c.decode, c.numeric = row.Float, decodeFloat8, true
	case oidNumeric:
		c.Kind, c.decode, c.numeric = row.Float, decodeNumeric, true
		// numeric(12,0) is how some programs write whole numbers, keys among them.
		if precision, scale := (modifier-4)>>16, (modifier-4)&0x7ff; modifier >= 4 && scale == 0 && precision <= 18 {
			c.Kind, c.decode = row.Int, decodeWholeNumeric
			c.order, c.parameter = quoted, "$%d::bigint"
		}
	case oidBool:
		c.Kind, c.decode = row.Bool, decodeBool
	case oidBytea:
		c.Kind, c.decode = row.Bytes, decodeBytes
	case oidTimestamptz:
		c.Kind, c.decode = row.Time, decodeTime
	case oidText, oidVarchar, oidName:
		c.Kind, c.decode = row.Text, decodeText
		c.order, c.parameter = quoted+` collate "C"`, "$%d::text"
	case oidUUID:
		c.Kind, c.decode, c.expression = row.Text, decodeText, quoted+"::text"
		c.order, c.parameter = quoted, "$%d::text::uuid" // sixteen bytes are ordered as their digits are
	default:
		if typeName == "geometry" || typeName == "geography" {
			c.Kind, c.decode, c.Geometry, c.Spatial = row.Bytes, decodeBytes, "ewkb", spatialOf(declared)
			break
		}
		c.Kind, c.decode, c.expression = row.Text, decodeText, quoted+"::text"
		c.order, c.parameter = "("+quoted+`::text) collate "C"`, "$%d::text"
	}
	return c
}
