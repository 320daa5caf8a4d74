package drive

import (
	"fmt"
	"io"
	"strings"
	"text/tabwriter"
	"time"
)

// A Report is the outcome of a drive.
type Report struct {
	About            string        `json:"about"`
	Target           string        `json:"target"`
	Normal           []Normal      `json:"normal"`
	QueueWaitSeconds float64       `json:"queue_wait_seconds"`
	Stages           []StageReport `json:"stages"`
	StreamsWhole     int64         `json:"streams_whole"`
	StreamsWrong     int64         `json:"streams_wrong"`
	StreamLines      int64         `json:"stream_lines"`
	Missed           []string      `json:"missed"` // sentences: what did not hold
	Said             []string      `json:"said"`   // samples of what went wrong
}

// Normal is what a request takes while nothing else is sent.
type Normal struct {
	Name    string  `json:"name"`
	Seconds float64 `json:"seconds"`
	Bytes   int     `json:"bytes"`
}

// A StageReport is the outcome of a stage; the first is the closed loop, if there was one. Times are in seconds.
type StageReport struct {
	Name     string  `json:"name"`
	Closed   bool    `json:"closed"`
	Rate     float64 `json:"rate"` // asked for, in requests a second
	Sent     int64   `json:"sent"`
	Goodput  float64 `json:"goodput"` // accepted answers a second within the stage
	Accepted Times   `json:"accepted"`
	InTime   float64 `json:"in_time"` // share of the accepted
	Refused  Times   `json:"refused"`
	Wrong    int64   `json:"wrong"`
	Odd      int64   `json:"odd_statuses"`
	Silent   int64   `json:"refused_without_retry_after"`
	Broken   int64   `json:"broken_connections"`
	Unsent   int64   `json:"unsent"`
	Probes   Times   `json:"probes"`
	Failed   int64   `json:"probes_failed"`
}

// Times are a count and quantiles in seconds.
type Times struct {
	Count int64   `json:"count"`
	P50   float64 `json:"p50"`
	P99   float64 `json:"p99"`
	Most  float64 `json:"most"`
}

func (h *histogram) times() Times {
	return Times{h.total, h.quantile(0.5).Seconds(), h.quantile(0.99).Seconds(), h.most.Seconds()}
}

// add puts a stage into the report.
func (r *Report) add(name string, closed bool, rate float64, length time.Duration, t *tally, w *watch) {
	s := StageReport{
		Name: name, Closed: closed, Rate: rate, Sent: t.sent, Goodput: float64(t.within) / length.Seconds(),
		Accepted: t.accepted.times(), Refused: t.refused.times(), Wrong: t.wrong, Odd: t.odd, Silent: t.silent, Broken: t.broken, Unsent: t.unsent,
		Probes: w.took.times(), Failed: w.failed,
	}
	if t.accepted.total > 0 {
		s.InTime = float64(t.inTime) / float64(t.accepted.total)
	}
	r.Stages = append(r.Stages, s)
	r.Said = append(append(r.Said, t.said...), w.said...)
}

// judge finds out what did not hold.
func (r *Report) judge(t *Thresholds) {
	r.Missed = []string{}
	missed := func(format string, values ...any) { r.Missed = append(r.Missed, fmt.Sprintf(format, values...)) }
	peak := 0.0
	for _, s := range r.Stages {
		peak = max(peak, s.Goodput)
	}
	for _, s := range r.Stages {
		for _, never := range []struct {
			n    int64
			what string
		}{
			{s.Wrong, "wrong answers"}, {s.Odd, "answers with a status other than 200, 429 and 503"}, {s.Silent, "refusals without Retry-After"},
			{s.Broken, "broken connections"}, {s.Unsent, "requests that could not be sent"}, {s.Failed, "probes that failed"},
		} {
			if never.n > 0 {
				missed("%s: %d %s", s.Name, never.n, never.what)
			}
		}
		if limit := t.ProbeSeconds; limit > 0 && s.Probes.Most > limit {
			missed("%s: a probe took %.3f s, at most %v", s.Name, s.Probes.Most, limit)
		}
		if s.Closed {
			continue
		}
		if limit := t.GoodputOfPeak; limit > 0 && s.Goodput < limit*peak && s.Rate >= peak {
			missed("%s: goodput is %.3f of the peak, at least %v", s.Name, s.Goodput/peak, limit)
		}
		if limit := t.AcceptedInTime; limit > 0 && s.InTime < limit {
			missed("%s: %.4f of the accepted are in time, at least %v", s.Name, s.InTime, limit)
		}
		if limit := t.AcceptedSeconds; limit > 0 && s.Accepted.P99 > limit {
			missed("%s: the 99th percentile of the accepted is %.4f s, at most %v", s.Name, s.Accepted.P99, limit)
		}
		if limit := t.RefusedSeconds; limit > 0 && s.Refused.P99 > limit {
			missed("%s: the 99th percentile of the refused is %.4f s, at most %v", s.Name, s.Refused.P99, limit)
		}
		if limit := t.RefusedShare; limit != nil && float64(s.Refused.Count) > *limit*float64(s.Sent) {
			missed("%s: %d of %d refused, at most a share of %v", s.Name, s.Refused.Count, s.Sent, *limit)
		}
	}
	if r.StreamsWrong > 0 {
		missed("%d bulk streams that did not end right", r.StreamsWrong)
	}
}

// WriteText writes the report for people. Times are in milliseconds.
func (r *Report) WriteText(out io.Writer) {
	fmt.Fprintf(out, "%s\ntarget %s, queue_wait_seconds %v\n", r.About, r.Target, r.QueueWaitSeconds)
	for _, n := range r.Normal {
		fmt.Fprintf(out, "  %s: %.2f ms while nothing else is sent, %d bytes\n", n.Name, 1e3*n.Seconds, n.Bytes)
	}
	table := tabwriter.NewWriter(out, 0, 0, 2, ' ', tabwriter.AlignRight)
	fmt.Fprintln(table, "stage\trate/s\tsent\tgoodput/s\taccepted\tp50\tp99\tmost\tin time\trefused\tp50\tp99\tmost\twrong\tbroken\tprobes\tp99\tmost\t")
	for _, s := range r.Stages {
		rate := fmt.Sprintf("%.0f", s.Rate)
		if s.Closed {
			rate = "closed"
		}
		fmt.Fprintf(table, "%s\t%s\t%d\t%.1f\t%s\t%.4f\t%s\t%d\t%d\t%s\t\n", s.Name, rate, s.Sent, s.Goodput, s.Accepted.text(true), s.InTime, s.Refused.text(true),
			s.Wrong+s.Odd+s.Silent, s.Broken+s.Unsent, s.Probes.text(false))
	}
	table.Flush()
	fmt.Fprintf(out, "bulk streams: %d ended right, %d did not, %d lines\n", r.StreamsWhole, r.StreamsWrong, r.StreamLines)
	for _, s := range r.Said {
		fmt.Fprintln(out, "  "+s)
	}
	if len(r.Missed) == 0 {
		fmt.Fprintln(out, "Everything held.")
		return
	}
	fmt.Fprintln(out, "Not held:\n  "+strings.Join(r.Missed, "\n  "))
}

func (t Times) text(middle bool) string {
	if middle {
		return fmt.Sprintf("%d\t%.1f\t%.1f\t%.1f", t.Count, 1e3*t.P50, 1e3*t.P99, 1e3*t.Most)
	}
	return fmt.Sprintf("%d\t%.1f\t%.1f", t.Count, 1e3*t.P99, 1e3*t.Most)
}
