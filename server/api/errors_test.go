package api

import (
	"context"
	"errors"
	"fmt"
	"net/http"
	"strings"
	"testing"

	"cadencewright/scheduler"
	"cadencewright/server/store"
)

// requests is a good request of every operation that asks the layers below.
var requests = []struct{ method, path, body string }{
	{"GET", "/telescopes", ""}, {"GET", "/telescopes/BRM", ""}, {"GET", "/telescopes/BRM/now", ""}, {"GET", "/telescopes/BRM/scans", ""},
	{"GET", "/telescopes/BRM/run-sheets/2027-01-18", ""}, {"GET", "/scans/41", ""}, {"POST", "/scans/41/outcome", `{"state":"done"}`},
	{"GET", "/sources", ""}, {"GET", "/sources/SIM%20J0412+1833", ""}, {"GET", "/weeks/2027-W03", ""}, {"GET", "/weeks/2027-W03/plans", ""},
	{"POST", "/weeks/2027-W03/plan", `{"seed":7}`}, {"GET", "/jobs/5", ""}, {"POST", "/jobs/5/stop", ""}, {"GET", "/plans/17", ""}, {"GET", "/plans/17/file", ""},
	{"GET", "/plans/17/scans", ""}, {"POST", "/plans/17/issue", ""}, {"GET", "/campaigns", ""}, {"GET", "/campaigns/1/file", ""}, {"GET", "/journal", ""},
}

// ifMatch is what issuing needs and the others pass over.
var ifMatch = []string{"If-Match", "*"}

// Every request above is good, and the list leaves no operation out.
func TestEveryOperationAnswers(t *testing.T) {
	_, _, doc := described(t)
	operations := 0
	for _, item := range doc.Paths.Map() {
		operations += len(item.Operations())
	}
	if operations != len(requests)+1 { // and the kinds of problem, which ask nobody
		t.Errorf("%d operations, %d are tried here", operations, len(requests))
	}
	for _, x := range requests {
		w := serve(t).do(x.method, x.path, x.body, ifMatch...)
		if w.Code/100 != 2 || !strings.HasPrefix(w.Header().Get("Content-Type"), "application/json") || w.Body.Len() == 0 {
			t.Errorf("%s %s: %d %s", x.method, x.path, w.Code, w.Body)
		}
	}
}

// Whatever goes wrong below, each operation answers with that kind's status
// and document, tells no secrets, and leaves the cause in the log.
func TestErrorsOfEveryOperation(t *testing.T) {
	for _, k := range []struct {
		err    error
		status int
		kind   string
	}{
		{scheduler.Errorf(scheduler.ErrInvalid, "that breaks a rule"), 422, "invalid"},
		{scheduler.Problems{{Pointer: "/state", Message: "must be done"}}, 422, "invalid"},
		{scheduler.Errorf(scheduler.ErrNotFound, "there is none"), 404, "not-found"},
		{scheduler.Errorf(scheduler.ErrConflict, "it is taken"), 409, "conflict"},
		{&store.StaleError{What: "plan 17", Current: 8}, 412, "stale"},
		{scheduler.Errorf(scheduler.ErrForbidden, "not for you"), 403, "not-allowed"},
		{scheduler.Errorf(scheduler.ErrTooMany, "slower"), 429, "too-many"},
		{scheduler.Errorf(scheduler.ErrUnavailable, "the database is away"), 503, "away"},
		{fmt.Errorf("query: %w", context.DeadlineExceeded), 503, "too-slow"},
		{errors.New("relation scan: password hunter2"), 500, "fault"},
	} {
		for _, x := range requests {
			s := serve(t)
			s.fail = k.err
			what := x.method + " " + x.path + ": " + k.kind
			w := s.do(x.method, x.path, x.body, ifMatch...)
			wantProblem(t, what, w, k.status, k.kind, "")
			if strings.Contains(w.Body.String(), "hunter2") || fmt.Sprint(s.log.Err()) != k.err.Error() || w.Header().Get("Cache-Control") != "no-store" || w.Header().Get("ETag") != "" {
				t.Errorf("%s: %s %v; the log has %v", what, w.Body, w.Header(), s.log.Err())
			}
			if p := problem(t, w); k.kind == "stale" && p.Current != 8 {
				t.Errorf("%s: the version now is %d, want 8", what, p.Current)
			}
			if k.status == 503 && w.Header().Get("Retry-After") == "" {
				t.Errorf("%s: no word on when to ask again", what)
			}
		}
	}
}

