package serve

import (
	"net/http"
	"runtime"
	"strconv"
	"time"

	"github.com/prometheus/client_golang/prometheus"
	"github.com/prometheus/client_golang/prometheus/collectors"

	"leat/api/admit"
	"leat/compute"
)

// unmatched is the route label of a request that no route answers.
const unmatched = "unmatched"

// optionsRoute is the route label of all OPTIONS that are answered, so that they make one series and not one for each path.
const optionsRoute = "options"

// otherMethod is the method label of all methods that are not in the list, and of all requests that no route answers.
const otherMethod = "other"

// methods are the values of the method label.
var methods = []string{
	http.MethodGet, http.MethodHead, http.MethodPost, http.MethodPut, http.MethodPatch,
	http.MethodDelete, http.MethodOptions, http.MethodConnect, http.MethodTrace,
}

// Outcomes of a solve or a bulk line.
const (
	outcomeResult  = "result"
	outcomeProblem = "problem"
	outcomePanic   = "panic"
)

// Reasons for which requests are turned away at the door, beside those of the pool.
const (
	awayRate    = "rate"
	awayStreams = "streams"
	awayBodies  = "held_bytes"
)

// metrics are all that /metrics tells of ourselves. Every label comes from a fixed list.
type metrics struct {
	registry *prometheus.Registry
	requests *prometheus.CounterVec
	duration *prometheus.HistogramVec
	solves   *prometheus.CounterVec
	refusals *prometheus.CounterVec
	lines    *prometheus.CounterVec
	refused  prometheus.Counter

	turnedAway *prometheus.CounterVec
	queueWait  prometheus.Histogram
}

func newMetrics(build Build, spoolBytes, heldBytes, connections func() int64, a *admission) *metrics {
	m := &metrics{
		registry: prometheus.NewRegistry(),
		requests: prometheus.NewCounterVec(prometheus.CounterOpts{
			Name: "leat_requests_total",
			Help: "Requests answered, by route template, method and status.",
		}, []string{"route", "method", "status"}),
		duration: prometheus.NewHistogramVec(prometheus.HistogramOpts{
			Name: "leat_request_duration_seconds",
			Help: "Time from a request's header to the end of its answer, by route template.",
			Buckets: []float64{
				50e-6, 100e-6, 250e-6, 500e-6, 1e-3, 2.5e-3, 5e-3, 10e-3, 25e-3, 50e-3, 100e-3, 250e-3, 500e-3, 1, 2.5, 5, 10, 60, 600,
			},
		}, []string{"route"}),
		solves: prometheus.NewCounterVec(prometheus.CounterOpts{
			Name: "leat_solves_total",
			Help: "Requests and bulk lines that were handed to an operation, by operation, kind of section and outcome.",
		}, []string{"operation", "kind", "outcome"}),
		refusals: prometheus.NewCounterVec(prometheus.CounterOpts{
			Name: "leat_refusals_total",
			Help: "Whole requests refused, by the kind of the problem; refused bulk lines are counted in leat_bulk_lines_total.",
		}, []string{"problem"}),
		lines: prometheus.NewCounterVec(prometheus.CounterOpts{
			Name: "leat_bulk_lines_total",
			Help: "Bulk lines answered, by operation and outcome.",
		}, []string{"operation", "outcome"}),
		turnedAway: prometheus.NewCounterVec(prometheus.CounterOpts{
			Name: "leat_turned_away_total",
			Help: "Requests refused without being solved because there is too much to do, by reason: line_full, long_wait (refused at once), waited_long, held_bytes, streams, rate.",
		}, []string{"reason"}),
		queueWait: prometheus.NewHistogram(prometheus.HistogramOpts{
			Name:    "leat_queue_wait_seconds",
			Help:    "How long unary requests that were solved had waited for a slot.",
			Buckets: []float64{100e-6, 1e-3, 5e-3, 10e-3, 25e-3, 50e-3, 100e-3, 250e-3, 500e-3, 1, 5},
		}),
	}
	m.refused = prometheus.NewCounter(prometheus.CounterOpts{
		Name: "leat_connections_refused_total",
		Help: "Connections refused since as many as are taken were open.",
	})
	open := prometheus.NewGaugeFunc(prometheus.GaugeOpts{
		Name: "leat_connections",
		Help: "Open connections on the public listener.",
	}, func() float64 { return float64(connections()) })
	spool := prometheus.NewGaugeFunc(prometheus.GaugeOpts{
		Name: "leat_spool_bytes",
		Help: "Bulk answers that wait in spool files for their readers.",
	}, func() float64 { return float64(spoolBytes()) })
	held := prometheus.NewGaugeFunc(prometheus.GaugeOpts{
		Name: "leat_held_bytes",
		Help: "Request bodies of unary operations, and their large answers that wait for readers, held in memory.",
	}, func() float64 { return float64(heldBytes()) })
	info := prometheus.NewGauge(prometheus.GaugeOpts{
		Name: "leat_build_info",
		Help: "Always 1; the labels say what runs.",
		ConstLabels: prometheus.Labels{
			"version": build.Version, "revision": build.Revision, "engine_version": compute.EngineVersion, "go_version": runtime.Version(),
		},
	})
	info.Set(1)
	m.registry.MustRegister(
		m.requests, m.duration, m.solves, m.refusals, m.lines, m.refused, m.turnedAway, m.queueWait, open, spool, held, info,
		collectors.NewGoCollector(), collectors.NewProcessCollector(collectors.ProcessCollectorOpts{}),
	)
	m.admission(a)
	return m
}

