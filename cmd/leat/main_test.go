package main

import (
	"bufio"
	"bytes"
	"encoding/json"
	"io"
	"net/http"
	"os"
	"os/exec"
	"strings"
	"syscall"
	"testing"
	"time"
)

// asCommand makes the test binary behave as leat itself, so that signals and exit codes are the real ones.
const asCommand = "RUN_AS_COMMAND"

func TestMain(m *testing.M) {
	if os.Getenv(asCommand) == "1" {
		main()
		return
	}
	os.Exit(m.Run())
}

func command(t testing.TB, environment []string, arguments ...string) *exec.Cmd {
	t.Helper()
	c := exec.CommandContext(t.Context(), os.Args[0], arguments...)
	c.Env = append(environment, asCommand+"=1", "TMPDIR="+t.TempDir())
	return c
}

func TestExitCodes(t *testing.T) {
	for _, row := range []struct {
		name        string
		environment []string
		arguments   []string
		code        int
		out, err    []string
	}{
		{"none", nil, nil, 2, nil, []string{"leat serve"}},
		{"help", nil, []string{"help"}, 0, []string{"leat serve", "leat health"}, nil},
		{"--help", nil, []string{"--help"}, 0, []string{"leat serve"}, nil},
		{"unknown", nil, []string{"server"}, 2, nil, []string{`unknown command "server"`}},
		{"version", nil, []string{"version"}, 0, []string{"leat ", "engine ", "go1."}, nil},
		{"--version", nil, []string{"--version"}, 0, []string{"leat ", "engine "}, nil},
		{"version --components", nil, []string{"version", "--components"}, 0, []string{`"bomFormat": "CycloneDX"`, `"purl": "pkg:golang/std@`, `"name": "leat"`}, nil},
		{"version with more", nil, []string{"version", "x"}, 2, nil, []string{"no arguments"}},
		{"help serve", nil, []string{"help", "serve"}, 0, []string{"--listen VALUE"}, nil},
		{"help health", nil, []string{"help", "health"}, 0, []string{"/readyz"}, nil},
		{"serve --help", nil, []string{"serve", "--help"}, 0, []string{"--listen VALUE", "LEAT_LISTEN", "127.0.0.1:8080", "LEAT_SPOOL_DIR"}, nil},
		{"health --help", nil, []string{"health", "--help"}, 0, []string{"/readyz"}, nil},
		{"key --help", nil, []string{"key", "--help"}, 0, []string{"leat key survey_office >> keys.txt"}, nil},
		{"help key", nil, []string{"help", "key"}, 0, []string{"SIGHUP"}, nil},
		{"key of nobody", nil, []string{"key"}, 2, nil, []string{"the caller's name"}},
		{"key of two words", nil, []string{"key", "survey office"}, 2, nil, []string{"letters, digits"}},
		{"register --help", nil, []string{"register", "--help"}, 0, []string{"leat register check MAPPING", "-dry-run", "Exit codes"}, nil},
		{"help register", nil, []string{"help", "register"}, 0, []string{"leat register work MAPPING"}, nil},
		{"register nothing", nil, []string{"register"}, 2, nil, []string{"say check, run, work or demo"}},
		{"register of no file", nil, []string{"register", "run", "/nowhere/at/all.yaml"}, 2, nil, []string{"/nowhere/at/all.yaml"}},
		{"register with a password", nil, []string{"register", "run", "--password", "x", "m.yaml"}, 2, nil, []string{"-password; --help lists the flags"}},
		{"all mistakes", []string{"LEAT_POINTS=x", "LEAT_TYPO=1"}, []string{"serve", "--listen", "x"}, 2, nil, []string{"--listen", "LEAT_POINTS", "LEAT_TYPO"}},
		{"no spool", nil, []string{"serve", "--spool-dir", "/nowhere/at/all"}, 1, nil, []string{"--spool-dir", "/nowhere/at/all"}},
		{"health of nothing", nil, []string{"health", "--listen", "127.0.0.1:1"}, 1, nil, []string{"refused"}},
		{"health with another flag", nil, []string{"health", "--url", "x"}, 2, nil, []string{"-url; --help lists the flags"}},
		{"health of a bad address", nil, []string{"health", "--listen", "x"}, 2, nil, []string{"--listen"}},
	} {
		t.Run(row.name, func(t *testing.T) {
			c := command(t, row.environment, row.arguments...)
			var out, err bytes.Buffer
			c.Stdout, c.Stderr = &out, &err
			c.Run()
			if code := c.ProcessState.ExitCode(); code != row.code {
				t.Errorf("exit code %d, want %d", code, row.code)
			}
			for _, part := range row.out {
				if !strings.Contains(out.String(), part) {
					t.Errorf("standard output %q lacks %q", out.String(), part)
				}
			}
			for _, part := range row.err {
				if !strings.Contains(err.String(), part) {
					t.Errorf("standard error %q lacks %q", err.String(), part)
				}
			}
		})
	}
}

