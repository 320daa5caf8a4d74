package serve

import (
	"go/ast"
	"go/parser"
	"go/token"
	"io/fs"
	"path/filepath"
	"strings"
	"testing"
)

// wallClock are the ways from a time.Time to the wall clock: they strip the monotonic reading that time.Now gives, or make a time that never had one. What
// is compared and subtracted without them goes by the monotonic clock, which no operator and no time server sets.
var wallClock = map[string]bool{
	"Round": true, "Truncate": true, "UTC": true, "Local": true, "In": true, "AddDate": true, "Unix": true, "UnixMilli": true, "UnixMicro": true, "UnixNano": true,
	"Date": true, "Parse": true, "ParseInLocation": true, "ModTime": true, "MarshalJSON": true, "GobEncode": true,
}

// mayTellTheTime are the places of api and cmd/leat that use the wall clock, by file and function, and why nothing waits for it there.
var mayTellTheTime = map[string]string{
	"api/serve/log.go NewLog":            "the time of a log line, which people read",
	"api/serve/patient.go NewPatientLog": "the time of a log line, which people read",
	"api/serve/bulk.go pump":             "1970 as a deadline, which is past by any clock and ends reading at once",
	"api/stream/spool.go release":        "a file is truncated there, not a time",
}

// TestNothingWaitsForTheWallClock reads the sources of the service for times without a monotonic reading: where there are none, a clock that jumps moves no deadline, no
// wait, no rate and no Retry-After. (Certificates end by the wall clock, in crypto/tls.)
func TestNothingWaitsForTheWallClock(t *testing.T) {
	found := map[string]bool{}
	for name := range wallClockUses(t, "../../api", "../../cmd/leat") {
		found[name] = true
		if mayTellTheTime[name] == "" {
			t.Errorf("%s goes by the wall clock", name)
		}
	}
	for name := range mayTellTheTime {
		if !found[name] {
			t.Errorf("%s no longer uses the wall clock; take it from the list", name)
		}
	}
}

// wallClockUses returns where files call what strips the monotonic reading.
func wallClockUses(t *testing.T, roots ...string) map[string]bool {
	t.Helper()
	uses, files := map[string]bool{}, 0
	for _, root := range roots {
		err := filepath.WalkDir(root, func(name string, entry fs.DirEntry, err error) error {
			if err != nil || entry.IsDir() || !strings.HasSuffix(name, ".go") || strings.HasSuffix(name, "_test.go") {
				return err
			}
			file, err := parser.ParseFile(token.NewFileSet(), name, nil, 0)
			if err != nil {
				return err
			}
			files++
			for _, declaration := range file.Decls {
				within := "a declaration"
				if function, is := declaration.(*ast.FuncDecl); is {
					within = function.Name.Name
				}
				ast.Inspect(declaration, func(n ast.Node) bool {
					call, is := n.(*ast.CallExpr)
					if !is {
						return true
					}
					selector, is := call.Fun.(*ast.SelectorExpr)
					if !is || !wallClock[selector.Sel.Name] {
						return true
					}
					from, _ := selector.X.(*ast.Ident)
					if ofOthers := from != nil && from.Name == "math"; !ofOthers && (!strings.HasPrefix(selector.Sel.Name, "Parse") || from != nil && from.Name == "time") {
						uses[strings.TrimPrefix(filepath.ToSlash(name), "../../")+" "+within] = true
					}
					return true
				})
			}
			return nil
		})
		if err != nil {
			t.Fatal(err)
		}
	}
	if files < 100 {
		t.Fatalf("only %d files were read", files)
	}
	return uses
}
