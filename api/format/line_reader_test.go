package format

import (
	"bytes"
	"errors"
	"io"
	"slices"
	"strings"
	"testing"
	"testing/iotest"

	"pgregory.net/rapid"

	"leat/api/stream"
)

// A found is what a LineReader says of one line.
type found struct {
	line     int64
	text     string
	overlong bool
}

// expected finds the lines of a whole body in the plainest way.
func expected(body string, limit int) (lines []found, position int64) {
	pieces := strings.Split(body, "\n")
	if pieces[len(pieces)-1] == "" {
		pieces = pieces[:len(pieces)-1]
	}
	for i, text := range pieces {
		text = strings.TrimSuffix(text, "\r")
		switch {
		case len(text) > limit:
			lines = append(lines, found{line: int64(i + 1), overlong: true})
		case strings.Trim(text, " \t\r") != "":
			lines = append(lines, found{line: int64(i + 1), text: text})
		}
	}
	return lines, int64(len(pieces) + 1)
}

// readAll reads all lines, asking Ready before each as whim has it.
func readAll(r *LineReader, whim func() bool) (lines []found, err error) {
	dst := []byte("before")
	for {
		if whim() {
			r.Ready()
		}
		out, line, err := r.Next(dst)
		var overlong *stream.Overlong
		switch {
		case errors.As(err, &overlong):
			lines = append(lines, found{line: line, overlong: true})
		case err != nil:
			return lines, err
		default:
			lines = append(lines, found{line: line, text: string(out[len(dst):])})
		}
		if err != nil && len(out) != len(dst) || string(out[:len(dst)]) != "before" {
			return lines, errors.New("dst is not as it was")
		}
		if r.Position() <= line {
			return lines, errors.New("the position is not after the line")
		}
	}
}

// pieces reads a body in pieces of the given sizes, over and over.
type pieces struct {
	body  io.Reader
	sizes []int
	at    int
}

func (p *pieces) Read(b []byte) (int, error) {
	n := p.sizes[p.at%len(p.sizes)]
	p.at++
	return p.body.Read(b[:min(n, len(b))])
}

func TestLinesOfAnyBodyInAnyPieces(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		limit := rapid.IntRange(1, 40).Draw(t, "limit")
		texts := []*rapid.Generator[string]{
			rapid.StringMatching(`[a-z{}" ]{0,45}`),
			rapid.StringMatching(`[ \t\r]{0,45}`),
			rapid.Just("\ufeff{}"),
			rapid.Just(""),
			rapid.Map(rapid.IntRange(-2, 2), func(d int) string { return strings.Repeat("x", max(0, limit+d)) }),
			rapid.Map(rapid.IntRange(-2, 2), func(d int) string { return strings.Repeat(" ", max(0, limit+d)) }),
		}
		var body strings.Builder
		for i, n := 0, rapid.IntRange(0, 30).Draw(t, "lines"); i < n; i++ {
			body.WriteString(rapid.OneOf(texts...).Draw(t, "text"))
			if i < n-1 || rapid.Bool().Draw(t, "last ends") {
				body.WriteString(rapid.SampledFrom([]string{"\n", "\r\n"}).Draw(t, "end"))
			}
		}
		want, position := expected(body.String(), limit)
		r := NewLineReader(&pieces{body: strings.NewReader(body.String()), sizes: rapid.SliceOfN(rapid.IntRange(0, 20), 1, 5).Filter(func(s []int) bool { return slices.Max(s) > 0 }).Draw(t, "pieces")}, limit)
		got, err := readAll(r, func() bool { return rapid.Bool().Draw(t, "ask") })
		if err != io.EOF {
			t.Fatalf("error %v", err)
		}
		if !slices.Equal(got, want) {
			t.Fatalf("body %q\ngot  %v\nwant %v", body.String(), got, want)
		}
		if r.Position() != position {
			t.Fatalf("body %q: position %d, want %d", body.String(), r.Position(), position)
		}
	})
}

