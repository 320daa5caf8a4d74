package serve

import (
	"errors"
	"flag"
	"fmt"
	"io"
	"net"
	"net/netip"
	"slices"
	"strconv"
	"strings"
	"time"
)

// A setting is one row of the table that flags, environment and --help are made from.
type setting struct {
	name     string // of the flag; the environment twin is LEAT_ and this in capitals
	meaning  string // one sentence
	accepted string // what a value may be
	set      func(*Config, string) error
	show     func(*Config) string
	isSwitch bool // its flag may stand alone, for true
}

func (s setting) variable() string {
	return "LEAT_" + strings.ToUpper(strings.ReplaceAll(s.name, "-", "_"))
}

var errNotAccepted = errors.New("not accepted")

// settings is the table. Its order is that of --help.
var settings = []setting{
	addressSetting("listen", "TCP address to serve HTTP on", "host:port; an empty host means every address, port 0 a free port", false, func(c *Config) *string { return &c.Listen }),
	bytesSetting("body-bytes", "greatest request body of a unary operation", 1<<10, 64<<20, func(c *Config) *int64 { return &c.BodyBytes }),
	bytesSetting("profile-body-bytes", "greatest request body of a profile", 1<<10, 1<<30, func(c *Config) *int64 { return &c.ProfileBytes }),
	bytesSetting("line-bytes", "greatest record of a bulk request", 1<<10, 64<<20, func(c *Config) *int64 { return &c.LineBytes }),
	bytesSetting("held-bytes", "request bodies held in memory at once, and as much again of answers that wait for their readers; beyond it 503", 1<<20, 64<<30, func(c *Config) *int64 { return &c.HeldBytes }),
	countSetting("array-items", "greatest length of a list in a request that has no limit of its own", 1, 1_000_000, func(c *Config) *int { return &c.ArrayItems }),
	countSetting("points", "most points of a surveyed section", 3, 1_000_000, func(c *Config) *int { return &c.Points }),
	countSetting("reaches", "most reaches of a profile", 1, 1_000_000, func(c *Config) *int { return &c.Reaches }),
	countSetting("stations", "most surveyed stations of a profile", 2, 1_000_000, func(c *Config) *int { return &c.Stations }),
	countSetting("report-points", "most places at which a profile reports", 1, 10_000_000, func(c *Config) *int { return &c.ReportPoints }),
	countSetting("flows", "most named flows of an appraisal", 1, 10_000, func(c *Config) *int { return &c.Flows }),
	countSetting("work", "greatest work of one request, estimated from its sizes; a unit is about a microsecond of a processor", 1000, 1_000_000_000, func(c *Config) *int { return &c.Work }),
	durationSetting("time-limit", "longest time of one calculation; beyond it 504", 100*time.Millisecond, 10*time.Minute, func(c *Config) *time.Duration { return &c.TimeLimit }),
	countSetting("solves", "requests and bulk lines solved at once; 0 is one for each processor", 0, 1024, func(c *Config) *int { return &c.Solves }),
	countSetting("queue", "requests that may wait to be solved, long ones (profiles) and short ones each; beyond it 503", 1, 100_000, func(c *Config) *int { return &c.Queue }),
	durationSetting("queue-wait", "longest time that a request waits to be solved; one that is expected to wait for more than a quarter of it gets 503 at once", time.Millisecond, time.Minute, func(c *Config) *time.Duration { return &c.QueueWait }),
	countSetting("streams", "bulk streams open at once; beyond it 503", 1, 100_000, func(c *Config) *int { return &c.Streams }),
	{
		"rate", "requests a second from each caller, told by its key or else its address, a bulk stream counting as one; beyond it 429; 0 is no bound", "0, or a number from 0.01 to 1000000",
		func(c *Config, text string) error {
			rate, err := strconv.ParseFloat(text, 64)
			if err != nil || !(rate == 0 || rate >= 0.01 && rate <= 1e6) {
				return errNotAccepted
			}
			c.Rate = rate
			return nil
		},
		func(c *Config) string { return strconv.FormatFloat(c.Rate, 'g', -1, 64) }, false,
	},
	countSetting("burst", "requests that a caller may send at once before rate counts", 1, 1_000_000, func(c *Config) *int { return &c.Burst }),
	durationSetting("idle-limit", "a bulk stream without progress is ended after this", time.Second, time.Hour, func(c *Config) *time.Duration { return &c.IdleLimit }),
	{
		name: "spool-dir", meaning: "folder for bulk answers that wait for a slow reader", accepted: "a folder that exists and can be written",
		set:  func(c *Config, text string) error { c.SpoolDir = text; return nil },
		show: func(c *Config) string { return c.SpoolDir },
	},
	bytesSetting("memory-bytes", "bulk answers that wait in memory, each stream, before they go to its file", 64<<10, 1<<30, func(c *Config) *int64 { return &c.MemoryBytes }),
	bytesSetting("spool-bytes", "bulk answers that wait in the file of one stream", 1<<20, 1<<50, func(c *Config) *int64 { return &c.SpoolBytes }),
	bytesSetting("spool-total-bytes", "bulk answers that wait in the files of all streams together", 1<<20, 1<<50, func(c *Config) *int64 { return &c.SpoolTotal }),
	durationSetting("drain-delay", "from a stop signal, unready, until the listener closes", 0, 10*time.Minute, func(c *Config) *time.Duration { return &c.DrainDelay }),
	durationSetting("drain-limit", "from a stop signal until what still runs is cut", time.Second, time.Hour, func(c *Config) *time.Duration { return &c.DrainLimit }),
	addressSetting("admin-listen", "TCP address for metrics, process profiles and probes, which need no key there; metrics are then on no other", "host:port, or nothing for no such listener", true, func(c *Config) *string { return &c.AdminListen }),
	countSetting("connections", "most connections at once; those beyond it get 503", 1, 1_000_000, func(c *Config) *int { return &c.Connections }),
	fileSetting("keys-file", "callers' keys, lines of a name and the SHA-256 of a key as leat key makes them; everything but probes then needs one", func(c *Config) *string { return &c.KeysFile }),
	fileSetting("tls-certificate", "certificate chain in PEM; HTTP is then served over TLS only", func(c *Config) *string { return &c.TLSCertificate }),
	fileSetting("tls-key", "private key in PEM that belongs to the certificate", func(c *Config) *string { return &c.TLSKey }),
	fileSetting("client-authorities", "certificates in PEM of the authorities that sign callers' certificates; every connection then needs one of these", func(c *Config) *string { return &c.ClientAuthorities }),
	{
		name: "allow-origin", meaning: "web origins whose pages may read answers (CORS)",
		accepted: "origins such as https://maps.example with commas between, * for all, or nothing for none",
		set: func(c *Config, text string) error {
			if _, err := parseOrigins(text); err != nil {
				return errNotAccepted
			}
			c.AllowOrigin = text
			return nil
		},
		show: func(c *Config) string { return c.AllowOrigin },
	},
	{
		name: "allow-open", meaning: "listen beyond this machine although there are neither keys nor TLS",
		accepted: "true or false; the flag alone means true",
		set: func(c *Config, text string) error {
			switch text {
			case "true":
				c.AllowOpen = true
			case "false":
				c.AllowOpen = false
			default:
				return errNotAccepted
			}
			return nil
		},
		show:     func(c *Config) string { return strconv.FormatBool(c.AllowOpen) },
		isSwitch: true,
	},
}

