package friction

// UnitCoefficients reports whether a law treats every section as one, so that alpha and beta are 1 at every depth: all laws but
// those that can tell, by a method AsOne, that they do not (zones combined as Divided or Lotter).
func UnitCoefficients(law Law) bool {
	parted, ok := law.(interface{ AsOne() bool })
	return !ok || parted.AsOne()
}
