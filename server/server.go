// Package server is the HTTP service: the route table, the order of what
// stands before every handler, and starting and stopping.
package server

import (
	"context"
	"errors"
	"fmt"
	"log/slog"
	"net"
	"net/http"
	"time"

	"github.com/danielgtaylor/huma/v2"
	"github.com/go-chi/chi/v5"
	"github.com/go-chi/chi/v5/middleware"

	"cadencewright/scheduler"
	"cadencewright/server/api"
	"cadencewright/server/auth"
	"cadencewright/server/pages"
	"cadencewright/server/planning"
	"cadencewright/server/store"
	"cadencewright/web/static"
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
	Clock   func() time.Time
	Secure  bool // people come over https
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
	handler http.Handler
	routes  chi.Routes
	api     huma.API
}

// New builds the service.
func New(d Deps) *Server {
	if d.Clock == nil {
		d.Clock = time.Now
	}
	s := &Server{store: d.Store, log: d.Log, metrics: d.Metrics, auth: auth.New(d.Store, d.Secure)}
	sheets := planning.Sheets{Store: d.Store}
	s.pages = pages.New(d.Store, d.Planner, sheets, s.auth, d.Clock)
	mux := chi.NewMux()
	// The order matters: what stands first sees the request first and the
	// answer last.
	mux.Use(
		s.logged,
		secured,
		bounded,
		middleware.Compress(5, "text/html", "text/css", "text/csv", "application/json", "application/problem+json", "image/svg+xml"),
		s.sameOrigin(),
		s.authorise(mux),
	)
	s.routeTable(mux)
	s.api = api.Register(mux, d.Store, d.Planner, sheets, d.Clock, d.Version)
	s.handler, s.routes = mux, mux
	return s
}

// routeTable is every route but those of the API. Who may call them stands in
// the access table.
func (s *Server) routeTable(mux *chi.Mux) {
	page := func(f func(http.ResponseWriter, *http.Request) error) http.HandlerFunc {
		return func(w http.ResponseWriter, r *http.Request) {
			if err := f(w, r); err != nil {
				s.answerError(w, r, err)
			}
		}
	}
	p := s.pages
	mux.Get("/livez", func(w http.ResponseWriter, _ *http.Request) { fmt.Fprintln(w, "ok") })
	mux.Get("/readyz", page(s.ready))
	mux.Handle("/static/*", static.Handler())

	mux.Get("/sign-in", page(p.SignIn))
	mux.Post("/sign-in", page(p.DoSignIn))
	mux.Get("/sign-in/{token}", page(p.Link))
	mux.Post("/sign-in/{token}", page(p.DoLink))
	mux.Post("/sign-out", page(p.SignOut))
	mux.Get("/help", page(p.Help))

	mux.Get("/", page(p.Home))
	mux.Get("/weeks/{week}", page(p.Week))
	mux.Get("/weeks/{week}/job", page(p.Job))
	mux.Get("/weeks/{week}/scans/{id}", page(p.Scan))
	mux.Post("/weeks/{week}/plan", page(p.Plan))
	mux.Post("/weeks/{week}/issue", page(p.Issue))
	mux.Post("/jobs/{id}/stop", page(p.Stop))
	mux.Get("/sources", page(p.Sources))
	mux.Get("/sources/{name}", page(p.Source))
	mux.Get("/telescopes", page(p.Telescopes))
	mux.Get("/telescopes/{code}", page(p.Telescope))
	mux.Get("/telescopes/{code}/nights/{night}", page(p.RunSheet))
	mux.Get("/telescopes/{code}/nights/{night}.csv", page(p.RunSheetCSV))

	mux.NotFound(page(func(_ http.ResponseWriter, r *http.Request) error {
		return scheduler.Errorf(scheduler.ErrNotFound, "there is nothing at %s", r.URL.Path)
	}))
	mux.MethodNotAllowed(func(w http.ResponseWriter, r *http.Request) {
		w.Header().Set("Content-Type", "application/problem+json")
		w.WriteHeader(http.StatusMethodNotAllowed)
		fmt.Fprintf(w, `{"type":"about:blank","title":"Method not allowed","status":405,"detail":"%s is not possible here"}`+"\n", r.Method)
	})
}

// sameOrigin refuses changes that another site's page asks for.
func (s *Server) sameOrigin() func(http.Handler) http.Handler {
	guard := http.NewCrossOriginProtection()
	guard.SetDenyHandler(http.HandlerFunc(func(w http.ResponseWriter, r *http.Request) {
		s.answerError(w, r, scheduler.Errorf(scheduler.ErrForbidden, "this change was asked for by a page of another site"))
	}))
	return guard.Handler
}

// ready tells whether requests can be served: the database answers.
func (s *Server) ready(w http.ResponseWriter, r *http.Request) error {
	ctx, cancel := context.WithTimeout(r.Context(), 2*time.Second)
	defer cancel()
	if err := s.store.Ping(ctx); err != nil {
		return err
	}
	fmt.Fprintln(w, "ready")
	return nil
}

// Handler is the whole service.
func (s *Server) Handler() http.Handler { return s.handler }

// API is the description of the REST API.
func (s *Server) API() huma.API { return s.api }

// Listen opens the address to serve on; an error says what to do.
func Listen(addr string) (net.Listener, error) {
	l, err := net.Listen("tcp", addr)
	if err != nil {
		return nil, fmt.Errorf("cannot listen on %s: %w; choose another address with CADENCEWRIGHT_ADDR", addr, err)
	}
	return l, nil
}

// Serve answers on the listener until ctx ends, then lets answers under way
// finish, up to the given time.
func (s *Server) Serve(ctx context.Context, l net.Listener, stopAfter time.Duration) error {
	srv := &http.Server{Handler: s.handler, ReadHeaderTimeout: 5 * time.Second, ReadTimeout: 30 * time.Second, WriteTimeout: 60 * time.Second,
		IdleTimeout: 2 * time.Minute, MaxHeaderBytes: 64 << 10, ErrorLog: slog.NewLogLogger(s.log.Handler(), slog.LevelWarn)}
	failed := make(chan error, 1)
	go func() { failed <- srv.Serve(l) }()
	select {
	case err := <-failed:
		return err
	case <-ctx.Done():
	}
	stop, cancel := context.WithTimeout(context.WithoutCancel(ctx), stopAfter)
	defer cancel()
	if err := srv.Shutdown(stop); err != nil {
		return errors.Join(err, srv.Close())
	}
	return nil
}
