package drive

import (
	"fmt"
	"io"
)

// WriteMetrics writes the report in the text format that Prometheus reads, as for a collector of text files.
func (r *Report) WriteMetrics(out io.Writer) {
	family := func(name, help string) { fmt.Fprintf(out, "# HELP %s %s\n# TYPE %s gauge\n", name, help, name) }
	family("leat_drive_requests", "Requests of a stage of the last drive, by what became of them.")
	for _, s := range r.Stages {
		for _, of := range []struct {
			outcome string
			n       int64
		}{{"accepted", s.Accepted.Count}, {"refused", s.Refused.Count}, {"wrong", s.Wrong}, {"odd_status", s.Odd}, {"no_retry_after", s.Silent}, {"broken", s.Broken}, {"unsent", s.Unsent}} {
			fmt.Fprintf(out, "leat_drive_requests{stage=%q,outcome=%q} %d\n", s.Name, of.outcome, of.n)
		}
	}
	family("leat_drive_goodput", "Accepted answers a second in a stage.")
	for _, s := range r.Stages {
		fmt.Fprintf(out, "leat_drive_goodput{stage=%q} %v\n", s.Name, s.Goodput)
	}
	family("leat_drive_latency_seconds", "Times from when a request was due to its answer, by what became of it.")
	for _, s := range r.Stages {
		for _, of := range []struct {
			outcome string
			times   Times
		}{{"accepted", s.Accepted}, {"refused", s.Refused}, {"probe", s.Probes}} {
			fmt.Fprintf(out, "leat_drive_latency_seconds{stage=%q,outcome=%q,of=\"p50\"} %v\n", s.Name, of.outcome, of.times.P50)
			fmt.Fprintf(out, "leat_drive_latency_seconds{stage=%q,outcome=%q,of=\"p99\"} %v\n", s.Name, of.outcome, of.times.P99)
			fmt.Fprintf(out, "leat_drive_latency_seconds{stage=%q,outcome=%q,of=\"most\"} %v\n", s.Name, of.outcome, of.times.Most)
		}
	}
	family("leat_drive_streams", "Bulk streams of the last drive, by how they ended.")
	fmt.Fprintf(out, "leat_drive_streams{outcome=\"whole\"} %d\nleat_drive_streams{outcome=\"wrong\"} %d\n", r.StreamsWhole, r.StreamsWrong)
	family("leat_drive_missed", "How many things did not hold that the plan asks for.")
	fmt.Fprintf(out, "leat_drive_missed %d\n", len(r.Missed))
}
