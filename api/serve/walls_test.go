package serve

import (
	"go/ast"
	"go/parser"
	"go/token"
	"io/fs"
	"path"
	"path/filepath"
	"slices"
	"strconv"
	"strings"
	"testing"
)

// The walls of the house: who may import whom. The whole module is read, tests apart, so that a wall cannot be missed by a list of packages.

// A house maps each package of the module (by its folder) to its files.
type house map[string][]*ast.File

const moduleName = "leat"

// readHouse parses every Go file of the module that is no test.
func readHouse(t *testing.T) house {
	t.Helper()
	root := filepath.Join("..", "..")
	files := token.NewFileSet()
	h := house{}
	err := filepath.WalkDir(root, func(name string, entry fs.DirEntry, err error) error {
		if err != nil {
			return err
		}
		base := entry.Name()
		if entry.IsDir() && name != root && (strings.HasPrefix(base, ".") || strings.HasPrefix(base, "_") || base == "testdata") {
			return fs.SkipDir
		}
		if entry.IsDir() || !strings.HasSuffix(base, ".go") || strings.HasSuffix(base, "_test.go") {
			return nil
		}
		file, err := parser.ParseFile(files, name, nil, 0)
		if err != nil {
			return err
		}
		folder, err := filepath.Rel(root, filepath.Dir(name))
		if err != nil {
			return err
		}
		folder = filepath.ToSlash(folder)
		h[folder] = append(h[folder], file)
		return nil
	})
	if err != nil {
		t.Fatal(err)
	}
	for _, expected := range []string{"compute", "compute/section", "compute/friction", "api/wire", "api/operation", "api/stream", "api/admit", "api/format", "api/picture", "api/site", "api/serve", "cmd/leat", "openapi"} {
		if h[expected] == nil {
			t.Fatalf("package %s was not found: the walls would stand around nothing", expected)
		}
	}
	return h
}

func importsOf(files []*ast.File) []string {
	var out []string
	for _, file := range files {
		for _, spec := range file.Imports {
			name, err := strconv.Unquote(spec.Path.Value)
			if err != nil {
				panic(err) // the parser has read it
			}
			out = append(out, name)
		}
	}
	slices.Sort(out)
	return slices.Compact(out)
}

// ours returns the folder of an imported package of the module.
func ours(name string) (folder string, found bool) {
	if name == moduleName {
		return ".", true
	}
	return strings.CutPrefix(name, moduleName+"/")
}

func isStandard(name string) bool {
	first, _, _ := strings.Cut(name, "/")
	_, own := ours(name)
	return !own && !strings.Contains(first, ".")
}

// compute works on values: of the standard library it needs arithmetic, and these are not arithmetic.
var notForCompute = []string{
	"net", "net/http", "encoding/json", "encoding/json/v2", "encoding/json/jsontext", "log", "log/slog", "time", "os", "io", "io/fs", "context",
	"math/rand", "math/rand/v2", "crypto/rand", "sync", "unsafe", "reflect", "runtime", "syscall",
}

func TestComputeImportsArithmeticOnly(t *testing.T) {
	h := readHouse(t)
	for folder, files := range h {
		if folder != "compute" && !strings.HasPrefix(folder, "compute/") {
			continue
		}
		if _, isSupport := supported(folder); isSupport {
			continue // dice for tests; nothing but tests imports it
		}
		for _, name := range importsOf(files) {
			own, isOwn := ours(name)
			switch {
			case isOwn && own != "compute" && !strings.HasPrefix(own, "compute/"):
				t.Errorf("%s imports %s: compute must know nothing of the rest", folder, name)
			case !isOwn && !isStandard(name):
				t.Errorf("%s imports %s: compute needs the standard library only", folder, name)
			case slices.Contains(notForCompute, name):
				t.Errorf("%s imports %s", folder, name)
			}
		}
		// The last bits of these depend on the instructions of the processor.
		for _, file := range files {
			ast.Inspect(file, func(n ast.Node) bool {
				call, isCall := n.(*ast.SelectorExpr)
				if !isCall {
					return true
				}
				if pkg, isName := call.X.(*ast.Ident); isName && pkg.Name == "math" && slices.Contains([]string{"Pow", "Exp", "Exp2", "Expm1", "FMA"}, call.Sel.Name) {
					t.Errorf("%s uses math.%s: its last bits are not the same on all processors", folder, call.Sel.Name)
				}
				return true
			})
		}
	}
}

