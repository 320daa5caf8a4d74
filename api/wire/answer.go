package wire

// An Answer is what an operation makes of a request, in SI units. Its further methods, if any, say in which forms beside JSON it can be told.
type Answer interface {
	// AppendJSON appends the answer as an object in a system of units; id stands in front where it is not nil.
	AppendJSON(dst []byte, system System, id ID) []byte
	// SetFingerprint sets the fingerprint that the answer is told with: see Traced.
	SetFingerprint(fingerprint string)
	// NonFinite says in words what of the answer should be a number and is infinite or NaN; empty where nothing is.
	NonFinite() string
}
