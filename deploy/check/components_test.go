package check

import (
	"encoding/json"
	"os"
	"regexp"
	"strings"
	"testing"

	cyclonedx "github.com/CycloneDX/cyclonedx-go"
)

// TestComponents reads what `leat version --components` says (LEAT_COMPONENTS names the file, LEAT_MODULES one with the output of `go version -m` of the same binary)
// by the types of CycloneDX, without unknown members, and holds it against Go's own account.
func TestComponents(t *testing.T) {
	name, account := os.Getenv("LEAT_COMPONENTS"), os.Getenv("LEAT_MODULES")
	if name == "" || account == "" {
		if os.Getenv("LEAT_ALL_PARTS") != "" {
			t.Fatal("LEAT_COMPONENTS or LEAT_MODULES is not set")
		}
		t.Skip("LEAT_COMPONENTS or LEAT_MODULES is not set; .ci/run sets them")
	}
	file, err := os.Open(name)
	if err != nil {
		t.Fatal(err)
	}
	defer file.Close()
	var bill cyclonedx.BOM
	decoder := json.NewDecoder(file)
	decoder.DisallowUnknownFields()
	if err := decoder.Decode(&bill); err != nil {
		t.Fatal(err)
	}
	if bill.BOMFormat != cyclonedx.BOMFormat || bill.SpecVersion != cyclonedx.SpecVersion1_6 || bill.Version != 1 {
		t.Errorf("format %q, version %v, number %d", bill.BOMFormat, bill.SpecVersion, bill.Version)
	}
	if c := bill.Metadata.Component; c == nil || c.Type != cyclonedx.ComponentTypeApplication || c.Name != "leat" {
		t.Errorf("the bill is of %+v", c)
	}
	told := map[string]bool{}
	for _, c := range *bill.Components {
		if c.Type != cyclonedx.ComponentTypeLibrary || !regexp.MustCompile(`^pkg:golang/[^ @]+@[^ @]+$`).MatchString(c.PackageURL) || c.PackageURL != c.BOMRef || told[c.Name+" "+c.Version] {
			t.Errorf("component %+v", c)
		}
		told[c.Name+" "+c.Version] = true
	}
	modules, err := os.ReadFile(account)
	if err != nil {
		t.Fatal(err)
	}
	counted := 1 // the standard library
	for line := range strings.Lines(string(modules)) {
		fields := strings.Fields(line)
		if len(fields) >= 3 && fields[0] == "dep" {
			counted++
			if !told[fields[1]+" "+fields[2]] {
				t.Errorf("%s %s is not told", fields[1], fields[2])
			}
		}
	}
	if counted < 20 || len(told) != counted {
		t.Errorf("%d components told, %d are in the binary", len(told), counted)
	}
}
