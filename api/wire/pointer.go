package wire

import (
	"strconv"
	"strings"
)

// A pointer is a JSON Pointer (RFC 6901) that grows.
type pointer string

var pointerEscapes = strings.NewReplacer("~", "~0", "/", "~1")

// member returns the pointer of a member of the object that p points to.
func (p pointer) member(name string) pointer {
	if strings.ContainsAny(name, "~/") {
		name = pointerEscapes.Replace(name)
	}
	return p + "/" + pointer(name)
}

// MemberPointer returns the JSON Pointer of a member of an object whose own pointer is given.
func MemberPointer(object, member string) string { return string(pointer(object).member(member)) }

// index returns the pointer of an item of the array that p points to.
func (p pointer) index(i int) pointer { return p + "/" + pointer(strconv.Itoa(i)) }

// longestShownName is the length in bytes of the longest unknown member's name that an answer repeats.
const longestShownName = 256