// begin starts `leat serve` on a free port and returns its address once it listens. lines gets the log that follows.
func begin(t *testing.T, environment ...string) (c *exec.Cmd, address string, lines *bufio.Scanner) {
	t.Helper()
	c = command(t, append(environment, "LEAT_LISTEN=127.0.0.1:0"), "serve")
	log, err := c.StderrPipe()
	if err != nil {
		t.Fatal(err)
	}
	if err := c.Start(); err != nil {
		t.Fatal(err)
	}
	lines = bufio.NewScanner(log)
	if !lines.Scan() {
		t.Fatal("nothing logged")
	}
	var line struct{ Message, Address string }
	if err := json.Unmarshal(lines.Bytes(), &line); err != nil || line.Message != "listening" {
		t.Fatalf("%s: %v", lines.Bytes(), err)
	}
	return c, line.Address, lines
}

func TestServeHealthAndSignals(t *testing.T) {
	for _, signal := range []os.Signal{syscall.SIGTERM, os.Interrupt} {
		t.Run(signal.String(), func(t *testing.T) {
			c, address, lines := begin(t)
			health := command(t, []string{"LEAT_LISTEN=" + address, "LEAT_TYPO=1"}, "health")
			if out, err := health.CombinedOutput(); err != nil || len(out) > 0 {
				t.Errorf("health: %v %s", err, out)
			}
			response, err := http.Post("http://"+address+"/v1/depths", "application/json", strings.NewReader(
				`{"section":{"kind":"triangular","side_slope":1},"roughness":{"manning":0.0125},"bed_slope":0.0004,"discharge":0.8}`))
			if err != nil {
				t.Fatal(err)
			}
			body, _ := io.ReadAll(response.Body)
			response.Body.Close()
			var answer struct {
				NormalDepth float64 `json:"normal_depth"`
			}
			// By hand: area 1 m2, hydraulic radius 2^(-3/2) m, so Q = 1/0.0125 * 1/2 * 0.02 = 0.8 m3/s at a depth of 1 m.
			if err := json.Unmarshal(body, &answer); err != nil || !(answer.NormalDepth > 1-1e-12 && answer.NormalDepth < 1+1e-12) {
				t.Errorf("%s %s", response.Status, body)
			}
			c.Process.Signal(signal)
			var last string
			for lines.Scan() {
				last = lines.Text()
			}
			if err := c.Wait(); err != nil {
				t.Errorf("exit: %v", err)
			}
			if !strings.Contains(last, `"message":"stopped"`) {
				t.Errorf("last line %s", last)
			}
		})
	}
}

// A second signal must not cut what the first is waiting for.
func TestSecondSignalCutsNothing(t *testing.T) {
	c, address, _ := begin(t, "LEAT_DRAIN_DELAY=700ms")
	c.Process.Signal(syscall.SIGTERM)
	time.Sleep(200 * time.Millisecond)
	c.Process.Signal(syscall.SIGTERM)
	time.Sleep(200 * time.Millisecond)
	response, err := http.Get("http://" + address + "/readyz")
	if err != nil {
		t.Fatal(err)
	}
	response.Body.Close()
	if response.StatusCode != http.StatusServiceUnavailable {
		t.Errorf("/readyz while draining: %s", response.Status)
	}
	if out, err := command(t, []string{"LEAT_LISTEN=" + address}, "health").CombinedOutput(); err == nil || !strings.Contains(string(out), "not ready, status 503") {
		t.Errorf("health while draining: %v %s", err, out)
	}
	if err := c.Wait(); err != nil {
		t.Errorf("exit: %v", err)
	}
}

func TestTakenPort(t *testing.T) {
	first, address, _ := begin(t)
	second := command(t, nil, "serve", "--listen", address)
	if out, err := second.CombinedOutput(); second.ProcessState.ExitCode() != 1 || !strings.Contains(string(out), address) {
		t.Errorf("%v %s", err, out)
	}
	first.Process.Signal(syscall.SIGTERM)
	first.Wait()
}
