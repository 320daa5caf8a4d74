package format

import (
	"bytes"

	"leat/api/operation"
	"leat/api/wire"
)

// appendTable appends an answer as comma-separated values (RFC 4180): a header of names, a line for each row. What cannot be given is empty.
func appendTable(dst []byte, solved *operation.Solved) ([]byte, *wire.Problem) {
	table := solved.Answer.(wire.Tabular).Table(solved.Units)
	for i, name := range table.Columns {
		if i > 0 {
			dst = append(dst, ',')
		}
		dst = append(dst, name...)
	}
	dst = append(dst, "\r\n"...)
	for row := range table.Rows {
		for column := range table.Columns {
			if column > 0 {
				dst = append(dst, ',')
			}
			start := len(dst)
			dst = quoteCell(table.Cell(dst, row, column), start)
		}
		dst = append(dst, "\r\n"...)
	}
	return dst, nil
}

// quoteCell puts the cell that begins at start into quotes, if it needs them.
func quoteCell(dst []byte, start int) []byte {
	cell := dst[start:]
	if !bytes.ContainsAny(cell, ",\"\r\n") {
		return dst
	}
	cell = bytes.ReplaceAll(cell, []byte(`"`), []byte(`""`)) // a copy
	dst = append(dst[:start], '"')
	dst = append(dst, cell...)
	return append(dst, '"')
}
