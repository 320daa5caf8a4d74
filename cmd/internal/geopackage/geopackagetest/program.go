package geopackagetest

import (
	"os"
	"os/exec"
	"testing"
)

// Program returns the path of a program from outside, such as ogrinfo of Debian's gdal-bin. It skips the test, or fails it under LEAT_ALL_PARTS=1,
// where there is none.
func Program(t testing.TB, name, debianPackage string) string {
	t.Helper()
	path, err := exec.LookPath(name)
	if err == nil {
		return path
	}
	missing := "there is no " + name + " for this test (Debian's package " + debianPackage + ")"
	if os.Getenv("LEAT_ALL_PARTS") == "1" {
		t.Fatal(missing)
	}
	t.Skip(missing)
	return ""
}
