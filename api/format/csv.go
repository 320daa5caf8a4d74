package format

import (
	"bytes"
	"fmt"
	"io"
	"strconv"
	"strings"
	"unicode/utf8"

	"github.com/go-json-experiment/json/jsontext"

	"leat/api/stream"
	"leat/api/wire"
)

// A csvReader finds the rows of a body of CSV. What they mean its header says.
type csvReader struct {
	cutter
	rule    csvRule
	b       *Bulk
	record  int64 // the number of the row that comes next
	begun   bool
	columns []csvColumn
	header  [][]byte // the names as they stood, to hand through
	has     []bool   // by column of the answer: one of the columns has its name
}

// A csvColumn is what one column of the header stands for.
type csvColumn struct {
	name  string
	key   []byte // as it stands in JSON, with quotes
	place wire.FlatPlace
	asked bool // it is the member at place
	id    bool
	found int // the column of the answer that has its name, or -1
}

func newCSVReader(body io.Reader, b *Bulk) *csvReader {
	c := &csvReader{b: b, record: 1}
	c.cutter = newCutter(body, &c.rule)
	return c
}

// Next appends the next row to dst, without its line end.
func (c *csvReader) Next(dst []byte) (extended []byte, line int64, err error) {
	if !c.begun {
		if err := c.readHeader(); err != nil {
			return dst, c.record, err
		}
		c.begun = true
	}
	for {
		extended, kept, err := c.row(dst)
		if err != nil {
			return dst, c.record, err
		}
		if kept && len(extended) == len(dst) {
			continue // a blank line
		}
		line := c.record
		c.record++
		if !kept {
			return dst, line, &stream.Fault{Reason: &stream.Overlong{Limit: c.b.lineBytes}}
		}
		return extended, line, nil
	}
}

// row appends the next row, blank or not. The error is io.EOF where there is none.
func (c *csvReader) row(dst []byte) (extended []byte, kept bool, err error) {
	// One byte beyond the limit is kept, which may be the carriage return before the line feed.
	extended, _, kept, err = c.next(dst, c.b.lineBytes+1)
	if err == io.EOF {
		if c.rule.state == inQuotes {
			return dst, false, refuseCSV("unclosed_quote", fmt.Sprintf("A quotation mark that was opened in row %d or before is never closed, so that the rows after it cannot be told apart. Close it; a quotation mark inside a cell is written twice.", c.record))
		}
		if kept && len(extended) == len(dst) {
			return dst, false, io.EOF
		}
		err = nil
	}
	if err != nil {
		return dst, false, err
	}
	extended = extended[:len(dst)+len(trimReturn(extended[len(dst):]))]
	return extended, kept && len(extended)-len(dst) <= c.b.lineBytes, nil
}

// Ready reports whether a row or the end is at hand.
func (c *csvReader) Ready() bool { return c.find() || c.err != nil }

// Position is the row that comes next.
func (c *csvReader) Position() int64 { return c.record }

func refuseCSV(code, detail string) error {
	return &Refusal{wire.MalformedCSV(wire.Fault{Code: code, Detail: detail})}
}

// The signs of other encodings at the head of a text, and that of UTF-8, which spreadsheets write and which does no harm.
var (
	markUTF8  = []byte("\xef\xbb\xbf")
	markUTF16 = [][]byte{[]byte("\xff\xfe"), []byte("\xfe\xff")}
)

// readHeader reads the names of the columns and finds what they stand for.
func (c *csvReader) readHeader() error {
	var header []byte
	for blank := true; blank; {
		var kept bool
		var err error
		header, kept, err = c.row(nil)
		switch {
		case err == io.EOF:
			return refuseCSV("empty_body", "There is no header line. The first line names the columns, such as id,section_kind,section_bottom_width,roughness_manning,bed_slope,discharge.")
		case err != nil:
			return err
		case !kept:
			return &Refusal{refusal(&stream.Overlong{Limit: c.b.lineBytes}, CSV)}
		}
		for _, mark := range markUTF16 {
			if bytes.HasPrefix(header, mark) {
				return refuseCSV("invalid_utf8", "The text is UTF-16. Save it as UTF-8.")
			}
		}
		header = bytes.TrimPrefix(header, markUTF8)
		blank = len(header) == 0
	}
	if !utf8.Valid(header) {
		return refuseCSV("invalid_utf8", "The header line is not UTF-8. Save the text as UTF-8.")
	}
	cells, _ := splitCells(nil, header, nil)
	if bytes.IndexByte(header, '\r') >= 0 {
		return refuseCSV("line_ends", "The lines end with carriage returns alone. Save the text with line feeds.")
	}
	if len(cells) == 1 {
		for sign, name := range map[string]string{";": "semicolons", "\t": "tabs", "|": "bars"} {
			if strings.Count(string(cells[0].value), sign) > 0 {
				return refuseCSV("wrong_separator", "The columns are separated by "+name+". Save the text with commas between columns and a point before decimals; spreadsheets and GIS programs ask for the separator when they export.")
			}
		}
	}
	return c.readNames(cells)
}

