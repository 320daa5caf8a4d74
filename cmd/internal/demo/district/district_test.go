package district_test

import (
	"bytes"
	"context"
	"crypto/sha256"
	"encoding/hex"
	"errors"
	"flag"
	"math"
	"os"
	"path/filepath"
	"regexp"
	"testing"

	"leat/cmd/internal/demo/district"
	"leat/cmd/internal/geopackage"
	"leat/cmd/internal/geopackage/geopackagetest"
)

// What the generator writes as SQL; a change of it is a change of the demo that users see.
const sqlHash = "bae19d42d9025f8bb01678351fb9bb9e98903f29e81bfcd6bc2cf67d054a3e09"

func TestTheSameBytesEveryTime(t *testing.T) {
	var sql [2]bytes.Buffer
	var files [2][]byte
	for i := range sql {
		if err := district.WriteSQL(&sql[i]); err != nil {
			t.Fatal(err)
		}
		path := filepath.Join(t.TempDir(), "ostermere.gpkg")
		if err := district.WriteGeoPackage(t.Context(), path); err != nil {
			t.Fatal(err)
		}
		var err error
		if files[i], err = os.ReadFile(path); err != nil {
			t.Fatal(err)
		}
	}
	if !bytes.Equal(sql[0].Bytes(), sql[1].Bytes()) || !bytes.Equal(files[0], files[1]) {
		t.Error("two runs of the generator differ")
	}
	hash := sha256.Sum256(sql[0].Bytes())
	if got := hex.EncodeToString(hash[:]); got != sqlHash {
		t.Errorf("the SQL has the hash %s, not %s; if that is meant, write the new one here", got, sqlHash)
	}
	t.Logf("SQL %d bytes, GeoPackage %d bytes", sql[0].Len(), len(files[0]))
}

func TestTheFileKeepsTheStandardsRules(t *testing.T) {
	path := filepath.Join(t.TempDir(), "ostermere.gpkg")
	if err := district.WriteGeoPackage(context.Background(), path); err != nil {
		t.Fatal(err)
	}
	geopackagetest.Judge(t, path)
	if err := district.WriteGeoPackage(context.Background(), path); err == nil {
		t.Error("a file that exists is written over")
	}
	f, err := geopackage.Open(t.Context(), path, geopackage.Read)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	if n, err := f.Integer("SELECT count(*) FROM channels"); err != nil || n != district.Rows {
		t.Errorf("%d rows, %v", n, err)
	}
}

var (
	into  = flag.String("into", "", "where the long register of TestMultiply is to be left")
	times = flag.Int("times", 3, "its length, in demos of 1,200 assets")
)

func TestMultiply(t *testing.T) {
	path := *into
	if path == "" {
		path = filepath.Join(t.TempDir(), "long.gpkg")
	}
	if err := district.WriteGeoPackage(t.Context(), path); err != nil {
		t.Fatal(err)
	}
	f, err := geopackage.Open(t.Context(), path, geopackage.Write)
	if err != nil {
		t.Fatal(err)
	}
	if err := errors.Join(f.Run("PRAGMA synchronous = OFF"), district.Multiply(f, *times)); err != nil {
		t.Fatal(err)
	}
	one, err := f.Integer("SELECT count(*) FROM section_points WHERE length(asset_code) = 11")
	if err != nil || one == 0 {
		t.Fatal(one, err)
	}
	for statement, want := range map[string]int64{
		"SELECT count(DISTINCT asset_code) FROM channels":                    int64(*times * district.Rows),
		"SELECT count(*) FROM channels WHERE geom IS NULL":                   0,
		"SELECT count(*) FROM section_points":                                int64(*times) * one,
		"SELECT count(*) FROM rtree_channels_geom":                           int64(*times * district.Rows),
		"SELECT count(*) FROM channels WHERE asset_code LIKE '%-0023-00001'": 1,
	} {
		if got, err := f.Integer(statement); err != nil || got != want {
			t.Errorf("%s: %d, %v, want %d", statement, got, err, want)
		}
	}
	if err := f.Close(); err != nil {
		t.Fatal(err)
	}
}

func TestTheRegisterIsWhatItSays(t *testing.T) {
	codes, shapes, classes := map[string]bool{}, map[string]int{}, map[string]int{}
	shape := regexp.MustCompile(`^[A-Z]{3}-[A-Z]{2}-\d{4}$`)
	for i, c := range district.Channels() {
		if !shape.MatchString(c.Code) || codes[c.Code] {
			t.Errorf("row %d: code %s", i+1, c.Code)
		}
		codes[c.Code] = true
		shapes[c.Shape]++
		classes[c.Class]++
		last := c.Line[len(c.Line)-1]
		if length, given := c.Length.(float64); given && length != 0 && !(math.Abs(last.M-length) <= 0.06) {
			t.Errorf("%s: the line is %g long, the register says %g", c.Code, last.M, length)
		}
		for _, v := range c.Line {
			if !(v.X > 0 && v.X < 12000 && v.Y > 0 && v.Y < 12000 && v.Z > -20 && v.Z < 40) {
				t.Errorf("%s lies at %+v", c.Code, v)
			}
		}
	}
	if len(shapes) != 10 || len(classes) != 8 { // with one misspelt each
		t.Errorf("shapes %v, classes %v", shapes, classes)
	}
	for name, n := range classes {
		if n < 40 && name != "swer" {
			t.Errorf("only %d of %s", n, name)
		}
	}
	rows := map[int]bool{}
	for _, m := range district.Mistakes {
		if rows[m.Row] || m.Told == "" || m.Column == "" || m.Row < 1 || m.Row > district.Rows {
			t.Errorf("mistake %+v", m)
		}
		rows[m.Row] = true
	}
}
