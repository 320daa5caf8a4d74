package wire

// Pair is a list of exactly two numbers that a request may leave out.
type Pair struct {
	Values [2]float64
	Given  bool
}

// NamedNumber is a member, with a name of the caller's, of an object of numbers; a list of them is such an object, in the order of the request.
type NamedNumber struct {
	Name  string
	Value float64
}

// Raw is any JSON value as it stood in the request: a part of the body that was decoded. Nil where none was given.
type Raw []byte

// MaxNameCharacters is the length of the longest name or text of the caller's.
const MaxNameCharacters = 256
