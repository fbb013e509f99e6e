package server

import (
	"cmp"
	"fmt"
	"net/http"
	"slices"
	"strings"
	"testing"

	"github.com/go-chi/chi/v5"

	"cadencewright/server/auth"
)

// Every route with every role and none: the table in code says who may call
// it, and the service does what the table says. A route that stands in no row
// fails.
func TestEveryRouteWithEveryRole(t *testing.T) {
	w := newWorld(t)
	clients := map[auth.Role]*client{}
	roles := []auth.Role{auth.RoleNone, auth.RoleReader, auth.RoleObserver, auth.RoleCoordinator, auth.RoleKey}
	for _, r := range roles {
		clients[r] = w.as(r)
	}
	seen := 0
	err := chi.Walk(w.srv.routes, func(method, pattern string, _ http.Handler, _ ...func(http.Handler) http.Handler) error {
		allowed := rolesOf(method, pattern)
		if len(allowed) == 0 {
			t.Errorf("%s %s stands in no row of the access table", method, pattern)
			return nil
		}
		seen++
		line := fmt.Sprintf("%-5s %-50s", method, pattern)
		for _, r := range roles {
			if method == "POST" && (pattern == "/sign-out" || strings.HasPrefix(pattern, "/sign-in")) {
				continue // they change who asks
			}
			path := strings.NewReplacer("{code}", w.telescopes()[0], "{week}", "2027-W04", "{night}", "2027-01-18", "{id}", "999999", "{name}", "nobody", "{token}", "x", "*", "none").Replace(pattern)
			res, body := clients[r].do(method, path, nil)
			refused := res.StatusCode == 401 || res.StatusCode == 403 || res.StatusCode == 303 && strings.HasPrefix(res.Header.Get("Location"), "/sign-in?")
			may := slices.Contains(allowed, r)
			if may == refused {
				t.Errorf("%s as %q: %s %s; the table says %v", line, r, res.Status, body, may)
			}
			if res.StatusCode >= 500 {
				t.Errorf("%s as %q: %s %s", line, r, res.Status, body)
			}
			if may {
				line += " " + string(cmp.Or(r, "nobody"))
			}
		}
		t.Log(line)
		return nil
	})
	if err != nil {
		t.Fatal(err)
	}
	if seen < 30 {
		t.Errorf("only %d routes were walked", seen)
	}
	for _, a := range access {
		if pattern := w.srv.routes.Find(chi.NewRouteContext(), a.method, strings.NewReplacer("{", "x", "}", "x", "*", "x").Replace(a.pattern)); pattern != a.pattern {
			t.Errorf("the access table names %s %s, which is no route", a.method, a.pattern)
		}
	}
}

// A key sees and reports for its own telescope only.
func TestKeyReportsForItsOwnTelescopeOnly(t *testing.T) {
	w := newWorld(t)
	ada := w.as(auth.RoleCoordinator)
	plan := w.plan(ada, "2027-W03")
	if res, b := ada.do("POST", "/api/v1/plans/"+itoa(plan)+"/issue", nil, "If-Match", `"1"`); res.StatusCode != 200 {
		t.Fatalf("issue: %s %s", res.Status, b)
	}
	scans := allOf[apiScan](ada, "/api/v1/plans/"+itoa(plan)+"/scans?limit=200")
	key := w.as(auth.RoleKey)
	own := w.telescopes()[0]
	for _, x := range scans {
		if x.Telescope != own {
			if res, _ := key.do("POST", "/api/v1/scans/"+itoa(x.ID)+"/outcome", map[string]any{"state": "done"}); res.StatusCode != 403 {
				t.Errorf("a key of %s reported for %s: %s", own, x.Telescope, res.Status)
			}
			return
		}
	}
	t.Fatal("the plan uses one telescope only")
}

// What is said of safety stands on every answer.
func TestHeaders(t *testing.T) {
	w := newWorld(t)
	c := w.as(auth.RoleReader)
	for _, path := range []string{"/", "/help", "/nowhere", "/api/v1/telescopes", "/api/v1/nowhere", "/livez"} {
		res, _ := c.do("GET", path, nil)
		for name, want := range map[string]string{"Content-Security-Policy": "default-src 'self'", "X-Content-Type-Options": "nosniff", "X-Request-Id": ""} {
			if got := res.Header.Get(name); got == "" || !strings.Contains(got, want) {
				t.Errorf("%s: %s is %q", path, name, got)
			}
		}
	}
	res, b := c.do("GET", "/api/v1/nowhere", nil)
	if res.StatusCode != 404 || res.Header.Get("Content-Type") != "application/problem+json" {
		t.Errorf("an unknown path of the API: %s %s %s", res.Status, res.Header.Get("Content-Type"), b)
	}
	res, _ = c.do("POST", "/weeks/2027-W03/plan", nil, "Sec-Fetch-Site", "cross-site")
	if res.StatusCode != 403 {
		t.Errorf("a change asked for by another site: %s, want 403", res.Status)
	}
}

// A part of a page that is asked for without a session sends the browser to
// sign in and back to the page that it was on, instead of putting the sign-in
// page into the part.
func TestSessionEndsUnderAPage(t *testing.T) {
	w := newWorld(t)
	c := w.as(auth.RoleNone)
	res, b := c.do("GET", "/weeks/2027-W03/job", nil, "HX-Request", "true", "HX-Current-URL", w.http.URL+"/weeks/2027-W03?show=unmet")
	if res.StatusCode != 401 || strings.Contains(string(b), "<form") {
		t.Errorf("%s: %.200s", res.Status, b)
	}
	if got, want := res.Header.Get("HX-Redirect"), "/sign-in?next=%2Fweeks%2F2027-W03%3Fshow%3Dunmet"; got != want {
		t.Errorf("sent to %q, want %q", got, want)
	}
	res, _ = c.do("GET", "/weeks/2027-W03/job", nil, "HX-Request", "true", "HX-Current-URL", "::")
	if got := res.Header.Get("HX-Redirect"); got != "/sign-in?next=%2F" {
		t.Errorf("with an address that is none, sent to %q", got)
	}
	res, _ = w.as(auth.RoleReader).do("GET", "/weeks/2027-W03/job", nil, "HX-Request", "true")
	if res.StatusCode != 200 || res.Header.Get("HX-Redirect") != "" {
		t.Errorf("with a session: %s, sent to %q", res.Status, res.Header.Get("HX-Redirect"))
	}
}

// Bad requests get a problem document that names the field, never a 5xx.
func TestBadReports(t *testing.T) {
	w := newWorld(t)
	c := w.as(auth.RoleCoordinator)
	for body, pointer := range map[string]string{
		`{"state":"finished"}`:            "/state",
		`{"state":"done","snr":-1}`:       "/snr",
		`{"state":"done","colour":"red"}`: "/colour",
		`{"state":7}`:                     "/state",
		`{`:                               "",
		`{"state":"lost","cause":"moon"}`: "/cause",
	} {
		res, b := c.do("POST", "/api/v1/scans/1/outcome", body)
		if res.StatusCode < 400 || res.StatusCode >= 500 || res.Header.Get("Content-Type") != "application/problem+json" {
			t.Errorf("%s: %s %s", body, res.Status, b)
		}
		if pointer != "" && !strings.Contains(string(b), `"pointer":"`+pointer+`"`) {
			t.Errorf("%s: the answer does not point to %s: %s", body, pointer, b)
		}
	}
}
