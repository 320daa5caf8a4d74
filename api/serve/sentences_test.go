package serve

import (
	"go/ast"
	"go/token"
	"strconv"
	"strings"
	"testing"
	"unicode"
)

// What callers read is told in whole sentences. This test reads the source for the texts of problems, faults and warnings, so that
// those too are judged that no test provokes; what is put together at run time is judged by its beginning and its end.

// tellers are the functions and methods whose last argument is such a text.
var tellers = map[string]bool{
	"add": true, "at": true, "end": true, "fault": true, // faults and notes of compute, warnings of operation
	"Unauthorized": true, "NotFound": true, "MethodNotAllowed": true, "NotAcceptable": true, "RequestTimeout": true, "UnsupportedMediaType": true,
	"TooManyRequests": true, "Internal": true, "NonFiniteResult": true, "Saturated": true, "Draining": true, "NotReady": true, "TimeLimit": true, "NoSolution": true,
}

// texts lists the first and the last literal of every text that a file tells; either is empty where that end is no literal.
func texts(file *ast.File) (out [][2]string) {
	note := func(e ast.Expr) {
		first, last := e, e
		for {
			sum, ok := first.(*ast.BinaryExpr)
			if !ok || sum.Op != token.ADD {
				break
			}
			first = sum.X
		}
		if sum, ok := last.(*ast.BinaryExpr); ok {
			last = sum.Y
		}
		ends := [2]string{literal(first), literal(last)}
		if strings.Contains(ends[0], " ") || strings.Contains(ends[1], " ") {
			out = append(out, ends)
		}
	}
	ast.Inspect(file, func(n ast.Node) bool {
		switch n := n.(type) {
		case *ast.KeyValueExpr:
			if key, ok := n.Key.(*ast.Ident); ok && key.Name == "Detail" {
				note(n.Value)
			}
		case *ast.CallExpr:
			name := ""
			switch f := n.Fun.(type) {
			case *ast.Ident:
				name = f.Name
			case *ast.SelectorExpr:
				name = f.Sel.Name
			}
			if tellers[name] && len(n.Args) > 0 {
				note(n.Args[len(n.Args)-1])
			}
		}
		return true
	})
	return out
}

// literal returns the text of a literal, or of the format that makes one; empty for anything else.
func literal(e ast.Expr) string {
	if call, ok := e.(*ast.CallExpr); ok {
		if f, ok := call.Fun.(*ast.SelectorExpr); ok && f.Sel.Name == "Sprintf" {
			e = call.Args[0]
		}
	}
	if basic, ok := e.(*ast.BasicLit); ok && basic.Kind == token.STRING {
		text, _ := strconv.Unquote(basic.Value)
		return text
	}
	return ""
}

// isSentence judges what is known of a text's ends: a capital letter or a member's name, and a full stop.
func isSentence(first, last string) bool {
	word, _, _ := strings.Cut(first, " ")
	begins := first == "" || unicode.IsUpper([]rune(first)[0]) || strings.Contains(word, "_") || strings.HasPrefix(first, "%")
	return begins && (last == "" || strings.HasSuffix(strings.TrimSpace(last), "."))
}

func TestDetailsAreSentences(t *testing.T) {
	judged := map[string]int{}
	for folder, files := range readHouse(t) {
		if !strings.HasPrefix(folder, "api/") && !strings.HasPrefix(folder, "compute/") {
			continue
		}
		for _, file := range files {
			for _, ends := range texts(file) {
				judged[folder]++
				if !isSentence(ends[0], ends[1]) {
					t.Errorf("%s: %q … %q is no sentence", folder, ends[0], ends[1])
				}
			}
		}
	}
	for _, folder := range []string{"compute/section", "compute/friction", "compute/profile", "api/operation", "api/serve", "api/format"} {
		if judged[folder] == 0 {
			t.Errorf("no text was found in %s", folder)
		}
	}
	for _, bad := range [][2]string{{"the depth lies above the crown.", ""}, {"", "the end"}, {"The depth", " is wrong"}} {
		if isSentence(bad[0], bad[1]) {
			t.Errorf("%q passes", bad)
		}
	}
}