// The order of the house, from the top; a package may import those below it only. Packages of one row do not import each other.
var order = [][]string{
	{"cmd/leat"},
	{"api/serve"},
	{"api/site", "api/record"},
	{"api/picture"},
	{"api/format"},
	{"api/operation"},
	{"api/wire"},
	{"compute/appraise", "compute/profile"},
	{"compute/structure"},
	{"compute/flow"},
	{"compute/friction"},
	{"compute/section"},
	{"compute/solve"},
	{"compute"},
}

// aside are packages that import nothing of the order; who may import them is said of each.
var aside = map[string]func(importer string) bool{
	"api/stream": func(importer string) bool {
		return importer == "api/format" || importer == "api/serve" || strings.HasPrefix(importer, "cmd/")
	},
	"api/admit": func(importer string) bool { return importer == "api/serve" || strings.HasPrefix(importer, "cmd/") },
	"api/wellformed": func(importer string) bool {
		return importer == "api/format" || importer == "cmd/internal/register/geojson"
	},
	"openapi": func(importer string) bool {
		return importer == "api/serve" || importer == "api/site" || importer == "cmd/leat"
	},
}

func rank(folder string) int {
	return slices.IndexFunc(order, func(row []string) bool { return slices.Contains(row, folder) })
}

// supported returns the package that a package of support for tests stands below: "x/y/ytest" supports "x/y".
func supported(folder string) (string, bool) {
	parent, base := path.Split(folder)
	parent = strings.TrimSuffix(parent, "/")
	return parent, parent != "" && base == path.Base(parent)+"test"
}

func TestImportsPointOneWay(t *testing.T) {
	h := readHouse(t)
	for folder, files := range h {
		_, isAside := aside[folder]
		inside := strings.HasPrefix(folder, "cmd/internal/")
		subject, isSupport := supported(folder)
		if isSupport {
			for _, name := range importsOf(files) {
				if own, isOwn := ours(name); isOwn && (rank(own) < 0 || rank(own) < rank(subject)) {
					t.Errorf("%s imports %s: tests of %s need nothing above it", folder, name, subject)
				}
			}
			continue
		}
		if rank(folder) < 0 && !isAside && !inside {
			t.Errorf("package %s has no place in the order of the house: give it one here and in DEVELOPERS.md", folder)
			continue
		}
		for _, name := range importsOf(files) {
			own, isOwn := ours(name)
			if !isOwn {
				continue
			}
			allowed, isAsideToo := aside[own]
			if _, isSupport := supported(own); isSupport {
				t.Errorf("%s imports %s: that is for tests", folder, name)
				continue
			}
			switch {
			case isAside:
				t.Errorf("%s imports %s: it must import nothing of ours", folder, name)
			case isAsideToo:
				if !allowed(folder) {
					t.Errorf("%s must not import %s", folder, name)
				}
			case strings.HasPrefix(own, "cmd/"):
				if !strings.HasPrefix(folder, "cmd/") {
					t.Errorf("%s imports %s: commands are for nobody else", folder, name)
				}
			case inside: // below cmd/leat, above all else
			case rank(own) <= rank(folder):
				t.Errorf("%s imports %s: that arrow points up", folder, name)
			}
		}
	}
}

// What the packages of leat register may import of ours. None of them knows HTTP.
var ofRegister = map[string][]string{
	"row": {}, "wholefile": {}, "store": {"row"},
	"csvfile": {"row", "store", "wholefile"}, "geojson": {"row", "store", "wholefile", "csvfile", "api/wellformed"},
	"geopackage": {"row", "store", "cmd/internal/geopackage"}, "postgres": {"row", "store"},
	"mapping": {"row", "store", "api/wire", "api/operation"},
	"run":     {"row", "store", "mapping", "api/wire", "api/operation", "compute"},
}

