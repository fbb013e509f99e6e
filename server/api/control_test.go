package api

import (
	"fmt"
	"net/http"
	"strings"
	"testing"
	"time"

	"cadencewright/scheduler"
	"cadencewright/server/auth"
	"cadencewright/server/store"
)

// A script that asks again and again is told 304 until either scan, its place
// or its version is another; the clock alone does not change the answer.
func TestNowIsAskedAgain(t *testing.T) {
	s := serve(t)
	one, two := s.scans[0], s.scans[1]
	s.now, s.next = &one, &two
	ask := func(tag string) (int, string) {
		t.Helper()
		w := s.do("GET", "/telescopes/BRM/now", "", "If-None-Match", tag)
		if w.Code == http.StatusNotModified && w.Body.Len() > 0 {
			t.Errorf("304 with a body: %s", w.Body)
		}
		if w.Header().Get("Cache-Control") != "private, no-cache" {
			t.Errorf("kept as %q", w.Header().Get("Cache-Control"))
		}
		return w.Code, w.Header().Get("ETag")
	}
	status, tag := ask("")
	if status != 200 || !strings.HasPrefix(tag, `"`) {
		t.Fatalf("%d %s", status, tag)
	}
	s.at = s.at.Add(time.Second)
	for _, header := range []string{tag, "W/" + tag, `"other", ` + tag, "*"} {
		if status, again := ask(header); status != 304 || again != tag {
			t.Errorf("If-None-Match %s: %d %s, want 304 %s", header, status, again, tag)
		}
	}
	seen := map[string]string{tag: "both"}
	for _, c := range []struct {
		name      string
		now, next *store.StoredScan
	}{{"begun", changed(one, store.ScanObserving), &two}, {"the next is dropped", &one, changed(two, store.ScanDropped)}, {"one has become the next", nil, &one}, {"only now", &one, nil},
		{"another next", &one, &s.scans[2]}, {"neither", nil, nil}} {
		s.now, s.next = c.now, c.next
		status, now := ask(tag)
		if status != 200 || seen[now] != "" {
			t.Errorf("%s: %d, tag %s is that of %q", c.name, status, now, seen[now])
		}
		seen[now] = c.name
	}
}

// changed is a scan in another state, and so in another version.
func changed(x store.StoredScan, state string) *store.StoredScan {
	x.State = state
	x.Version++
	return &x
}

// What is said of now comes with the service's clock, to the millisecond, and
// the revision of the plan that it is part of.
func TestWhatNowSays(t *testing.T) {
	s := serve(t)
	s.at = monday.Add(20*time.Hour + 123456789*time.Nanosecond)
	one, two := s.scans[0], s.scans[1]
	two.Revision = 3
	for _, c := range []struct {
		now, next *store.StoredScan
		revision  int
	}{{&one, &two, 2}, {nil, &two, 3}, {nil, nil, 0}} {
		s.now, s.next = c.now, c.next
		var got NowAnswer
		s.get("/telescopes/BRM/now", &got)
		if got.PlanRevision != c.revision || (got.Now != nil) != (c.now != nil) || (got.Next != nil) != (c.next != nil) || got.Telescope != "BRM" ||
			!got.ServerTime.Equal(monday.Add(20*time.Hour+123*time.Millisecond)) {
			t.Errorf("%+v", got)
		}
	}
	if at := s.asked["NowNext"][1].(time.Time); !at.Equal(s.at) {
		t.Errorf("asked for %s", at)
	}
	s.now, s.next = nil, nil
	wantProblem(t, "another telescope", s.do("GET", "/telescopes/ZZZ/now", ""), 404, "not-found", "")
}

