package main

import (
	"bufio"
	"crypto/sha256"
	"encoding/hex"
	"flag"
	"fmt"
	"io"
	"math/rand/v2"
	"os"
	"path/filepath"
	"strings"
	"sync"
	"testing"
	"time"

	"zombiezen.com/go/sqlite"

	"leat/cmd/internal/demo/district"
	"leat/cmd/internal/geopackage"
	"leat/cmd/internal/geopackage/geopackagetest"
)

var (
	killTimes = flag.Int("times", 4, "length of the register whose run is killed, in demos of 1,200 assets")
	kills     = flag.Int("kills", 4, "how often a run over a GeoPackage is killed")
	killRows  = flag.Int("rows", 100, "rows of a batch of the run that is killed")
)

// A run that is killed again and again, at moments that nobody chose, ends in the same results as one that is left alone: each asset once, and no batch by halves.
func TestAKilledRunOverAGeoPackageGoesOn(t *testing.T) {
	whole := makeRegister(t, *killTimes)
	broken := copyRegister(t, whole)
	register := func(mapping string) []string {
		return []string{"register", "run", "--quiet", "--rows", fmt.Sprint(*killRows), mapping}
	}
	began := time.Now()
	c := command(t, nil, register(whole)...)
	if out, _ := c.CombinedOutput(); c.ProcessState.ExitCode() != exitProblems {
		t.Fatalf("undisturbed: %v\n%s", c.ProcessState, out)
	}
	took := time.Since(began)

	dice := rand.New(rand.NewPCG(9, 2))
	killed, within := 0, 0
	for range *kills {
		c := command(t, nil, register(broken)...)
		said, err := c.StderrPipe()
		if err != nil {
			t.Fatal(err)
		}
		if err := c.Start(); err != nil {
			t.Fatal(err)
		}
		// The run is under way from the line that names it; the moment is one of the run, not of its preparation.
		lines := bufio.NewScanner(said)
		if !lines.Scan() {
			t.Fatalf("a run that went on said nothing and ended with %v", c.Wait())
		}
		if strings.HasPrefix(lines.Text(), "going on") {
			within++
		}
		var rest sync.WaitGroup
		rest.Go(func() {
			for lines.Scan() {
			}
		})
		ended := make(chan error, 1)
		go func() { rest.Wait(); ended <- c.Wait() }()
		select {
		case <-ended:
			if c.ProcessState.ExitCode() != exitProblems {
				t.Fatalf("a run that went on: %v", c.ProcessState)
			}
		case <-time.After(time.Duration(dice.Float64() * float64(took) * 1.2 / float64(*kills))):
			if err := c.Process.Kill(); err != nil {
				t.Fatal(err)
			}
			<-ended
			killed++
		}
	}
	c = command(t, nil, register(broken)...)
	out, _ := c.CombinedOutput()
	if c.ProcessState.ExitCode() != exitProblems {
		t.Fatalf("the last run: %v\n%s", c.ProcessState, out)
	}
	t.Logf("killed %d times, %d runs went on where another had been killed, undisturbed it took %v; the last one: %s", killed, within, took.Round(time.Millisecond), firstLine(out))
	if killed == 0 || within == 0 {
		t.Error("no run was killed and gone on with: the register is too short for this machine")
	}
	want, rows := resultHash(t, whole)
	got, rowsToo := resultHash(t, broken)
	if want != got || rows != rowsToo {
		t.Errorf("%d results with the hash %s after kills, %d with %s without", rowsToo, got, rows, want)
	}
	geopackagetest.Judge(t, filepath.Join(filepath.Dir(broken), "ostermere.gpkg"))
}

func firstLine(text []byte) string {
	for _, line := range strings.Split(string(text), "\n") {
		if strings.Contains(line, "rows in") {
			return line
		}
	}
	return string(text)
}

func makeRegister(t *testing.T, times int) (mapping string) {
	t.Helper()
	folder := t.TempDir()
	file := filepath.Join(folder, "ostermere.gpkg")
	if err := district.WriteGeoPackage(t.Context(), file); err != nil {
		t.Fatal(err)
	}
	if times > 1 {
		f, err := geopackage.Open(t.Context(), file, geopackage.Write)
		if err != nil {
			t.Fatal(err)
		}
		if err := f.Run("PRAGMA synchronous = OFF"); err != nil {
			t.Fatal(err)
		}
		if err := district.Multiply(f, times); err != nil {
			t.Fatal(err)
		}
		if err := f.Close(); err != nil {
			t.Fatal(err)
		}
	}
	content, err := os.ReadFile("../../deploy/register/ostermere_geopackage.yaml")
	if err != nil {
		t.Fatal(err)
	}
	mapping = filepath.Join(folder, "mapping.yaml")
	if err := os.WriteFile(mapping, content, 0o600); err != nil {
		t.Fatal(err)
	}
	return mapping
}

func copyRegister(t *testing.T, mapping string) string {
	t.Helper()
	folder := t.TempDir()
	for _, name := range []string{"mapping.yaml", "ostermere.gpkg"} {
		from, err := os.Open(filepath.Join(filepath.Dir(mapping), name))
		if err != nil {
			t.Fatal(err)
		}
		defer from.Close()
		to, err := os.Create(filepath.Join(folder, name))
		if err != nil {
			t.Fatal(err)
		}
		if _, err := io.Copy(to, from); err != nil {
			t.Fatal(err)
		}
		if err := to.Close(); err != nil {
			t.Fatal(err)
		}
	}
	return filepath.Join(folder, "mapping.yaml")
}

// resultHash is of all results and problems, in the order of their assets, but for the run and the moment.
func resultHash(t *testing.T, mapping string) (hash string, rows int64) {
	t.Helper()
	f, err := geopackage.Open(t.Context(), filepath.Join(filepath.Dir(mapping), "ostermere.gpkg"), geopackage.Read)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	sum := sha256.New()
	for _, part := range []struct{ table, order string }{{"leat_results", "asset"}, {"leat_results_problems", "asset, pointer, code, text"}} {
		described, err := f.Table(part.table)
		if err != nil {
			t.Fatal(err)
		}
		var names []string
		for _, c := range described.Columns {
			if c.Name != described.Key && c.Name != "run" && c.Name != "computed_at" {
				names = append(names, "quote("+geopackage.Quote(c.Name)+")") // of numbers all digits that tell them apart
			}
		}
		err = f.Rows("SELECT "+strings.Join(names, " || ',' || ")+" FROM "+part.table+" ORDER BY "+part.order, func(s *sqlite.Stmt) error {
			fmt.Fprintln(sum, s.ColumnText(0))
			rows++
			return nil
		})
		if err != nil {
			t.Fatal(err)
		}
	}
	return hex.EncodeToString(sum.Sum(nil)), rows
}
