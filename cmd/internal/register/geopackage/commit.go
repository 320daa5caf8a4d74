package geopackage

import (
	"bytes"
	"context"
	"encoding/hex"
	"strings"

	"zombiezen.com/go/sqlite"

	"leat/cmd/internal/geopackage"
	"leat/cmd/internal/register/row"
	"leat/cmd/internal/register/store"
)

// statements are those of Commit and Stored, prepared once for each connection.
type statements struct {
	put         string // a result, in the order of the layout
	drop        string // a result, by its asset
	dropRange   string // problems after a key and up to one
	dropProblem string // problems of an asset
	dropLine    string // problems of a row without a key, by its line
	putProblem  string
	mark, count string
	storedRange string // results after a key and up to one
	storedByKey string
	from, until string // the bounds of a range
}

func (p *plan) statements() statements {
	results, problems, runs := geopackage.Quote(p.names.results), geopackage.Quote(p.names.problems), geopackage.Quote(p.names.runs)
	asset := geopackage.Quote(p.layout.Columns[0].Name)
	var columns, set []string
	fingerprint, copied := "''", "0"
	for i, c := range p.layout.Columns {
		name := geopackage.Quote(c.Name)
		columns = append(columns, name)
		if i > 0 {
			set = append(set, name+" = excluded."+name)
		}
		switch c.Role {
		case store.RoleFingerprint:
			fingerprint = name
		case store.RoleCopiedHash:
			copied = name
		}
	}
	marks := strings.TrimSuffix(strings.Repeat("?, ", len(columns)), ", ")
	stored := "SELECT " + asset + ", " + fingerprint + ", " + copied + " FROM " + results + " WHERE "
	return statements{
		put:         "INSERT INTO " + results + " (" + strings.Join(columns, ", ") + ") VALUES (" + marks + ") ON CONFLICT (" + asset + ") DO UPDATE SET " + strings.Join(set, ", "),
		drop:        "DELETE FROM " + results + " WHERE " + asset + " = ?",
		dropRange:   "DELETE FROM " + problems + " WHERE asset IS NOT NULL",
		dropProblem: "DELETE FROM " + problems + " WHERE asset = ?",
		dropLine:    "DELETE FROM " + problems + " WHERE asset IS NULL AND line = ?",
		putProblem:  "INSERT INTO " + problems + " (run, " + geopackage.QuoteAll(store.ProblemColumns) + ") VALUES (?, ?, ?, ?, ?, ?, ?)",
		mark:        "UPDATE " + runs + " SET mark = ? WHERE run = ?",
		count:       "UPDATE " + runs + " SET \"read\" = \"read\" + ?, computed = computed + ?, unchanged = unchanged + ?, bad = bad + ?, removed = removed + ?, problems = problems + ? WHERE run = ?",
		storedRange: stored + "1",
		storedByKey: stored + asset + " = ?",
		from:        asset + " > ?",
		until:       asset + " <= ?",
	}
}

func (t *target) Commit(ctx context.Context, batch *store.Batch) error {
	if err := ctx.Err(); err != nil {
		return err
	}
	return t.writing.Within(func() error {
		for _, key := range batch.Gone {
			if err := t.execute(t.sql.drop, key); err != nil {
				return err
			}
		}
		if err := t.dropProblems(&batch.Stretch); err != nil {
			return err
		}
		for _, cells := range batch.Results {
			if err := t.execute(t.sql.put, cells...); err != nil {
				return err
			}
		}
		if err := t.putProblems(batch.Problems); err != nil {
			return err
		}
		if !batch.Mark.IsNull() {
			if err := t.execute(t.sql.mark, batch.Mark, row.OfString(t.run)); err != nil {
				return err
			}
		}
		c := &batch.Counts
		return t.execute(t.sql.count, row.OfInt(c.Read), row.OfInt(c.Computed), row.OfInt(c.Unchanged), row.OfInt(c.Bad), row.OfInt(c.Removed), row.OfInt(c.Problems), row.OfString(t.run))
	})
}

// execute runs a prepared statement that gives no rows.
func (t *target) execute(statement string, values ...row.Value) error {
	s, err := t.writing.Prepare(statement)
	if err != nil {
		return err
	}
	for i, v := range values {
		bind(s, i+1, v)
	}
	_, err = s.Step()
	if resetting := s.Reset(); err == nil {
		err = resetting
	}
	return err
}

