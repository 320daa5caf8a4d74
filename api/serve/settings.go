package serve

import (
	"errors"
	"flag"
	"fmt"
	"io"
	"net"
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
}

func (s setting) variable() string {
	return "LEAT_" + strings.ToUpper(strings.ReplaceAll(s.name, "-", "_"))
}

var errNotAccepted = errors.New("not accepted")

// settings is the table. Its order is that of --help.
var settings = []setting{
	{
		"listen", "TCP address to serve HTTP on", "host:port; an empty host means every address, port 0 a free port",
		func(c *Config, text string) error {
			_, port, err := net.SplitHostPort(text)
			if err != nil {
				return errNotAccepted
			}
			if _, err := strconv.ParseUint(port, 10, 16); err != nil {
				return errNotAccepted
			}
			c.Listen = text
			return nil
		},
		func(c *Config) string { return c.Listen },
	},
	bytesSetting("body-bytes", "greatest request body of a unary operation", 1<<10, 64<<20, func(c *Config) *int64 { return &c.BodyBytes }),
	bytesSetting("profile-body-bytes", "greatest request body of a profile", 1<<10, 1<<30, func(c *Config) *int64 { return &c.ProfileBytes }),
	bytesSetting("line-bytes", "greatest record of a bulk request", 1<<10, 64<<20, func(c *Config) *int64 { return &c.LineBytes }),
	bytesSetting("held-bytes", "request bodies held in memory at once; beyond it 503", 1<<20, 64<<30, func(c *Config) *int64 { return &c.HeldBytes }),
	countSetting("array-items", "greatest length of a list in a request that has no limit of its own", 1, 1_000_000, func(c *Config) *int { return &c.ArrayItems }),
	countSetting("points", "most points of a surveyed section", 3, 1_000_000, func(c *Config) *int { return &c.Points }),
	countSetting("reaches", "most reaches of a profile", 1, 1_000_000, func(c *Config) *int { return &c.Reaches }),
	countSetting("stations", "most surveyed stations of a profile", 2, 1_000_000, func(c *Config) *int { return &c.Stations }),
	countSetting("report-points", "most places at which a profile reports", 1, 10_000_000, func(c *Config) *int { return &c.ReportPoints }),
	countSetting("flows", "most named flows of an appraisal", 1, 10_000, func(c *Config) *int { return &c.Flows }),
	durationSetting("time-limit", "longest time of one calculation; beyond it 504", 100*time.Millisecond, 10*time.Minute, func(c *Config) *time.Duration { return &c.TimeLimit }),
	durationSetting("idle-limit", "a bulk stream without progress is ended after this", time.Second, time.Hour, func(c *Config) *time.Duration { return &c.IdleLimit }),
	{
		"spool-dir", "folder for bulk answers that wait for a slow reader", "a folder that exists and can be written",
		func(c *Config, text string) error { c.SpoolDir = text; return nil },
		func(c *Config) string { return c.SpoolDir },
	},
	bytesSetting("memory-bytes", "bulk answers that wait in memory, each stream, before they go to its file", 64<<10, 1<<30, func(c *Config) *int64 { return &c.MemoryBytes }),
	bytesSetting("spool-bytes", "bulk answers that wait in the file of one stream", 1<<20, 1<<50, func(c *Config) *int64 { return &c.SpoolBytes }),
	bytesSetting("spool-total-bytes", "bulk answers that wait in the files of all streams together", 1<<20, 1<<50, func(c *Config) *int64 { return &c.SpoolTotal }),
	durationSetting("drain-delay", "from a stop signal, unready, until the listener closes", 0, 10*time.Minute, func(c *Config) *time.Duration { return &c.DrainDelay }),
	durationSetting("drain-limit", "from a stop signal until what still runs is cut", time.Second, time.Hour, func(c *Config) *time.Duration { return &c.DrainLimit }),
}

// The units of size that a value in bytes may bear, the largest first.
var sizeUnits = []struct {
	name   string
	factor int64
}{{"TiB", 1 << 40}, {"GiB", 1 << 30}, {"MiB", 1 << 20}, {"KiB", 1 << 10}}

func bytesSetting(name, meaning string, least, most int64, field func(*Config) *int64) setting {
	return setting{
		name, meaning,
		fmt.Sprintf("a whole number of bytes from %s to %s, with KiB, MiB, GiB or TiB if you like", showBytes(least), showBytes(most)),
		func(c *Config, text string) error {
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
		func(c *Config) string { return showBytes(*field(c)) },
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
		name, meaning, fmt.Sprintf("a whole number from %d to %d", least, most),
		func(c *Config, text string) error {
			n, err := strconv.Atoi(text)
			if err != nil || n < least || n > most {
				return errNotAccepted
			}
			*field(c) = n
			return nil
		},
		func(c *Config) string { return strconv.Itoa(*field(c)) },
	}
}

func durationSetting(name, meaning string, least, most time.Duration, field func(*Config) *time.Duration) setting {
	return setting{
		name, meaning, fmt.Sprintf("a time from %s to %s, written like 500ms, 30s or 2m", durationText(least), durationText(most)),
		func(c *Config, text string) error {
			d, err := time.ParseDuration(text)
			if err != nil || d < least || d > most {
				return errNotAccepted
			}
			*field(c) = d
			return nil
		},
		func(c *Config) string { return durationText(*field(c)) },
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
	config := Default()
	mistakes := loadEnvironment(&config, environment)
	flags := flag.NewFlagSet("leat serve", flag.ContinueOnError)
	flags.SetOutput(io.Discard)
	flags.Usage = func() {}
	for _, s := range settings {
		flags.Func(s.name, s.meaning, func(text string) error {
			if err := s.set(&config, text); err != nil {
				// Collected rather than returned: package flag would stop at the first mistake.
				mistakes = append(mistakes, fmt.Errorf("--%s: %q is not accepted; give %s", s.name, clip(text), s.accepted))
			}
			return nil
		})
	}
	if err := flags.Parse(arguments); err != nil {
		if errors.Is(err, flag.ErrHelp) {
			return config, flag.ErrHelp
		}
		mistakes = append(mistakes, fmt.Errorf("%w; --help lists the flags", err))
	} else if flags.NArg() > 0 {
		mistakes = append(mistakes, fmt.Errorf("unexpected argument %q; settings are flags, --help lists them", clip(flags.Arg(0))))
	}
	if len(mistakes) == 0 {
		mistakes = config.check()
	}
	return config, errors.Join(mistakes...)
}

// LoadListen reads the listen address alone, for a probe that must not fail over settings that concern the server only.
func LoadListen(arguments, environment []string) (string, error) {
	var kept []string
	for _, pair := range environment {
		if strings.HasPrefix(pair, "LEAT_LISTEN=") {
			kept = append(kept, pair)
		}
	}
	config, err := Load(arguments, kept)
	return config.Listen, err
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
	return mistakes
}

// Help returns the text of `leat serve --help`: each flag, its variable, default, meaning and accepted values.
func Help() string {
	var b strings.Builder
	b.WriteString("leat serve starts the HTTP service. It is ready when GET /readyz answers 200.\n\n")
	b.WriteString("A flag wins over its variable; an empty variable counts as absent.\n")
	config := Default()
	for _, s := range settings {
		fmt.Fprintf(&b, "\n  --%s VALUE\n      %s.\n      Variable %s. Default %s.\n      Accepted: %s.\n", s.name, s.meaning, s.variable(), s.show(&config), s.accepted)
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