// A body that does not fit is refused with the place that is wrong, before
// anything is asked of the layers below.
func TestBodiesThatDoNotFit(t *testing.T) {
	const outcome, plan = "/scans/41/outcome", "/weeks/2027-W03/plan"
	for _, c := range []struct {
		path, body string
		status     int
		kind       string
		field      string
	}{
		{outcome, `{"state":"finished"}`, 422, "invalid", "/state"},
		{outcome, `{"state":7}`, 422, "invalid", "/state"},
		{outcome, `{"state":null}`, 422, "invalid", "/state"},
		{outcome, `{"state":["done"]}`, 422, "invalid", "/state"},
		{outcome, `{}`, 422, "invalid", ""},
		{outcome, `{"State":"done"}`, 422, "invalid", ""},
		{outcome, `{"state":"done","STATE":"finished"}`, 422, "invalid", "/STATE"},
		{outcome, `{"state":"done","weather":"fine"}`, 422, "invalid", "/weather"},
		{outcome, `{"state":"lost","cause":"aliens"}`, 422, "invalid", "/cause"},
		{outcome, `{"state":"done","snr":"412"}`, 422, "invalid", "/snr"},
		{outcome, `{"state":"done","snr":0}`, 422, "invalid", "/snr"},
		{outcome, `{"state":"done","toa_us":-1}`, 422, "invalid", "/toa_us"},
		{outcome, `{"state":"done","snr":1e13}`, 422, "invalid", "/snr"},
		{outcome, `{"state":"done","started_at":"yesterday"}`, 422, "invalid", "/started_at"},
		{outcome, `{"state":"done","started_at":1700000000}`, 422, "invalid", "/started_at"},
		{outcome, `{"state":"done","note":"` + strings.Repeat("x", 501) + `"}`, 422, "invalid", "/note"},
		{outcome, `["done"]`, 422, "invalid", ""},
		{outcome, `"done"`, 422, "invalid", ""},
		{outcome, `{"state":"done"`, 400, "malformed", ""},
		{outcome, `{"state":"done"} and more`, 400, "malformed", ""},
		{outcome, `state=done`, 400, "malformed", ""},
		{outcome, ``, 400, "malformed", ""},
		{plan, `{"seed":-1}`, 422, "invalid", "/seed"},
		{plan, `{"seed":9007199254740992}`, 422, "invalid", "/seed"},
		{plan, `{"seed":1.5}`, 422, "invalid", "/seed"},
		{plan, `{"seed":"7"}`, 422, "invalid", "/seed"},
		{plan, `{"speed":7}`, 422, "invalid", "/speed"},
	} {
		s := serve(t)
		w := s.do(http.MethodPost, c.path, c.body)
		wantProblem(t, c.path+" "+c.body, w, c.status, c.kind, c.field)
		if _, asked := s.asked["ReportOutcome"]; asked {
			t.Errorf("%s was reported", c.body)
		}
		if _, asked := s.asked["Planner"]; asked {
			t.Errorf("%s was planned", c.body)
		}
	}
	w := serve(t).do(http.MethodPost, outcome, `{"state":"finished","snr":-1,"weather":"fine"}`)
	if p := problem(t, w); len(p.Errors) != 3 {
		t.Errorf("three fields are wrong: %+v", p)
	}
	wantProblem(t, "plain text", serve(t).do(http.MethodPost, outcome, "done", "Content-Type", "text/plain"), 415, "media-type", "")
	wantProblem(t, "two megabytes", serve(t).do(http.MethodPost, outcome, `{"note":"`+strings.Repeat("x", 2<<20)+`"}`), 413, "too-large", "")
}

// Parameters out of range, of a wrong type or too long name themselves.
func TestParametersThatDoNotFit(t *testing.T) {
	lists := []string{"/telescopes", "/sources", "/telescopes/BRM/scans", "/weeks/2027-W03/plans", "/plans/17/scans", "/campaigns", "/journal"}
	for _, path := range lists {
		for _, limit := range []string{"0", "-1", "201", "many", "1.5", "99999999999999999999"} {
			wantProblem(t, path+" limit "+limit, serve(t).do("GET", path+"?limit="+limit, ""), 422, "invalid", "limit")
		}
		for _, cursor := range []string{"nonsense", "%25%25", strings.Repeat("A", 401), cursorOf("no such entry")} {
			if cursor == cursorOf("no such entry") && path == "/weeks/2027-W03/plans" { // whose order is known: nothing comes after
				continue
			}
			wantProblem(t, path+" cursor "+cursor, serve(t).do("GET", path+"?cursor="+cursor, ""), 422, "invalid", "cursor")
		}
		for _, limit := range []string{"1", "200"} {
			if w := serve(t).do("GET", path+"?limit="+limit, ""); w.Code != 200 {
				t.Errorf("%s limit %s: %d %s", path, limit, w.Code, w.Body)
			}
		}
	}
	for path, field := range map[string]string{
		"/scans/0": "id", "/scans/-1": "id", "/scans/x": "id", "/scans/9223372036854775808": "id", "/plans/0": "id", "/jobs/1e3": "id", "/campaigns/one/file": "id",
		"/weeks/2027-W3": "week", "/weeks/2027-03": "week", "/weeks/2027-W54": "week", "/weeks/0000-W00": "week", "/weeks/2027-W03%20/plans": "week",
		"/telescopes/" + strings.Repeat("T", 101): "code", "/sources/" + strings.Repeat("S", 201): "name", "/sources?due=perhaps": "due",
		"/telescopes/BRM/scans?from=2027-01-18": "from", "/telescopes/BRM/scans?to=tomorrow": "to", "/telescopes/BRM/run-sheets/the-night-of-the-18th": "night",
		"/telescopes/BRM/scans?from=1800-01-01T00:00:00Z": "from", "/telescopes/BRM/scans?from=2300-01-01T00:00:00Z": "from",
		"/telescopes/BRM/scans?from=2027-01-18T00:00:00Z&to=2027-01-18T00:00:00Z": "to",
		"/telescopes/BRM/scans?from=2027-01-18T00:00:00Z&to=2027-02-01T00:00:01Z": "to",
	} {
		wantProblem(t, path, serve(t).do("GET", path, ""), 422, "invalid", field)
	}
}
