package wire

// Kinds returns the kinds of cross-section.
func Kinds() []Kind {
	return []Kind{Rectangular, Trapezoidal, Triangular, Parabolic, UShaped, Circular, Box, Elliptical, Egg, Horseshoe, Gutter, TwoStage, Surveyed, Tabulated}
}

// SeveralKinds stands for the kind of a profile's sections where they are not of one.
const SeveralKinds Kind = "several"

// SectionKind is the kind of the request's section.
func (r *SectionRequest) SectionKind() Kind { return r.Section.Kind }

// SectionKind is the kind of the request's section.
func (r *DepthsRequest) SectionKind() Kind { return r.Section.Kind }

// SectionKind is the kind of the request's section.
func (r *RatingRequest) SectionKind() Kind { return r.Section.Kind }

// SectionKind is the kind of the request's section.
func (r *AppraisalRequest) SectionKind() Kind { return r.Section.Kind }

// SectionKind is the kind of all sections of the run, or SeveralKinds.
func (r *ProfileRequest) SectionKind() (kind Kind) {
	for i := range r.Reaches {
		if kind = together(kind, r.Reaches[i].Section.Kind); kind == SeveralKinds {
			return kind
		}
	}
	for i := range r.Stations {
		if kind = together(kind, r.Stations[i].Section.Kind); kind == SeveralKinds {
			return kind
		}
	}
	return kind
}

// together is the kind of sections of which some are known to be of one kind ("" for none yet) and another is of its own.
func together(known, next Kind) Kind {
	if known == "" || known == next {
		return next
	}
	return SeveralKinds
}
