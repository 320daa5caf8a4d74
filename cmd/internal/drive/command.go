package drive

import (
	"bytes"
	"context"
	"errors"
	"flag"
	"fmt"
	"io"
	"net"
	"net/netip"
	"net/url"
	"os"
	"strings"
	"sync"
	"time"

	"github.com/go-json-experiment/json"
	"github.com/go-json-experiment/json/jsontext"
)

// An Outcome is how a drive ended.
type Outcome uint8

// The outcomes.
const (
	Held    Outcome = iota // all thresholds did
	Missed                 // some did not
	Misused                // the arguments or the plan are at fault; nothing was sent
	Failed                 // it did not come to its end
)

// usage is what help says.
const usage = `leat drive makes load on a service in staging and says what became of it.

  leat drive [FLAG…] PLAN

PLAN is a JSON file that says which requests are sent in which mix, at which rates for how long, which probes and bulk streams
go beside, and what must hold; deploy/load has some. Rates are fixed: a request is sent when it is due, and its time counts from then.

`

// Run carries out leat drive.
func Run(ctx context.Context, arguments []string, stdout, stderr io.Writer) Outcome {
	flags := flag.NewFlagSet("leat drive", flag.ContinueOnError)
	flags.SetOutput(io.Discard)
	where := flags.String("target", "http://127.0.0.1:8080", "`URL` of the service")
	remote := flags.Bool("allow-remote", false, "send to a target that is not on this machine; ask its operator first")
	length := flags.Float64("seconds", 0, "`time` of each stage, in place of the plan's")
	output := flags.String("json", "", "`file` for the report as JSON")
	exposition := flags.String("metrics", "", "`file` for the report in the text format of Prometheus")
	if err := flags.Parse(arguments); errors.Is(err, flag.ErrHelp) {
		fmt.Fprint(stdout, usage)
		flags.SetOutput(stdout)
		flags.PrintDefaults()
		return Held
	} else if err != nil {
		return misused(stderr, err)
	}
	if flags.NArg() != 1 {
		return misused(stderr, errors.New("give one plan; leat drive --help tells more"))
	}
	address, err := addressOf(*where, *remote)
	if err != nil {
		return misused(stderr, err)
	}
	plan, err := Load(flags.Arg(0))
	if err != nil {
		return misused(stderr, err)
	}
	if *length != 0 {
		for i := range plan.Stages {
			plan.Stages[i].Seconds = *length
		}
		if err := plan.check(); err != nil {
			return misused(stderr, fmt.Errorf("--seconds: %w", err))
		}
	}
	report, err := Drive(ctx, plan, address)
	if err != nil {
		fmt.Fprintf(stderr, "leat drive: %v\n", err)
		return Failed
	}
	report.WriteText(stdout)
	if *output != "" {
		text, err := json.Marshal(report, jsontext.WithIndent("  "))
		if err == nil {
			err = os.WriteFile(*output, append(text, '\n'), 0o644)
		}
		if err != nil {
			fmt.Fprintf(stderr, "leat drive: %v\n", err)
			return Failed
		}
	}
	if *exposition != "" {
		var text bytes.Buffer
		report.WriteMetrics(&text)
		if err := os.WriteFile(*exposition, text.Bytes(), 0o644); err != nil {
			fmt.Fprintf(stderr, "leat drive: %v\n", err)
			return Failed
		}
	}
	if len(report.Missed) > 0 {
		return Missed
	}
	return Held
}

func misused(stderr io.Writer, err error) Outcome {
	fmt.Fprintf(stderr, "leat drive: %v\n", err)
	return Misused
}

// addressOf returns the host and port of a target, which must be on this machine unless remote ones are allowed.
func addressOf(where string, remote bool) (string, error) {
	u, err := url.Parse(where)
	if err != nil || u.Scheme != "http" || u.Host == "" || strings.Trim(u.Path, "/") != "" {
		return "", fmt.Errorf("--target %q is not accepted; give a URL such as http://127.0.0.1:8080", where)
	}
	host, port := u.Hostname(), u.Port()
	if port == "" {
		port = "80"
	}
	if host == "localhost" {
		host = "127.0.0.1"
	}
	if ip, err := netip.ParseAddr(host); !remote && (err != nil || !ip.IsLoopback()) {
		return "", fmt.Errorf("--target %s is not on this machine; load is for staging, and --allow-remote sends it all the same", where)
	}
	return net.JoinHostPort(host, port), nil
}

