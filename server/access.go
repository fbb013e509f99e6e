package server

import (
	"net/http"
	"net/url"
	"slices"
	"strings"

	"github.com/go-chi/chi/v5"

	"cadencewright/scheduler"
	"cadencewright/server/auth"
	"cadencewright/server/logline"
)

// Who may call what. A route that stands in no row of this table answers
// nobody: a test walks the router and fails for one that was forgotten. A key
// calls what names its own telescope in the path; where the path names a scan,
// the handler sees whose it is.
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
	{"GET", "/api/v1/problems", anyone},

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

	{"GET", "/api/v1/telescopes", people},
	{"GET", "/api/v1/telescopes/{code}", all},
	{"GET", "/api/v1/telescopes/{code}/now", all},
	{"GET", "/api/v1/telescopes/{code}/scans", all},
	{"GET", "/api/v1/telescopes/{code}/run-sheets/{night}", all},
	{"GET", "/api/v1/scans/{id}", all},
	{"POST", "/api/v1/scans/{id}/outcome", reporters},
	{"GET", "/api/v1/sources", people},
	{"GET", "/api/v1/sources/{name}", people},
	{"GET", "/api/v1/weeks/{week}", people},
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
// so. It stands between the router and the handlers, so that what it looks up
// is the very route that was chosen. A key reaches what is its own telescope's
// alone.
func (s *Server) authorise(next http.Handler) http.Handler {
	return http.HandlerFunc(func(w http.ResponseWriter, r *http.Request) {
		pattern := chi.RouteContext(r.Context()).RoutePattern()
		if slices.Contains(openPatterns, pattern) { // no look-up for what needs nobody's name
			next.ServeHTTP(w, r)
			return
		}
		id, err := s.auth.Identify(r)
		if err != nil {
			s.answerError(w, r, err)
			return
		}
		logline.From(r.Context()).SetActor(id.Actor())
		if err := mayCall(id, rolesOf(r.Method, pattern), chi.URLParam(r, "code")); err != nil {
			if id.Role == auth.RoleNone && r.Header.Get("HX-Request") == "true" {
				// A part of a page cannot hold the sign-in page: the browser is sent
				// there, and comes back to the page that it was on.
				w.Header().Set("HX-Redirect", "/sign-in?next="+url.QueryEscape(pageOf(r)))
			}
			if id.Role == auth.RoleNone && r.Header.Get("HX-Request") == "" && wantsPage(r) && (r.Method == http.MethodGet || r.Method == http.MethodHead) {
				http.Redirect(w, r, "/sign-in?next="+url.QueryEscape(r.URL.RequestURI()), http.StatusSeeOther)
				return
			}
			s.answerError(w, r, err)
			return
		}
		next.ServeHTTP(w, r.WithContext(auth.With(r.Context(), id)))
	})
}

// pageOf is the path of the page that asks for a part of itself.
func pageOf(r *http.Request) string {
	u, err := url.Parse(r.Header.Get("HX-Current-URL"))
	if err != nil || u.Path == "" {
		return "/"
	}
	return u.RequestURI()
}

// mayCall refuses somebody whose role is not among those that may, and a key
// whose telescope is another than the one in the path.
func mayCall(id auth.Identity, roles []auth.Role, telescope string) error {
	switch {
	case len(roles) == 0:
		return scheduler.Errorf(scheduler.ErrForbidden, "nobody may call this")
	case slices.Contains(roles, id.Role) && (telescope == "" || id.MaySee(telescope)):
		return nil
	case slices.Contains(roles, id.Role):
		return scheduler.Errorf(scheduler.ErrForbidden, "this key is for telescope %s", strings.Join(id.Telescopes, ", "))
	case id.Role == auth.RoleNone:
		return scheduler.Errorf(scheduler.ErrUnauthenticated, "sign in, or send a key as: Authorization: Bearer KEY")
	}
	return scheduler.Errorf(scheduler.ErrForbidden, "this is not for a %s", id.Role)
}

// openPatterns are routes that never look at who asks. The table lets anybody
// call them; they answer even with a wrong key and while the database is away.
var openPatterns = []string{"/livez", "/readyz", "/static/*", "/api/v1/openapi.json", "/api/v1/openapi.yaml", "/api/v1/problems"}
