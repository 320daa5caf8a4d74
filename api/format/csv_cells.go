package format

import (
	"bytes"

	"leat/api/wire"
)

// A csvRule cuts a body of CSV at the line feeds that end records: those outside quotation marks.
type csvRule struct{ state csvState }

type csvState uint8

const (
	cellStart csvState = iota
	inCell
	inQuotes
	afterQuote // a quotation mark within quotes: their end, or the first half of one that is meant
)

func (r *csvRule) find(data []byte) int {
	state := r.state
	for i := 0; i < len(data); i++ {
		c := data[i]
		if state == inQuotes {
			quote := bytes.IndexByte(data[i:], '"')
			if quote < 0 {
				break
			}
			i += quote
			state = afterQuote
			continue
		}
		switch {
		case c == '\n':
			r.state = cellStart
			return i
		case c == ',':
			state = cellStart
		case c == '"' && state == cellStart, c == '"' && state == afterQuote:
			state = inQuotes
		default:
			state = inCell
		}
	}
	r.state = state
	return -1
}

// A cell is one value of a row.
type cell struct {
	raw   []byte // as it stood
	value []byte // without its quotation marks
	wrong string // why it cannot be read, or empty
}

const (
	strayQuote = "A quotation mark stands inside a cell. Put the whole cell into quotation marks, and write each inside it twice."
	afterCell  = "Something follows the closing quotation mark of a cell. A quotation mark inside a cell is written twice."
)

// splitCells appends the cells of a record, which is without its line end, and the values that had to be written anew to texts.
func splitCells(cells []cell, record, texts []byte) ([]cell, []byte) {
	for i := 0; ; {
		start := i
		var c cell
		if i < len(record) && record[i] == '"' {
			c.value, texts, i, c.wrong = quotedCell(record, texts, i)
		}
		if comma := bytes.IndexByte(record[i:], ','); comma >= 0 {
			i += comma
		} else {
			i = len(record)
		}
		c.raw = record[start:i]
		if len(c.raw) == 0 || c.raw[0] != '"' {
			c.value = c.raw
			if bytes.IndexByte(c.raw, '"') >= 0 {
				c.wrong = strayQuote
			}
		}
		cells = append(cells, c)
		if i == len(record) {
			return cells, texts
		}
		i++
	}
}

// quotedCell reads a cell in quotation marks that begins at i, and returns the place after it.
func quotedCell(record, texts []byte, i int) (value, room []byte, after int, wrong string) {
	i++
	start, from := i, len(texts)
	for {
		quote := bytes.IndexByte(record[i:], '"')
		if quote < 0 { // the rule has seen to it that there is one, save at the end of an unclosed record
			return record[start:], texts, len(record), afterCell
		}
		i += quote
		if i+1 < len(record) && record[i+1] == '"' {
			texts = append(texts, record[start:i+1]...)
			i += 2
			start = i
			continue
		}
		break
	}
	value = record[start:i]
	if len(texts) > from {
		texts = append(texts, value...)
		value = texts[from:len(texts):len(texts)]
	}
	if i++; i < len(record) && record[i] != ',' {
		wrong = afterCell
	}
	return value, texts, i, wrong
}

// appendCell appends a text as a cell, in quotation marks where it needs them.
func appendCell(dst []byte, table *wire.FlatTable, row *wire.FlatAnswer, column int) []byte {
	start := len(dst)
	return quoteCell(table.AppendText(dst, row, column), start)
}