// A plan that has not changed is not sent again; a change needs the version
// that it is of.
func TestVersionsOfPlans(t *testing.T) {
	s := serve(t)
	w := s.do("GET", "/plans/17", "")
	tag := w.Header().Get("ETag")
	if w.Code != 200 || tag != `"4"` {
		t.Fatalf("%d %s", w.Code, tag)
	}
	if w := s.do("GET", "/plans/17", "", "If-None-Match", tag); w.Code != 304 || w.Body.Len() != 0 || w.Header().Get("ETag") != tag {
		t.Errorf("not changed: %d %s", w.Code, w.Body)
	}
	if w := s.do("GET", "/plans/17", "", "If-None-Match", `"3"`); w.Code != 200 {
		t.Errorf("changed: %d", w.Code)
	}
	wantProblem(t, "no version", s.do("POST", "/plans/17/issue", ""), 428, "no-version", "")
	for _, old := range []string{`"3"`, `W/"5"`, `"x"`, `"0"`, `"-4"`, "nonsense"} {
		w := s.do("POST", "/plans/17/issue", "", "If-Match", old)
		wantProblem(t, "If-Match "+old, w, 412, "stale", "")
		if p := problem(t, w); p.Current != 4 {
			t.Errorf("If-Match %s: the version now is %d, want 4", old, p.Current)
		}
	}
	for _, good := range []string{tag, "W/" + tag, `"x", ` + tag, "*"} {
		w := s.do("POST", "/plans/17/issue", "", "If-Match", good)
		if w.Code != 200 || w.Header().Get("ETag") != `"5"` || !strings.Contains(w.Body.String(), `"state":"issued"`) {
			t.Errorf("If-Match %s: %d %s", good, w.Code, w.Body)
		}
	}
	if actor := s.asked["Issue"][2]; actor != "Ada" {
		t.Errorf("issued by %v", actor)
	}
}

// Who may report what: a coordinator everything, an observer and a key what is
// their telescope's, a reader nothing. A key's telescope goes down with the
// report, to be checked where the scan is locked.
func TestWhoMayReport(t *testing.T) {
	key := auth.Identity{Name: "control", Role: auth.RoleKey, Telescopes: []string{"BRM"}}
	for _, c := range []struct {
		who    auth.Identity
		scan   int64
		status int
		actor  string
		only   string
	}{
		{auth.Identity{Name: "Ada", Role: auth.RoleCoordinator}, 41, 200, "Ada", ""},
		{auth.Identity{Name: "Ada", Role: auth.RoleCoordinator}, 43, 200, "Ada", ""},
		{auth.Identity{Name: "Bo", Role: auth.RoleObserver, Telescopes: []string{"BRM"}}, 41, 200, "Bo", ""},
		{auth.Identity{Name: "Bo", Role: auth.RoleObserver, Telescopes: []string{"BRM"}}, 43, 403, "", ""},
		{auth.Identity{Name: "Bo", Role: auth.RoleObserver}, 41, 403, "", ""},
		{auth.Identity{Name: "Cy", Role: auth.RoleReader}, 41, 403, "", ""},
		{auth.Identity{}, 41, 403, "", ""},
		{key, 41, 200, "key control", "BRM"},
		{auth.Identity{Name: "Ada", Role: auth.RoleCoordinator}, 99, 404, "", ""},
	} {
		s := serve(t)
		s.who = c.who
		w := s.do("POST", fmt.Sprintf("/scans/%d/outcome", c.scan), `{"state":"done"}`)
		if w.Code != c.status {
			t.Errorf("%+v, scan %d: %d %s, want %d", c.who, c.scan, w.Code, w.Body, c.status)
			continue
		}
		asked, reported := s.asked["ReportOutcome"]
		if reported != (c.status == 200) {
			t.Errorf("%+v, scan %d: reported %t", c.who, c.scan, reported)
		}
		if reported && (asked[1] != c.actor || asked[2] != c.only) {
			t.Errorf("%+v: reported by %v for %q alone", c.who, asked[1], asked[2])
		}
	}
	s := serve(t)
	s.who = key
	if w := s.do("GET", "/scans/41", ""); w.Code != 200 {
		t.Errorf("a key's own scan: %d", w.Code)
	}
	wantProblem(t, "a key at another's scan", s.do("GET", "/scans/43", ""), 403, "not-allowed", "")
}

