package wire

import (
	"crypto/sha256"
	"fmt"
	"math"
	"slices"
	"strconv"
	"strings"
	"testing"

	"pgregory.net/rapid"

	"leat/compute"
)

// TestFingerprintIsWhatItSays writes out what is hashed.
func TestFingerprintIsWhatItSays(t *testing.T) {
	limits := DefaultLimits()
	for _, row := range []struct {
		name, body string
		units      System
		want       string
	}{
		{"plain", trapezoidDepths, SI,
			`{"bed_slope":0.0012,"discharge":4.75,"roughness":{"manning":0.025},"section":{"bank_height":1.8,"bottom_width":2.5,"kind":"trapezoidal","side_slope":1.5},"units":"si"}`},
		{"units of the call", trapezoidDepths, US,
			`{"bed_slope":0.0012,"discharge":4.75,"roughness":{"manning":0.025},"section":{"bank_height":1.8,"bottom_width":2.5,"kind":"trapezoidal","side_slope":1.5},"units":"us"}`},
		{"units of the request, escapes, nulls, spellings", ` { "un\u0069ts" : "u\u0073" , "id":17, "x":null,"discharge":475E-2 ,"depth":null,
			"section":{"k\u0069nd":"rect\u0061ngular","diameter":null,"bottom_width":2.50},"roughness":{"manning_by_depth":[[0,3e-2],[ 1.0,0.030 ]]},"bed_slope":-0.0}`, SI,
			`{"bed_slope":0,"discharge":4.75,"roughness":{"manning_by_depth":[[0,0.03],[1,0.03]]},"section":{"bottom_width":2.5,"kind":"rectangular"},"units":"us"}`},
		{"a reach keeps its id", `{"id":1,"discharge":1,"reaches":[{"id":"a","length":10,"bed_slope":0.001,"section":{"kind":"circular","diameter":1},"roughness":{"manning":0.01}}],"downstream":{"control":"normal"}}`, SI,
			`{"discharge":1,"downstream":{"control":"normal"},"reaches":[{"bed_slope":0.001,"id":"a","length":10,"roughness":{"manning":0.01},"section":{"diameter":1,"kind":"circular"}}],"units":"si"}`},
	} {
		body := []byte(row.body)
		system, problem := Scan(body, row.units, &limits)
		if problem != nil {
			t.Fatal(problem)
		}
		want := fmt.Sprintf("%x", sha256.Sum256([]byte("depths\n"+compute.EngineVersion+"\n"+row.want)))
		if got := Fingerprint("depths", body, system); got != want {
			c := new(canonical)
			t.Errorf("%s: %s, want %s, of\n%s", row.name, got, want, c.request("depths", body, system))
		}
	}
	if Fingerprint("depths", []byte(trapezoidDepths), SI) == Fingerprint("rating", []byte(trapezoidDepths), SI) {
		t.Error("two operations have the same fingerprint")
	}
}

// A pair is a member of an object that a test makes up.
type pair struct {
	name  string
	value any // float64, string, bool, []any, []pair
}

// drawObject draws an object: names are distinct, of letters that escapes and the order of UTF-16 treat in different ways.
func drawObject(t *rapid.T, depth int) []pair {
	names := rapid.SliceOfNDistinct(rapid.StringOfN(rapid.RuneFrom([]rune("abz_\"\\/\n\u00e9\ue000\U0001f600")), 1, 4, -1), 1, 6, rapid.ID).Draw(t, "names")
	var out []pair
	for _, name := range names {
		out = append(out, pair{name, drawValue(t, depth-1)})
	}
	return out
}

func drawValue(t *rapid.T, depth int) any {
	kinds := 5
	if depth == 0 {
		kinds = 3
	}
	switch rapid.IntRange(0, kinds-1).Draw(t, "kind") {
	case 0:
		return drawNumber(t)
	case 1:
		return rapid.StringOfN(rapid.RuneFrom([]rune("ab\"\\/\t\u0001\u00e9\u20ac\U0001f600")), 0, 5, -1).Draw(t, "text")
	case 2:
		return rapid.Bool().Draw(t, "bool")
	case 3:
		var list []any
		for range rapid.IntRange(0, 4).Draw(t, "items") {
			list = append(list, drawValue(t, depth-1))
		}
		return list
	}
	return drawObject(t, depth)
}

func drawNumber(t *rapid.T) float64 {
	v := rapid.OneOf(rapid.Float64Range(-1e6, 1e6), rapid.Map(rapid.IntRange(-2000, 2000), func(n int) float64 { return float64(n) / 100 }),
		rapid.Float64Range(-1e-5, 1e-5)).Draw(t, "number")
	if math.Abs(v) < 1e-99 {
		return 0
	}
	return v
}

