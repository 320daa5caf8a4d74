package friction

// UnitCoefficients reports whether a law treats every section as one, so that alpha and beta are 1 at every depth: all laws but
// zones combined as Divided or Lotter.
func UnitCoefficients(law Law) bool {
	zones, parted := law.(*Zones)
	return !parted || zones.AsOne()
}
