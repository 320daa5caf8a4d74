package site

import (
	"bytes"
	"html"
	"regexp"
	"strings"
	"testing"

	"leat/api/wire"
)

// Every type of the table has its page with cause and cure, and the list leads to each.
func TestProblemPages(t *testing.T) {
	list, each, err := Problems()
	if err != nil {
		t.Fatal(err)
	}
	types := wire.ProblemTypes()
	if len(types) < 15 || len(each) != len(types) || len(advices) != len(types) {
		t.Errorf("%d types, %d pages, advice of %d", len(types), len(each), len(advices))
	}
	for _, kind := range types {
		text := html.UnescapeString(string(each[kind.Name]))
		told := advices[kind.Name]
		for _, part := range []string{"<h1>" + kind.Title + "</h1>", "<code>" + kind.Name + "</code>", told.Cause, told.Cure} {
			if part == "" || !strings.Contains(text, part) {
				t.Errorf("the page of %s does not show %q", kind.Name, part)
			}
		}
		for _, sentence := range []string{told.Cause, told.Cure} {
			if len(sentence) < 40 || !strings.HasSuffix(sentence, ".") {
				t.Errorf("%s: %q", kind.Name, sentence)
			}
		}
		if !bytes.Contains(list, []byte(`<a href="`+kind.Reference()+`"><code>`+kind.Name+`</code></a>`)) {
			t.Errorf("the list does not lead to %s", kind.Name)
		}
	}
}

// The pages need nothing from outside, and may be shown under the policy of the page at the root: their style is its style.
func TestProblemPagesNeedNothingFromOutside(t *testing.T) {
	list, each, err := Problems()
	if err != nil {
		t.Fatal(err)
	}
	each["the list"] = list
	for name, text := range each {
		if !bytes.Equal(style(text), style(page)) {
			t.Errorf("%s: style %q", name, style(text))
		}
		if found := regexp.MustCompile(`(?i)<script|src=|@import|url\(|https?://|style=|<link|ZgotmplZ`).Find(text); found != nil {
			t.Errorf("%s holds %q", name, found)
		}
	}
}