// Lines longer than the buffer, kept and not kept.
func TestLinesLongerThanTheBuffer(t *testing.T) {
	const limit = 3 * readBytes
	body := strings.Repeat("a", limit) + "\r\n" + strings.Repeat("b", limit+1) + "\n" + strings.Repeat("c", 20*readBytes) + "\nd\n"
	for name, r := range map[string]io.Reader{"whole": strings.NewReader(body), "halves": iotest.HalfReader(strings.NewReader(body))} {
		got, err := readAll(NewLineReader(r, limit), func() bool { return true })
		want, _ := expected(body, limit)
		if err != io.EOF || !slices.Equal(got, want) || len(want) != 4 || !want[1].overlong || !want[2].overlong {
			t.Errorf("%s: %d lines, error %v", name, len(got), err)
		}
	}
}

// An overlong line's bytes are never held: neither in the reader nor in the caller's buffer.
func TestOverlongLinesAreNotKept(t *testing.T) {
	r := NewLineReader(io.MultiReader(io.LimitReader(endless{}, 100<<20), strings.NewReader("\nnext\n")), 1000)
	dst := make([]byte, 0, 2000)
	dst, line, err := r.Next(dst)
	var overlong *stream.Overlong
	if !errors.As(err, &overlong) || overlong.Limit != 1000 || line != 1 || len(dst) != 0 || cap(dst) != 2000 {
		t.Fatalf("line %d, %d bytes of %d, error %v", line, len(dst), cap(dst), err)
	}
	dst, line, err = r.Next(dst)
	if err != nil || line != 2 || string(dst) != "next" {
		t.Fatalf("line %d %q, error %v", line, dst, err)
	}
}

type endless struct{}

func (endless) Read(p []byte) (int, error) {
	for i := range p {
		p[i] = 'x'
	}
	return len(p), nil
}

// Ready is true only where Next does not read the body again.
func TestReadyMeansNoWaiting(t *testing.T) {
	body := &scripted{reads: []string{"one\n\n  \n", "\r\n\ntwo\nthree\nfo", "ur\n", ""}}
	r := NewLineReader(body, 100)
	ready := func(want bool, text string) {
		t.Helper()
		if got := r.Ready(); got != want {
			t.Fatalf("before %q: ready is %t", text, got)
		}
		before := body.at
		b, _, err := r.Next(nil)
		if string(b) != text || (err != nil) != (text == "") {
			t.Fatalf("got %q, error %v; want %q", b, err, text)
		}
		if want && body.at != before {
			t.Fatalf("before %q: ready, but the body was read", text)
		}
	}
	ready(false, "one")
	ready(false, "two") // only blank lines are at hand
	ready(true, "three")
	ready(false, "four")
	ready(false, "")
	ready(true, "") // the end is at hand
}

// scripted gives one string a read, then the end.
type scripted struct {
	reads []string
	at    int
}

func (s *scripted) Read(p []byte) (int, error) {
	if s.at >= len(s.reads) {
		return 0, io.EOF
	}
	n := copy(p, s.reads[s.at])
	s.at++
	return n, nil
}

func TestABodyThatFails(t *testing.T) {
	broken := errors.New("broken")
	r := NewLineReader(io.MultiReader(strings.NewReader("one\ntwo\nthr"), iotest.ErrReader(broken)), 100)
	got, err := readAll(r, func() bool { return false })
	if err != broken || len(got) != 2 || r.Position() != 3 {
		t.Fatalf("%v, error %v, position %d", got, err, r.Position())
	}
	if !r.Ready() {
		t.Error("the error is not at hand")
	}
	if _, _, err := NewLineReader(&pieces{body: strings.NewReader("x"), sizes: []int{0}}, 100).Next(nil); err == nil {
		t.Error("a body that gives nothing for ever is no error")
	}
}

func TestReadingLinesAllocatesNothing(t *testing.T) {
	line := []byte(`{"section":{"kind":"rectangular","bottom_width":2}}` + "\r\n\n")
	body := bytes.NewReader(bytes.Repeat(line, 2000))
	r := NewLineReader(body, 1<<20)
	dst := make([]byte, 0, 1000)
	if n := testing.AllocsPerRun(1000, func() {
		r.Ready()
		if _, _, err := r.Next(dst); err != nil {
			t.Fatal(err)
		}
	}); n > 0 {
		t.Errorf("%v allocations a line", n)
	}
}
