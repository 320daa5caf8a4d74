package postgres

import (
	"context"
	"errors"
	"fmt"
	"regexp"
	"strconv"
	"strings"

	"github.com/jackc/pgx/v5"
	"github.com/jackc/pgx/v5/pgxpool"

	"leat/cmd/internal/register/row"
)

// typeModifier is how PostGIS spells the type of a column: "geometry(LineStringZM,25832)".
var typeModifier = regexp.MustCompile(`geometry\(([A-Za-z]+?)(ZM|Z|M)?(?:,(\d+))?\)$`)

// spatialOf says what a type tells of the geometries of its column; nil where it tells nothing. The reference system has its number only.
func spatialOf(declared string) *row.Spatial {
	parts := typeModifier.FindStringSubmatch(declared)
	if parts == nil {
		return nil
	}
	spatial := &row.Spatial{Type: strings.ToUpper(parts[1])}
	if strings.Contains(parts[2], "Z") {
		spatial.Z = 1
	}
	if strings.Contains(parts[2], "M") {
		spatial.M = 1
	}
	if number, err := strconv.ParseInt(parts[3], 10, 32); err == nil {
		spatial.System = row.ReferenceSystem{ID: number, Code: number}
	}
	return spatial
}

// describeSystem adds what the database knows of a reference system.
func describeSystem(ctx context.Context, pool *pgxpool.Pool, system *row.ReferenceSystem) error {
	if system.ID <= 0 {
		return nil
	}
	var schema string
	err := again(ctx, func() error {
		return pool.QueryRow(ctx, "select coalesce((select n.nspname from pg_class c join pg_namespace n on n.oid = c.relnamespace where c.relname = 'spatial_ref_sys' and c.relkind in ('r', 'v') limit 1), '')").Scan(&schema)
	})
	if err != nil || schema == "" {
		return err
	}
	err = again(ctx, func() error {
		return pool.QueryRow(ctx, "select coalesce(auth_name, ''), coalesce(auth_srid, srid), coalesce(srtext, '') from "+quote(schema, "spatial_ref_sys")+" where srid = $1", system.ID).
			Scan(&system.Organization, &system.Code, &system.Definition)
	})
	if errors.Is(err, pgx.ErrNoRows) {
		return nil
	}
	if err != nil {
		return fmt.Errorf("reading the reference systems: %w", err)
	}
	// Well-known text begins with the kind and the name: PROJCS["ETRS89 / UTM zone 32N", …
	if _, rest, found := strings.Cut(system.Definition, `"`); found {
		system.Name, _, _ = strings.Cut(rest, `"`)
	}
	return nil
}

// indexGeometries gives the results' geometries an index, by which maps find those in sight. It is made at the end of a first run, since putting rows in under it is slow.
func (t *target) indexGeometries(ctx context.Context) error {
	for i := range t.layout.Columns {
		column := &t.layout.Columns[i]
		if t.columns[i].geometry == "" || t.typeOf(column) == "bytea" {
			continue
		}
		err := again(ctx, func() error {
			return t.inTransaction(ctx, func(tx pgx.Tx) error {
				var there bool
				err := tx.QueryRow(ctx, `select exists (select from pg_index i join pg_class c on c.oid = i.indexrelid join pg_am m on m.oid = c.relam join pg_attribute a on a.attrelid = i.indrelid and a.attnum = i.indkey[0]
where i.indrelid = $1::text::regclass and m.amname = 'gist' and a.attname = $2)`, t.results.quoted(), column.Name).Scan(&there)
				if err != nil || there {
					return err
				}
				_, err = tx.Exec(ctx, "create index on "+t.results.quoted()+" using gist ("+quote(column.Name)+")")
				return err
			})
		})
		if err != nil {
			return fmt.Errorf("making an index of the geometries of %s: %w", t.results, err)
		}
	}
	return nil
}
