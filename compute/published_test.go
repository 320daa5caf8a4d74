package compute_test

import (
	"bytes"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"math"
	"os"
	"slices"
	"strings"
	"testing"
)

// publishedCase is one published check: what its source states, in the units of its source.
type publishedCase struct {
	ID                           string             `json:"id"`
	Topic                        string             `json:"topic"`
	Source                       string             `json:"source"`
	Provenance                   string             `json:"provenance"`   // seen, memory, common practice
	ValueOrigin                  string             `json:"value_origin"` // published, own
	Units                        string             `json:"units"`
	Given                        map[string]any     `json:"given"`
	Expected                     map[string]any     `json:"expected"`
	Tolerance                    map[string]float64 `json:"tolerance"` // absolute
	Constants                    map[string]float64 `json:"constants"`
	Independent                  map[string]any     `json:"independent"` // the same worked out elsewhere, with the constants above, to 9 digits or more
	IndependentStandardConstants map[string]any     `json:"independent_standard_constants"`
	Note                         string             `json:"note"`
}

// loadPublished reads cases. It refuses unknown and duplicate members, trailing data, a case without source or identity, one
// that asserts nothing, and a tolerance that serves nothing.
func loadPublished(data []byte) ([]publishedCase, error) {
	if err := refuseDuplicates(json.NewDecoder(bytes.NewReader(data)), ""); err != nil {
		return nil, err
	}
	decoder := json.NewDecoder(bytes.NewReader(data))
	decoder.DisallowUnknownFields()
	var cases []publishedCase
	if err := decoder.Decode(&cases); err != nil {
		return nil, err
	}
	if _, err := decoder.Token(); err != io.EOF {
		return nil, errors.New("trailing data")
	}
	seen := map[string]bool{}
	for _, c := range cases {
		switch {
		case c.ID == "" || seen[c.ID]:
			return nil, fmt.Errorf("%q: an id is missing or used twice", c.ID)
		case c.Source == "" || c.Topic == "":
			return nil, fmt.Errorf("%s: source or topic is missing", c.ID)
		case !slices.Contains([]string{"seen", "memory", "common practice"}, c.Provenance):
			return nil, fmt.Errorf("%s: unknown provenance %q", c.ID, c.Provenance)
		case c.Units != "si" && c.Units != "us":
			return nil, fmt.Errorf("%s: unknown units %q", c.ID, c.Units)
		case len(c.Expected) == 0:
			return nil, fmt.Errorf("%s: asserts nothing", c.ID)
		}
		seen[c.ID] = true
		for name, value := range c.Expected {
			if list, isList := value.([]any); isList && len(list) == 0 {
				return nil, fmt.Errorf("%s: %s asserts nothing", c.ID, name)
			}
		}
		for name, tolerance := range c.Tolerance {
			if _, expected := c.Expected[name]; !expected || !(tolerance > 0) {
				return nil, fmt.Errorf("%s: the tolerance of %s serves nothing", c.ID, name)
			}
		}
	}
	return cases, nil
}

// refuseDuplicates walks one JSON value and fails on a member that stands twice in its object.
func refuseDuplicates(decoder *json.Decoder, path string) error {
	token, err := decoder.Token()
	if err != nil {
		return err
	}
	delimiter, isDelimiter := token.(json.Delim)
	if !isDelimiter {
		return nil
	}
	names := map[string]bool{}
	for i := 0; decoder.More(); i++ {
		place := fmt.Sprintf("%s/%d", path, i)
		if delimiter == '{' {
			name, err := decoder.Token()
			if err != nil {
				return err
			}
			place = path + "/" + name.(string)
			if names[place] {
				return fmt.Errorf("%s stands twice", place)
			}
			names[place] = true
		}
		if err := refuseDuplicates(decoder, place); err != nil {
			return err
		}
	}
	_, err = decoder.Token()
	return err
}

// published maps each case to what checks it here.
var published = map[string]func(*claim){}

// elsewhere maps each case that the packages at hand have no part in to the reason.
var elsewhere = map[string]string{}

// covers adds a check of some cases.
func covers(check func(*claim), ids ...string) {
	for _, id := range ids {
		if published[id] != nil || elsewhere[id] != "" {
			panic(id + " is covered twice")
		}
		published[id] = check
	}
}

