package server

import (
	"net/http"
	"slices"

	"github.com/go-chi/chi/v5"

	"cadencewright/scheduler"
	"cadencewright/server/auth"
)

// Who may call what. A route that stands in no row of this table answers
// nobody: a test walks the router and fails for one that was forgotten.
var access = []struct {
	method, pattern string
	roles           []auth.Role
}{
	{"GET", "/livez", anyone},
	{"GET", "/readyz", anyone},
	{"GET", "/static/*", anyone},
	{"GET", "/sign-in", anyone},
	{"POST", "/sign-in", anyone},
	{"GET", "/sign-in/{token}", anyone},
	{"POST", "/sign-in/{token}", anyone},
	{"POST", "/sign-out", anyone},
	{"GET", "/help", anyone},
	{"GET", "/api/v1/openapi.json", anyone},
	{"GET", "/api/v1/openapi.yaml", anyone},
	{"GET", "/api/v1/openapi-3.0.json", anyone},
	{"GET", "/api/v1/openapi-3.0.yaml", anyone},

	{"GET", "/", people},
	{"GET", "/weeks/{week}", people},
	{"GET", "/weeks/{week}/job", people},
	{"GET", "/weeks/{week}/scans/{id}", people},
	{"GET", "/sources", people},
	{"GET", "/sources/{name}", people},
	{"GET", "/telescopes", people},
	{"GET", "/telescopes/{code}", people},
	{"GET", "/telescopes/{code}/nights/{night}", people},
	{"GET", "/telescopes/{code}/nights/{night}.csv", people},
	{"POST", "/weeks/{week}/plan", coordinators},
	{"POST", "/weeks/{week}/issue", coordinators},
	{"POST", "/jobs/{id}/stop", coordinators},

	{"GET", "/api/v1/telescopes", all},
	{"GET", "/api/v1/telescopes/{code}/now", all},
	{"GET", "/api/v1/telescopes/{code}/scans", all},
	{"GET", "/api/v1/telescopes/{code}/run-sheets/{night}", all},
	{"GET", "/api/v1/scans/{id}", all},
	{"POST", "/api/v1/scans/{id}/outcome", reporters},
	{"GET", "/api/v1/weeks/{week}/plans", people},
	{"POST", "/api/v1/weeks/{week}/plan", coordinators},
	{"GET", "/api/v1/jobs/{id}", people},
	{"POST", "/api/v1/jobs/{id}/stop", coordinators},
	{"GET", "/api/v1/plans/{id}", people},
	{"GET", "/api/v1/plans/{id}/file", people},
	{"GET", "/api/v1/plans/{id}/scans", people},
	{"POST", "/api/v1/plans/{id}/issue", coordinators},
	{"GET", "/api/v1/campaigns", people},
	{"GET", "/api/v1/campaigns/{id}/file", people},
	{"GET", "/api/v1/journal", people},
}

// The groups of roles in the table.
var (
	anyone       = []auth.Role{auth.RoleNone, auth.RoleReader, auth.RoleObserver, auth.RoleCoordinator, auth.RoleKey}
	people       = []auth.Role{auth.RoleReader, auth.RoleObserver, auth.RoleCoordinator}
	coordinators = []auth.Role{auth.RoleCoordinator}
	reporters    = []auth.Role{auth.RoleObserver, auth.RoleCoordinator, auth.RoleKey}
	all          = []auth.Role{auth.RoleReader, auth.RoleObserver, auth.RoleCoordinator, auth.RoleKey}
)

// rolesOf are the roles that may call a route; none for one that the table
// does not name. HEAD asks what GET may.
func rolesOf(method, pattern string) []auth.Role {
	if method == http.MethodHead {
		method = http.MethodGet
	}
	for _, a := range access {
		if a.method == method && a.pattern == pattern {
			return a.roles
		}
	}
	return nil
}

// authorise finds out who asks and lets the request through if the table says
// so. It stands before the router has chosen a route, and asks it which one
// that would be: a path that is no route goes on to its 404.
func (s *Server) authorise(mux *chi.Mux) func(http.Handler) http.Handler {
	return func(next http.Handler) http.Handler {
		return http.HandlerFunc(func(w http.ResponseWriter, r *http.Request) {
			method := r.Method
			if method == http.MethodHead {
				method = http.MethodGet
			}
			pattern := mux.Find(chi.NewRouteContext(), method, r.URL.Path)
			line(r).pattern = pattern
			if pattern == "" {
				next.ServeHTTP(w, r)
				return
			}
			roles := rolesOf(method, pattern)
			id, err := auth.Identity{}, error(nil)
			if !slices.Contains(openPatterns, pattern) { // no look-up for what needs nobody's name
				id, err = s.auth.Identify(r)
			}
			switch {
			case err != nil:
				s.answerError(w, r, err)
				return
			case len(roles) == 0:
				s.answerError(w, r, scheduler.Errorf(scheduler.ErrForbidden, "nobody may call this"))
				return
			case !slices.Contains(roles, id.Role) && id.Role == auth.RoleNone:
				s.signInFirst(w, r)
				return
			case !slices.Contains(roles, id.Role):
				s.answerError(w, r, scheduler.Errorf(scheduler.ErrForbidden, "a %s may not do this", id.Role))
				return
			}
			line(r).actor = id.Actor()
			next.ServeHTTP(w, r.WithContext(auth.With(r.Context(), id)))
		})
	}
}

// openPatterns are routes that never look at who asks.
var openPatterns = []string{"/livez", "/readyz", "/static/*"}

// signInFirst sends a browser to the sign-in page and tells a script that a
// key is wanted.
func (s *Server) signInFirst(w http.ResponseWriter, r *http.Request) {
	if wantsPage(r) && r.Method == http.MethodGet {
		http.Redirect(w, r, "/sign-in?next="+urlQuery(r.URL.RequestURI()), http.StatusSeeOther)
		return
	}
	s.answerError(w, r, scheduler.Errorf(scheduler.ErrUnauthenticated, "sign in, or send a key as: Authorization: Bearer KEY"))
}
