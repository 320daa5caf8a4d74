package wire

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

// AppendJSON appends the fault as an object with the one of pointer, parameter and column that is meant.
func (f *Fault) AppendJSON(dst []byte) []byte {
	switch {
	case f.Parameter != "":
		dst = appendText(append(dst, `{"parameter":`...), f.Parameter)
	case f.Column != "":
		dst = appendText(append(dst, `{"column":`...), f.Column)
	default:
		dst = appendText(append(dst, `{"pointer":`...), f.Pointer)
	}
	dst = appendText(append(dst, `,"code":`...), f.Code)
	dst = appendText(append(dst, `,"detail":`...), f.Detail)
	return append(dst, '}')
}

// Where returns the place of a fault as text that a sentence can follow: its pointer, parameter or column and a colon; empty for the top of a request.
func (f *Fault) Where() string {
	switch {
	case f.Parameter != "":
		return f.Parameter + ": "
	case f.Column != "":
		return f.Column + ": "
	case f.Pointer != "":
		return f.Pointer + ": "
	}
	return ""
}
