package format

import (
	"fmt"
	"io"
	"runtime"
	"strings"
	"testing"

	"leat/api/operation"
	"leat/api/stream"
)

// A repeated body is a head, n times a record with its number, and a tail, made while it is read.
type repeated struct {
	head, record, tail string
	n, done            int
	rest               []byte
}

func (r *repeated) Read(p []byte) (int, error) {
	for len(r.rest) == 0 {
		switch {
		case r.head != "":
			r.rest, r.head = []byte(r.head), ""
		case r.done < r.n:
			r.done++
			r.rest = fmt.Appendf(r.rest[:0], r.record, r.done)
		case r.tail != "":
			r.rest, r.tail = []byte(r.tail), ""
		default:
			return 0, io.EOF
		}
	}
	n := copy(p, r.rest)
	r.rest = r.rest[n:]
	return n, nil
}

// A heapWatch is an output that notes the largest live heap it sees.
type heapWatch struct{ bytes, next, most uint64 }

func (h *heapWatch) Write(p []byte) (int, error) {
	if h.bytes += uint64(len(p)); h.bytes >= h.next {
		h.next = h.bytes + 4<<20
		runtime.GC()
		var m runtime.MemStats
		runtime.ReadMemStats(&m)
		h.most = max(h.most, m.HeapAlloc)
	}
	return len(p), nil
}

// Memory does not grow with the number of records, in any kind.
func TestMemoryDoesNotGrowWithRecords(t *testing.T) {
	const row = `"section_kind":"circular","section_diameter":0.9,"roughness_manning":0.013,"bed_slope":0.01,"discharge":0.4`
	for _, c := range []struct {
		kind               Kind
		head, record, tail string
	}{
		{NDJSON, "", `{"id":%d,` + row + "}\n", ""},
		{JSONArray, "[", `{"id":%d,` + row + "},", "{}]"},
		{GeoJSON, `{"type":"FeatureCollection","features":[`, `{"type":"Feature","id":%d,"geometry":null,"properties":{` + row + "}},", "{}]}"},
		{CSV, "id,section_kind,section_diameter,roughness_manning,bed_slope,discharge\n", "%d,circular,0.9,0.013,0.01,0.4\n", ""},
	} {
		most := func(n int) uint64 {
			b := newBulk(t, &operation.Depths, operation.Options{}, Choice{In: c.kind, Out: c.kind, Flat: true}, 1<<20)
			run := b.Open(&repeated{head: c.head, record: c.record, tail: c.tail, n: n})
			var out heapWatch
			p := stream.Pump{Reader: run.Reader, Writer: run.Writer, Solver: run.Solver, Output: &out}
			if s, err := p.Run(t.Context()); err != nil || s.Lines-s.Problems != int64(n) {
				t.Fatalf("%+v %v", s, err)
			}
			return out.most
		}
		few, many := most(2_000/share), most(40_000/share)
		if many > few+few/2+2<<20 {
			t.Errorf("%s: %d bytes of heap, %d for twenty times as many records", c.kind.MediaType(), few, many)
		}
		t.Logf("%s: %d KiB, %d KiB for twenty times as many records", c.kind.MediaType(), few>>10, many>>10)
	}
}

// BenchmarkKinds answers records of one kind, flat, by the operation depths; NDJSON nested is what to compare with.
func BenchmarkKinds(b *testing.B) {
	rows := registerRows(b, 5000)
	all := bodies(b, rows, "")
	for _, c := range []struct {
		name string
		choice
	}{
		{"NDJSON", choice{}}, {"flat NDJSON", choice{In: NDJSON, Out: NDJSON, Flat: true}}, {"array", choice{In: JSONArray, Out: JSONArray}},
		{"flat features", choice{In: GeoJSON, Out: GeoJSON}}, {"CSV", choice{In: CSV, Out: CSV}},
	} {
		b.Run(strings.ReplaceAll(c.name, " ", "_"), func(b *testing.B) {
			form := newBulk(b, &operation.Depths, operation.Options{Brief: true}, Choice(c.choice), 1<<20)
			for b.Loop() {
				run := form.Open(strings.NewReader(all[c.name]))
				p := stream.Pump{Reader: run.Reader, Writer: run.Writer, Solver: run.Solver, Output: nowhere{}}
				if s, err := p.Run(b.Context()); err != nil || s.Lines != int64(len(rows)) {
					b.Fatalf("%+v, %v", s, err)
				}
			}
			b.ReportMetric(float64(len(rows))*float64(b.N)/b.Elapsed().Seconds(), "records/s")
		})
	}
}

type choice Choice
