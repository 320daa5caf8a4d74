package geopackagetest

import (
	"strings"
	"testing"

	"zombiezen.com/go/sqlite"
	"zombiezen.com/go/sqlite/sqlitex"
)

// Texts returns the rows of a statement, columns joined by a bar.
func Texts(t testing.TB, path, statement string) []string {
	t.Helper()
	c, err := sqlite.OpenConn(path, sqlite.OpenReadOnly)
	if err != nil {
		t.Fatal(err)
	}
	defer c.Close()
	var out []string
	err = sqlitex.ExecuteTransient(c, statement, &sqlitex.ExecOptions{ResultFunc: func(s *sqlite.Stmt) error {
		var cells []string
		for i := range s.ColumnCount() {
			cells = append(cells, s.ColumnText(i))
		}
		out = append(out, strings.Join(cells, "|"))
		return nil
	}})
	if err != nil {
		t.Fatal(err)
	}
	return out
}
