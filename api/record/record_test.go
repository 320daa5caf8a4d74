package record

import (
	"bytes"
	"crypto/sha256"
	"encoding/base64"
	"encoding/json"
	"encoding/xml"
	"flag"
	"io"
	"math"
	"os"
	"path/filepath"
	"regexp"
	"strconv"
	"strings"
	"testing"

	"leat/api/operation"
	"leat/api/wire"
)

var update = flag.Bool("update", false, "write the golden files anew")

// written solves a request and writes its record.
func written(t testing.TB, op *operation.Operation, body []byte) (page []byte, answer []byte) {
	t.Helper()
	solved, problem := op.Solve(body, operation.Options{Fingerprint: true})
	if problem != nil {
		t.Fatal(problem)
	}
	page, problem = Renderings(op)[0].Append([]byte("kept"), &solved)
	if problem != nil {
		t.Fatal(problem)
	}
	page, kept := bytes.CutPrefix(page, []byte("kept"))
	if !kept {
		t.Fatal("what stood in the buffer is gone")
	}
	return page, solved.AppendJSON(nil, true)
}

// examples are the requests of the contract's examples for an operation, by file name.
func examples(t testing.TB, op *operation.Operation) []string {
	t.Helper()
	names, err := filepath.Glob(filepath.Join("..", "..", "openapi", "examples", op.Name+".*.request.json"))
	if err != nil || len(names) == 0 {
		t.Fatal(op.Name, err)
	}
	return names
}

// TestGolden holds every byte of one record an operation.
func TestGolden(t *testing.T) {
	for _, name := range []string{"section.ditch", "depths.pipe", "rating.uniform", "profile.drain", "appraisal.ditch"} {
		op := operationOf(t, name)
		body, err := os.ReadFile(filepath.Join("..", "..", "openapi", "examples", name+".request.json"))
		if err != nil {
			t.Fatal(err)
		}
		got, _ := written(t, op, body)
		file := filepath.Join("testdata", name+".html")
		if *update {
			if err := os.WriteFile(file, got, 0o644); err != nil {
				t.Fatal(err)
			}
			continue
		}
		if want, err := os.ReadFile(file); err != nil || !bytes.Equal(got, want) {
			t.Errorf("%s is not as it was (%v); where that is meant, write it anew with -update, and look at it", file, err)
		}
	}
}

func operationOf(t testing.TB, name string) *operation.Operation {
	t.Helper()
	for _, op := range operation.All() {
		if strings.HasPrefix(name, op.Name+".") {
			return op
		}
	}
	t.Fatal(name)
	return nil
}

var exact = regexp.MustCompile(`<data value="([^"]*)">([^<]*)</data>`)

// TestRecordsTellTheAnswer holds that each record is well-formed, the same twice, without script or anything from outside, and tells every number of its answer.
func TestRecordsTellTheAnswer(t *testing.T) {
	for _, op := range operation.All() {
		for _, name := range examples(t, op) {
			body, err := os.ReadFile(name)
			if err != nil {
				t.Fatal(err)
			}
			got, answer := written(t, op, body)
			if again, _ := written(t, op, body); !bytes.Equal(got, again) {
				t.Errorf("%s: the same request gave other bytes", name)
			}
			d := xml.NewDecoder(bytes.NewReader(got))
			d.Entity = xml.HTMLEntity
			for err == nil {
				_, err = d.Token()
			}
			if err != io.EOF {
				t.Errorf("%s is not well-formed: %v", name, err)
			}
			for _, never := range []string{"<script", "<link", "src=", "href=", "style=", "ZgotmplZ", "NaN", "%!"} {
				if bytes.Contains(got, []byte(never)) {
					t.Errorf("%s holds %q", name, never)
				}
			}
			sum := sha256.Sum256(between(got, "<style>", "</style>"))
			if bytes.Count(got, []byte("<style")) != 1 || !strings.Contains(Policy(), base64.StdEncoding.EncodeToString(sum[:])) {
				t.Errorf("%s: the policy does not let its style in", name)
			}
			told := map[string]bool{}
			for _, m := range exact.FindAllSubmatch(got, -1) {
				told[string(m[1])] = true
				v, err := strconv.ParseFloat(string(m[1]), 64)
				short, err2 := strconv.ParseFloat(string(m[2]), 64)
				if err != nil || err2 != nil || !(math.Abs(v-short) <= 6e-6*math.Abs(v)) {
					t.Errorf("%s shows %s as %s", name, m[1], m[2])
				}
			}
			whole, err := read(answer)
			if err != nil {
				t.Fatal(err)
			}
			each(whole, func(n node) {
				literal, isNumber := n.value.(json.Number)
				if isNumber && n.key != "id" && n.key != "length" && n.key != "" && !told[literal.String()] {
					t.Errorf("%s does not tell %s %s", name, n.key, literal)
				}
			})
			for _, said := range []string{"Local codes", "Reviewer, name", "Designer, name", `role="img"`, "Engine version"} {
				if !bytes.Contains(got, []byte(said)) {
					t.Errorf("%s lacks %q", name, said)
				}
			}
		}
	}
}

