package serve

import (
	"bytes"
	"compress/gzip"
	"fmt"
	"io"
	"math/rand/v2"
	"net/http"
	"strings"
	"testing"

	"github.com/klauspost/compress/zstd"
)

func TestChooseCoding(t *testing.T) {
	for accept, want := range map[string]coding{
		"": identity, "gzip": gzipCoding, "x-gzip": gzipCoding, "GZIP": gzipCoding, "gzip, deflate": gzipCoding, "gzip, deflate, br, zstd": zstdCoding, "gzip;q=1.0, zstd;q=0.5": gzipCoding,
		"*": zstdCoding, "*;q=0": identity, "gzip;q=0": identity, "gzip;q=0, *": zstdCoding, "zstd;q=0, *": gzipCoding, "identity": identity, "br": identity, "deflate, br": identity,
		"gzip;q=2": identity, "gzip;q=NaN": identity, "gzip;x=1": identity, ";;,": identity, "gzip ; q=0.1": gzipCoding, "identity;q=0, gzip;q=0": identity, "zstd;q=0.000": identity,
	} {
		if got := chooseCoding(http.Header{"Accept-Encoding": {accept}}); got != want {
			t.Errorf("%q: %q, want %q", accept, got, want)
		}
	}
	if got := chooseCoding(http.Header{"Accept-Encoding": {"br", "gzip"}}); got != gzipCoding {
		t.Errorf("two headers: %q", got)
	}
}

// decoded undoes a coding by the standard library for gzip, and by a streaming reader with the window bound of RFC 9659 for zstd.
func decoded(t *testing.T, r reply) []byte {
	t.Helper()
	var text []byte
	var err error
	switch coding := r.header.Get("Content-Encoding"); coding {
	case "":
		return r.body
	case "gzip":
		reader, openErr := gzip.NewReader(bytes.NewReader(r.body))
		if openErr != nil {
			t.Fatal(openErr)
		}
		text, err = io.ReadAll(reader)
	case "zstd":
		reader, openErr := zstd.NewReader(bytes.NewReader(r.body), zstd.WithDecoderMaxWindow(8<<20), zstd.WithDecoderConcurrency(1))
		if openErr != nil {
			t.Fatal(openErr)
		}
		defer reader.Close()
		text, err = io.ReadAll(reader)
	default:
		t.Fatalf("Content-Encoding %q", coding)
	}
	if err != nil {
		t.Fatal(err)
	}
	return text
}

func TestCodedAnswersAreTheSame(t *testing.T) {
	r := start(t, nil)
	for _, size := range []int{0, 900, 5000, 3 << 20} {
		body := fmt.Sprintf(`{"bytes":%d}`, size)
		plain := r.send("POST", "/v1/depths", body, "Content-Type", jsonHeader)
		if plain.header.Get("Content-Encoding") != "" {
			t.Error("coded unasked")
		}
		for _, accept := range []string{"gzip", "zstd", "br"} {
			got := r.send("POST", "/v1/depths", body, "Content-Type", jsonHeader, "Accept-Encoding", accept)
			if coded := got.header.Get("Content-Encoding"); size > leastCoded && accept != "br" && (coded != accept || len(got.body) > size/2) || size < 900 && coded != "" {
				t.Errorf("%s of %d bytes: %q, %d bytes", accept, size, coded, len(got.body))
			}
			if !bytes.Equal(decoded(t, got), plain.body) {
				t.Errorf("%s of %d bytes is another answer", accept, size)
			}
			if size > leastCoded && got.header.Get("Vary") != "Accept-Encoding" {
				t.Errorf("Vary %q", got.header.Get("Vary"))
			}
		}
	}
}

