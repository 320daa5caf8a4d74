package row

// A Memory holds the bytes of values and is used again after Reset. The zero Memory is ready.
type Memory struct {
	room []byte // older pieces are kept by the values that point into them
}

// leastRoom is the size of the first piece of a memory.
const leastRoom = 16 << 10

// Reset forgets what was copied: the values that were made of it must not be used any more.
func (m *Memory) Reset() { m.room = m.room[:0] }

// Copy returns a copy of bytes that lives until Reset.
func (m *Memory) Copy(b []byte) []byte {
	m.reserve(len(b))
	start := len(m.room)
	m.room = append(m.room, b...)
	return m.room[start:len(m.room):len(m.room)]
}

// Text returns a text with a copy of a string.
func (m *Memory) Text(s string) Value {
	m.reserve(len(s))
	start := len(m.room)
	m.room = append(m.room, s...)
	return OfText(m.room[start:len(m.room):len(m.room)])
}

// Keep copies a value's bytes, if it has any.
func (m *Memory) Keep(v Value) Value {
	if v.bytes != nil {
		v.bytes = m.Copy(v.bytes)
	}
	return v
}

func (m *Memory) reserve(n int) {
	if cap(m.room)-len(m.room) < n {
		m.room = make([]byte, 0, max(2*cap(m.room), n, leastRoom))
	}
}