func between(text []byte, from, until string) []byte {
	_, rest, _ := bytes.Cut(text, []byte(from))
	out, _, _ := bytes.Cut(rest, []byte(until))
	return out
}

// TestPublished holds records of published examples against the publication's own numbers, at the digits it prints, in its own units. The values are from
// testdata/published.json.
func TestPublished(t *testing.T) {
	const trapezoid = `"section":{"kind":"trapezoidal","bottom_width":20,"side_slope":2}`
	for _, c := range []struct {
		id   string
		op   *operation.Operation
		body string
		want map[string]string // by row or column heading
	}{
		// Chow (1959), example 2-1: A, P, R, T and D of a trapezoid. It prints R as 4.10 ft.
		{"chow-2-1", &operation.Section, `{"units":"us",` + trapezoid + `,"depth":6}`,
			map[string]string{"area": "192", "wetted perimeter": "46.8", "hydraulic radius": "4.10", "top width": "44", "hydraulic depth": "4.36"}},
		// Chow (1959), example 6-2: normal depth 3.36 ft. Its velocity, printed as 4.46 ft/s, is 4.454 by more digits (400 over 89.8), so it is
		// left to the tolerances of the published checks; so is the critical depth of example 10-1, found by trial.
		{"chow-6-2", &operation.Depths, `{"units":"us",` + trapezoid + `,"roughness":{"manning":0.025},"bed_slope":0.0016,"discharge":400}`,
			map[string]string{"normal depth": "3.36"}},
		// Chow (1959), the 36-inch culvert of chapter 4: critical depth 1.44 ft at 20 ft3/s.
		{"chow-4-3-circ", &operation.Depths, `{"units":"us","section":{"kind":"circular","diameter":3},"roughness":{"manning":0.013},"bed_slope":0.001,"discharge":20}`,
			map[string]string{"critical depth": "1.44"}},
	} {
		page, _ := written(t, c.op, []byte(c.body))
		shownAs := tabulated(t, page)
		for name, want := range c.want {
			v, err := strconv.ParseFloat(shownAs[name], 64)
			decimals := len(want) - strings.IndexByte(want+".", '.') - 1
			if strings.IndexByte(want, '.') < 0 {
				decimals = 0
			}
			if got := strconv.FormatFloat(v, 'f', decimals, 64); err != nil || got != want {
				t.Errorf("%s, %s: the record shows %q, which is %s at the digits of the publication, %s there", c.id, name, shownAs[name], got, want)
			}
		}
	}
}

