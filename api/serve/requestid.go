package serve

import (
	"crypto/rand"
	"net/http"
	"strings"
)

const longestRequestID = 128

// requestID takes over the caller's own id where it is harmless in a header, a log and a URN, else makes one.
func requestID(h http.Header) string {
	if ids := h["Request-Id"]; len(ids) == 1 && harmless(ids[0]) {
		return ids[0]
	}
	return rand.Text()
}

func harmless(id string) bool {
	if id == "" || len(id) > longestRequestID {
		return false
	}
	for i := range len(id) {
		switch b := id[i]; {
		case '0' <= b && b <= '9', 'a' <= b && b <= 'z', 'A' <= b && b <= 'Z':
		case b == '-', b == '_', b == '.', b == ':':
		default:
			return false
		}
	}
	return true
}

// traceID returns the trace id of a valid W3C traceparent header (Trace Context, level 1, section 3.2), else nothing.
func traceID(h http.Header) string {
	parents := h["Traceparent"]
	if len(parents) != 1 {
		return ""
	}
	parent := parents[0]
	if len(parent) < 55 || parent[2] != '-' || parent[35] != '-' || parent[52] != '-' {
		return ""
	}
	version, trace, span, flags := parent[:2], parent[3:35], parent[36:52], parent[53:55]
	if !lowerHex(version) || !lowerHex(trace) || !lowerHex(span) || !lowerHex(flags) || version == "ff" {
		return ""
	}
	// Version 00 ends here; a later one may go on after a dash.
	if len(parent) > 55 && (version == "00" || parent[55] != '-') {
		return ""
	}
	if strings.Trim(trace, "0") == "" || strings.Trim(span, "0") == "" {
		return ""
	}
	return trace
}

func lowerHex(s string) bool {
	for i := range len(s) {
		if b := s[i]; (b < '0' || b > '9') && (b < 'a' || b > 'f') {
			return false
		}
	}
	return true
}