// addressSetting is a TCP address, which may be empty where that means none.
func addressSetting(name, meaning, accepted string, mayBeEmpty bool, field func(*Config) *string) setting {
	return setting{
		name: name, meaning: meaning, accepted: accepted,
		set: func(c *Config, text string) error {
			_, port, err := net.SplitHostPort(text)
			if err == nil {
				_, err = strconv.ParseUint(port, 10, 16)
			}
			if err != nil && !(mayBeEmpty && text == "") {
				return errNotAccepted
			}
			*field(c) = text
			return nil
		},
		show: func(c *Config) string { return *field(c) },
	}
}

// fileSetting is a file that is read at the start and again whenever it has changed.
func fileSetting(name, meaning string, field func(*Config) *string) setting {
	return setting{
		name: name, meaning: meaning, accepted: "a file that can be read, or nothing for none; changes are taken over while the service runs",
		set:  func(c *Config, text string) error { *field(c) = text; return nil },
		show: func(c *Config) string { return *field(c) },
	}
}

// The units of size that a value in bytes may bear, the largest first.
var sizeUnits = []struct {
	name   string
	factor int64
}{{"TiB", 1 << 40}, {"GiB", 1 << 30}, {"MiB", 1 << 20}, {"KiB", 1 << 10}}

func bytesSetting(name, meaning string, least, most int64, field func(*Config) *int64) setting {
	return setting{
		name: name, meaning: meaning,
		accepted: fmt.Sprintf("a whole number of bytes from %s to %s, with KiB, MiB, GiB or TiB if you like", showBytes(least), showBytes(most)),
		set: func(c *Config, text string) error {
			digits, factor := text, int64(1)
			for _, unit := range sizeUnits {
				if rest, found := strings.CutSuffix(text, unit.name); found {
					digits, factor = strings.TrimSpace(rest), unit.factor
					break
				}
			}
			n, err := strconv.ParseInt(digits, 10, 64)
			if err != nil || n < 0 || n > most/factor || n*factor < least {
				return errNotAccepted
			}
			*field(c) = n * factor
			return nil
		},
		show: func(c *Config) string { return showBytes(*field(c)) },
	}
}