// spell writes a value as one of the many texts that mean it.
func spell(t *rapid.T, value any) string {
	space := func() string { return rapid.SampledFrom([]string{"", "", " ", "\n\t", " \r\n"}).Draw(t, "space") }
	switch value := value.(type) {
	case float64:
		return spellNumber(t, value)
	case string:
		return spellText(t, value)
	case bool:
		return strconv.FormatBool(value)
	case []any:
		var items []string
		for _, item := range value {
			items = append(items, space()+spell(t, item)+space())
		}
		return "[" + strings.Join(items, ",") + space() + "]"
	}
	var parts []string
	for _, m := range rapid.Permutation(value.([]pair)).Draw(t, "order") {
		parts = append(parts, space()+spellText(t, m.name)+space()+":"+space()+spell(t, m.value)+space())
		if rapid.IntRange(0, 4).Draw(t, "null") == 0 {
			parts = append(parts, spellText(t, "no "+m.name)+": null")
		}
	}
	return "{" + strings.Join(parts, ",") + space() + "}"
}

func spellNumber(t *rapid.T, v float64) string {
	shortest := strconv.FormatFloat(v, 'f', -1, 64)
	switch rapid.IntRange(0, 5).Draw(t, "spelling") {
	case 0:
		return strconv.FormatFloat(v, 'e', -1, 64)
	case 1:
		return strings.ToUpper(strconv.FormatFloat(v, 'e', 17, 64))
	case 2:
		if strings.Contains(shortest, ".") {
			return shortest + "00"
		}
		return shortest + ".0"
	case 3:
		if v == 0 {
			return "-0e0"
		}
		return shortest + "e+0"
	}
	return shortest
}

func spellText(t *rapid.T, text string) string {
	var b strings.Builder
	b.WriteByte('"')
	for _, r := range text {
		units := []rune{r}
		escaped := rapid.Bool().Draw(t, "escaped")
		switch {
		case escaped || r < ' ' || r == '"' || r == '\\':
			if r > 0xffff {
				units = []rune{0xd800 + (r-0x10000)>>10, 0xdc00 + (r-0x10000)&0x3ff}
			}
			for _, unit := range units {
				fmt.Fprintf(&b, `\u%04`+rapid.SampledFrom([]string{"x", "X"}).Draw(t, "case"), unit)
			}
		default:
			b.WriteRune(r)
		}
	}
	b.WriteByte('"')
	return b.String()
}

// TestFingerprintOfAnySpelling holds that what does not change a request does not change its fingerprint, and that what does, does.
func TestFingerprintOfAnySpelling(t *testing.T) {
	limits := DefaultLimits()
	fingerprint := func(t *rapid.T, body string) string {
		system, problem := Scan([]byte(body), SI, &limits)
		if problem != nil {
			t.Fatalf("%s: %s", problem.Detail, body)
		}
		return Fingerprint("depths", []byte(body), system)
	}
	rapid.Check(t, func(t *rapid.T) {
		object := drawObject(t, 4)
		one, other := spell(t, object), spell(t, object)
		if fingerprint(t, one) != fingerprint(t, other) {
			t.Fatalf("two fingerprints of one request:\n%s\n%s", one, other)
		}
		withID := append(slices.Clone(object), pair{"id", "a"})
		if text := spell(t, withID); fingerprint(t, text) != fingerprint(t, one) {
			t.Fatalf("the id counts: %s", text)
		}
		withUnits := append(slices.Clone(object), pair{"units", "us"})
		if text := spell(t, withUnits); fingerprint(t, text) == fingerprint(t, one) {
			t.Fatalf("the units do not count: %s", text)
		}
		changed := change(t, object).([]pair)
		if text := spell(t, changed); fingerprint(t, text) == fingerprint(t, one) {
			t.Fatalf("one fingerprint of two requests:\n%s\n%s", one, text)
		}
	})
}

// change returns the value with one thing in it changed.
func change(t *rapid.T, value any) any {
	switch value := value.(type) {
	case float64:
		if value == 0 {
			return 1.0
		}
		return math.Nextafter(value, math.Inf(1))
	case string:
		return value + "x"
	case bool:
		return !value
	case []any:
		if len(value) == 0 {
			return []any{0.0}
		}
		i := rapid.IntRange(0, len(value)-1).Draw(t, "item")
		out := slices.Clone(value)
		out[i] = change(t, out[i])
		return out
	}
	out := slices.Clone(value.([]pair))
	i := rapid.IntRange(0, len(out)-1).Draw(t, "member")
	if len(out) > 1 && rapid.Bool().Draw(t, "drop") {
		return slices.Delete(out, i, i+1)
	}
	out[i].value = change(t, out[i].value)
	return out
}

// TestFingerprintsDiffer holds that no two of many requests that differ in one digit have the same fingerprint.
func TestFingerprintsDiffer(t *testing.T) {
	seen := map[string]string{}
	for i := range 10_000 {
		body := strings.Replace(trapezoidDepths, "4.75", fmt.Sprint(1+float64(i)/1024), 1)
		f := Fingerprint("depths", []byte(body), SI)
		if other, found := seen[f]; found || len(f) != 64 || strings.Trim(f, "0123456789abcdef") != "" {
			t.Fatalf("%s is the fingerprint of\n%s\n%s", f, body, other)
		}
		seen[f] = body
	}
}
