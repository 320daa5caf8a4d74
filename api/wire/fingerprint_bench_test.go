package wire

import (
	"crypto/sha256"
	"strings"
	"testing"

	"github.com/go-json-experiment/json/jsontext"
)

// fingerprinted are bodies as callers send them.
var fingerprinted = []struct{ name, body string }{
	{"depths", trapezoidDepths},
	{"depths in another order", `{ "discharge" : 4.750, "bed_slope" : 1.2e-3, "roughness" : {"manning" : 0.025}, "section" : {"side_slope" : 1.5, "kind" : "trapezoidal", "bank_height" : 1.80, "bottom_width" : 2.5}, "id" : "A-17"}`},
	{"surveyed", surveyedSection},
	{"profile", drainProfile},
}

func BenchmarkFingerprint(b *testing.B) {
	for _, row := range fingerprinted {
		b.Run(row.name, func(b *testing.B) {
			body := []byte(row.body)
			b.ReportAllocs()
			b.SetBytes(int64(len(body)))
			for b.Loop() {
				Fingerprint("depths", body, SI)
			}
		})
	}
}

// BenchmarkLibraryFingerprint is the yardstick: the JSON library's own canonical form, which keeps id and nulls and adds no units.
func BenchmarkLibraryFingerprint(b *testing.B) {
	for _, row := range fingerprinted {
		b.Run(row.name, func(b *testing.B) {
			body := []byte(row.body)
			var room jsontext.Value
			b.ReportAllocs()
			b.SetBytes(int64(len(body)))
			for b.Loop() {
				room = append(room[:0], body...)
				if err := room.Canonicalize(); err != nil {
					b.Fatal(err)
				}
				sha256.Sum256(room)
			}
		})
	}
}

// BenchmarkHashAlone is what of a fingerprint is the hash.
func BenchmarkHashAlone(b *testing.B) {
	text := []byte(strings.Repeat("x", len(trapezoidDepths)))
	for b.Loop() {
		sha256.Sum256(text)
	}
}