// readNames finds what the columns stand for, and refuses those that stand for nothing.
func (c *csvReader) readNames(cells []cell) error {
	var faults []wire.Fault
	fault := func(f wire.Fault) {
		if len(faults) < wire.MaxFaults {
			faults = append(faults, f)
		}
	}
	seen := map[string]bool{}
	prefix := c.b.choice.Prefix
	for i := range cells {
		name := string(cells[i].value)
		column := csvColumn{name: name, found: c.b.columns.find(name)}
		column.key, _ = jsontext.AppendQuote(nil, name)
		rest, read := strings.CutPrefix(name, prefix)
		switch {
		case cells[i].wrong != "":
			return refuseCSV("syntax_error", "In the header line: "+cells[i].wrong)
		case seen[name]:
			fault(wire.Fault{Column: shownColumn(name), Code: "duplicate_column", Detail: "Two columns are called " + shownColumn(name) + "; give each once."})
		case read:
			column.place, column.asked = c.b.plan.Find(rest)
			column.id = column.asked && rest == "id"
			if !column.asked && !(prefix != "" && c.b.table != nil && c.b.isAnswer(rest)) {
				fault(c.b.plan.Unknown(name, prefix, c.b.table))
			}
		}
		seen[name] = true
		c.columns = append(c.columns, column)
		c.header = append(c.header, cells[i].raw)
	}
	if len(faults) > 0 {
		return &Refusal{wire.InvalidRequest(faults...)}
	}
	c.has = make([]bool, len(c.b.columns.names))
	for i := range c.columns {
		if found := c.columns[i].found; found >= 0 {
			c.has[found] = true
		}
	}
	return nil
}

// shownColumn is a column's name in a sentence.
func shownColumn(name string) string {
	if runes := []rune(name); len(runes) > 60 {
		return string(runes[:60]) + "…"
	}
	return name
}

// read makes a request of a row.
func (c *csvReader) read(r *request, record []byte) {
	r.row.Reset()
	r.cells, r.texts = splitCells(r.cells[:0], record, r.texts[:0])
	ragged := len(r.cells) != len(c.columns)
	toJSON := c.b.choice.Prefix != "" && c.b.choice.Out != CSV && c.b.choice.flatOut()
	for i := range min(len(r.cells), len(c.columns)) {
		cell, column := &r.cells[i], &c.columns[i]
		if column.id && len(cell.value) > 0 && (!ragged || i == 0) {
			if id, err := jsontext.AppendQuote(nil, cell.value); err == nil {
				r.id = id
			}
		}
		switch {
		case !column.asked:
		case cell.wrong != "":
			r.row.Unreadable(column.place, cell.wrong)
		default:
			r.row.SetText(column.place, cell.value)
		}
		if toJSON {
			c.hand(r, column, cell.value)
		}
	}
	if ragged {
		r.problem = wire.InvalidRequest(raggedRow(len(r.cells), len(c.columns)))
		return
	}
	r.build(c.b)
}

func raggedRow(given, wanted int) wire.Fault {
	detail := fmt.Sprintf("The row has %s, but the header names %s.", counted(given, "cell"), counted(wanted, "column"))
	if given > wanted {
		detail += " If commas stand before decimals, write points; put a text with commas into quotation marks."
	}
	return wire.Fault{Code: "wrong_length", Detail: detail}
}

// hand hands a cell through as a member of a JSON object: as a string, or null where it is empty.
func (c *csvReader) hand(r *request, column *csvColumn, value []byte) {
	m := member{name: column.key, value: []byte("null"), asked: column.asked, found: column.found}
	if len(value) > 0 {
		var err error
		if m.value, err = jsontext.AppendQuote(nil, value); err != nil {
			r.row.Fault(wire.Fault{Column: column.name, Code: "invalid_utf8", Detail: "The text is not valid UTF-8. Save the data as UTF-8."})
		}
	}
	r.members = append(r.members, m)
}

func counted(n int, what string) string {
	if n == 1 {
		return "1 " + what
	}
	return strconv.Itoa(n) + " " + what + "s"
}

// A csvTarget writes CSV: a header line, and one row for each answer. With a prefix the rows that came come back, with answers in further columns.
type csvTarget struct {
	b    *Bulk
	from *csvReader // where rows are handed through, else nil or not asked
}

// passes reports whether what came is handed through.
func (t *csvTarget) passes() bool { return t.b.choice.Prefix != "" }

func (t *csvTarget) tell(dst []byte, r *request, a *answer) []byte {
	row := a.row()
	first := true
	next := func() {
		if !first {
			dst = append(dst, ',')
		}
		first = false
	}
	if t.passes() {
		for i := range t.from.columns {
			column := &t.from.columns[i]
			next()
			before := len(dst)
			if column.found >= 0 && !column.id {
				dst = appendCell(dst, t.b.table, &row, column.found)
			}
			if len(dst) == before && i < len(r.cells) && (column.found < 0 || column.asked) {
				dst = append(dst, r.cells[i].raw...)
			}
		}
	}
	for i := range t.b.columns.names {
		if t.passes() && t.from.has[i] {
			continue
		}
		next()
		dst = appendCell(dst, t.b.table, &row, i)
	}
	return append(dst, "\r\n"...)
}

// Begin writes the header line.
func (t *csvTarget) Begin(dst []byte) []byte {
	start := len(dst)
	if t.passes() {
		for _, name := range t.from.header {
			dst = append(append(dst, name...), ',')
		}
	}
	for i, name := range t.b.columns.names {
		if !t.passes() || !t.from.has[i] {
			dst = append(append(dst, name...), ',')
		}
	}
	if len(dst) > start {
		dst = dst[:len(dst)-1]
	}
	return append(dst, "\r\n"...)
}

// Answer has framed its row already.
func (t *csvTarget) Answer(dst, answer []byte) []byte { return append(dst, answer...) }

// Flush has nothing.
func (t *csvTarget) Flush(dst []byte) []byte { return dst }

// End has nothing: the header or the trailers of the answer say that it is whole.
func (t *csvTarget) End(dst []byte, _ stream.Summary) []byte { return dst }
