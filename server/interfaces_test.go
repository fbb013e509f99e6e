package server

import (
	"encoding/json"
	"net/http/httptest"
	"net/url"
	"slices"
	"strings"
	"testing"
	"time"

	"cadencewright/scheduler"
	"cadencewright/server/api"
	"cadencewright/server/auth"
	"cadencewright/server/httperr"
)

// issued is a world whose week has an issued plan.
func issued(t *testing.T) (*world, *client, []apiScan) {
	t.Helper()
	w := newWorld(t)
	ada := w.as(auth.RoleCoordinator)
	plan := w.plan(ada, "2027-W03")
	if res, b := ada.do("POST", "/api/v1/plans/"+itoa(plan)+"/issue", nil, "If-Match", "*"); res.StatusCode != 200 {
		t.Fatalf("issue: %s %s", res.Status, b)
	}
	return w, ada, allOf[apiScan](ada, "/api/v1/plans/"+itoa(plan)+"/scans?limit=50")
}

// problemOf reads a problem document.
func problemOf(t *testing.T, b []byte) httperr.Problem {
	t.Helper()
	var p httperr.Problem
	if err := json.Unmarshal(b, &p); err != nil {
		t.Fatalf("%v: %s", err, b)
	}
	return p
}

func TestTelescopesAndSources(t *testing.T) {
	w := newWorld(t)
	c := w.as(auth.RoleReader)
	campaign, _, err := w.store.LoadCampaign(t.Context(), w.ref.ID)
	if err != nil {
		t.Fatal(err)
	}
	telescopes := allOf[api.Telescope](c, "/api/v1/telescopes?limit=2")
	if len(telescopes) != len(campaign.Telescopes) {
		t.Fatalf("%d telescopes, want %d", len(telescopes), len(campaign.Telescopes))
	}
	for i, x := range campaign.Telescopes {
		var one api.Telescope
		c.get("/api/v1/telescopes/"+x.Code, &one)
		if telescopes[i].Code != x.Code || one.LatitudeDeg != x.LatitudeDeg || len(one.Receivers) != len(x.Receivers) || one.Mount != string(x.Mount) {
			t.Errorf("telescope %s: %+v", x.Code, one)
		}
	}
	all := allOf[api.Source](c, "/api/v1/sources?limit=20")
	due := allOf[api.Source](c, "/api/v1/sources?limit=20&due=true")
	if len(all) != len(campaign.Sources) || len(due) == 0 || len(due) >= len(all) {
		t.Fatalf("%d sources, %d due; want %d, some", len(all), len(due), len(campaign.Sources))
	}
	goals := 0
	for i, s := range all {
		goals += len(s.Goals)
		isDue := slices.ContainsFunc(s.Goals, func(g api.GoalState) bool { return g.DueNow })
		if s.Name != campaign.Sources[i].Name || s.DueNow != isDue || isDue != slices.ContainsFunc(due, func(d api.Source) bool { return d.Name == s.Name }) {
			t.Errorf("source %s: due %v", s.Name, s.DueNow)
		}
	}
	want := 0
	campaign.EachGoal(func(scheduler.GoalKind, int, *scheduler.Goal) { want++ })
	if goals != want {
		t.Errorf("%d goals, want %d", goals, want)
	}
	var one api.Source
	c.get("/api/v1/sources/"+url.PathEscape(all[3].Name), &one)
	if one.Name != all[3].Name || len(one.Goals) != len(all[3].Goals) {
		t.Errorf("source %s: %+v", all[3].Name, one)
	}
	c.get("/api/v1/sources/"+strings.NewReplacer(" ", "%20", "+", "%2B").Replace(all[3].Name), &one) // as some clients escape it
}