func showBytes(n int64) string {
	for _, unit := range sizeUnits {
		if n >= unit.factor && n%unit.factor == 0 {
			return strconv.FormatInt(n/unit.factor, 10) + unit.name
		}
	}
	return strconv.FormatInt(n, 10)
}

func countSetting(name, meaning string, least, most int, field func(*Config) *int) setting {
	return setting{
		name: name, meaning: meaning, accepted: fmt.Sprintf("a whole number from %d to %d", least, most),
		set: func(c *Config, text string) error {
			n, err := strconv.Atoi(text)
			if err != nil || n < least || n > most {
				return errNotAccepted
			}
			*field(c) = n
			return nil
		},
		show: func(c *Config) string { return strconv.Itoa(*field(c)) },
	}
}

func durationSetting(name, meaning string, least, most time.Duration, field func(*Config) *time.Duration) setting {
	return setting{
		name: name, meaning: meaning, accepted: fmt.Sprintf("a time from %s to %s, written like 500ms, 30s or 2m", durationText(least), durationText(most)),
		set: func(c *Config, text string) error {
			d, err := time.ParseDuration(text)
			if err != nil || d < least || d > most {
				return errNotAccepted
			}
			*field(c) = d
			return nil
		},
		show: func(c *Config) string { return durationText(*field(c)) },
	}
}

// durationText writes a time as people do: 10m rather than 10m0s.
func durationText(d time.Duration) string {
	text := d.String()
	for _, rest := range []string{"m0s", "h0m"} {
		if strings.HasSuffix(text, rest) {
			text = text[:len(text)-2]
		}
	}
	return text
}

// Load reads settings: the defaults, over them the environment (as os.Environ gives it), over it the arguments. The error
// joins all mistakes, each naming its flag or variable and what would be accepted; it is flag.ErrHelp where help was asked for.
func Load(arguments, environment []string) (Config, error) {
	config, mistakes := load(arguments, environment)
	if errors.Is(errors.Join(mistakes...), flag.ErrHelp) {
		return config, flag.ErrHelp
	}
	if len(mistakes) == 0 {
		mistakes = config.check()
	}
	return config, errors.Join(mistakes...)
}

// load reads settings without asking whether they go together.
func load(arguments, environment []string) (Config, []error) {
	config := Default()
	mistakes := loadEnvironment(&config, environment)
	flags := flag.NewFlagSet("leat serve", flag.ContinueOnError)
	flags.SetOutput(io.Discard)
	flags.Usage = func() {}
	for _, s := range settings {
		define := flags.Func
		if s.isSwitch {
			define = flags.BoolFunc
		}
		define(s.name, s.meaning, func(text string) error {
			if err := s.set(&config, text); err != nil {
				// Collected rather than returned: package flag would stop at the first mistake.
				mistakes = append(mistakes, fmt.Errorf("--%s: %q is not accepted; give %s", s.name, clip(text), s.accepted))
			}
			return nil
		})
	}
	if err := flags.Parse(arguments); err != nil {
		if errors.Is(err, flag.ErrHelp) {
			return config, []error{flag.ErrHelp}
		}
		mistakes = append(mistakes, fmt.Errorf("%w; --help lists the flags", err))
	} else if flags.NArg() > 0 {
		mistakes = append(mistakes, fmt.Errorf("unexpected argument %q; settings are flags, --help lists them", clip(flags.Arg(0))))
	}
	return config, mistakes
}

// A ProbeTarget is where a service on this machine answers probes.
type ProbeTarget struct {
	Address string // as its listener's setting says it
	TLS     bool
}

// LoadProbe reads where to probe, and nothing else, so that a probe cannot fail over settings that concern the server only.
func LoadProbe(arguments, environment []string) (ProbeTarget, error) {
	var kept []string
	for _, pair := range environment {
		name, _, _ := strings.Cut(pair, "=")
		if slices.Contains([]string{"LEAT_LISTEN", "LEAT_ADMIN_LISTEN", "LEAT_TLS_CERTIFICATE"}, name) {
			kept = append(kept, pair)
		}
	}
	config, mistakes := load(arguments, kept)
	if err := errors.Join(mistakes...); err != nil {
		return ProbeTarget{}, err
	}
	if config.AdminListen != "" {
		return ProbeTarget{Address: config.AdminListen}, nil
	}
	return ProbeTarget{Address: config.Listen, TLS: config.TLSCertificate != ""}, nil
}

