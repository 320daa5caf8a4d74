package serve

import (
	"errors"
	"flag"
	"strings"
	"testing"
	"time"
)

func TestDefaultsAreAccepted(t *testing.T) {
	config, err := Load(nil, nil)
	if err != nil || config != Default() {
		t.Errorf("%+v, %v", config, err)
	}
	// Every default survives being written and read again, so --help shows what may be given.
	for _, s := range settings {
		shown := s.show(&config)
		again := Default()
		if err := s.set(&again, shown); err != nil || again != config {
			t.Errorf("--%s does not take its own default %q", s.name, shown)
		}
	}
}

func TestFlagsWinOverVariables(t *testing.T) {
	config, err := Load(
		[]string{"--body-bytes", "2MiB", "-time-limit=3s"},
		[]string{"LEAT_BODY_BYTES=3MiB", "LEAT_POINTS=77", "LEAT_ARRAY_ITEMS=", "LEAT_TIME_LIMIT=4s", "LEAT_LINE_BYTES=2048",
			"LEAT_PORT=tcp://10.0.0.1:80", "LEAT_PORT_80_TCP_ADDR=10.0.0.1", "LEAT_SERVICE_HOST=10.0.0.1", "PATH=/bin", "LEATHER=brown"})
	if err != nil {
		t.Fatal(err)
	}
	want := Default()
	want.BodyBytes, want.TimeLimit, want.Points, want.LineBytes = 2<<20, 3*time.Second, 77, 2048
	if config != want {
		t.Errorf("%+v\nwant %+v", config, want)
	}
}

func TestAllMistakesAtOnce(t *testing.T) {
	_, err := Load([]string{"--listen", "nowhere", "--points", "2", "--idle-limit=1"}, []string{"LEAT_BODY_BYTES=-1", "LEAT_BODYBYTES=1"})
	if err == nil {
		t.Fatal("accepted")
	}
	for _, part := range []string{
		`--listen: "nowhere" is not accepted; give host:port`, `--points: "2" is not accepted; give a whole number from 3 to`,
		`--idle-limit: "1" is not accepted; give a time from 1s to 1h, written`, `LEAT_BODY_BYTES: "-1" is not accepted; give a whole number of bytes from 1KiB to 64MiB`,
		"LEAT_BODYBYTES is no setting", "LEAT_BODY_BYTES, LEAT_PROFILE_BODY_BYTES",
	} {
		if !strings.Contains(err.Error(), part) {
			t.Errorf("no %q in\n%v", part, err)
		}
	}
}

func TestRefusedSettings(t *testing.T) {
	for _, arguments := range [][]string{
		{"--unknown", "1"}, {"surplus"}, {"--points"}, {"--points", "1e3"}, {"--points", ""}, {"--points", "99999999999999999999"},
		{"--body-bytes", "1000"}, {"--body-bytes", "65MiB"}, {"--body-bytes", "9223372036854775807TiB"}, {"--body-bytes", "1MB"}, {"--body-bytes", "1.5MiB"},
		{"--listen", "127.0.0.1"}, {"--listen", "127.0.0.1:http"}, {"--listen", ":70000"}, {"--listen", ""},
		{"--time-limit", "10"}, {"--time-limit", "0s"}, {"--time-limit", "NaN"},
		{"--held-bytes", "1MiB", "--body-bytes", "2MiB"}, {"--drain-delay", "30s"}, {"--spool-total-bytes", "1MiB"},
	} {
		if config, err := Load(arguments, nil); err == nil || errors.Is(err, flag.ErrHelp) {
			t.Errorf("%q: %+v, %v", arguments, config, err)
		}
	}
}

func TestHelpShowsEverySetting(t *testing.T) {
	if _, err := Load([]string{"--help"}, nil); !errors.Is(err, flag.ErrHelp) {
		t.Errorf("--help: %v", err)
	}
	text, config := Help(), Default()
	for _, s := range settings {
		for _, part := range []string{"--" + s.name + " VALUE", s.variable(), "Default " + s.show(&config) + ".", s.meaning, s.accepted} {
			if !strings.Contains(text, part) {
				t.Errorf("help does not show %q", part)
			}
		}
	}
}

func TestHealthLooksAtTheListenAddressOnly(t *testing.T) {
	got, err := LoadListen(nil, []string{"LEAT_LISTEN=:9000", "LEAT_UNKNOWN=1", "LEAT_POINTS=bad"})
	if err != nil || got != ":9000" {
		t.Errorf("%q, %v", got, err)
	}
}

func TestSpoolFolderIsCheckedAtTheStart(t *testing.T) {
	config := testConfig(t)
	config.SpoolDir += "/absent"
	if _, err := New(config, nil, testSurroundings(new(logBuffer))); err == nil || !strings.Contains(err.Error(), "--spool-dir") {
		t.Errorf("error %v", err)
	}
}

func TestTakenPortFailsTheStart(t *testing.T) {
	r := start(t, nil)
	config := testConfig(t)
	config.Listen = r.address
	second, err := New(config, nil, testSurroundings(new(logBuffer)))
	if err != nil {
		t.Fatal(err)
	}
	if _, err := second.Start(); err == nil || !strings.Contains(err.Error(), "--listen "+r.address) {
		t.Errorf("error %v", err)
	}
}
