package wire

import (
	"crypto/sha256"
	"encoding/hex"
	"sync"

	"leat/compute"
)

// Traced is the part of an answer that tells which request and which engine it came from.
type Traced struct {
	Fingerprint string // left out where empty
}

// SetFingerprint sets the fingerprint that the answer is told with.
func (t *Traced) SetFingerprint(fingerprint string) { t.Fingerprint = fingerprint }

// fingerprintsOmit are the members at the top of a request that do not stand in its canonical form as they are: the id means
// nothing to the answer, and the units in force are always written.
var fingerprintsOmit = []string{"id", "units"}

var canonicals = sync.Pool{New: func() any { return new(canonical) }}

// Fingerprint returns what a request to an operation and its answer are known by: the lower-case hexadecimal SHA-256 of the operation's
// name, a line feed, compute.EngineVersion, a line feed, and the request in canonical form (RFC 8785) with the units in force
// written, without its id and without nulls. Requests that differ in spacing, in the order of members or in how numbers and
// strings are spelt have the same one. body must be one that Decode or Scan has accepted, system the units then in force.
func Fingerprint(operation string, body []byte, system System) string {
	c := canonicals.Get().(*canonical)
	sum := sha256.Sum256(c.request(operation, body, system))
	c.release()
	canonicals.Put(c)
	var text [2 * sha256.Size]byte
	hex.Encode(text[:], sum[:])
	return string(text[:])
}

// request returns what the fingerprint of a request is the hash of; it is good until the next call.
func (c *canonical) request(operation string, body []byte, system System) []byte {
	c.in, c.at = body, 0
	c.out = append(append(c.out[:0], operation...), '\n')
	c.out = append(append(c.out, compute.EngineVersion...), '\n')
	first, start := c.begin()
	if c.peek() == '{' {
		c.object(fingerprintsOmit)
	}
	at := len(c.out)
	c.out = append(append(append(c.out, `"units":"`...), system.String()...), '"')
	c.add(c.name([]byte(`"units"`)), at)
	c.end(first, start)
	return c.out
}

// keptCanonical is how much room for output a canonical at rest keeps.
const keptCanonical = 64 << 10

// release forgets the body, so that a canonical at rest does not keep it alive.
func (c *canonical) release() {
	c.in, c.at = nil, 0
	c.members, c.names = c.members[:0], c.names[:0]
	if cap(c.out)+cap(c.spare)+cap(c.names) > keptCanonical {
		c.out, c.spare, c.names = nil, nil, nil
	}
}