func TestRegisterImportsPointOneWay(t *testing.T) {
	const register = "cmd/internal/register/"
	found := 0
	for folder, files := range readHouse(t) {
		name, inside := strings.CutPrefix(folder, register)
		if _, isSupport := supported(folder); !inside || isSupport {
			continue
		}
		allowed, known := ofRegister[name]
		if !known {
			t.Errorf("package %s has no place in the register: give it one here and in DEVELOPERS.md", folder)
		}
		found++
		for _, imported := range importsOf(files) {
			if own, isOwn := ours(imported); isOwn && !slices.Contains(allowed, strings.TrimPrefix(own, register)) {
				t.Errorf("%s imports %s", folder, imported)
			}
		}
	}
	if found < len(ofRegister)-2 {
		t.Errorf("only %d packages of the register were found", found)
	}
}

func TestOnlyServeImportsGin(t *testing.T) {
	for folder, files := range readHouse(t) {
		for _, name := range importsOf(files) {
			if strings.HasPrefix(name, "github.com/gin-gonic/") && folder != "api/serve" {
				t.Errorf("%s imports %s", folder, name)
			}
			if strings.HasPrefix(name, "github.com/getkin/") {
				t.Errorf("%s imports %s: that is for tests", folder, name)
			}
			if name == "net/http" && (strings.HasPrefix(folder, "api/") && !slices.Contains([]string{"api/serve", "api/wire"}, folder)) {
				t.Errorf("%s imports net/http: HTTP is api/serve's", folder)
			}
		}
	}
}

// Nothing under api and compute calls out or starts programs: a service that computes has no reason to.
func TestNothingCallsOut(t *testing.T) {
	forbidden := map[string][]string{
		"net":      {"Dial", "DialTimeout", "Dialer", "DialTCP", "DialUDP", "DialUnix", "DialIP", "LookupHost", "LookupIP", "LookupAddr", "Resolver", "DefaultResolver"},
		"net/http": {"Client", "DefaultClient", "Transport", "DefaultTransport", "Get", "Post", "PostForm", "Head", "NewRequest", "NewRequestWithContext"},
		"os":       {"StartProcess"},

		"crypto/tls": {"Dial", "DialWithDialer", "Dialer", "Client"},
		"syscall":    {"Socket", "Connect", "ForkExec", "StartProcess", "Exec"},
	}
	for folder, files := range readHouse(t) {
		if !strings.HasPrefix(folder, "api/") && folder != "compute" && !strings.HasPrefix(folder, "compute/") {
			continue
		}
		for _, file := range files {
			names := map[string]string{} // local name of a package to its path
			for _, spec := range file.Imports {
				name, _ := strconv.Unquote(spec.Path.Value)
				local := path.Base(name)
				if spec.Name != nil {
					local = spec.Name.Name
				}
				names[local] = name
				if slices.Contains([]string{"os/exec", "net/rpc", "net/smtp", "plugin", "net/http/httputil"}, name) || local == "." {
					t.Errorf("%s imports %s", folder, name)
				}
			}
			ast.Inspect(file, func(n ast.Node) bool {
				selector, is := n.(*ast.SelectorExpr)
				if !is {
					return true
				}
				if pkg, isName := selector.X.(*ast.Ident); isName && slices.Contains(forbidden[names[pkg.Name]], selector.Sel.Name) {
					t.Errorf("%s uses %s.%s", folder, names[pkg.Name], selector.Sel.Name)
				}
				return true
			})
		}
	}
}

// A wall that cannot fail is none: the functions that the walls stand on, on small inputs.
func TestWallsCanFail(t *testing.T) {
	if rank("compute/flow") >= rank("compute/section") || rank("api/wire") >= rank("compute") || rank("cmd/leat") != 0 || rank("nowhere") != -1 {
		t.Error("rank")
	}
	if isStandard("github.com/gin-gonic/gin") || isStandard("leat/compute") || !isStandard("net/http") {
		t.Error("isStandard")
	}
	if subject, found := supported("compute/friction/frictiontest"); !found || subject != "compute/friction" {
		t.Error("supported")
	}
	if _, found := supported("compute/latest"); found {
		t.Error("supported")
	}
	if _, found := ours("leather/x"); found {
		t.Error("ours")
	}
	file, err := parser.ParseFile(token.NewFileSet(), "x.go", "package x\nimport (\n\"os/exec\"\n)\nvar _ = exec.Command", 0)
	if err != nil || !slices.Equal(importsOf([]*ast.File{file}), []string{"os/exec"}) {
		t.Error("importsOf")
	}
}