func TestWeekAtAGlance(t *testing.T) {
	w := newWorld(t)
	ada := w.as(auth.RoleCoordinator)
	var week api.Week
	ada.get("/api/v1/weeks/2027-W03", &week)
	if week.Issued != nil || week.Draft != nil || week.Job != nil || !week.From.Equal(monday) || !week.To.Equal(monday.AddDate(0, 0, 7)) {
		t.Errorf("an empty week is %+v", week)
	}
	first := w.plan(ada, "2027-W03")
	second := w.plan(ada, "2027-W03")
	if res, b := ada.do("POST", "/api/v1/plans/"+itoa(first)+"/issue", nil, "If-Match", "*"); res.StatusCode != 200 {
		t.Fatalf("issue: %s %s", res.Status, b)
	}
	week = api.Week{}
	ada.get("/api/v1/weeks/2027-W03", &week)
	if week.Issued == nil || week.Issued.ID != first || week.Issued.Revision != 1 || week.Draft == nil || week.Draft.ID != second || week.Job == nil || week.Job.Plan != second {
		t.Errorf("the week is %+v", week)
	}
	plans := allOf[api.Plan](ada, "/api/v1/weeks/2027-W03/plans?limit=1")
	if len(plans) != 2 || plans[0].ID != second || plans[1].ID != first {
		t.Errorf("the plans are %+v", plans)
	}
	// A job that has ended is not stopped, and that is no fault.
	res, b := ada.do("POST", "/api/v1/jobs/"+itoa(week.Job.ID)+"/stop", nil)
	if res.StatusCode != 200 || !strings.Contains(string(b), `"state":"done"`) {
		t.Errorf("stop: %s %s", res.Status, b)
	}
	res, b = ada.do("GET", "/api/v1/plans/"+itoa(first)+"/file", nil)
	if p, err := scheduler.ReadPlan(b); err != nil || len(p.Scans) == 0 || !strings.Contains(res.Header.Get("Content-Disposition"), "plan-2027-W03-") {
		t.Errorf("the plan's file: %v, %v", err, res.Header)
	}
	res, _ = ada.do("GET", "/api/v1/plans/"+itoa(second), nil)
	if again, _ := ada.do("GET", "/api/v1/plans/"+itoa(second), nil, "If-None-Match", res.Header.Get("ETag")); again.StatusCode != 304 {
		t.Errorf("a plan that has not changed: %s", again.Status)
	}
}

// What a campaign's file says is what was imported, and a plan asked for with
// no body is one.
func TestCampaignFile(t *testing.T) {
	w := newWorld(t)
	ada := w.as(auth.RoleCoordinator)
	list := allOf[api.Campaign](ada, "/api/v1/campaigns?limit=1")
	if len(list) != 1 || !list[0].Live {
		t.Fatalf("campaigns %+v", list)
	}
	_, b := ada.do("GET", "/api/v1/campaigns/"+itoa(list[0].ID)+"/file", nil)
	got, err := scheduler.ReadCampaign(b)
	if err != nil {
		t.Fatal(err)
	}
	want, _, err := w.store.LoadCampaign(t.Context(), w.ref.ID)
	if err != nil || !got.Equal(want) {
		t.Errorf("the file is another campaign (%v)", err)
	}
	res, b := ada.do("POST", "/api/v1/weeks/2027-W03/plan", nil)
	if res.StatusCode != 202 {
		t.Errorf("plan without a body: %s %s", res.Status, b)
	}
	res, b = ada.do("POST", "/api/v1/weeks/2027-W03/plan", nil)
	if res.StatusCode != 409 {
		t.Errorf("a second job: %s %s", res.Status, b)
	}
}

// A key reaches its own telescope; an observer reports where they are named.
func TestScope(t *testing.T) {
	w, _, scans := issued(t)
	own := w.telescopes()[0]
	var mine, other apiScan
	for _, x := range scans {
		if x.Telescope == own {
			mine = x
		} else {
			other = x
		}
	}
	if mine.ID == 0 || other.ID == 0 {
		t.Fatal("the plan uses one telescope only")
	}
	w.clock.set(mine.Start.Add(time.Minute))
	key, observer := w.as(auth.RoleKey), w.as(auth.RoleObserver)
	for _, c := range []struct {
		who          *client
		method, path string
		body         any
		want         int
	}{
		{key, "GET", "/api/v1/telescopes/" + own, nil, 200}, {key, "GET", "/api/v1/telescopes/" + other.Telescope, nil, 403},
		{key, "GET", "/api/v1/telescopes/" + own + "/now", nil, 200}, {key, "GET", "/api/v1/telescopes/" + other.Telescope + "/now", nil, 403},
		{key, "GET", "/api/v1/telescopes/" + other.Telescope + "/scans", nil, 403}, {key, "GET", "/api/v1/telescopes/" + other.Telescope + "/run-sheets/2027-01-18", nil, 403},
		{key, "GET", "/api/v1/scans/" + itoa(mine.ID), nil, 200}, {key, "GET", "/api/v1/scans/" + itoa(other.ID), nil, 403},
		{key, "GET", "/api/v1/telescopes", nil, 403}, {key, "GET", "/telescopes/" + own, nil, 403},
		{observer, "GET", "/api/v1/scans/" + itoa(other.ID), nil, 200}, {observer, "GET", "/api/v1/telescopes/" + other.Telescope + "/now", nil, 200},
		{observer, "POST", "/api/v1/scans/" + itoa(other.ID) + "/outcome", `{"state":"lost","cause":"wind"}`, 403},
		{observer, "POST", "/api/v1/scans/" + itoa(mine.ID) + "/outcome", `{"state":"observing"}`, 200},
		{key, "POST", "/api/v1/scans/" + itoa(mine.ID) + "/outcome", `{"state":"done"}`, 200},
		{key, "POST", "/api/v1/scans/" + itoa(other.ID) + "/outcome", `{"state":"lost","cause":"wind"}`, 403},
	} {
		if res, b := c.who.do(c.method, c.path, c.body); res.StatusCode != c.want {
			t.Errorf("%s %s: %s %s, want %d", c.method, c.path, res.Status, b, c.want)
		}
	}
}

