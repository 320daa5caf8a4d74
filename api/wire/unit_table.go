package wire

import (
	"cmp"
	"slices"
	"strconv"
)

// A MemberUnit tells in which unit a member of requests or answers stands in each system.
type MemberUnit struct {
	Member   string
	Column   int // of a list of tuples, from 0; -1 for a member that is no such list
	Quantity Quantity
}

// MemberUnits lists every member that is a number or a list of them, by name and column.
func MemberUnits() []MemberUnit { return slices.Clone(memberUnits) }

var memberUnits = collectMemberUnits()

func collectMemberUnits() []MemberUnit {
	var all []MemberUnit
	for _, p := range plans {
		for i := range p.fields {
			switch f := &p.fields[i]; f.shape {
			case shapeNumber, shapeNumbers, shapeWhole, shapeNamed, shapePositions:
				all = append(all, MemberUnit{f.name, -1, f.quantity[0]})
			case shapePairs, shapePair, shapeRows:
				for column, q := range f.quantity {
					all = append(all, MemberUnit{f.name, column, q})
				}
			}
		}
	}
	for _, m := range answerMembers {
		all = append(all, MemberUnit{m.name, -1, m.quantity})
	}
	slices.SortFunc(all, func(a, b MemberUnit) int {
		return cmp.Or(cmp.Compare(a.Member, b.Member), cmp.Compare(a.Column, b.Column), cmp.Compare(a.Quantity, b.Quantity))
	})
	return slices.Compact(all)
}

// AppendUnits appends the answer of GET /v1/units: for each member what it measures and its unit in each system, as people write
// it and as a UCUM code; null where UCUM has none, which knows whole powers only.
func AppendUnits(dst []byte) []byte {
	dst = append(dst, `{"members":[`...)
	for i, m := range memberUnits {
		if i > 0 {
			dst = append(dst, ',')
		}
		dst = appendText(append(dst, `{"name":`...), m.Member)
		if m.Column >= 0 {
			dst = strconv.AppendInt(append(dst, `,"column":`...), int64(m.Column), 10)
		}
		dst = appendText(append(dst, `,"quantity":`...), m.Quantity.String())
		dst = appendUnit(append(dst, `,"si":`...), SI, m.Quantity)
		dst = appendUnit(append(dst, `,"us":`...), US, m.Quantity)
		dst = append(dst, '}')
	}
	return append(dst, "]}"...)
}

func appendUnit(dst []byte, system System, q Quantity) []byte {
	dst = appendText(append(dst, `{"unit":`...), system.Unit(q))
	dst = appendName(dst, `,"ucum":`, system.UCUM(q))
	return append(dst, '}')
}
