package wire

import (
	"encoding/json"
	"strings"
	"testing"
	"unicode/utf16"

	"github.com/go-json-experiment/json/jsontext"
	"pgregory.net/rapid"

	"leat/compute"
)

// canonicalOf returns one value in canonical form.
func canonicalOf(text string) string {
	c := canonical{in: []byte(text)}
	c.value()
	return string(c.out)
}

// TestCanonicalOfTheStandard holds the examples of RFC 8785, sections 3.2.2, 3.2.3 and 3.2.4; its appendix B is in TestAppendNumber.
func TestCanonicalOfTheStandard(t *testing.T) {
	for _, row := range []struct{ name, text, want string }{
		{"3.2.2, serialization of primitive values", `{
  "numbers": [333333333.33333329, 1E30, 4.50,
              2e-3, 0.000000000000000000000000001],
  "string": "\u20ac$\u000F\u000aA'\u0042\u0022\u005c\\\"\/",
  "literals": [null, true, false]
}`, `{"literals":[null,true,false],"numbers":[333333333.3333333,1e+30,4.5,0.002,1e-27],"string":"€$\u000f\nA'B\"\\\\\"/"}`},
		{"3.2.3, sorting of object properties", `{
  "\u20ac": "Euro Sign",
  "\r": "Carriage Return",
  "\ufb33": "Hebrew Letter Dalet With Dagesh",
  "1": "One",
  "\ud83d\ude00": "Emoji: Grinning Face",
  "\u0080": "Control",
  "\u00f6": "Latin Small Letter O With Diaeresis"
}`, "{\"\\r\":\"Carriage Return\",\"1\":\"One\",\"\u0080\":\"Control\",\"ö\":\"Latin Small Letter O With Diaeresis\"," +
			"\"€\":\"Euro Sign\",\"😀\":\"Emoji: Grinning Face\",\"\ufb33\":\"Hebrew Letter Dalet With Dagesh\"}"},
	} {
		if got := canonicalOf(row.text); got != row.want {
			t.Errorf("%s:\ngot  %s\nwant %s", row.name, got, row.want)
		}
	}
}

// TestCanonicalNumbers holds literals that are near to what is taken over as it stands.
func TestCanonicalNumbers(t *testing.T) {
	for literal, want := range map[string]string{
		"0": "0", "-0": "0", "0.0": "0", "-0.0": "0", "0e5": "0", "-0E-5": "0", "7": "7", "-7": "-7", "10": "10", "-100": "-100", "1.0": "1", "1.50": "1.5",
		"-1.5": "-1.5", "0.1": "0.1", "1e-1": "0.1", "0.00001": "0.00001", "0.000001": "0.000001", "0.0000011": "0.0000011", "0.0000001": "1e-7",
		"0.00000012": "1.2e-7", "-0.0000001": "-1e-7", "1e5": "100000", "1E+5": "100000", "123456789012345": "123456789012345",
		"1234567890123456": "1234567890123456", "9007199254740993": "9007199254740992", "0.12345678901234567": "0.12345678901234566",
		"100000000000000000000": "100000000000000000000", "1000000000000000000000": "1e+21", "0.1000000000000000055511151231257827": "0.1",
		"1.7976931348623157e100": "1.7976931348623157e+100", "1e-100": "1e-100",
	} {
		if got := canonicalOf(literal); got != want {
			t.Errorf("%s: got %s, want %s", literal, got, want)
		}
	}
}

// TestShortNumbersAreCanonical holds that a literal which is taken over unread is what reading and writing it would give.
func TestShortNumbersAreCanonical(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		literal := rapid.StringMatching(`-?(0|[1-9][0-9]{0,16})(\.[0-9]{1,17})?`).Draw(t, "literal")
		var want jsontext.Value = []byte(literal)
		if err := want.Canonicalize(); err != nil {
			t.Fatal(err)
		}
		if string(want) == "-0" {
			want = []byte("0")
		}
		if got := canonicalOf(literal); got != string(want) {
			t.Errorf("%s: got %s, want %s", literal, got, want)
		}
	})
}

// TestNamesSortByCodeUnits holds the order of names against that of their UTF-16.
func TestNamesSortByCodeUnits(t *testing.T) {
	names := rapid.StringOf(rapid.OneOf(rapid.RuneFrom([]rune("az\u007f\u0080\u07ff\u0800\ud7ff\ue000\ufb33\uffff\U00010000\U0001f600\U0010ffff")), rapid.Rune()))
	rapid.Check(t, func(t *rapid.T) {
		a, b := names.Draw(t, "a"), names.Draw(t, "b")
		x, y := utf16.Encode([]rune(a)), utf16.Encode([]rune(b))
		want := 0
		for i := range min(len(x), len(y)) {
			if want = int(x[i]) - int(y[i]); want != 0 {
				break
			}
		}
		if want == 0 {
			want = len(x) - len(y)
		}
		if got := compareNames([]byte(a), []byte(b)); got < 0 != (want < 0) || got > 0 != (want > 0) {
			t.Errorf("%q and %q: got %d, want %d", a, b, got, want)
		}
	})
}

// FuzzCanonical holds the canonical form against the JSON library's own, and that it stays as it is.
func FuzzCanonical(f *testing.F) {
	seed(f)
	f.Fuzz(func(t *testing.T, data []byte) {
		limits := DefaultLimits()
		system, problem := Scan(data, SI, &limits)
		text := new(canonical).request("depths", data, system) // must not panic, whatever it is
		if problem != nil {
			return
		}
		want := jsontext.Value(withoutNulls(t, data))
		if err := want.Canonicalize(); err != nil {
			t.Fatal(err)
		}
		// The library writes -0, which RFC 8785 does not (section 3.2.2.3 refers to ECMAScript).
		if got := canonicalOf(string(data)); got != string(want) && !strings.Contains(string(want), "-0") {
			t.Errorf("got  %s\nwant %s", got, want)
		}
		got := canonicalOf(string(data))
		if again := canonicalOf(got); again != got {
			t.Errorf("%s becomes %s", got, again)
		}
		if data[0] == '{' && !jsontext.Value(text[len("depths\n"+compute.EngineVersion+"\n"):]).IsValid() {
			t.Errorf("no JSON: %s", text)
		}
	})
}

// withoutNulls leaves the members out whose value is null.
func withoutNulls(t testing.TB, data []byte) []byte {
	t.Helper()
	decoder := json.NewDecoder(strings.NewReader(string(data)))
	decoder.UseNumber()
	var value any
	if err := decoder.Decode(&value); err != nil {
		t.Fatal(err)
	}
	dropNulls(value)
	out, err := json.Marshal(value)
	if err != nil {
		t.Fatal(err)
	}
	return out
}

func dropNulls(value any) {
	switch value := value.(type) {
	case map[string]any:
		for name, member := range value {
			if member == nil {
				delete(value, name)
			} else {
				dropNulls(member)
			}
		}
	case []any:
		for _, item := range value {
			dropNulls(item)
		}
	}
}
