package wire

// SectionAnswer answers a SectionRequest.
type SectionAnswer struct {
	Traced
	States   []State
	Warnings []Warning
}

// AppendJSON appends the answer in a system of units; id stands in front where it is not nil.
func (a *SectionAnswer) AppendJSON(dst []byte, system System, id ID) []byte {
	dst = appendHead(dst, system, id, a.Fingerprint)
	dst = appendStates(dst, `,"states":`, a.States, system)
	dst = appendWarnings(dst, a.Warnings)
	return append(dst, '}')
}
