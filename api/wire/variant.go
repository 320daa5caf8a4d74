package wire

// A varied struct is a union: after decoding, it says which variant it is.
type varied interface {
	// variant returns the kind or law that the members given make, empty where they make none.
	variant() string
}

func (s *Section) variant() string { return string(s.Kind) }

// variant sets the law by the first member that names one, and the law's way of combining.
func (r *Roughness) variant() string {
	switch {
	case r.Manning.Given:
		r.Law = Manning
	case r.Strickler.Given:
		r.Law = Strickler
	case r.Chezy.Given:
		r.Law = Chezy
	case r.SandRoughness.Given:
		r.Law = SandRoughness
	case r.Zones != nil:
		r.Law = Zones
	case r.ManningByDepth != nil:
		r.Law = ManningByDepth
	case r.Bed.Given || r.Sides.Given:
		r.Law = BedAndSides
	}
	return string(r.Law)
}