func TestCodedDocuments(t *testing.T) {
	r := start(t, nil)
	plain := r.send("GET", "/v1/units", "")
	tags := map[string]bool{plain.header.Get("Etag"): true}
	for _, accept := range []string{"gzip", "zstd"} {
		got := r.send("GET", "/v1/units", "", "Accept-Encoding", accept)
		if got.header.Get("Content-Encoding") != accept || !bytes.Equal(decoded(t, got), plain.body) {
			t.Errorf("%s: %v", accept, got.header)
		}
		tag := got.header.Get("Etag")
		tags[tag] = true
		if again := r.send("GET", "/v1/units", "", "Accept-Encoding", accept, "If-None-Match", tag); again.status != 304 || again.header.Get("Etag") != tag || again.header.Get("Content-Encoding") != "" {
			t.Errorf("%s again: %d %v", accept, again.status, again.header)
		}
		if again := r.send("GET", "/v1/units", "", "If-None-Match", tag); again.status != 200 {
			t.Errorf("the tag of %s stands for the plain bytes too: %d", accept, again.status)
		}
		head := r.send("HEAD", "/v1/units", "", "Accept-Encoding", accept)
		if head.header.Get("Content-Length") != got.header.Get("Content-Length") || head.header.Get("Etag") != tag {
			t.Errorf("HEAD %s: %v", accept, head.header)
		}
	}
	if len(tags) != 3 {
		t.Errorf("tags %v: three different texts need three", tags)
	}
}

// A compressed body is refused with advice, whatever it would become.
func TestCodedRequestsAreRefused(t *testing.T) {
	r := start(t, nil)
	var bomb bytes.Buffer
	w := gzip.NewWriter(&bomb)
	w.Write(make([]byte, 10<<20))
	w.Close()
	for _, target := range []string{"/v1/depths", "/v1/bulk/depths"} {
		media := jsonHeader
		for _, coding := range []string{"gzip", "zstd", "br", "gzip, gzip"} {
			got := r.send("POST", target, bomb.String(), "Content-Type", media, "Content-Encoding", coding)
			if p := got.problem(t, 415); !strings.Contains(p.Detail, "as it is") || got.header.Get("Accept-Encoding") != "identity" {
				t.Errorf("%s %s: %s %v", target, coding, p.Detail, got.header)
			}
		}
	}
}

// Bulk is sent as it is, asked or not: its lines go out while others still come in, and its hash is of the bytes on the wire.
func TestBulkIsNotCoded(t *testing.T) {
	r := start(t, nil)
	got := r.send("POST", "/v1/bulk/depths", strings.Repeat("{}\n", 100), "Content-Type", "application/x-ndjson", "Accept-Encoding", "gzip, zstd")
	if got.status != 200 || got.header.Get("Content-Encoding") != "" || !bytes.Contains(got.body, []byte(`{"end":true,"lines":100`)) {
		t.Errorf("%d %v", got.status, got.header)
	}
}

func BenchmarkCoding(b *testing.B) {
	// States as they are told: the same names again and again, numbers of sixteen digits.
	var body []byte
	random := rand.New(rand.NewPCG(1, 2))
	for len(body) < 64<<10 {
		body = fmt.Appendf(body, `{"depth":%v,"area":%v,"wetted_perimeter":%v,"hydraulic_radius":%v,"top_width":%v},`, random.Float64(), random.Float64(), random.Float64(), random.Float64(), random.Float64())
	}
	for _, c := range []coding{gzipCoding, zstdCoding} {
		b.Run(string(c), func(b *testing.B) {
			b.SetBytes(int64(len(body)))
			b.ReportAllocs()
			var dst []byte
			for b.Loop() {
				dst = c.encode(dst[:0], body)
			}
			b.ReportMetric(float64(len(body))/float64(len(dst)), "ratio")
		})
	}
	b.Run("gzip of the standard library", func(b *testing.B) {
		b.SetBytes(int64(len(body)))
		w, err := gzip.NewWriterLevel(nil, gzip.BestSpeed)
		if err != nil {
			b.Fatal(err)
		}
		var dst bytes.Buffer
		for b.Loop() {
			dst.Reset()
			w.Reset(&dst)
			w.Write(body)
			w.Close()
		}
		b.ReportMetric(float64(len(body))/float64(dst.Len()), "ratio")
	})
}
