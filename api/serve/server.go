package serve

import (
	"context"
	"errors"
	"fmt"
	"log/slog"
	"net"
	"net/http"
	"sync/atomic"
	"time"

	"leat/api/operation"
	"leat/api/stream"
	"leat/api/wire"
)

// Times that no operator needs to change.
const (
	headerTime    = 5 * time.Second  // for a request's header to arrive
	bodyTime      = 30 * time.Second // for the body of a unary request to arrive after it
	keepAliveTime = 60 * time.Second // for the next request on a connection to begin
	headerBytes   = 16 << 10
	answerTime    = 10 * time.Second // for an answer to be taken
	streamsAtOnce = 100              // of one HTTP/2 connection
)

// Surroundings are what a server is given beside its settings and operations.
type Surroundings struct {
	Log   *slog.Logger
	Build Build
	// Ready is a calculation with a known answer, made anew for each GET /readyz; its error makes the server unready. It must be cheap.
	Ready func() error
	// Contract is the OpenAPI document in YAML.
	Contract []byte
}

// A Server is Leat over HTTP. It holds no state between requests and nothing of it is global, so that many can live in one process.
type Server struct {
	config     Config
	operations []*operation.Operation
	log        *slog.Logger
	build      Build
	known      func() error
	metrics    *metrics
	bodies     *larder
	answers    answers
	limits     wire.Limits
	store      *stream.Store
	routes     []route
	http       *http.Server
	listener   net.Listener

	unready  atomic.Bool
	draining chan struct{} // closed when bulk streams must end
	served   chan error
}

// New builds a server; Start makes it listen. It fails if the spool's folder cannot be written or the contract cannot be read.
func New(config Config, operations []*operation.Operation, around Surroundings) (*Server, error) {
	s := &Server{
		config:     config,
		operations: operations,
		log:        around.Log,
		build:      around.Build,
		known:      around.Ready,
		bodies:     newLarder(config.HeldBytes),
		limits: wire.Limits{
			ArrayItems: config.ArrayItems, Points: config.Points, Reaches: config.Reaches, Stations: config.Stations, ReportPoints: config.ReportPoints, Flows: config.Flows,
		},
		store:    stream.NewStore(config.SpoolDir, config.MemoryBytes, config.SpoolBytes, config.SpoolTotal),
		draining: make(chan struct{}),
		served:   make(chan error, 1),
	}
	if err := s.store.Check(); err != nil {
		return nil, fmt.Errorf("--spool-dir %q cannot be used: %w", config.SpoolDir, err)
	}
	documents, err := s.documents(around.Contract)
	if err != nil {
		return nil, err
	}
	s.metrics = newMetrics(around.Build, s.store.Used, s.bodies.held.Load)
	s.routes = s.plan(documents)
	names := make([]string, len(operations))
	for i, op := range operations {
		names[i] = op.Name
	}
	s.metrics.prepare(s.routes, names)

	var protocols http.Protocols
	protocols.SetHTTP1(true)
	protocols.SetUnencryptedHTTP2(true)
	s.http = &http.Server{
		Handler:           s.router(),
		Protocols:         &protocols,
		HTTP2:             &http.HTTP2Config{MaxConcurrentStreams: streamsAtOnce},
		ReadHeaderTimeout: headerTime,
		ReadTimeout:       headerTime + bodyTime,
		WriteTimeout:      bodyTime + config.TimeLimit + answerTime,
		IdleTimeout:       keepAliveTime,
		MaxHeaderBytes:    headerBytes,
		ErrorLog:          slog.NewLogLogger(around.Log.Handler(), slog.LevelWarn),

		DisableGeneralOptionsHandler: true, // "OPTIONS *" gets a problem like any other unknown path
	}
	return s, nil
}

// Start binds the listen address and serves in the background. The error is that of binding; the address is the one bound.
func (s *Server) Start() (net.Addr, error) {
	listener, err := net.Listen("tcp", s.config.Listen)
	if err != nil {
		return nil, fmt.Errorf("--listen %s cannot be bound: %w", s.config.Listen, err)
	}
	s.listener = listener
	go func() { s.served <- s.http.Serve(listener) }()
	return listener.Addr(), nil
}

// Served receives the error of a server that stopped serving by itself, and http.ErrServerClosed once Stop began.
func (s *Server) Served() <-chan error { return s.served }

// Stop ends the server without losing an answer: it becomes unready, waits DrainDelay, closes the listener, tells bulk streams to end, and
// returns when all requests are answered. What still runs after DrainLimit is cut, and that is the error.
func (s *Server) Stop() error {
	ctx, cancel := context.WithTimeout(context.Background(), s.config.DrainLimit)
	defer cancel()
	s.unready.Store(true)
	time.Sleep(s.config.DrainDelay)
	close(s.draining)
	err := s.http.Shutdown(ctx)
	if err != nil {
		err = errors.Join(fmt.Errorf("requests still ran after --drain-limit %s and were cut: %w", s.config.DrainLimit, err), s.http.Close())
	}
	return err
}