func loadEnvironment(config *Config, environment []string) []error {
	var mistakes []error
	known := map[string]setting{}
	for _, s := range settings {
		known[s.variable()] = s
	}
	for _, pair := range environment {
		name, text, _ := strings.Cut(pair, "=")
		switch s, found := known[name]; {
		case !strings.HasPrefix(name, "LEAT_"):
		case found && text == "": // an empty variable is an absent one
		case found:
			if err := s.set(config, text); err != nil {
				mistakes = append(mistakes, fmt.Errorf("%s: %q is not accepted; give %s", name, clip(text), s.accepted))
			}
		case strings.HasPrefix(name, "LEAT_PORT"), strings.HasPrefix(name, "LEAT_SERVICE_"):
			// An orchestrator that runs a service named leat injects these; they are no settings of ours.
		default:
			mistakes = append(mistakes, fmt.Errorf("%s is no setting; the LEAT_ names are %s", clip(name), strings.Join(variables(), ", ")))
		}
	}
	return mistakes
}

func variables() []string {
	var names []string
	for _, s := range settings {
		names = append(names, s.variable())
	}
	return names
}

// check holds the rules that concern more than one setting.
func (c *Config) check() []error {
	var mistakes []error
	if least := max(c.BodyBytes, c.ProfileBytes); c.HeldBytes < least {
		mistakes = append(mistakes, fmt.Errorf("--held-bytes (%s) must be at least --body-bytes (%s) and --profile-body-bytes (%s)", showBytes(c.HeldBytes), showBytes(c.BodyBytes), showBytes(c.ProfileBytes)))
	}
	if c.SpoolTotal < c.SpoolBytes {
		mistakes = append(mistakes, fmt.Errorf("--spool-total-bytes (%s) must be at least --spool-bytes (%s)", showBytes(c.SpoolTotal), showBytes(c.SpoolBytes)))
	}
	if c.DrainLimit <= c.DrainDelay {
		mistakes = append(mistakes, fmt.Errorf("--drain-limit (%s) must be longer than --drain-delay (%s)", c.DrainLimit, c.DrainDelay))
	}
	if (c.TLSCertificate == "") != (c.TLSKey == "") {
		mistakes = append(mistakes, errors.New("--tls-certificate and --tls-key belong together; give both or neither"))
	}
	if c.ClientAuthorities != "" && c.TLSCertificate == "" {
		mistakes = append(mistakes, errors.New("--client-authorities needs --tls-certificate and --tls-key, since certificates are shown over TLS only"))
	}
	if !c.AllowOpen && c.KeysFile == "" && c.TLSCertificate == "" && !isLoopback(c.Listen) {
		mistakes = append(mistakes, fmt.Errorf("--listen %s lets anyone on the network call; give --keys-file or --tls-certificate, or say --allow-open", c.Listen))
	}
	// Where callers are known, whoever sets both knows that the network keeps them from the admin port. To ask for --allow-open there would open the
	// public listener too on the day that the keys' setting is lost.
	if !c.AllowOpen && c.KeysFile == "" && c.TLSCertificate == "" && c.AdminListen != "" && !isLoopback(c.AdminListen) {
		mistakes = append(mistakes, fmt.Errorf("--admin-listen %s shows metrics and process profiles to anyone on the network; listen on 127.0.0.1, give callers keys or TLS, or say --allow-open", c.AdminListen))
	}
	if c.AdminListen != "" && c.AdminListen == c.Listen && !strings.HasSuffix(c.Listen, ":0") {
		mistakes = append(mistakes, fmt.Errorf("--admin-listen and --listen are both %s; give them different ports", c.Listen))
	}
	return mistakes
}

// isLoopback reports whether an address can be reached from this machine only.
func isLoopback(address string) bool {
	host, _, err := net.SplitHostPort(address)
	if err != nil {
		return false
	}
	ip, err := netip.ParseAddr(host)
	return host == "localhost" || err == nil && ip.Unmap().IsLoopback()
}

// Help returns the text of `leat serve --help`: each flag, its variable, default, meaning and accepted values.
func Help() string {
	var b strings.Builder
	b.WriteString("leat serve starts the HTTP service. It is ready when GET /readyz answers 200.\n\n")
	b.WriteString("A flag wins over its variable; an empty variable counts as absent.\n")
	config := Default()
	for _, s := range settings {
		value, preset := " VALUE", s.show(&config)
		if s.isSwitch {
			value = ""
		}
		if preset == "" {
			preset = "nothing"
		}
		fmt.Fprintf(&b, "\n  --%s%s\n      %s.\n      Variable %s. Default %s.\n      Accepted: %s.\n", s.name, value, s.meaning, s.variable(), preset, s.accepted)
	}
	return b.String()
}

// clip shortens foreign text for a message.
func clip(text string) string {
	const most = 60
	if len(text) <= most {
		return text
	}
	return strings.ToValidUTF8(text[:most], "") + "…"
}