// Drive carries out a plan against the service at an address. Its error says why it could not.
func Drive(ctx context.Context, plan *Plan, address string) (*Report, error) {
	d := &drive{plan: plan, address: address, client: &client{address: address}}
	defer d.client.close()
	if err := d.limits(ctx); err != nil {
		return nil, err
	}
	r := &Report{About: plan.About, Target: address, QueueWaitSeconds: d.queueWait.Seconds()}
	for _, request := range plan.Requests {
		t := &target{Request: request}
		if request.TakeSeconds > 0 {
			if err := d.aim(ctx, t); err != nil {
				return nil, err
			}
		} else {
			t.bytes = post(address, request.Path, request.Body)
		}
		took, err := d.time(ctx, t, 21)
		// On a busy machine all tries of aim may have been slow; a faster one afterwards tells.
		for again := 0; again < 3 && err == nil && took[0].Seconds() < 0.8*request.TakeSeconds; again++ {
			if err = d.aim(ctx, t); err == nil {
				took, err = d.time(ctx, t, 21)
			}
		}
		if err != nil {
			return nil, err
		}
		t.normal = took[len(took)/2]
		if err := t.judge(); err != nil {
			return nil, err
		}
		d.targets = append(d.targets, t)
		r.Normal = append(r.Normal, Normal{t.Name, t.normal.Seconds(), len(t.bytes)})
	}

	streaming, stop := context.WithCancel(ctx)
	defer stop()
	var f flow
	var streams sync.WaitGroup
	for i := range plan.Streams {
		streams.Go(func() { d.stream(streaming, &plan.Streams[i], &f) })
	}
	capacity := 0.0
	if c := plan.Capacity; c != nil {
		t, w := d.beside(ctx, func() *tally { return d.closed(ctx, c) })
		r.add("capacity", true, 0, seconds(c.Seconds), t, w)
		capacity = r.Stages[0].Goodput
	}
	for i := range plan.Stages {
		s := &plan.Stages[i]
		rate := s.Rate + s.TimesCapacity*capacity
		if !(rate > 0 && rate <= mostRate) {
			return nil, fmt.Errorf("stage %s would have a rate of %.0f a second, and may have up to %d", s.Name, rate, mostRate)
		}
		t, w := d.beside(ctx, func() *tally { return d.open(ctx, s, rate) })
		r.add(s.Name, false, rate, seconds(s.Seconds), t, w)
		if ctx.Err() != nil {
			return nil, errors.New("stopped before the end")
		}
	}
	stop()
	streams.Wait()
	r.StreamsWhole, r.StreamsWrong, r.StreamLines = f.whole, f.wrong, f.lines
	r.Said = append(r.Said, f.said...)
	r.judge(&plan.Thresholds)
	return r, nil
}

// beside makes load with probes beside it.
func (d *drive) beside(ctx context.Context, load func() *tally) (*tally, *watch) {
	w := new(watch)
	probing, stop := context.WithCancel(ctx)
	var probes sync.WaitGroup
	if d.plan.Probes != nil {
		probes.Go(func() { d.probe(probing, d.plan.Probes, w) })
	}
	t := load()
	stop()
	probes.Wait()
	return t, w
}

// limits asks the service for what the judgement needs.
func (d *drive) limits(ctx context.Context) error {
	r, err := d.client.send(ctx, get(d.address, "/v1/limits", ""), time.Now())
	if err != nil {
		return fmt.Errorf("the service at %s does not answer: %w", d.address, err)
	}
	wait, err := at(r.body, "/queue_wait_seconds")
	if r.status != 200 || err != nil {
		return fmt.Errorf("GET /v1/limits of %s: status %d, queue_wait_seconds: %v", d.address, r.status, err)
	}
	d.queueWait = seconds(wait)
	return nil
}
