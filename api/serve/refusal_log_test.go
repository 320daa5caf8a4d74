package serve

import (
	"testing"
	"time"
)

func TestRefusalsOfASecond(t *testing.T) {
	var l refusalLog
	const at = 5 * time.Second
	for n := range 1000 {
		write, leftOut := l.took(at+time.Duration(n)*time.Microsecond, true)
		if write != (n < refusalLines) || leftOut != 0 {
			t.Fatalf("refusal %d: %v, %d", n, write, leftOut)
		}
	}
	if write, leftOut := l.took(at+500*time.Millisecond, false); !write || leftOut != 0 {
		t.Errorf("an answer in the same second: %v, %d", write, leftOut)
	}
	if write, leftOut := l.took(at+2*time.Second, false); !write || leftOut != 1000-refusalLines {
		t.Errorf("an answer later: %v, %d", write, leftOut)
	}
	if write, leftOut := l.took(at+2*time.Second, true); !write || leftOut != 0 || l.rest() != 0 {
		t.Errorf("a refusal later: %v, %d", write, leftOut)
	}
}

// TestAStormOfRefusalsIsSampled: what is logged and what is said to be left out are all that was refused, and the metrics have them all.
func TestAStormOfRefusalsIsSampled(t *testing.T) {
	r := start(t, func(c *Config, _ *Surroundings) { c.Rate, c.Burst = 0.001, 1 })
	const sent = 300
	for range sent {
		r.send("POST", "/v1/depths", `{}`, "Content-Type", jsonHeader)
	}
	if err := r.Stop(); err != nil {
		t.Fatal(err)
	}
	lines, leftOut := 0, 0
	for _, line := range r.log.lines(t) {
		if n, is := line["lines_left_out"].(float64); is {
			leftOut += int(n)
		}
		if line["status"] == 429.0 {
			lines++
			if line["level"] != "WARN" {
				t.Errorf("a refusal is logged as %v", line)
			}
		}
	}
	if lines < refusalLines || lines == sent-1 || lines+leftOut != sent-1 {
		t.Errorf("%d refusals logged, %d left out, %d sent", lines, leftOut, sent-1)
	}
}
