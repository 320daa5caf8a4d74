package postgres

import (
	"context"
	"encoding/binary"
	"encoding/hex"
	"errors"
	"fmt"

	"github.com/jackc/pgx/v5/pgconn"

	"leat/cmd/internal/register/row"
	"leat/cmd/internal/register/store"
)

// stretch demands that an asset is of a stretch; order is the column, spelled by what it is ordered.
func (t *target) stretch(c *clause, order string, s *store.Stretch) {
	if s.Ordered {
		c.between(order, t.compared, s.After, s.Until)
		return
	}
	c.conditions = append(c.conditions, c.among(order, t.keyKind, s.Keys))
}

// among demands that a key is one of several.
func (c *clause) among(order string, kind row.Kind, keys []row.Value) string {
	pattern := "$%d::bigint[]"
	if kind != row.Int {
		pattern = "$%d::text[]"
	}
	return order + " = any(" + c.parameter(pattern, keyParameters(kind, keys)) + ")"
}

const undefinedTable = "42P01"

func (t *target) Stored(ctx context.Context, stretch *store.Stretch, found func(key row.Value, stored store.Stored)) error {
	if t.layout == nil {
		return fmt.Errorf("the results of %s are asked for before their layout is known", t.results)
	}
	var c clause
	t.stretch(&c, t.order, stretch)
	copied := "null::bigint"
	if t.copied != "" {
		copied = t.copied
	}
	text := "select " + quote(t.layout.Columns[0].Name) + ", " + t.fingerprint + ", " + copied + " from " + t.results.quoted() + c.where()
	// Rows are told to the caller once it is certain that there are no more, since a lost connection has them read again.
	var page row.Page
	var prints [][32]byte
	var hashes []int64
	err := again(ctx, func() error {
		page.Reset(1, 0)
		prints, hashes = prints[:0], hashes[:0]
		rows, err := t.pool.Query(ctx, text, inBinary(c.parameters)...)
		if err != nil {
			return err
		}
		defer rows.Close()
		for rows.Next() {
			raw := rows.RawValues()
			key := page.Add(0)
			if t.keyKind == row.Int {
				key[0], err = decodeInt(&page, raw[0])
			} else {
				key[0], err = decodeText(&page, raw[0])
			}
			if err != nil {
				return err
			}
			// What is no fingerprint is none: the asset is computed anew.
			var print [32]byte
			if len(raw[1]) == 64 {
				if _, err := hex.Decode(print[:], raw[1]); err != nil {
					print = [32]byte{}
				}
			}
			var hash int64
			if len(raw[2]) == 8 {
				hash = int64(binary.BigEndian.Uint64(raw[2]))
			}
			prints, hashes = append(prints, print), append(hashes, hash)
		}
		return rows.Err()
	})
	if fault, is := errors.AsType[*pgconn.PgError](err); is && fault.Code == undefinedTable {
		return nil // before the first run
	}
	if err != nil {
		return fmt.Errorf("reading the fingerprints of %s: %w", t.results, err)
	}
	for i := range prints {
		found(page.Row(i)[0], store.Stored{Fingerprint: prints[i], Copied: hashes[i]})
	}
	return nil
}
