package wire

import (
	"runtime"
	"strings"
	"testing"
	"time"
)

// amplifiers are bodies of 1 MiB that cost an ordinary decoder many times what their length suggests, in time or in memory.
func amplifiers() map[string]string {
	const size = 1 << 20
	fill := func(head, item, tail string) string {
		return head + strings.TrimSuffix(strings.Repeat(item, (size-len(head)-len(tail))/len(item)), ",") + tail
	}
	const section = `{"section":{"kind":"circular","diameter":1},"depths":[`
	manyNames := func() string {
		var b strings.Builder
		b.WriteString(`{"a":1`)
		for i := 0; b.Len() < size; i++ {
			b.WriteString(`,"`)
			for n := i; n > 0; n /= 26 {
				b.WriteByte(byte('b' + n%26))
			}
			b.WriteString(`x":1`)
		}
		return b.String() + "}"
	}
	return map[string]string{
		"ordinary numbers":        fill(section, "12.345,", "]}"),
		"zeros":                   fill(section, "0,", "]}"),
		"least normal numbers":    fill(section, "2.2250738585072011e-308,", "]}"),
		"subnormal numbers":       fill(section, "1.1e-310,", "]}"),
		"halfway numbers":         fill(section, "9007199254740993,", "]}"),
		"halfway small numbers":   fill(section, "9007199254740993e-60,", "]}"),
		"objects in a list":       fill(`{"section":`+`[`, "{},", "]}"),
		"opening brackets":        strings.Repeat("[", size),
		"opening objects":         strings.Repeat(`{"a":`, size/5),
		"digits":                  strings.Repeat("7", size),
		"digits of an exponent":   "1e" + strings.Repeat("7", size),
		"the same unknown member": fill(`{`, `"nonsense":1,`, "}"),
		"unknown members":         manyNames(),
		"one long name":           `{"` + strings.Repeat("x", size) + `":1}`,
		"one long escaped name":   `{"` + strings.Repeat(`\u0041`, size/6) + `":1}`,
		"one long string":         `{"section":"` + strings.Repeat(`\n`, size/2) + `"}`,
		"one long id":             `{"id":"` + strings.Repeat(`\ud83c\udf0a`, size/12) + `"}`,
		"one long kind":           `{"section":{"kind":"` + strings.Repeat("x", size) + `"}}`,
		"spaces":                  strings.Repeat(" ", size),
		"lists within the limit":  fill(`{"a":[`, "["+strings.TrimSuffix(strings.Repeat("0,", 9000), ",")+"],", "]}"),
		"points within the limit": `{"section":{"kind":"surveyed","points":[` + strings.TrimSuffix(strings.Repeat("[1.7976931348623157e-99,9007199254740993e-60],", 10_000), ",") + `]},"depth":1}`,
	}
}

// TestAmplifiers bounds what such bodies cost. The time allowed is far more than it takes, as machines that run tests are busy;
// BenchmarkAmplifiers tells the time itself.
func TestAmplifiers(t *testing.T) {
	limits := DefaultLimits()
	for name, body := range amplifiers() {
		data := []byte(body)
		var r SectionRequest
		Decode([]byte(trapezoidDepths), SI, &limits, &r)
		var before, after runtime.MemStats
		runtime.ReadMemStats(&before)
		start := time.Now()
		p := Decode(data, SI, &limits, &r)
		took := time.Since(start)
		runtime.ReadMemStats(&after)
		if p == nil && name != "points within the limit" {
			t.Errorf("%s: accepted", name)
		}
		if allocated := after.TotalAlloc - before.TotalAlloc; allocated > 16<<20 {
			t.Errorf("%s: %d MiB allocated", name, allocated>>20)
		}
		if took > time.Second {
			t.Errorf("%s: took %v", name, took)
		}
		if p != nil {
			if text := p.AppendJSON(nil); len(text) > 1<<16 {
				t.Errorf("%s: the answer has %d bytes", name, len(text))
			}
		}
	}
}

func BenchmarkAmplifiers(b *testing.B) {
	limits := DefaultLimits()
	for name, body := range amplifiers() {
		b.Run(name, func(b *testing.B) {
			data := []byte(body)
			b.ReportAllocs()
			for b.Loop() {
				var r SectionRequest
				Decode(data, SI, &limits, &r)
			}
		})
	}
}
