package store

import (
	"hash/maphash"
	"slices"

	"leat/cmd/internal/register/row"
)

// shownTwice is how many values that stand twice a KeyFault names.
const shownTwice = 5

// CheckKeys finds keys that are null or stand twice, for files, which have no index to ask. each calls its function with every key, the same each time;
// it is called a second time only where hashes meet. Eight bytes a row are kept.
func CheckKeys(each func(func(row.Value)) error) error {
	seed := maphash.MakeSeed()
	hash := func(v row.Value) uint64 { return maphash.Bytes(seed, v.Append(nil)) }
	var hashes []uint64
	fault := &KeyFault{}
	err := each(func(v row.Value) {
		if v.IsNull() || v.Kind == row.Text && len(v.Bytes()) == 0 {
			fault.Nulls++
			return
		}
		hashes = append(hashes, hash(v))
	})
	switch {
	case err != nil:
		return err
	case fault.Nulls > 0:
		return fault
	}
	slices.Sort(hashes)
	var suspects []uint64
	for i := 1; i < len(hashes); i++ {
		if hashes[i] == hashes[i-1] {
			suspects = append(suspects, hashes[i])
		}
	}
	if suspects == nil {
		return nil
	}
	seen := map[string]int{}
	err = each(func(v row.Value) {
		if _, suspect := slices.BinarySearch(suspects, hash(v)); !suspect || len(fault.Twice) == shownTwice {
			return
		}
		text := v.String()
		if seen[text]++; seen[text] == 2 {
			fault.Twice = append(fault.Twice, text)
		}
	})
	if err != nil || len(fault.Twice) == 0 {
		return err
	}
	return fault
}