// belongs says why some cases are checked elsewhere or not at all.
func belongs(reason string, ids ...string) {
	for _, id := range ids {
		if published[id] != nil || elsewhere[id] != "" {
			panic(id + " is covered twice")
		}
		elsewhere[id] = reason
	}
}

// TestPublished runs every published case against its own constants and tolerance. Every case is either checked or has a reason why not, every
// given member is used, every expected one asserted or left with a reason.
func TestPublished(t *testing.T) {
	known := map[string]bool{}
	counts := map[string]int{}
	for _, file := range []string{"../testdata/published.json", "../testdata/published_more.json", "../testdata/published_appraisal.json"} {
		data, err := os.ReadFile(file)
		if err != nil {
			t.Fatal(err)
		}
		cases, err := loadPublished(data)
		if err != nil {
			t.Fatalf("%s: %v", file, err)
		}
		for i := range cases {
			c := &cases[i]
			if known[c.ID] {
				t.Errorf("%s stands in two files", c.ID)
			}
			known[c.ID] = true
			check := published[c.ID]
			if check == nil {
				if elsewhere[c.ID] == "" {
					t.Errorf("%s is neither checked nor accounted for", c.ID)
				}
				counts["elsewhere"]++
				continue
			}
			counts["checked"]++
			t.Run(c.ID, func(t *testing.T) {
				t.Logf("%s [%s, %s]", c.Source, c.Provenance, c.ValueOrigin)
				claim := &claim{T: t, c: c, read: map[string]bool{}, asserted: map[string]bool{}, agreement: 1e-10}
				check(claim)
				claim.close()
				counts["values"] += claim.values
				counts["left"] += claim.left
			})
		}
	}
	for id := range published {
		if !known[id] {
			t.Errorf("the check of %s has no case", id)
		}
	}
	for id := range elsewhere {
		if !known[id] {
			t.Errorf("the reason for %s has no case", id)
		}
	}
	t.Logf("%d cases checked with %d values, %d members left with a reason; %d cases belong elsewhere",
		counts["checked"], counts["values"], counts["left"], counts["elsewhere"])
}

// claim is one case under test.
type claim struct {
	*testing.T
	c              *publishedCase
	read, asserted map[string]bool
	agreement      float64 // relative tolerance against the independent value
	values, left   int
}

// given returns a given number.
func (c *claim) given(name string) float64 {
	c.Helper()
	x, isNumber := c.c.Given[name].(float64)
	if !isNumber {
		c.Fatalf("given %s is no number: %v", name, c.c.Given[name])
	}
	c.read[name] = true
	return x
}

// list returns a given list of numbers.
func (c *claim) list(name string) []float64 {
	c.Helper()
	c.read[name] = true
	return c.numbers(c.c.Given[name])
}

// part returns a number of a given object.
func (c *claim) part(name, member string) float64 {
	c.Helper()
	object, _ := c.c.Given[name].(map[string]any)
	x, isNumber := object[member].(float64)
	if !isNumber {
		c.Fatalf("given %s/%s is no number", name, member)
	}
	c.read[name] = true
	return x
}

// is fails the test unless a given member has a value: words that say which case it is.
func (c *claim) is(name string, want any) {
	c.Helper()
	if c.c.Given[name] != want {
		c.Fatalf("given %s is %v, not %v", name, c.c.Given[name], want)
	}
	c.read[name] = true
}

// aside marks given members that only comment.
func (c *claim) aside(names ...string) {
	for _, name := range names {
		c.read[name] = true
	}
}

func (c *claim) numbers(value any) []float64 {
	c.Helper()
	list, _ := value.([]any)
	var numbers []float64
	for _, item := range list {
		x, isNumber := item.(float64)
		if !isNumber {
			c.Fatalf("%v is no number", item)
		}
		numbers = append(numbers, x)
	}
	if len(numbers) == 0 {
		c.Fatalf("%v is no list of numbers", value)
	}
	return numbers
}

// want compares computed numbers with the expected member: one, or a list in its order. Where the case holds the same value worked out
// independently, they must agree with that much more closely.
func (c *claim) want(name string, got ...float64) {
	c.Helper()
	tolerance := c.c.Tolerance[name]
	if !(tolerance > 0) {
		c.Fatalf("%s has no tolerance", name)
	}
	c.compare(name, tolerance, got)
	var independent []float64
	switch value := c.c.Independent[name].(type) {
	case float64:
		independent = []float64{value}
	case []any:
		independent = c.numbers(value)
	}
	if len(independent) != len(got) {
		return
	}
	for i, want := range independent {
		if !(math.Abs(got[i]-want) <= c.agreement*math.Abs(want)) {
			c.Errorf("%s = %.13g, independently %.13g", name, got[i], want)
		}
	}
}

