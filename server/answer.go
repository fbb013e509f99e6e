package server

import (
	"context"
	"fmt"
	"net/http"
	"strings"
	"time"

	"github.com/go-chi/chi/v5"

	"cadencewright/scheduler"
	"cadencewright/server/api"
	"cadencewright/server/httperr"
	"cadencewright/server/logline"
)

// answer is the adapter between handlers, which return an error, and the
// router: it answers the error and keeps it for the log.
func (s *Server) answer(f func(http.ResponseWriter, *http.Request) error) http.HandlerFunc {
	return func(w http.ResponseWriter, r *http.Request) {
		if err := f(w, r); err != nil {
			s.answerError(w, r, err)
		}
	}
}

// answerError answers with a page or a problem document, and keeps what only
// the log may know.
func (s *Server) answerError(w http.ResponseWriter, r *http.Request, err error) {
	logline.From(r.Context()).Fail(err)
	if !wantsPage(r) {
		httperr.Write(w, r, err)
		return
	}
	p := httperr.Of(err)
	p.Instance = w.Header().Get("X-Request-Id")
	httperr.Headers(w.Header(), p.Status)
	s.pages.Error(w, r, p)
}

// wantsPage tells a browser from a script.
func wantsPage(r *http.Request) bool {
	return !isAPI(r) && !strings.HasSuffix(r.URL.Path, ".csv") && strings.Contains(r.Header.Get("Accept"), "text/html")
}

func isAPI(r *http.Request) bool { return strings.HasPrefix(r.URL.Path, "/api/") }

// nothingHere is the answer at a path that is no route.
func nothingHere(_ http.ResponseWriter, r *http.Request) error {
	err := scheduler.Errorf(scheduler.ErrNotFound, "there is nothing at %.200q", r.URL.Path)
	if isAPI(r) {
		err = scheduler.Errorf(scheduler.ErrNotFound, "the API has nothing at %.200q; %s describes what it has", r.URL.Path, api.DocumentPaths[0])
	}
	return err
}

// notPossible is the answer to a method that a path does not have.
func notPossible(w http.ResponseWriter, r *http.Request) error {
	var allowed []string
	for _, m := range []string{http.MethodGet, http.MethodHead, http.MethodPost, http.MethodPut, http.MethodPatch, http.MethodDelete} {
		if routes := chi.RouteContext(r.Context()).Routes; routes.Match(chi.NewRouteContext(), m, routePath(r)) ||
			m == http.MethodHead && len(allowed) > 0 && allowed[0] == http.MethodGet {
			allowed = append(allowed, m)
		}
	}
	w.Header().Set("Allow", strings.Join(allowed, ", "))
	return scheduler.Errorf(httperr.ErrMethod, "%.20q is not possible here; %s is", r.Method, strings.Join(allowed, ", "))
}

// routePath is the path as the router reads it.
func routePath(r *http.Request) string {
	if r.URL.RawPath != "" {
		return r.URL.RawPath
	}
	return r.URL.Path
}

// readyWithin is how long the database may take to say that it is there.
const readyWithin = 2 * time.Second

// ready tells whether requests can be served: the database answers.
func (s *Server) ready(w http.ResponseWriter, r *http.Request) error {
	ctx, cancel := context.WithTimeout(r.Context(), readyWithin)
	defer cancel()
	if err := s.store.Ping(ctx); err != nil {
		return err
	}
	w.Header().Set("Cache-Control", "no-store")
	fmt.Fprintln(w, "ready")
	return nil
}
