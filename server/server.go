// Package server is the HTTP service: the route table and the order of what
// stands before every handler (routes.go), who may call what (access.go), and
// starting and stopping.
package server

import (
	"context"
	"errors"
	"fmt"
	"log/slog"
	"net"
	"net/http"
	"syscall"
	"time"

	"github.com/go-chi/chi/v5"

	"cadencewright/scheduler"
	"cadencewright/server/api"
	"cadencewright/server/auth"
	"cadencewright/server/pages"
	"cadencewright/server/planning"
	"cadencewright/server/store"
)

// Planner hands planning jobs to the queue.
type Planner interface {
	Plan(ctx context.Context, campaign int64, h scheduler.Horizon, seed int64, actor string) (store.PlanJob, error)
}

// Deps is what the service is made of.
type Deps struct {
	Store   *store.Store
	Planner Planner
	Log     *slog.Logger
	Clock   func() time.Time // nil: the system's
	Secure  bool             // cookies over https only
	BaseURL string           // as people reach the service, where a proxy stands before it; may be empty
	Version string
	Metrics *Metrics // nil: none
}

// Server is the service.
type Server struct {
	store   *store.Store
	auth    *auth.Auth
	pages   *pages.Pages
	log     *slog.Logger
	metrics *Metrics
	origin  string // trusted besides the one that a request was sent to; may be empty
	handler http.Handler
	routes  chi.Routes
	api     *api.API
}

// New builds the service.
func New(d Deps) *Server {
	if d.Clock == nil {
		d.Clock = time.Now
	}
	s := &Server{store: d.Store, log: d.Log, metrics: d.Metrics, origin: d.BaseURL, auth: auth.New(d.Store, d.Secure)}
	sheets := planning.Sheets{Store: d.Store}
	s.pages = pages.New(d.Store, d.Planner, sheets, s.auth, d.Clock)
	mux := chi.NewMux()
	s.before(mux)
	mux.Group(func(r chi.Router) {
		r.Use(s.authorise)
		s.routeTable(r)
		s.api = api.Register(r, d.Store, d.Planner, sheets, d.Clock, d.Version)
	})
	mux.NotFound(s.answer(nothingHere))
	mux.MethodNotAllowed(s.answer(notPossible))
	s.handler, s.routes = mux, mux
	return s
}

// Handler is the whole service.
func (s *Server) Handler() http.Handler { return s.handler }

// API is the REST API with its description.
func (s *Server) API() *api.API { return s.api }

// Listen opens the address to serve on; an error says what to do.
func Listen(addr string) (net.Listener, error) { return listen(addr, "CADENCEWRIGHT_ADDR") }

// ListenMetrics opens the address to serve metrics on.
func ListenMetrics(addr string) (net.Listener, error) {
	return listen(addr, "CADENCEWRIGHT_METRICS_ADDR")
}

func listen(addr, setting string) (net.Listener, error) {
	l, err := net.Listen("tcp", addr)
	switch {
	case err == nil:
		return l, nil
	case errors.Is(err, syscall.EADDRINUSE):
		return nil, fmt.Errorf("cannot listen on %s: another program does; stop that one, or choose another address with %s", addr, setting)
	case errors.Is(err, syscall.EACCES):
		return nil, fmt.Errorf("cannot listen on %s: this user may not; choose a port above 1023 with %s", addr, setting)
	}
	return nil, fmt.Errorf("cannot listen on %s: %w; choose another address with %s", addr, err, setting)
}

// The limits of one connection: a client that sends or takes its time is let
// go. An answer may take as long as a request may be worked on, and then some
// for a poor line.
const (
	headerTimeout = 5 * time.Second
	readTimeout   = 30 * time.Second
	writeTimeout  = workTimeout + 60*time.Second
	idleTimeout   = 2 * time.Minute
	maxHeader     = 64 << 10
)

// Serve answers on the listener until ctx ends, then takes no more requests,
// lets answers under way finish, up to the given time, and breaks off what is
// left.
func (s *Server) Serve(ctx context.Context, l net.Listener, stopAfter time.Duration) error {
	return serve(ctx, l, s.handler, s.log, stopAfter)
}

// ServeMetrics serves metrics and profiles until ctx ends.
func (s *Server) ServeMetrics(ctx context.Context, l net.Listener) error {
	return serve(ctx, l, s.metrics.Handler(), s.log, time.Second)
}

func serve(ctx context.Context, l net.Listener, h http.Handler, log *slog.Logger, stopAfter time.Duration) error {
	srv := &http.Server{Handler: h, ReadHeaderTimeout: headerTimeout, ReadTimeout: readTimeout, WriteTimeout: writeTimeout,
		IdleTimeout: idleTimeout, MaxHeaderBytes: maxHeader, ErrorLog: slog.NewLogLogger(log.Handler(), slog.LevelWarn)}
	failed := make(chan error, 1)
	go func() { failed <- srv.Serve(l) }()
	select {
	case err := <-failed:
		return fmt.Errorf("serving on %s: %w", l.Addr(), err)
	case <-ctx.Done():
	}
	stop, cancel := context.WithTimeout(context.WithoutCancel(ctx), stopAfter)
	defer cancel()
	if err := srv.Shutdown(stop); err != nil {
		log.Warn("answers under way were broken off", "after", stopAfter, "error", err)
		return srv.Close()
	}
	return nil
}
