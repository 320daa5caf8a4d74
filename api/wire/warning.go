package wire

// Warning is something a caller should know about an answer; it is never an error.
type Warning struct {
	Code    string
	Detail  string
	Pointer string // of the request member concerned, or empty
}

// AppendJSON appends the warning as an object; an empty pointer is left out.
func (w *Warning) AppendJSON(dst []byte) []byte {
	dst = appendText(append(dst, `{"code":`...), w.Code)
	dst = appendText(append(dst, `,"detail":`...), w.Detail)
	if w.Pointer != "" {
		dst = appendText(append(dst, `,"pointer":`...), w.Pointer)
	}
	return append(dst, '}')
}

// appendWarnings appends the member warnings, an empty list where there are none.
func appendWarnings(dst []byte, warnings []Warning) []byte {
	dst = append(dst, `,"warnings":[`...)
	for i := range warnings {
		if i > 0 {
			dst = append(dst, ',')
		}
		dst = warnings[i].AppendJSON(dst)
	}
	return append(dst, ']')
}
