package register

import (
	"context"
	"errors"
	"flag"
	"fmt"
	"io"
	"strings"

	"leat/cmd/internal/register/mapping"
	"leat/cmd/internal/register/run"
	"leat/cmd/internal/register/store"
)

// An Outcome is how a command ended.
type Outcome uint8

// The outcomes.
const (
	Done     Outcome = iota // everything is well
	Problems                // it came to its end, and some rows have problems
	Misused                 // the arguments or the mapping file are at fault; nothing was written
	Failed                  // it did not come to its end; a run that is started again goes on where it stopped
)

// Usage is what help says.
const Usage = `leat register carries every asset of a register through a calculation and writes the answers back.

  leat register check MAPPING   read everything and say what is wrong, by row and column; nothing is computed or written
  leat register run MAPPING     compute and write; started again after a break it goes on where it stopped
  leat register work MAPPING    join a run that was begun with run --shared, on this or another machine (PostgreSQL)
  leat register demo FOLDER     write the register of an invented district there, as a GeoPackage and as SQL, to try all this on

MAPPING is the YAML file that says where the register is, which column feeds which member in which unit, and where the
results go. Passwords come from the environment (PGPASSWORD, PGPASSFILE) or a file, never from there or from a flag.

Flags, before or behind the file:
`

// command is one of the three.
type command struct {
	name    string
	mapping string
	options run.Options
	shared  bool
	quiet   bool
	shown   int

	stdout, stderr io.Writer
}

// Run carries out check, run or work.
func Run(ctx context.Context, arguments []string, stdout, stderr io.Writer) Outcome {
	if len(arguments) > 0 && arguments[0] == "demo" {
		return writeDemo(ctx, arguments[1:], stdout, stderr)
	}
	c := &command{stdout: stdout, stderr: stderr}
	err := c.parse(arguments)
	if errors.Is(err, flag.ErrHelp) {
		return Done
	}
	if err != nil {
		fmt.Fprintf(stderr, "leat register: %v\n", err)
		return Misused
	}
	outcome, err := c.do(ctx)
	if err == nil {
		return outcome
	}
	var faults mapping.Faults
	if errors.As(err, &faults) {
		fmt.Fprintln(stderr, faults.Error())
		return Misused
	}
	if errors.Is(err, context.Canceled) {
		err = errors.New("stopped before the end; start it again: in a database it goes on, CSV and GeoJSON results begin anew")
	}
	fmt.Fprintf(stderr, "leat register %s: %v\n", c.name, err)
	return outcome
}

// parse reads the arguments: a verb, then flags and the file in any order.
func (c *command) parse(arguments []string) error {
	flags := flag.NewFlagSet("leat register", flag.ContinueOnError)
	flags.SetOutput(io.Discard)
	flags.StringVar(&c.options.Run, "run", "", "`ID` of the run to go on with or to begin; else the unfinished one, or a new one")
	flags.IntVar(&c.options.Rows, "rows", run.DefaultRows, "`rows` of a batch, which is written at once")
	flags.IntVar(&c.options.Workers, "workers", 0, "`number` of solvers at once; 0 for as many as there are processors")
	flags.BoolVar(&c.options.DryRun, "dry-run", false, "compute everything and write nothing")
	flags.BoolVar(&c.shared, "shared", false, "cut the run into jobs that leat register work takes part in (PostgreSQL)")
	flags.BoolVar(&c.quiet, "quiet", false, "no line of progress")
	flags.IntVar(&c.shown, "problems", 100, "most `problems` that check prints one by one; 0 for all")
	for {
		if err := flags.Parse(arguments); err != nil {
			if errors.Is(err, flag.ErrHelp) {
				fmt.Fprint(c.stdout, Usage)
				flags.SetOutput(c.stdout)
				flags.PrintDefaults()
				fmt.Fprint(c.stdout, exitCodes)
				return err
			}
			return fmt.Errorf("%w; --help lists the flags", err)
		}
		rest := flags.Args()
		if len(rest) == 0 {
			break
		}
		switch {
		case c.name == "":
			c.name = rest[0]
		case c.mapping == "":
			c.mapping = rest[0]
		default:
			return fmt.Errorf("%q is one argument too many", rest[0])
		}
		arguments = rest[1:]
	}
	return c.judge()
}

const exitCodes = `
Exit codes: 0 done, every row well; 1 not finished (start it again); 2 misused: the arguments or the mapping file; 3 done, some rows have problems.
`

func (c *command) judge() error {
	switch c.name {
	case "check", "run", "work":
	case "":
		return errors.New("say check, run, work or demo; --help tells more")
	default:
		return fmt.Errorf("there is no %q; say check, run, work or demo", c.name)
	}
	switch {
	case c.mapping == "":
		return fmt.Errorf("name the mapping file: leat register %s MAPPING", c.name)
	case c.options.Rows < 1 || c.options.Rows > 1_000_000:
		return errors.New("--rows must be from 1 to 1000000")
	case c.options.Workers < 0 || c.options.Workers > 1000:
		return errors.New("--workers must be from 0 to 1000")
	case c.shown < 0:
		return errors.New("--problems must not be negative")
	case c.options.DryRun && (c.shared || c.name != "run"):
		return errors.New("--dry-run belongs to run, without --shared")
	case c.shared && c.name != "run":
		return errors.New("--shared belongs to run")
	case len(c.options.Run) > 100 || strings.ContainsFunc(c.options.Run, func(r rune) bool { return r < ' ' }):
		return errors.New("--run must have at most 100 characters, none of them control characters")
	}
	return nil
}

func (c *command) do(ctx context.Context) (Outcome, error) {
	file, err := mapping.Load(c.mapping)
	if err != nil {
		return Misused, err
	}
	source, err := openSource(ctx, file)
	if err != nil {
		return Failed, err
	}
	defer source.Close()
	if !c.quiet {
		c.options.Progress = newProgress(c.stderr).told
	}
	listing := &listing{out: c.stdout, most: c.shown}
	if c.name == "check" {
		after := c.options.Progress
		c.options.Progress = func(p *run.Progress) {
			listing.add(p.Problems)
			if after != nil {
				after(p)
			}
		}
	}
	c.options.Begun = func(state store.State) {
		if state.Resumed {
			fmt.Fprintf(c.stderr, "going on with run %s\n", state.Run)
		} else {
			fmt.Fprintf(c.stderr, "run %s\n", state.Run)
		}
	}
	job, err := run.Prepare(file, source, c.options)
	if err != nil {
		return Failed, err
	}
	target, err := openTarget(ctx, file)
	if err != nil {
		return Failed, err
	}
	defer target.Close()
	if c.name != "work" {
		if err := target.Check(ctx, job.Layout()); err != nil {
			return Failed, placed(file, "target", err)
		}
		if err := job.CheckKey(ctx); err != nil {
			return Failed, err
		}
	}
	var report *run.Report
	switch {
	case c.name == "check":
		report, err = job.Check(ctx)
		if err == nil {
			listing.end()
		}
	case c.shared || c.name == "work":
		return c.share(ctx, file, source, target, job)
	default:
		report, err = job.Run(ctx, target)
	}
	if err != nil {
		return Failed, placed(file, "target", err)
	}
	c.summarize(file, report)
	if report.Counts.Bad > 0 {
		return Problems, nil
	}
	return Done, nil
}
