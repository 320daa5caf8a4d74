package wire

import (
	"encoding/csv"
	"os"
	"path/filepath"
	"strconv"
	"strings"
	"testing"
)

const corpus = "../../testdata/json_parsing"

// outcome tells how Decode judged a body, as a status and the code of the first fault.
func outcome(p *Problem) string {
	if p == nil {
		return "200"
	}
	return strconv.Itoa(p.Status) + " " + p.Errors[0].Code
}

// asNumber and asList put a text in place of the value of a member in a request that is otherwise sound.
func asNumber(text []byte) []byte {
	return []byte(`{"section":{"kind":"rectangular","bottom_width":1},"roughness":{"manning":0.02},"bed_slope":0.001,"discharge":` + string(text) + `}`)
}

func asList(text []byte) []byte {
	return []byte(`{"section":{"kind":"rectangular","bottom_width":1},"depths":` + string(text) + `}`)
}

// TestCorpus pins what becomes of every file of the JSON parsing corpus (N. Seriot 2016, licence beside it), as a body, as
// a number's value and as a list's: testdata/json_parsing/outcomes.csv, recorded once and read through; what the policy says of
// it as a whole is counted below.
func TestCorpus(t *testing.T) {
	pinned := readOutcomes(t)
	files, err := filepath.Glob(filepath.Join(corpus, "test_parsing", "*.json"))
	if err != nil || len(files) != 318 || len(pinned) != 318 {
		t.Fatalf("%d files, %d pinned outcomes, want 318 of each (%v)", len(files), len(pinned), err)
	}
	limits := DefaultLimits()
	accepted := map[byte]int{}
	for _, file := range files {
		name := filepath.Base(file)
		data, err := os.ReadFile(file)
		if err != nil {
			t.Fatal(err)
		}
		var r DepthsRequest
		var s SectionRequest
		got := [3]string{
			outcome(Decode(data, SI, &limits, &r)),
			outcome(Decode(asNumber(data), SI, &limits, &r)),
			outcome(Decode(asList(data), SI, &limits, &s)),
		}
		if want := pinned[name]; got != want {
			t.Errorf("%s,%s; pinned %s", name, strings.Join(got[:], ","), strings.Join(want[:], ","))
		}
		syntax := strings.HasPrefix(got[0], "400")
		if !syntax {
			accepted[name[0]]++
		}
		for _, o := range got[1:] {
			if syntax != strings.HasPrefix(o, "400") {
				t.Errorf("%s is %s as a body and %s as a value", name, got[0], o)
			}
		}
	}
	// The policy: all that must be accepted but the two with duplicate members, nothing that must not, and of the rest the
	// three whole numbers that float64 rounds.
	if accepted['y'] != 93 || accepted['n'] != 0 || accepted['i'] != 3 {
		t.Errorf("accepted as JSON: %d y, %d n, %d i; want 93, 0, 3", accepted['y'], accepted['n'], accepted['i'])
	}
}

func readOutcomes(t *testing.T) map[string][3]string {
	t.Helper()
	f, err := os.Open(filepath.Join(corpus, "outcomes.csv"))
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	rows, err := csv.NewReader(f).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	pinned := map[string][3]string{}
	for _, row := range rows[1:] {
		pinned[row[0]] = [3]string{row[1], row[2], row[3]}
	}
	return pinned
}
