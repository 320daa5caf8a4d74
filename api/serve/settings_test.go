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
		{"--allow-open=1"}, {"--allow-open", "true"}, {"--connections", "0"}, {"--admin-listen", "9090"}, {"--allow-origin", "maps.example"}, {"--allow-origin", "https://maps.example/"},
		{"--allow-origin", "*,https://maps.example"}, {"--allow-origin", "null"}, {"--allow-origin", "https://Maps.example"}, {"--allow-origin", "https://maps.example:443"}, {"--allow-origin", "ftp://maps.example"},
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
		value, preset := " VALUE\n", s.show(&config)
		if s.isSwitch {
			value = "\n"
		}
		if preset == "" {
			preset = "nothing"
		}
		for _, part := range []string{"--" + s.name + value, s.variable(), "Default " + preset + ".", s.meaning, s.accepted} {
			if !strings.Contains(text, part) {
				t.Errorf("help does not show %q", part)
			}
		}
	}
}

func TestProbeLooksAtTheAddressesOnly(t *testing.T) {
	for _, row := range []struct {
		arguments, environment []string
		want                   ProbeTarget
	}{
		{nil, []string{"LEAT_LISTEN=:9000", "LEAT_UNKNOWN=1", "LEAT_POINTS=bad"}, ProbeTarget{":9000", false}},
		{nil, []string{"LEAT_LISTEN=:9000", "LEAT_TLS_CERTIFICATE=cert.pem"}, ProbeTarget{":9000", true}},
		{[]string{"--admin-listen", ":9001"}, []string{"LEAT_TLS_CERTIFICATE=cert.pem"}, ProbeTarget{":9001", false}},
	} {
		if got, err := LoadProbe(row.arguments, row.environment); err != nil || got != row.want {
			t.Errorf("%q %q: %+v, %v", row.arguments, row.environment, got, err)
		}
	}
}

// Whom the network could let in uninvited must be asked for by name.
func TestListeningBeyondTheMachineMustBeMeant(t *testing.T) {
	for _, row := range []struct {
		arguments string
		accepted  bool
	}{
		{"", true}, {"--listen localhost:0", true}, {"--listen [::1]:0", true}, {"--listen 127.9.9.9:80", true}, {"--listen [::ffff:127.0.0.1]:80", true},
		{"--listen :8080", false}, {"--listen 0.0.0.0:8080", false}, {"--listen [::]:8080", false}, {"--listen 10.0.0.7:8080", false}, {"--listen leat.example:80", false},
		{"--listen :8080 --allow-open", true}, {"--listen :8080 --allow-open=false", false}, {"--listen :8080 --keys-file keys", true},
		{"--listen :8080 --tls-certificate c --tls-key k", true}, {"--tls-certificate c", false}, {"--tls-key k", false}, {"--client-authorities a", false},
		{"--admin-listen 127.0.0.1:9090", true}, {"--admin-listen :9090", false}, {"--admin-listen :9090 --keys-file keys", true}, {"--admin-listen :9090 --tls-certificate c --tls-key k", true}, {"--admin-listen :9090 --allow-open", true},
		{"--admin-listen 127.0.0.1:8080", false}, {"--listen 127.0.0.1:0 --admin-listen 127.0.0.1:0", true},
	} {
		_, err := Load(strings.Fields(row.arguments), nil)
		if (err == nil) != row.accepted {
			t.Errorf("%q: %v", row.arguments, err)
		}
	}
	if _, err := Load(nil, []string{"LEAT_LISTEN=:8080", "LEAT_ALLOW_OPEN=true", "LEAT_KEYS_FILE="}); err != nil {
		t.Error(err)
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
