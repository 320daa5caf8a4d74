package wire

// A nameIndex finds a name among a few by its length and then one by one. Decoding by it takes about 5 % less time than by a map.
type nameIndex [][]named

type named struct {
	name  string
	value int
}

// add puts a name in; it must be new.
func (x *nameIndex) add(name string, value int) {
	for len(*x) <= len(name) {
		*x = append(*x, nil)
	}
	(*x)[len(name)] = append((*x)[len(name)], named{name, value})
}

// find returns the value of a name.
func find[T string | []byte](x nameIndex, name T) (value int, found bool) {
	if len(name) >= len(x) {
		return 0, false
	}
	for i := range x[len(name)] {
		if n := &x[len(name)][i]; n.name == string(name) {
			return n.value, true
		}
	}
	return 0, false
}
