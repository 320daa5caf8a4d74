package format

import "leat/api/wire"

// A request is what a source makes of one record. Its memory is used again.
type request struct {
	body    []byte        // the request object, nested
	id      []byte        // where it can be told without the body, as its JSON literal
	problem *wire.Problem // why there is no body
	flat    bool          // row made the body
	row     *wire.FlatRow
	members []member // of a flat record: all it had, in order

	answer   answer
	feature  featureParts // of a record of GeoJSON
	cells    []cell       // of a record of CSV
	replaced []bool       // by column of the answer: stands in place of a member
	room     []byte       // for body
	texts    []byte       // room for cells without their quotes
}

// A member is one column or property that a flat record had.
type member struct {
	name  []byte // as it stands in JSON, with quotes; nil in CSV, whose names are in the header
	value []byte // a JSON value, or the cell of CSV as it stood
	asked bool   // it is a member of the request
	found int    // the column of the answer that has its name, or -1
}

// keptRequest is the size of the largest buffer that is kept for use again.
const keptRequest = 1 << 20

// reset empties the request.
func (r *request) reset() {
	r.body, r.id, r.problem, r.flat = nil, nil, nil, false
	r.members, r.cells, r.feature = r.members[:0], r.cells[:0], featureParts{}
	r.room, r.texts = r.room[:0], r.texts[:0]
}

// keep lets go of what is too large to be kept, and of what belongs to the record.
func (r *request) keep() {
	if cap(r.room) > keptRequest {
		r.room = nil
	}
	if cap(r.texts) > keptRequest {
		r.texts = nil
	}
	r.body, r.id, r.problem, r.answer = nil, nil, nil, answer{}
	clear(r.members[:cap(r.members)])
}

// build makes the body of what the row was given, or the problem that the row has.
func (r *request) build(b *Bulk) {
	r.flat = true
	r.room = r.row.AppendRequest(r.room[:0])
	r.body = r.room
	r.problem = r.row.Problem(r.body, b.options.Units, b.limits())
}
