package wire

// Problem is an RFC 9457 problem. Its JSON form is written by AppendJSON; Title never changes for a Type.
type Problem struct {
	Type     string // URI reference that resolves to the entry of this problem in the service's own documents
	Title    string
	Status   int
	Detail   string
	Instance string  // urn of the request id; empty in bulk
	Errors   []Fault // all faults found, at most MaxFaults
}

// MaxFaults is the most faults that one problem lists.
const MaxFaults = 100

// Fault is one entry of a problem's errors. Exactly one of Pointer (which may be the empty pointer), Parameter and Column is meant.
type Fault struct {
	Pointer   string // RFC 6901, from the request's or record's top
	Parameter string // name of a query parameter
	Column    string // name of a column or property
	Code      string // snake_case, stable
	Detail    string // one sentence: what is wrong, where, what would be accepted
}

// Warning is something a caller should know about an answer; it is never an error.
type Warning struct {
	Code    string
	Detail  string
	Pointer string // of the request member concerned, or empty
}

func (p *Problem) Error() string { return p.Title + ": " + p.Detail }
