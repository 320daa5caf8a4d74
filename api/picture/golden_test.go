package picture

import (
	"bufio"
	"bytes"
	"crypto/sha256"
	"encoding/hex"
	"flag"
	"fmt"
	"image/png"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"leat/api/operation"
)

var update = flag.Bool("update", false, "write the golden files anew")

// A sample is a request whose picture is kept in testdata.
type sample struct {
	name string
	op   *operation.Operation
	body []byte
}

// golden are the samples: examples of the contract, and assets and runs of the demo by their ids.
func golden(t testing.TB) []sample {
	t.Helper()
	var out []sample
	for _, name := range []string{
		"section.ditch", "section.egg", "section.geometry", "depths.ditch", "depths.pipe", "depths.surcharged", "depths.surveyed", "depths.two_stage", "depths.us",
		"depths.adverse", "rating.uniform", "rating.critical", "profile.drain", "profile.culvert", "profile.surveyed", "profile.us", "appraisal.ditch", "appraisal.pipe",
		"appraisal.unknown", "appraisal.bend",
	} {
		body, err := os.ReadFile(filepath.Join("..", "..", "openapi", "examples", name+".request.json"))
		if err != nil {
			t.Fatal(err)
		}
		out = append(out, sample{name, operationOf(name), body})
	}
	for _, row := range []struct{ file, name, id string }{
		{"ostermere_profiles", "profile.chute", "MAR-PF-05"}, {"ostermere_profiles", "profile.jump", "SAL-PF-04"},
	} {
		out = append(out, sample{row.name, operationOf(row.name), demo(t, row.file, row.id)})
	}
	return append(out,
		sample{"depths.conjugate", &operation.Depths, []byte(`{"id":"a <b> & \"c\"","section":{"kind":"trapezoidal","bottom_width":2,"left_side_slope":1,"right_side_slope":2.5,"bank_height":1.6},"roughness":{"manning":0.02},"bed_slope":0.0008,"discharge":3,"depth":0.25}`)},
		sample{"depths.zones", &operation.Depths, []byte(`{"section":{"kind":"surveyed","points":[[0,14.1],[6,12.4],[14,12.2],[16,10.2],[19,10.0],[21,12.3],[33,12.6],[36,14.4]]},"roughness":{"zones":[{"until":14,"manning":0.06},{"until":21,"manning":0.03},{"manning":0.08}]},"bed_slope":0.0012,"discharge":38}`)},
		sample{"section.gutter", &operation.Section, []byte(`{"section":{"kind":"gutter","cross_slope":0.02,"curb_height":0.15,"gutter_width":0.6,"gutter_slope":0.08},"depths":[0.05,0.1,0.2]}`)},
	)
}

func operationOf(name string) *operation.Operation {
	for _, op := range operation.All() {
		if strings.HasPrefix(name, op.Name+".") {
			return op
		}
	}
	panic(name)
}

// demo returns a line of the demo's files by its id.
func demo(t testing.TB, file, id string) []byte {
	t.Helper()
	data, err := os.ReadFile(filepath.Join("..", "..", "testdata", file+".ndjson"))
	if err != nil {
		t.Fatal(err)
	}
	lines := bufio.NewScanner(bytes.NewReader(data))
	lines.Buffer(nil, 1<<22)
	for lines.Scan() {
		if bytes.Contains(lines.Bytes(), []byte(`"id":"`+id+`"`)) {
			return bytes.Clone(lines.Bytes())
		}
	}
	t.Fatalf("%s has no %s", file, id)
	return nil
}

// solved solves a sample.
func (s sample) solved(t testing.TB) *operation.Solved {
	t.Helper()
	solved, problem := s.op.Solve(s.body, operation.Options{})
	if problem != nil {
		t.Fatalf("%s: %v", s.name, problem)
	}
	return &solved
}

func (s sample) svg(t testing.TB) []byte {
	t.Helper()
	out, problem := AppendSVG(nil, s.solved(t))
	if problem != nil {
		t.Fatalf("%s: %v", s.name, problem)
	}
	return out
}

// TestGolden holds every byte of the pictures; of PNG their hashes. LEAT_PICTURES names a folder in which both are laid to be looked at.
func TestGolden(t *testing.T) {
	var hashes bytes.Buffer
	folder := os.Getenv("LEAT_PICTURES")
	for _, s := range golden(t) {
		svg := s.svg(t)
		raster, problem := AppendPNG(nil, s.solved(t))
		if problem != nil {
			t.Fatal(problem)
		}
		again, _ := AppendPNG(nil, s.solved(t))
		if !bytes.Equal(raster, again) || !bytes.Equal(svg, s.svg(t)) {
			t.Errorf("%s: the same request gave other bytes", s.name)
		}
		config, err := png.DecodeConfig(bytes.NewReader(raster))
		if err != nil || config.Width != paperWide*perUnit {
			t.Errorf("%s: %v, %d pixels wide", s.name, err, config.Width)
		}
		sum := sha256.Sum256(raster)
		fmt.Fprintf(&hashes, "%s  %s.png\n", hex.EncodeToString(sum[:]), s.name)
		if folder != "" {
			for name, data := range map[string][]byte{s.name + ".svg": svg, s.name + ".png": raster} {
				if err := os.WriteFile(filepath.Join(folder, name), data, 0o644); err != nil {
					t.Fatal(err)
				}
			}
		}
		compare(t, s.name+".svg", svg)
	}
	compare(t, "png.sha256", hashes.Bytes())
}

// compare holds bytes against a golden file, or writes it.
func compare(t *testing.T, name string, got []byte) {
	t.Helper()
	path := filepath.Join("testdata", name)
	if *update {
		if err := os.WriteFile(path, got, 0o644); err != nil {
			t.Fatal(err)
		}
		return
	}
	want, err := os.ReadFile(path)
	if err != nil {
		t.Errorf("%v; write it with -update, and look at it", err)
		return
	}
	if !bytes.Equal(got, want) {
		t.Errorf("%s is not as it was; where that is meant, write it anew with -update, and look at it", path)
	}
}
