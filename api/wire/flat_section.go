package wire

var sectionTable = newFlatTable(
	flatStates("", func(a *SectionAnswer) *State {
		if len(a.States) != 1 {
			return nil
		}
		return &a.States[0]
	}),
	func(a Answer) []Warning { return a.(*SectionAnswer).Warnings },
	func(a Answer) string { return a.(*SectionAnswer).Fingerprint })

// FlatTable has the members of the one state.
func (*SectionAnswer) FlatTable() *FlatTable { return sectionTable }

// FlatAbsent speaks where there are states at several depths.
func (a *SectionAnswer) FlatAbsent() string {
	if len(a.States) == 1 {
		return ""
	}
	return "A flat answer holds one state: give one depth in place of depths, or accept application/json or application/x-ndjson without flat."
}
