package postgres

import (
	"context"
	"fmt"
	"strings"

	"github.com/jackc/pgx/v5"
)

// create makes what is not there yet.
func (t *target) create(ctx context.Context, tx pgx.Tx, shared bool) error {
	for _, d := range t.definitions(shared) {
		var there bool
		if err := tx.QueryRow(ctx, "select to_regclass($1) is not null", d.table.quoted()).Scan(&there); err != nil {
			return fmt.Errorf("looking for the table %s: %w", d.table, err)
		}
		if there {
			continue
		}
		for _, statement := range d.statements() {
			if _, err := tx.Exec(ctx, statement); err != nil {
				return fmt.Errorf("creating the table %s: %w", d.table, err)
			}
		}
	}
	return nil
}

// statements are what creates a table.
func (d *definition) statements() []string {
	lines := make([]string, len(d.columns))
	for i, column := range d.columns {
		lines[i] = strings.TrimSpace(quote(column.name) + " " + column.kind + " " + column.rest)
	}
	out := []string{"create table " + d.table.quoted() + " (" + strings.Join(lines, ", ") + ")"}
	for _, expressions := range d.indexes {
		out = append(out, "create index on "+d.table.quoted()+" "+expressions)
	}
	out = append(out, "comment on table "+d.table.quoted()+" is "+literal(d.comment))
	for _, column := range d.columns {
		if column.comment != "" {
			out = append(out, "comment on column "+d.table.quoted()+"."+quote(column.name)+" is "+literal(column.comment))
		}
	}
	return out
}