// near is want with a tolerance of its own, for a reason.
func (c *claim) near(name string, got, tolerance float64, reason string) {
	c.Helper()
	c.Logf("%s is held to %g: %s", name, tolerance, reason)
	c.compare(name, tolerance, []float64{got})
}

func (c *claim) compare(name string, tolerance float64, got []float64) {
	c.Helper()
	var want []float64
	switch value := c.c.Expected[name].(type) {
	case float64:
		want = []float64{value}
	case []any:
		want = c.numbers(value)
	default:
		c.Fatalf("expected %s is no number", name)
	}
	if len(want) != len(got) {
		c.Fatalf("%s has %d values, not %d", name, len(want), len(got))
	}
	c.asserted[name] = true
	for i := range want {
		c.values++
		if !(math.Abs(got[i]-want[i]) <= tolerance) {
			c.Errorf("%s = %.12g, want %g within %g", name, got[i], want[i], tolerance)
		}
	}
}

// leave says why an expected member is not asserted.
func (c *claim) leave(reason string, names ...string) {
	c.Helper()
	for _, name := range names {
		if _, expected := c.c.Expected[name]; !expected || c.asserted[name] {
			c.Errorf("there is no reason to leave %s", name)
		}
		c.asserted[name] = true
		c.left++
		c.Logf("%s is left: %s", name, reason)
	}
}

// close fails the test where something given went unused or something expected unasserted.
func (c *claim) close() {
	if c.Failed() {
		return
	}
	if c.values == 0 {
		c.Error("no value was compared")
	}
	for name := range c.c.Given {
		if !c.read[name] {
			c.Errorf("given %s was not used", name)
		}
	}
	for name := range c.c.Expected {
		if !c.asserted[name] {
			c.Errorf("expected %s was not asserted", name)
		}
	}
}

// gravity returns the case's own gravity.
func (c *claim) gravity() float64 {
	c.Helper()
	g := c.c.Constants["gravity"]
	if !(g > 0) {
		c.Fatal("the case has no gravity")
	}
	return g
}

// TestPublishedLoaderRefuses holds the loader to what it promises.
func TestPublishedLoaderRefuses(t *testing.T) {
	const good = `{"id":"a","topic":"t","source":"s","provenance":"seen","value_origin":"own","units":"si","given":{},"expected":{"x":1},"tolerance":{"x":0.1},"constants":{},"independent":{},"independent_standard_constants":{},"note":""}`
	if cases, err := loadPublished([]byte("[" + good + "]")); err != nil || len(cases) != 1 || cases[0].Expected["x"] != 1.0 {
		t.Fatalf("good case: %v %v", cases, err)
	}
	for _, row := range []struct{ name, old, new string }{
		{"unknown member", `"note":""`, `"notes":""`},
		{"misspelt expected", `"expected":{"x":1}`, `"expext":{"x":1}`},
		{"asserts nothing", `"expected":{"x":1}`, `"expected":{}`},
		{"asserts an empty list", `"expected":{"x":1}`, `"expected":{"x":[]}`},
		{"zero tolerance", `"tolerance":{"x":0.1}`, `"tolerance":{"x":0}`},
		{"idle tolerance", `"tolerance":{"x":0.1}`, `"tolerance":{"x":0.1,"y":0.1}`},
		{"duplicate member", `"expected":{"x":1}`, `"expected":{"x":1,"x":1}`},
		{"duplicate id", `"note":""}`, `"note":""},` + good},
		{"no source", `"source":"s"`, `"source":""`},
		{"provenance", `"seen"`, `"heard"`},
		{"units", `"si"`, `"cgs"`},
		{"trailing data", `"note":""}`, `"note":""}] [`},
	} {
		t.Run(row.name, func(t *testing.T) {
			bad := strings.Replace(good, row.old, row.new, 1)
			if bad == good {
				t.Fatal("nothing was replaced")
			}
			if _, err := loadPublished([]byte("[" + bad + "]")); err == nil {
				t.Error("was accepted")
			}
		})
	}
}
