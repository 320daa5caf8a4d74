package serve

import (
	"bytes"
	"crypto/rand"
	"crypto/sha256"
	"crypto/subtle"
	"encoding/hex"
	"errors"
	"fmt"
	"strings"
)

// mostKeys bounds what a wrong key costs: each is compared with all.
const mostKeys = 1000

// A keyring holds the hashes of callers' keys. It does not change; a changed file makes another one.
type keyring struct{ keys []callerKey }

type callerKey struct {
	hash   [sha256.Size]byte
	caller string
}

// parseKeys reads a keys file: lines of a caller's name and the SHA-256 of a key in hexadecimal digits. A caller may have several lines, so that
// a key can be changed without a gap. Empty lines and lines that begin with # are passed over. The error names every faulty line, never a hash.
func parseKeys(text []byte) (*keyring, error) {
	ring := new(keyring)
	seen := map[[sha256.Size]byte]bool{}
	var mistakes []error
	mistake := func(line int, format string, values ...any) {
		if len(mistakes) < 10 {
			mistakes = append(mistakes, fmt.Errorf("line %d "+format, append([]any{line}, values...)...))
		}
	}
	number := 0
	for raw := range bytes.Lines(text) {
		number++
		fields := strings.Fields(string(raw))
		if len(fields) == 0 || strings.HasPrefix(fields[0], "#") {
			continue
		}
		if len(fields) != 2 {
			mistake(number, "is not a name and a hash with a space between")
			continue
		}
		key := callerKey{caller: fields[0]}
		digits, err := hex.DecodeString(fields[1])
		switch {
		case !isCallerName(key.caller):
			mistake(number, "has a name that is not of up to %d letters, digits, dots, dashes and underscores", longestCallerName)
			continue
		case err != nil || len(digits) != len(key.hash):
			mistake(number, "has no SHA-256 in 64 hexadecimal digits; leat key NAME makes such lines")
			continue
		}
		copy(key.hash[:], digits)
		if seen[key.hash] {
			mistake(number, "has the hash of a line above; each key belongs to one caller, once")
			continue
		}
		seen[key.hash] = true
		ring.keys = append(ring.keys, key)
	}
	switch {
	case len(ring.keys) > mostKeys:
		mistakes = append(mistakes, fmt.Errorf("there are %d keys; at most %d are accepted", len(ring.keys), mostKeys))
	case len(ring.keys) == 0 && mistakes == nil:
		mistakes = append(mistakes, errors.New("there is no key in it, so that nobody could call; leat key NAME makes one"))
	}
	return ring, errors.Join(mistakes...)
}

const longestCallerName = 64

func isCallerName(name string) bool {
	for i := range len(name) {
		switch b := name[i]; {
		case '0' <= b && b <= '9', 'a' <= b && b <= 'z', 'A' <= b && b <= 'Z', b == '-', b == '_', b == '.':
		default:
			return false
		}
	}
	return name != "" && len(name) <= longestCallerName
}

// caller returns whose key it is. Every key takes the same time: all hashes are compared, in constant time each, whether one matched or not.
func (k *keyring) caller(key string) (name string, known bool) {
	hash := sha256.Sum256([]byte(key))
	found := -1
	for i := range k.keys {
		found = subtle.ConstantTimeSelect(subtle.ConstantTimeCompare(hash[:], k.keys[i].hash[:]), i, found)
	}
	if found < 0 {
		return "", false
	}
	return k.keys[found].caller, true
}

// NewKey makes a key for a caller and the line of a keys file that knows it. The key cannot be had from the line: it is 130 random bits, which nobody
// finds by trying, so that a plain hash keeps it.
func NewKey(caller string) (key, line string, err error) {
	if !isCallerName(caller) {
		return "", "", fmt.Errorf("a caller's name has up to %d letters, digits, dots, dashes and underscores", longestCallerName)
	}
	key = "leat_" + rand.Text()
	hash := sha256.Sum256([]byte(key))
	return key, caller + " " + hex.EncodeToString(hash[:]), nil
}
