package wire

import "strconv"

// summary returns what stands for all faults: the first, with where it is and how many others there are.
func summary(faults []Fault) string {
	if len(faults) == 0 {
		return ""
	}
	first := faults[0].Where() + faults[0].Detail
	switch n := len(faults) - 1; n {
	case 0:
		return first
	case 1:
		return first + " There is 1 other fault."
	default:
		return first + " There are " + strconv.Itoa(n) + " other faults."
	}
}
