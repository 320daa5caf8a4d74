package format

import (
	"bytes"
	"io"

	"github.com/go-json-experiment/json/jsontext"

	"leat/api/stream"
	"leat/api/wellformed"
	"leat/api/wire"
)

// A featureReader finds the features of a FeatureCollection, and keeps what stands before and after them.
type featureReader struct {
	itemReader
	b     *Bulk
	begun bool
	head  []byte // up to the bracket before the first feature, that included
	tail  []byte // from the bracket after the last
}

func newFeatureReader(body io.Reader, b *Bulk) *featureReader {
	f := &featureReader{itemReader: itemReader{limit: b.lineBytes, record: 1}, b: b}
	f.rule.outside = true
	f.cutter = newCutter(body, &f.rule)
	return f
}

// Next appends the next feature to dst.
func (f *featureReader) Next(dst []byte) (extended []byte, line int64, err error) {
	if !f.begun {
		if err := f.open(); err != nil {
			return dst, 1, err
		}
		f.begun = true
		f.begin()
	}
	extended, line, done, err := f.item(dst)
	if done {
		return dst, line, f.close()
	}
	return extended, line, err
}

// open reads the collection up to its first feature.
func (f *featureReader) open() error {
	for {
		before := len(f.head)
		f.head = append(f.head, f.buffer[f.from:f.to]...)
		end, clause := findFeatures(f.head)
		switch {
		case clause != "":
			if _, problem := wire.Scan(f.head, wire.SI, f.b.limits()); problem != nil && clause == notJSON {
				return &Refusal{problem}
			}
			return refuseJSON("not_a_feature_collection", clause)
		case end > 0:
			f.from += end - before
			f.head = f.head[:end]
			return f.checkHead()
		case len(f.head) > f.limit:
			return &Refusal{tooLongCollection(f.limit)}
		}
		f.from = f.to
		if err := f.more(); err == io.EOF {
			if len(bytes.TrimSpace(f.head)) == 0 {
				return refuseJSON("empty_body", "there is no JSON value; "+collectionWanted)
			}
			return refuseJSON("syntax_error", "the body ends before the features; "+collectionWanted)
		} else if err != nil {
			return err
		}
	}
}

const (
	collectionWanted = `a GeoJSON FeatureCollection is expected: {"type": "FeatureCollection", "features": [{…}, {…}]}`
	notJSON          = "the collection is not well-formed JSON before its features"
)

func tooLongCollection(limit int) *wire.Problem {
	return refusal(&stream.Overlong{Limit: limit}, GeoJSON)
}

// findFeatures returns where, after its bracket, the list of features of a collection begins; 0 where more of the collection is needed, and a
// clause where it cannot be one.
func findFeatures(head []byte) (end int, clause string) {
	i := wellformed.SkipSpace(head, 0)
	if i == len(head) {
		return 0, ""
	}
	switch head[i] {
	case '{':
	case '[':
		return 0, collectionWanted + "; a plain list of requests is application/json"
	case 0xEF:
		return 0, "a byte order mark is not accepted in GeoJSON; send UTF-8 without one"
	default:
		return 0, collectionWanted
	}
	i = wellformed.SkipSpace(head, i+1)
	for {
		if i >= len(head) {
			return 0, ""
		}
		if head[i] == '}' {
			return 0, `there is no member features; ` + collectionWanted
		}
		if head[i] != '"' {
			return 0, notJSON
		}
		start := i
		i = wellformed.SkipString(head, i)
		name := head[start:i]
		if i = wellformed.SkipSpace(head, i); i >= len(head) {
			return 0, ""
		}
		if head[i] != ':' {
			return 0, notJSON
		}
		if i = wellformed.SkipSpace(head, i+1); i >= len(head) {
			return 0, ""
		}
		if string(name) == `"features"` {
			if head[i] != '[' {
				return 0, "features must be a list of features"
			}
			return i + 1, ""
		}
		value := i
		i = wellformed.SkipValue(head, i)
		if string(name) == `"type"` && i < len(head) && string(head[value:i]) != `"FeatureCollection"` {
			return 0, "the type of the collection must be FeatureCollection; " + collectionWanted
		}
		if i = wellformed.SkipSpace(head, i); i >= len(head) {
			return 0, ""
		}
		switch head[i] {
		case ',':
			i = wellformed.SkipSpace(head, i+1)
		case '}':
		default:
			return 0, notJSON
		}
	}
}

// checkHead refuses a collection that is not well-formed up to its features.
func (f *featureReader) checkHead() error {
	whole := append(bytes.Clone(f.head), "]}"...)
	if jsontext.Value(whole).IsValid() {
		return nil
	}
	if _, problem := wire.Scan(whole, wire.SI, f.b.limits()); problem != nil {
		return &Refusal{problem}
	}
	return refuseJSON("syntax_error", notJSON)
}

