package serve

import (
	"context"
	"crypto/tls"
	"errors"
	"fmt"
	"log/slog"
	"net"
	"net/http"
	"sync"
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
	config       Config
	operations   []*operation.Operation
	log          *slog.Logger
	build        Build
	known        func() error
	metrics      *metrics
	admission    *admission
	bodies       *larder
	answers      answers
	shelf        shelf
	limits       wire.Limits
	store        *stream.Store
	routes       routes
	origins      origins
	http         *http.Server
	admin        *http.Server // nil without an admin listener
	adminAddress net.Addr
	inside       atomic.Int64 // connections on the public listener
	began        time.Time
	refusals     refusalLog

	keys     atomic.Pointer[keyring]    // nil where none are asked for
	tls      atomic.Pointer[tls.Config] // nil without TLS
	renewals []*renewal
	renewing sync.Mutex

	unready  atomic.Bool
	draining chan struct{} // closed when bulk streams must end
	stopped  chan struct{} // closed when nothing needs to be renewed any more
	served   chan error
}

// New builds a server; Start makes it listen. It fails if the spool's folder cannot be written, or the contract, keys or certificates cannot be read.
func New(config Config, operations []*operation.Operation, around Surroundings) (*Server, error) {
	s := &Server{
		config:     config,
		operations: operations,
		log:        around.Log,
		build:      around.Build,
		known:      around.Ready,
		admission:  newAdmission(&config),
		bodies:     newLarder(config.HeldBytes),
		shelf:      shelf{room: config.HeldBytes},
		limits: wire.Limits{
			ArrayItems: config.ArrayItems, Points: config.Points, Reaches: config.Reaches, Stations: config.Stations, ReportPoints: config.ReportPoints, Flows: config.Flows,
			Work: config.Work,
		},
		store:    stream.NewStore(config.SpoolDir, config.MemoryBytes, config.SpoolBytes, config.SpoolTotal),
		draining: make(chan struct{}),
		stopped:  make(chan struct{}),
		served:   make(chan error, 2),
		began:    time.Now(),
	}
	if err := s.store.Check(); err != nil {
		return nil, fmt.Errorf("--spool-dir %q cannot be used: %w", config.SpoolDir, err)
	}
	var err error
	if s.origins, err = parseOrigins(config.AllowOrigin); err != nil {
		return nil, fmt.Errorf("--allow-origin %q: %w", config.AllowOrigin, err)
	}
	if err := s.firstLook(); err != nil {
		return nil, err
	}
	documents, err := s.documents(around.Contract)
	if err != nil {
		return nil, err
	}
	s.metrics = newMetrics(around.Build, s.store.Used, s.bodies.held.Load, s.inside.Load, s.admission)
	s.routes = s.plan(documents)
	names := make([]string, len(operations))
	for i, op := range operations {
		names[i] = op.Name
	}
	s.metrics.prepare(s.routes, names)
	s.metrics.bounds(config)

	s.http = s.newHTTP(s.router(s.routes, s.authorize), bodyTime+config.TimeLimit+answerTime)
	if config.AdminListen != "" {
		s.admin = s.newHTTP(s.router(s.adminPlan()), profileTime+answerTime)
	}
	return s, nil
}

// newHTTP makes the server of one listener, which speaks HTTP/1.1 and HTTP/2, over TLS and in the clear.
func (s *Server) newHTTP(handler http.Handler, answer time.Duration) *http.Server {
	var protocols http.Protocols
	protocols.SetHTTP1(true)
	protocols.SetHTTP2(true)
	protocols.SetUnencryptedHTTP2(true)
	return &http.Server{
		Handler:           handler,
		Protocols:         &protocols,
		HTTP2:             &http.HTTP2Config{MaxConcurrentStreams: streamsAtOnce},
		ReadHeaderTimeout: headerTime,
		ReadTimeout:       headerTime + bodyTime,
		WriteTimeout:      answer,
		IdleTimeout:       keepAliveTime,
		MaxHeaderBytes:    headerBytes,
		ErrorLog:          slog.NewLogLogger(s.log.Handler(), slog.LevelWarn),

		DisableGeneralOptionsHandler: true, // "OPTIONS *" is answered by our own
	}
}

// Start binds the addresses and serves in the background. The error is that of binding; the address is the public one that is bound.
func (s *Server) Start() (net.Addr, error) {
	listener, err := listen("listen", s.config.Listen)
	if err != nil {
		return nil, err
	}
	var admin *net.TCPListener
	if s.admin != nil {
		if admin, err = listen("admin-listen", s.config.AdminListen); err != nil {
			return nil, errors.Join(err, listener.Close())
		}
		s.adminAddress = admin.Addr()
		go func() {
			s.served <- s.admin.Serve(&doorkeeper{TCPListener: admin, most: adminConnections, inside: new(atomic.Int64), refused: s.metrics.refused, leaving: make(chan struct{}, mostLeaving)})
		}()
	}
	door := &doorkeeper{TCPListener: listener, most: int64(s.config.Connections), inside: &s.inside, refused: s.metrics.refused, quiet: s.tls.Load() != nil, leaving: make(chan struct{}, mostLeaving)}
	if s.tls.Load() != nil {
		s.http.TLSConfig = s.listenTLS()
		go func() { s.served <- s.http.ServeTLS(door, "", "") }()
	} else {
		go func() { s.served <- s.http.Serve(door) }()
	}
	if len(s.renewals) > 0 {
		go s.keepRenewing(s.stopped)
	}
	return listener.Addr(), nil
}

// AdminAddress is the bound address of the admin listener once the server has started, nil without one.
func (s *Server) AdminAddress() net.Addr { return s.adminAddress }

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
	close(s.stopped)
	err := s.http.Shutdown(ctx)
	if err != nil {
		err = errors.Join(fmt.Errorf("requests still ran after --drain-limit %s and were cut: %w", s.config.DrainLimit, err), s.http.Close())
	}
	if s.admin != nil {
		// Last, so that probes are answered while requests end. A profile being taken is worth no wait.
		err = errors.Join(err, s.admin.Close())
	}
	s.logLeftOut(s.refusals.rest())
	return err
}
