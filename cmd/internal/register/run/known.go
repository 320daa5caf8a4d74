package run

import (
	"hash/maphash"

	"leat/cmd/internal/register/row"
	"leat/cmd/internal/register/store"
)

// known are the stored results of a stretch, found by their keys. Its memory is used again.
type known struct {
	byHash  map[uint64]int32 // to the last entry of a hash, from 1
	entries []knownEntry
	memory  row.Memory
	seed    maphash.Seed
}

type knownEntry struct {
	store.Stored
	key    row.Value
	before int32 // another entry of the same hash, from 1; 0 for none
	holds  bool  // its result stays, or is replaced
}

func (k *known) reset() {
	if k.byHash == nil {
		k.byHash, k.seed = map[uint64]int32{}, maphash.MakeSeed()
	}
	clear(k.byHash)
	k.entries = k.entries[:0]
	k.memory.Reset()
}

func (k *known) hash(key row.Value) uint64 {
	if key.Kind == row.Int {
		return uint64(key.Int())
	}
	return maphash.Bytes(k.seed, key.Bytes())
}

// add is told of a stored result.
func (k *known) add(key row.Value, stored store.Stored) {
	hash := k.hash(key)
	k.entries = append(k.entries, knownEntry{Stored: stored, key: k.memory.Keep(key), before: k.byHash[hash]})
	k.byHash[hash] = int32(len(k.entries))
}

// find returns the stored result of a key, nil where there is none.
func (k *known) find(key row.Value) *knownEntry {
	if len(k.entries) == 0 {
		return nil
	}
	for at := k.byHash[k.hash(key)]; at > 0; at = k.entries[at-1].before {
		if k.entries[at-1].key.Equal(key) {
			return &k.entries[at-1]
		}
	}
	return nil
}

func (k *known) keep(e *knownEntry) { e.holds = true }

// replaced says that a key's result is written anew.
func (k *known) replaced(key row.Value) {
	if e := k.find(key); e != nil {
		e.holds = true
	}
}

// gone appends the keys whose results do not hold any more: those of rows that are bad or, where the stretch is a whole one, not there.
func (k *known) gone(dst []row.Value) []row.Value {
	for i := range k.entries {
		if e := &k.entries[i]; !e.holds {
			dst = append(dst, e.key)
		}
	}
	return dst
}