// admission registers what tells of slots and lines.
func (m *metrics) admission(a *admission) {
	gauge := func(name, help string, labels prometheus.Labels, value func() float64) {
		m.registry.MustRegister(prometheus.NewGaugeFunc(prometheus.GaugeOpts{Name: name, Help: help, ConstLabels: labels}, value))
	}
	for _, class := range admit.Classes() {
		labels := prometheus.Labels{"class": class.String()}
		gauge("leat_queue_length", "What waits for a slot: short and long unary requests, and workers of bulk streams.", labels,
			func() float64 { return float64(a.pool.Waiting(class)) })
		gauge("leat_slots_held", "Slots in use, by the class of work.", labels, func() float64 { return float64(a.pool.Held(class)) })
	}
	gauge("leat_slots", "How many solves there may be at once.", nil, func() float64 { return float64(a.pool.Slots()) })
	gauge("leat_slot_silence_seconds", "Longest time since a solve that holds a slot gave a sign of life.", nil, func() float64 { return a.pool.Silence().Seconds() })
	gauge("leat_bulk_streams", "Bulk streams that are open.", nil, func() float64 { return float64(a.streams.Taken()) })
	for _, reason := range admit.Reasons() {
		m.turnedAway.WithLabelValues(string(reason))
	}
	for _, reason := range []string{awayRate, awayStreams, awayBodies} {
		m.turnedAway.WithLabelValues(reason)
	}
}

// bounds registers the limits that gauges run up against, so that alerts need not know the settings.
func (m *metrics) bounds(config Config) {
	for _, bound := range []struct {
		name, help string
		value      int64
	}{
		{"leat_spool_limit_bytes", "Most bytes of bulk answers that may wait in spool files.", config.SpoolTotal},
		{"leat_held_limit_bytes", "Most bytes of request bodies of unary operations that are held in memory.", config.HeldBytes},
	} {
		gauge := prometheus.NewGauge(prometheus.GaugeOpts{Name: bound.name, Help: bound.help})
		gauge.Set(float64(bound.value))
		m.registry.MustRegister(gauge)
	}
}

// prepare creates the series that are certain to occur, so that rates start from zero.
func (m *metrics) prepare(routes []route, operations []string) {
	for _, r := range routes {
		if r.silent {
			continue
		}
		m.duration.WithLabelValues(r.path)
		m.requests.WithLabelValues(r.path, r.method, "200")
		if r.method == http.MethodGet {
			m.requests.WithLabelValues(r.path, http.MethodHead, "200")
		}
	}
	m.duration.WithLabelValues(unmatched)
	m.requests.WithLabelValues(unmatched, otherMethod, "404")
	m.requests.WithLabelValues(unmatched, otherMethod, "405")
	m.duration.WithLabelValues(optionsRoute)
	m.requests.WithLabelValues(optionsRoute, http.MethodOptions, "204")
	for _, kind := range kinds {
		m.refusals.WithLabelValues(kind)
	}
	for _, name := range operations {
		for _, kind := range solveKinds(name) {
			m.solves.WithLabelValues(name, string(kind), outcomeResult)
			m.solves.WithLabelValues(name, string(kind), outcomeProblem)
		}
		m.solves.WithLabelValues(name, string(unknownKind), outcomePanic)
		m.lines.WithLabelValues(name, outcomeResult)
		m.lines.WithLabelValues(name, outcomeProblem)
	}
}

func (m *metrics) observe(route, method string, status int, elapsed time.Duration) {
	if route == unmatched {
		method = otherMethod // strangers' methods times their statuses would be many series that tell nobody anything
	}
	m.requests.WithLabelValues(route, methodLabel(method), strconv.Itoa(status)).Inc()
	m.duration.WithLabelValues(route).Observe(elapsed.Seconds())
}

func methodLabel(method string) string {
	for _, known := range methods {
		if method == known {
			return known
		}
	}
	return otherMethod
}