func (t *target) dropProblems(stretch *store.Stretch) error {
	if !stretch.Ordered {
		for _, key := range stretch.Keys {
			if key.IsNull() {
				continue
			}
			if err := t.execute(t.sql.dropProblem, key); err != nil {
				return err
			}
		}
		return nil
	}
	statement, bounds := t.sql.dropRange, []row.Value(nil)
	if !stretch.After.IsNull() {
		statement, bounds = statement+" AND asset > ?", append(bounds, stretch.After)
	}
	if !stretch.Until.IsNull() {
		statement, bounds = statement+" AND asset <= ?", append(bounds, stretch.Until)
	}
	return t.execute(statement, bounds...)
}

func (t *target) putProblems(problems []store.Problem) error {
	// A row without a key is known by its line alone; it may have several problems.
	last := int64(0)
	for i := range problems {
		if p := &problems[i]; p.Asset.IsNull() && p.Line != last {
			last = p.Line
			if err := t.execute(t.sql.dropLine, row.OfInt(p.Line)); err != nil {
				return err
			}
		}
	}
	for i := range problems {
		p := &problems[i]
		line := row.Value{}
		if p.Line > 0 {
			line = row.OfInt(p.Line)
		}
		err := t.execute(t.sql.putProblem, row.OfString(t.run), p.Asset, line, optional(p.Column), optional(p.Pointer), row.OfString(p.Code), row.OfString(p.Text))
		if err != nil {
			return err
		}
	}
	return nil
}

// optional is null for an empty text.
func optional(text string) row.Value {
	if text == "" {
		return row.Value{}
	}
	return row.OfString(text)
}

func (t *target) Stored(ctx context.Context, stretch *store.Stretch, found func(key row.Value, stored store.Stored)) error {
	if err := ctx.Err(); err != nil {
		return err
	}
	if stretch.Ordered {
		statement, bounds := t.sql.storedRange, []row.Value(nil)
		if !stretch.After.IsNull() {
			statement, bounds = statement+" AND "+t.sql.from, append(bounds, stretch.After)
		}
		if !stretch.Until.IsNull() {
			statement, bounds = statement+" AND "+t.sql.until, append(bounds, stretch.Until)
		}
		return geopackage.Explain(t.spec.Path, t.stored(statement, bounds, found))
	}
	for _, key := range stretch.Keys {
		if key.IsNull() {
			continue
		}
		if err := t.stored(t.sql.storedByKey, []row.Value{key}, found); err != nil {
			return geopackage.Explain(t.spec.Path, err)
		}
	}
	return nil
}

func (t *target) stored(statement string, bounds []row.Value, found func(row.Value, store.Stored)) error {
	s, err := t.reading.Prepare(statement)
	if err != nil {
		return err
	}
	defer s.Reset()
	for i, v := range bounds {
		bind(s, i+1, v)
	}
	var page row.Page
	var buffer []byte
	for {
		more, err := s.Step()
		if err != nil || !more {
			return err
		}
		page.Reset(0, 0)
		var key, fingerprint row.Value
		key, buffer = cell(s, 0, t.layout.Columns[0].Kind, &page, buffer)
		fingerprint, buffer = cell(s, 1, row.Text, &page, buffer)
		stored := store.Stored{Copied: s.ColumnInt64(2)}
		// What is no fingerprint, because somebody edited the table, is that of no request.
		if n, err := hex.Decode(stored.Fingerprint[:], bytes.TrimSpace(limit(fingerprint.Bytes()))); err != nil || n != len(stored.Fingerprint) {
			stored.Fingerprint = [32]byte{}
		}
		found(key, stored)
	}
}

// limit cuts what is longer than a fingerprint, and would not fit.
func limit(text []byte) []byte { return text[:min(len(text), 64)] }

// ownValue reads a cell into memory of its own.
func ownValue(s *sqlite.Stmt, at int, kind row.Kind) row.Value {
	var page row.Page
	page.Reset(0, 0)
	v, _ := cell(s, at, kind, &page, nil)
	return v.Clone()
}