// A report goes down whole, and its key stands for the scan and the body
// together.
func TestWhatIsReported(t *testing.T) {
	s := serve(t)
	body := `{"state":"partial","cause":"wind","started_at":"2027-01-18T20:01:00Z","ended_at":"2027-01-18T20:21:00Z","snr":41.5,"toa_us":0.9,"note":"gusts"}`
	if w := s.do("POST", "/scans/41/outcome", body, "Idempotency-Key", "k1"); w.Code != 200 || !strings.Contains(w.Body.String(), `"state":"partial"`) {
		t.Fatalf("%d %s", w.Code, w.Body)
	}
	r, idem := s.asked["ReportOutcome"][0].(store.Report), s.asked["ReportOutcome"][3].(store.Idempotency)
	if r.State != "partial" || r.Cause != "wind" || !r.StartedAt.Equal(monday.Add(20*time.Hour+time.Minute)) || !r.EndedAt.Equal(monday.Add(20*time.Hour+21*time.Minute)) ||
		*r.SNR != 41.5 || *r.TOAUs != 0.9 || r.Note != "gusts" {
		t.Errorf("reported %+v", r)
	}
	if idem.Key != "k1" || string(idem.Body) != "41\n"+body {
		t.Errorf("key %q for %q", idem.Key, idem.Body)
	}
	s.do("POST", "/scans/42/outcome", `{"state":"done"}`)
	r, idem = s.asked["ReportOutcome"][0].(store.Report), s.asked["ReportOutcome"][3].(store.Idempotency)
	if r.StartedAt != nil || r.SNR != nil || idem.Key != "" || !strings.HasPrefix(string(idem.Body), "42\n") {
		t.Errorf("reported %+v, key %+v", r, idem)
	}
	wantProblem(t, "a long key", s.do("POST", "/scans/42/outcome", `{"state":"done"}`, "Idempotency-Key", strings.Repeat("k", 201)), 422, "invalid", "Idempotency-Key")
}

// Scans of a stretch of time: a day from now where nothing is said, a fortnight
// at most, in UTC whatever the zone of who asks.
func TestStretchOfScans(t *testing.T) {
	for query, want := range map[string][2]time.Time{
		"":                           {monday.Add(20 * time.Hour), monday.Add(44 * time.Hour)},
		"?from=2027-01-19T00:00:00Z": {monday.AddDate(0, 0, 1), monday.AddDate(0, 0, 2)},
		"?to=2027-01-19T00:00:00Z":   {monday.Add(20 * time.Hour), monday.AddDate(0, 0, 1)},
		"?from=2027-01-18T02:00:00%2B02:00&to=2027-02-01T00:00:00Z": {monday, monday.AddDate(0, 0, 14)},
	} {
		s := serve(t)
		if w := s.do("GET", "/telescopes/BRM/scans"+query, ""); w.Code != 200 {
			t.Errorf("%s: %d %s", query, w.Code, w.Body)
			continue
		}
		asked := s.asked["LiveScans"]
		if from, to := asked[1].(time.Time), asked[2].(time.Time); !from.Equal(want[0]) || !to.Equal(want[1]) || from.Location() != time.UTC {
			t.Errorf("%s: asked from %s to %s, want %s to %s", query, from, to, want[0], want[1])
		}
	}
	wantProblem(t, "another telescope", serve(t).do("GET", "/telescopes/ZZZ/scans", ""), 404, "not-found", "")
}

// A job that ended by itself before it could be stopped is no fault of who
// asked; one that was never there is.
func TestStoppingJobs(t *testing.T) {
	s := serve(t)
	s.job.State = store.JobDone
	if w := s.do("POST", "/jobs/5/stop", ""); w.Code != 200 || s.asked["StopJob"] != nil {
		t.Errorf("a job that is done: %d, asked to stop %v", w.Code, s.asked["StopJob"])
	}
	s.job.State = store.JobRunning
	s.fails["StopJob"] = scheduler.Errorf(scheduler.ErrNotFound, "not under way")
	if w := s.do("POST", "/jobs/5/stop", ""); w.Code != 200 || s.asked["StopJob"][1] != "Ada" {
		t.Errorf("a job that ended meanwhile: %d %s", w.Code, w.Body)
	}
	s.fails["StopJob"] = scheduler.Errorf(scheduler.ErrUnavailable, "away")
	wantProblem(t, "away", s.do("POST", "/jobs/5/stop", ""), 503, "away", "")
	s.fails["Job"] = scheduler.Errorf(scheduler.ErrNotFound, "there is no planning job 6")
	wantProblem(t, "no job", s.do("POST", "/jobs/6/stop", ""), 404, "not-found", "")
}
