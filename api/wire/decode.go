package wire

// Decode reads one request object into a struct and checks it: I-JSON first, then every rule that the types' tags and
// their own methods say. units is the system of the call, in force unless the request names one; afterwards all values
// are in SI. On failure it returns the problem (400, 413 or 422) with every fault it found, and into must not be used
// save its ID, which is set wherever the body could be read that far. into is overwritten as a whole.
func Decode(body []byte, units System, limits *Limits, into Request) *Problem {
	return nil
}
