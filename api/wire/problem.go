package wire

import "strconv"

// Problem is an RFC 9457 problem. Its JSON form is written by AppendJSON; Title never changes for a Type.
type Problem struct {
	Type     string // URI reference that resolves to the entry of this problem in the service's own documents
	Title    string
	Status   int
	Detail   string
	Instance string  // urn of the request id; empty in bulk
	Errors   []Fault // all faults found, at most MaxFaults
}

func (p *Problem) Error() string { return p.Title + ": " + p.Detail }

// AppendJSON appends the problem as an object. An empty instance and an empty list of errors are left out.
func (p *Problem) AppendJSON(dst []byte) []byte {
	dst = appendText(append(dst, `{"type":`...), p.Type)
	dst = appendText(append(dst, `,"title":`...), p.Title)
	dst = strconv.AppendInt(append(dst, `,"status":`...), int64(p.Status), 10)
	dst = appendText(append(dst, `,"detail":`...), p.Detail)
	if p.Instance != "" {
		dst = appendText(append(dst, `,"instance":`...), p.Instance)
	}
	if len(p.Errors) > 0 {
		dst = append(dst, `,"errors":[`...)
		for i := range p.Errors {
			if i > 0 {
				dst = append(dst, ',')
			}
			dst = p.Errors[i].AppendJSON(dst)
		}
		dst = append(dst, ']')
	}
	return append(dst, '}')
}
