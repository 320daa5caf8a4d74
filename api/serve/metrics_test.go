package serve

import (
	"fmt"
	"math/rand/v2"
	"strings"
	"testing"

	"github.com/prometheus/client_golang/prometheus/testutil"
)

func TestMetricsLintClean(t *testing.T) {
	r := start(t, nil)
	r.send("POST", "/v1/depths", `{}`, "Content-Type", jsonHeader)
	problems, err := testutil.GatherAndLint(r.metrics.registry)
	if err != nil {
		t.Fatal(err)
	}
	for _, p := range problems {
		t.Errorf("%s: %s", p.Metric, p.Text)
	}
}

func TestSeriesExistFromTheStart(t *testing.T) {
	r := start(t, nil)
	text := string(r.send("GET", "/metrics", "").body)
	for _, series := range []string{
		`leat_requests_total{method="POST",route="/v1/depths",status="200"} 0`,
		`leat_requests_total{method="POST",route="/v1/bulk/rating",status="200"} 0`,
		`leat_request_duration_seconds_bucket{route="/v1/depths",le="5e-05"} 0`,
		`leat_request_duration_seconds_count{route="unmatched"} 0`,
		`leat_solves_total{kind="unknown",operation="section",outcome="result"} 0`,
		`leat_solves_total{kind="unknown",operation="section",outcome="panic"} 0`,
		`leat_refusals_total{problem="too_large"} 0`,
		`leat_bulk_lines_total{operation="depths",outcome="problem"} 0`,
		`leat_spool_bytes 0`, `leat_held_bytes 0`,
		`leat_build_info{engine_version="`, `revision="0123",version="v0.0.0-test"} 1`,
		`go_goroutines `, `process_resident_memory_bytes `,
	} {
		if !strings.Contains(text, series) {
			t.Errorf("no %s in\n%s", series, text)
		}
	}
}

func TestMetricsCount(t *testing.T) {
	r := start(t, nil)
	for range 3 {
		r.send("POST", "/v1/depths", `{}`, "Content-Type", jsonHeader)
	}
	r.send("POST", "/v1/depths", `{"act":"refuse"}`, "Content-Type", jsonHeader)
	r.send("POST", "/v1/depths", `{"act":"panic"}`, "Content-Type", jsonHeader)
	r.send("POST", "/v1/depths", `{}`)
	got := r.send("POST", "/v1/bulk/depths", "{}\n{\"act\":\"refuse\"}\n\n{\"act\":\"panic\"}\n", "Content-Type", "application/x-ndjson")
	if got.status != 200 {
		t.Fatalf("bulk: %d %s", got.status, got.body)
	}
	waitFor(t, "the stream to be counted", func() bool {
		return testutil.ToFloat64(r.metrics.requests.WithLabelValues("/v1/bulk/depths", "POST", "200")) == 1
	})
	text := string(r.send("GET", "/metrics", "").body)
	for _, series := range []string{
		`leat_requests_total{method="POST",route="/v1/depths",status="200"} 3`,
		`leat_requests_total{method="POST",route="/v1/depths",status="422"} 1`,
		`leat_requests_total{method="POST",route="/v1/depths",status="500"} 1`,
		`leat_requests_total{method="POST",route="/v1/depths",status="415"} 1`,
		`leat_request_duration_seconds_count{route="/v1/depths"} 6`,
		`leat_solves_total{kind="unknown",operation="depths",outcome="result"} 4`,
		`leat_solves_total{kind="unknown",operation="depths",outcome="problem"} 2`,
		`leat_solves_total{kind="unknown",operation="depths",outcome="panic"} 2`,
		`leat_refusals_total{problem="invalid_request"} 1`,
		`leat_refusals_total{problem="internal_error"} 1`,
		`leat_refusals_total{problem="unsupported_media_type"} 1`,
		`leat_bulk_lines_total{operation="depths",outcome="result"} 1`,
		`leat_bulk_lines_total{operation="depths",outcome="problem"} 2`,
	} {
		if !strings.Contains(text, series+"\n") {
			t.Errorf("no %s in\n%s", series, text)
		}
	}
}

func TestCallersCannotMakeSeries(t *testing.T) {
	r := start(t, nil)
	count := func() int {
		families, err := r.metrics.registry.Gather()
		if err != nil {
			t.Fatal(err)
		}
		n := 0
		for _, family := range families {
			if strings.HasPrefix(family.GetName(), "leat_") {
				n += len(family.GetMetric())
			}
		}
		return n
	}
	before := count()
	// Ten thousand, over one connection after the other, with methods that there are and paths that nearly are.
	random := rand.New(rand.NewPCG(5, 21))
	letters := func() string {
		text := make([]byte, 1+random.IntN(12))
		for i := range text {
			text[i] = byte('A' + random.IntN(26))
		}
		return string(text)
	}
	for sent := 0; sent < 10_000; {
		var batch strings.Builder
		const together = 100
		for i := range together {
			method, path := letters(), "/"+strings.ToLower(letters())
			switch random.IntN(4) {
			case 0:
				method = methods[random.IntN(len(methods))]
			case 1:
				path = r.routes[random.IntN(len(r.routes))].path
			case 2:
				path = "/v1/" + strings.ToLower(letters()) + "?" + letters()
			}
			closes := ""
			if i == together-1 {
				closes = "Connection: close\r\n"
			}
			fmt.Fprintf(&batch, "%s %s HTTP/1.1\r\nHost: leat\r\nContent-Length: 0\r\n%s\r\n", method, path, closes)
		}
		if got := strings.Count(r.converse(batch.String(), false), "HTTP/1.1 "); got != together {
			t.Fatalf("%d answers to %d requests", got, together)
		}
		sent += together
	}
	if after := count(); after > before+2 {
		t.Errorf("%d series more", after-before)
	}
}
