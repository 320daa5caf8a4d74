package postgres

import (
	"fmt"
	"strings"

	"github.com/jackc/pgx/v5"

	"leat/cmd/internal/register/store"
)

// quote spells an identifier so that SQL takes it for nothing else, schema and table joined by a point.
func quote(parts ...string) string { return pgx.Identifier(parts).Sanitize() }

// literal spells one of our own texts as a string constant, for statements that take no parameters (COMMENT).
func literal(text string) string {
	text = strings.ReplaceAll(text, "\x00", "")
	quoted := "'" + strings.ReplaceAll(text, "'", "''") + "'"
	if strings.Contains(text, `\`) {
		// Means the same whether or not the server takes backslashes in plain constants for escapes.
		return " E" + strings.ReplaceAll(quoted, `\`, `\\`)
	}
	return quoted
}

// A table is the name of a table with its schema.
type table struct{ schema, name string }

func (t table) quoted() string { return quote(t.schema, t.name) }

// String names the table in messages.
func (t table) String() string { return t.schema + "." + t.name }

// longestName is how many bytes PostgreSQL keeps of an identifier; it cuts longer ones off without an error.
const longestName = 63

// checkName makes sure that a name can be that of a table or column.
func checkName(field, name string) error {
	switch {
	case name == "":
		return &store.Misfit{Field: field, Detail: "A name is missing here."}
	case len(name) > longestName:
		return &store.Misfit{Field: field, Detail: fmt.Sprintf("The name %q has %d bytes; PostgreSQL keeps %d, so that a shorter one is needed.", name, len(name), longestName)}
	case strings.ContainsRune(name, 0):
		return &store.Misfit{Field: field, Detail: fmt.Sprintf("The name %q holds a zero byte, which no name in PostgreSQL can.", name)}
	}
	return nil
}