// tabulated reads the result tables of a record as a reader would: rows of a name and a value, or columns below their heading.
func tabulated(t *testing.T, page []byte) map[string]string {
	t.Helper()
	var doc struct {
		Sections []struct {
			Tables []struct {
				Class string   `xml:"class,attr"`
				Head  []string `xml:"thead>tr>th"`
				Rows  []struct {
					Cells []struct {
						Text string `xml:",chardata"`
						Data string `xml:"data"`
					} `xml:"td"`
				} `xml:"tbody>tr"`
			} `xml:"table"`
		} `xml:"body>main>section"`
	}
	_, rest, _ := bytes.Cut(page, []byte("<html"))
	if err := xml.Unmarshal(append([]byte("<html"), rest...), &doc); err != nil {
		t.Fatal(err)
	}
	out := map[string]string{}
	for _, s := range doc.Sections {
		for _, table := range s.Tables {
			if table.Class != "results" {
				continue
			}
			for _, row := range table.Rows {
				if len(table.Head) == 3 && table.Head[0] == "what" {
					out[row.Cells[0].Text] = row.Cells[1].Data
					continue
				}
				for i, cell := range row.Cells {
					name, _, _ := strings.Cut(table.Head[i], " (")
					if _, known := out[name]; !known {
						out[name] = cell.Data
					}
				}
			}
		}
	}
	return out
}

// TestStepsComeOut computes the steps that are quotients and products from the numbers that stand there, as a reviewer would: they give the result that is shown.
func TestStepsComeOut(t *testing.T) {
	body := []byte(`{"units":"us","section":{"kind":"trapezoidal","bottom_width":20,"side_slope":2},"barrels":2,"roughness":{"manning":0.025},"bed_slope":0.0016,"discharge":400,"energy_coefficient":1.1}`)
	request, err := read(body)
	if err != nil {
		t.Fatal(err)
	}
	solved, problem := operation.Depths.Solve(body, operation.Options{})
	if problem != nil {
		t.Fatal(problem)
	}
	inSI, err := read(solved.Answer.AppendJSON(nil, wire.SI, nil))
	if err != nil {
		t.Fatal(err)
	}
	all, count := workThrough(inSI, request, wire.US, solved.Answer)
	if len(all) != 2 || count != 2 {
		t.Fatalf("%d states of %d", len(all), count)
	}
	number := regexp.MustCompile(`[0-9.]+(e-?[0-9]+)?`)
	for _, w := range all {
		for _, s := range w.Steps {
			var n []float64
			for _, m := range number.FindAllString(s.Numbers, -1) {
				v, err := strconv.ParseFloat(m, 64)
				if err != nil {
					t.Fatal(s, err)
				}
				n = append(n, v)
			}
			var want float64
			cosine := func(i int) float64 { return math.Sqrt(n[i] - n[i+1]*n[i+1]) } // 1 and slope, then the exponent 2
			switch s.Name {
			case "hydraulic radius", "hydraulic depth":
				want = n[0] / n[1]
			case "conveyance":
				want = n[0] * math.Cbrt(n[1]*n[1]) / n[4]
			case "velocity":
				want = n[0] / (n[1] * n[2])
			case "uniform discharge":
				want = n[0] * n[1] * math.Sqrt(n[2])
			case "velocity head":
				want = n[0] * n[1] * n[1] / (n[2] * n[3])
			case "Froude number":
				want = math.Sqrt(n[0] * n[1] * n[1] * n[2] / (n[3] * n[4] * cosine(5)))
			case "specific energy":
				want = n[0]*cosine(1) + n[3]
			case "specific force":
				want = n[0]*n[1]*n[1]*n[2]/n[3] + cosine(4)*n[6]*n[7]
			case "friction slope":
				want = n[0] / (n[1] * n[2])
				want *= want
			case "bed shear stress":
				want = n[0] * n[1] * n[2] * n[3]
			case "stream power":
				want = n[0] * n[1]
			default:
				continue
			}
			if got, err := strconv.ParseFloat(s.Result, 64); err != nil || !(math.Abs(got-want) <= 5e-5*math.Abs(want)) {
				t.Errorf("%s: %s = %s gives %g, the record says %s", w.Title, s.Name, s.Numbers, want, s.Result)
			}
		}
	}
}