// close reads what follows the features.
func (f *featureReader) close() error {
	f.tail = append(f.tail[:0], ']')
	for {
		f.tail = append(f.tail, f.buffer[f.from:f.to]...)
		f.from, f.searched = f.to, f.to
		if len(f.tail) > f.limit {
			return &Refusal{tooLongCollection(f.limit)}
		}
		if err := f.more(); err == io.EOF {
			break
		} else if err != nil {
			return err
		}
	}
	whole := append(bytes.Clone(f.head), f.tail...)
	if !jsontext.Value(whole).IsValid() {
		return refuseJSON("syntax_error", "the collection is not well-formed JSON after its features")
	}
	isCollection := false
	wellformed.Each(whole, func(name, value []byte, _, _ int) {
		isCollection = isCollection || string(name) == `"type"` && string(value) == `"FeatureCollection"`
	})
	if !isCollection {
		return refuseJSON("not_a_feature_collection", `the type of the collection must be FeatureCollection; `+collectionWanted)
	}
	return io.EOF
}

// featureParts are what of a feature is wanted.
type featureParts struct {
	record     []byte
	properties [2]int // where the value of the member properties stands; 0 where there is none
	end        int    // where the closing brace stands
	members    int
	id         []byte
}

// read makes a request of a feature: its properties, and its id.
func (f *featureReader) read(r *request, record []byte) {
	if !jsontext.Value(record).IsValid() {
		r.problem, r.id = malformed(record, f.b), findID(record, "id")
		return
	}
	if record[wellformed.SkipSpace(record, 0)] != '{' {
		r.problem = wire.InvalidRequest(wire.Fault{Code: "not_an_object", Detail: "A feature must be an object."})
		return
	}
	p := featureParts{record: record, end: bytes.LastIndexByte(record, '}')}
	isFeature := false
	wellformed.Each(record, func(name, value []byte, from, to int) {
		p.members++
		switch string(name) {
		case `"type"`:
			isFeature = string(value) == `"Feature"`
		case `"properties"`:
			p.properties = [2]int{from, to}
		case `"id"`:
			p.id = value
		}
	})
	properties := record[p.properties[0]:p.properties[1]]
	object := []byte("{}")
	switch {
	case len(properties) > 0 && properties[0] == '{':
		object = properties
	case len(properties) > 0 && properties[0] != 'n':
		r.feature, r.id = p, idLiteral(p.id)
		r.problem = wire.InvalidRequest(wire.Fault{Pointer: "/properties", Code: "not_an_object", Detail: "The properties of a feature must be an object."})
		return
	}
	r.readMembers(f.b, object)
	r.feature = p
	f.setID(r, p.id)
	if !isFeature {
		r.row.Fault(wire.Fault{Pointer: "/type", Code: "unknown_value", Detail: "The type of a feature must be Feature."})
	}
	r.build(f.b)
}

// setID gives the request its feature's id. A property may say the same.
func (f *featureReader) setID(r *request, id []byte) {
	if len(id) == 0 || id[0] == 'n' {
		return
	}
	property := r.id
	if r.id = idLiteral(id); property == nil {
		if at, known := f.b.plan.Find("id"); known {
			r.row.SetJSON(at, id)
		}
	} else if !bytes.Equal(property, id) {
		r.row.Fault(wire.Fault{Column: f.b.choice.Prefix + "id", Code: "conflicting_member", Detail: "The feature's id and its property " + f.b.choice.Prefix + "id differ; give the id once."})
	}
}

// A featureTarget writes the FeatureCollection that came, its features with answers among their properties.
type featureTarget struct {
	b     *Bulk
	from  *featureReader
	begun bool
}

func (t *featureTarget) tell(dst []byte, r *request, a *answer) []byte {
	p := &r.feature
	if p.record == nil { // it cannot be told what stood there
		dst = append(dst, `{"type":"Feature",`...)
		if len(a.id) > 0 {
			dst = append(append(append(dst, `"id":`...), a.id...), ',')
		}
		dst = t.b.columns.appendRow(append(dst, `"geometry":null,"properties":`...), r, a, true, true)
		return append(dst, '}')
	}
	if p.properties[1] == 0 {
		dst = append(dst, p.record[:p.end]...)
		if p.members > 0 {
			dst = append(dst, ',')
		}
		dst = t.b.columns.appendRow(append(dst, `"properties":`...), r, a, true, true)
		return append(dst, p.record[p.end:]...)
	}
	dst = append(dst, p.record[:p.properties[0]]...)
	dst = t.b.columns.appendRow(dst, r, a, true, true)
	return append(dst, p.record[p.properties[1]:]...)
}

// Begin writes what stood before the features.
func (t *featureTarget) Begin(dst []byte) []byte { return append(dst, t.from.head...) }

// Answer puts each feature on a line of its own.
func (t *featureTarget) Answer(dst, answer []byte) []byte {
	return appendItem(dst, answer, &t.begun)
}

// Flush has nothing.
func (t *featureTarget) Flush(dst []byte) []byte { return dst }

// End writes what stood after the features; a collection that is not complete it leaves open.
func (t *featureTarget) End(dst []byte, s stream.Summary) []byte {
	if !s.Complete {
		return dst
	}
	return append(append(dst, '\n'), t.from.tail...)
}