// The same report sent again counts once; another under its key is refused.
func TestIdempotency(t *testing.T) {
	w, _, scans := issued(t)
	own := w.telescopes()[0]
	scans = slices.DeleteFunc(scans, func(x apiScan) bool { return x.Telescope != own })
	script := w.as(auth.RoleKey)
	w.clock.set(scans[0].Start.Add(time.Minute))
	send := func(scan int64, body, key string) (int, []byte) {
		res, b := script.do("POST", "/api/v1/scans/"+itoa(scan)+"/outcome", body, "Idempotency-Key", key)
		return res.StatusCode, b
	}
	status, first := send(scans[0].ID, `{"state":"observing"}`, "k")
	if status != 200 {
		t.Fatalf("%d %s", status, first)
	}
	if status, b := send(scans[0].ID, `{"state":"observing"}`, "k"); status != 200 || string(b) != string(first) {
		t.Errorf("again: %d %s\nwant %s", status, b, first)
	}
	if status, b := send(scans[0].ID, `{"state":"done"}`, "k"); status != 422 || !strings.Contains(string(b), "Idempotency-Key") {
		t.Errorf("another body: %d %s", status, b)
	}
	if status, b := send(scans[1].ID, `{"state":"observing"}`, "k"); status != 422 {
		t.Errorf("another scan: %d %s", status, b)
	}
	if status, b := send(scans[0].ID, `{"state":"observing"}`, "k2"); status != 409 {
		t.Errorf("the same report under another key: %d %s", status, b)
	}
	if status, b := send(scans[0].ID, `{"state":"done"}`, "k3"); status != 200 {
		t.Errorf("done: %d %s", status, b)
	}
	if status, b := send(scans[0].ID, `{"state":"observing"}`, "k"); status != 200 || string(b) != string(first) {
		t.Errorf("the first report, long after: %d %s\nwant %s", status, b, first)
	}
}

