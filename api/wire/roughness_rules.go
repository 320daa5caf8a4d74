package wire

// rules judges that there is one law, which variant has found, and what its parts need; it sets the default combination.
func (r *Roughness) rules(w *walk) {
	switch r.Law {
	case "":
		w.fault(codeMissingMember, func() string {
			return "A friction law is missing: give one of manning, strickler, chezy, sand_roughness, zones, manning_by_depth, or bed and sides."
		})
	case Zones:
		for i := range r.Zones {
			last := i == len(r.Zones)-1
			if r.Zones[i].Until.Given != last {
				continue
			}
			at := w.enter("zones")
			w.enterItem(i)
			if last {
				w.faultAt("until", codeForeignMember, func() string { return "The last zone goes on to the end of the section: leave until out." })
			} else {
				w.faultAt("until", codeMissingMember, func() string { return "until is missing: every zone but the last needs the offset at which it ends." })
			}
			w.leave(at)
		}
		if r.Combine == "" {
			r.Combine = Divided
		}
	case BedAndSides:
		switch r.Combine {
		case "":
			r.Combine = HortonEinstein
		case Divided, Lotter:
			w.faultAt("combine", codeUnknownValue, func() string {
				return `combine must be "horton_einstein" or "pavlovskii" for bed and sides; "divided" and "lotter" are for zones.`
			})
		}
	}
}

// fits judges whether a section has the parts that the law speaks of. w reads the object that holds both.
func (r *Roughness) fits(w *walk, s *Section) {
	var member string
	var kinds []Kind
	switch r.Law {
	case Zones:
		member, kinds = "zones", []Kind{Surveyed, TwoStage}
	case BedAndSides:
		member, kinds = "bed", []Kind{Rectangular, Trapezoidal, Box, TwoStage}
	default:
		return
	}
	if s.Kind == "" {
		return
	}
	for _, kind := range kinds {
		if s.Kind == kind {
			return
		}
	}
	at := w.enter("roughness")
	w.faultAt(member, codeForeignMember, func() string {
		names := make([]string, len(kinds))
		for i, kind := range kinds {
			names[i] = string(kind)
		}
		return variantText(string(r.Law)) + " is for sections of kind " + list(names, "and") + ", not for " + string(s.Kind) + "."
	})
	w.leave(at)
}