// Each bad request gets its status, the kind of its problem and the field.
func TestBadRequests(t *testing.T) {
	w := newWorld(t)
	c := w.as(auth.RoleCoordinator)
	code := w.telescopes()[0]
	for _, x := range []struct {
		method, path string
		status       int
		kind, field  string
	}{
		{"GET", "/telescopes?limit=0", 422, "invalid", "limit"}, {"GET", "/telescopes?limit=many", 422, "invalid", "limit"},
		{"GET", "/sources?cursor=nonsense", 422, "invalid", "cursor"}, {"GET", "/sources/nobody", 404, "not-found", ""},
		{"GET", "/telescopes/NONE", 404, "not-found", ""}, {"GET", "/telescopes/NONE/now", 404, "not-found", ""}, {"GET", "/telescopes/NONE/scans", 404, "not-found", ""},
		{"GET", "/telescopes/" + code + "/scans?from=yesterday", 422, "invalid", "from"},
		{"GET", "/telescopes/" + code + "/scans?from=2027-01-18T00:00:00Z&to=2027-01-17T00:00:00Z", 422, "invalid", "to"},
		{"GET", "/telescopes/" + code + "/scans?from=2027-01-18T00:00:00Z&to=2027-03-17T00:00:00Z", 422, "invalid", "to"},
		{"GET", "/telescopes/" + code + "/run-sheets/tonight", 422, "invalid", ""},
		{"GET", "/weeks/2027-W54", 422, "invalid", "week"}, {"GET", "/weeks/nextweek", 422, "invalid", "week"}, {"POST", "/weeks/2027-W60/plan", 422, "invalid", "week"},
		{"GET", "/scans/0", 422, "invalid", "id"}, {"GET", "/scans/x", 422, "invalid", "id"}, {"GET", "/scans/999999", 404, "not-found", ""},
		{"GET", "/plans/999999", 404, "not-found", ""}, {"POST", "/plans/999999/issue", 428, "no-version", ""}, {"GET", "/jobs/999999", 404, "not-found", ""},
		{"POST", "/jobs/999999/stop", 404, "not-found", ""}, {"GET", "/campaigns/999999/file", 404, "not-found", ""}, {"DELETE", "/plans/1", 405, "method", ""},
		{"POST", "/weeks/2031-W20/plan", 0, "", ""}, // beyond the campaign: a job that fails with its reason, or a refusal
	} {
		res, b := c.do(x.method, api.Prefix+x.path, nil)
		if x.status == 0 {
			if res.StatusCode >= 500 {
				t.Errorf("%s %s: %s %s", x.method, x.path, res.Status, b)
			}
			continue
		}
		p := problemOf(t, b)
		if res.StatusCode != x.status || !strings.HasSuffix(p.Type, "#"+x.kind) || p.Instance != res.Header.Get("X-Request-Id") || p.Detail == "" {
			t.Errorf("%s %s: %s %s, want %d %s", x.method, x.path, res.Status, b, x.status, x.kind)
		}
		if x.field != "" && (len(p.Errors) == 0 || p.Errors[0].Pointer != x.field) {
			t.Errorf("%s %s: %v, want a word on %s", x.method, x.path, p.Errors, x.field)
		}
	}
	res, _ := c.do("POST", "/api/v1/scans/1/outcome", `{"state":"done"}`, "Content-Type", "text/plain")
	if res.StatusCode != 415 {
		t.Errorf("a body of plain text: %s, want 415", res.Status)
	}
	res, _ = c.do("POST", "/api/v1/scans/1/outcome", `{"state":"done","note":"`+strings.Repeat("x", 1<<20)+`"}`)
	if res.StatusCode != 413 {
		t.Errorf("a body of a megabyte: %s, want 413", res.Status)
	}
}

func TestJournalInPages(t *testing.T) {
	w, ada, _ := issued(t)
	lines := allOf[api.Entry](ada, "/api/v1/journal?limit=2")
	if len(lines) < 4 {
		t.Fatalf("%d lines", len(lines))
	}
	for i := 1; i < len(lines); i++ {
		if lines[i].ID >= lines[i-1].ID {
			t.Errorf("line %d stands before %d", lines[i-1].ID, lines[i].ID)
		}
	}
	if lines[0].Action != "issue" || !strings.HasPrefix(lines[0].Actor, "coordinator") {
		t.Errorf("the newest line is %+v", lines[0])
	}
	if res, b := w.as(auth.RoleReader).do("GET", "/api/v1/journal?cursor="+url.QueryEscape("YWZ0ZXIgeA"), nil); res.StatusCode != 422 { // "after x"
		t.Errorf("a cursor that is no id: %s %s", res.Status, b)
	}
}

// Metrics name routes, never what stands in a path, and known methods only.
func TestMetrics(t *testing.T) {
	w := newWorld(t)
	m := NewMetrics(w.store)
	w.srv.metrics = m
	c := w.as(auth.RoleReader)
	c.do("GET", "/api/v1/sources/SECRETNAME", nil)
	c.do("GET", "/nowhere/SECRETNAME", nil)
	c.do("BREWSECRETNAME", "/api/v1/sources", nil)
	rec := httptest.NewRecorder()
	m.Handler().ServeHTTP(rec, httptest.NewRequest("GET", "/metrics", nil))
	body := rec.Body.String()
	for _, want := range []string{`cadencewright_request_seconds_count{method="GET",route="/api/v1/sources/{name}",status="404"} 1`, `route="none",status="404"`, `method="other"`,
		"cadencewright_db_connections ", "go_goroutines "} {
		if !strings.Contains(body, want) {
			t.Errorf("%s is missing", want)
		}
	}
	if strings.Contains(body, "SECRETNAME") {
		t.Error("metrics name what stands in a path")
	}
	rec = httptest.NewRecorder()
	m.Handler().ServeHTTP(rec, httptest.NewRequest("GET", "/debug/pprof/", nil))
	if rec.Code != 200 {
		t.Errorf("profiles: %d", rec.Code)
	}
	if res, _ := c.do("GET", "/metrics", nil); res.StatusCode != 404 {
		t.Errorf("metrics are served to everybody: %s", res.Status)
	}
}
