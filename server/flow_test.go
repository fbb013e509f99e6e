package server

import (
	"encoding/csv"
	"net/http"
	"net/url"
	"strconv"
	"strings"
	"testing"
	"time"

	"cadencewright/scheduler"
	"cadencewright/scheduler/units"
	"cadencewright/server/auth"
)

func itoa(n int64) string { return strconv.FormatInt(n, 10) }

type apiScan struct {
	ID        int64     `json:"id"`
	Telescope string    `json:"telescope"`
	Source    string    `json:"source"`
	Receiver  string    `json:"receiver"`
	Start     time.Time `json:"start"`
	End       time.Time `json:"end"`
	State     string    `json:"state"`
	Earns     []struct {
		Goal, Unit string
		Value      float64
	} `json:"earns"`
}

// The whole week by its interfaces: plan, issue, run sheet, what is now, the
// outcome, and the source no longer due.
func TestWeekFromPlanToOutcome(t *testing.T) {
	w := newWorld(t)
	ada := w.as(auth.RoleCoordinator)
	week := scheduler.WeekName(monday)
	plan := w.plan(ada, week)

	var facts struct {
		Score, Bound, Possible float64
		State                  string
	}
	res := ada.get("/api/v1/plans/"+itoa(plan), &facts)
	if facts.State != "draft" || facts.Score <= 0 || facts.Score > facts.Bound || facts.Bound > facts.Possible {
		t.Errorf("the draft is %+v", facts)
	}
	tag := res.Header.Get("ETag")
	if res, _ := ada.do("POST", "/api/v1/plans/"+itoa(plan)+"/issue", nil); res.StatusCode != 428 {
		t.Errorf("issue without If-Match: %s, want 428", res.Status)
	}
	if res, b := ada.do("POST", "/api/v1/plans/"+itoa(plan)+"/issue", nil, "If-Match", `"99"`); res.StatusCode != 412 || !strings.Contains(string(b), `"current_version":1`) {
		t.Errorf("issue with a wrong version: %s %s, want 412 with the current version", res.Status, b)
	}
	if res, b := ada.do("POST", "/api/v1/plans/"+itoa(plan)+"/issue", nil, "If-Match", tag); res.StatusCode != 200 {
		t.Fatalf("issue: %s %s", res.Status, b)
	}

	script := w.as(auth.RoleKey)
	tel := w.telescopes()[0]
	scans := allOf[apiScan](script, "/api/v1/telescopes/"+tel+"/scans?limit=7&from="+url.QueryEscape(monday.Format(time.RFC3339))+"&to="+url.QueryEscape(monday.AddDate(0, 0, 7).Format(time.RFC3339)))
	x := firstThatMeetsACadence(t, scans)

	// At its start the script asks what to do, twice: the second time nothing
	// has changed.
	w.clock.set(x.Start.Add(time.Second))
	var now struct{ Now, Next *apiScan }
	res = script.get("/api/v1/telescopes/"+tel+"/now", &now)
	if now.Now == nil || now.Now.ID != x.ID {
		t.Fatalf("now is %+v, want scan %d", now.Now, x.ID)
	}
	if res, _ := script.do("GET", "/api/v1/telescopes/"+tel+"/now", nil, "If-None-Match", res.Header.Get("ETag")); res.StatusCode != http.StatusNotModified {
		t.Errorf("asked again: %s, want 304", res.Status)
	}

	if !dueNow(t, w, x.Source, x.Earns[0].Goal) {
		t.Fatalf("goal %s of %s is not due before its scan", x.Earns[0].Goal, x.Source)
	}
	for _, state := range []string{"observing", "done"} {
		for range 2 { // the line dropped: sent again
			res, b := script.do("POST", "/api/v1/scans/"+itoa(x.ID)+"/outcome", map[string]any{"state": state, "note": "clear sky"}, "Idempotency-Key", "r-"+state)
			if res.StatusCode != 200 {
				t.Fatalf("report %s: %s %s", state, res.Status, b)
			}
		}
	}
	if res, _ := script.do("POST", "/api/v1/scans/"+itoa(x.ID)+"/outcome", map[string]any{"state": "lost", "cause": "wind"}); res.StatusCode != 409 {
		t.Errorf("a scan that is done became lost: %s, want 409", res.Status)
	}
	if dueNow(t, w, x.Source, x.Earns[0].Goal) {
		t.Errorf("goal %s of %s is still due after its scan", x.Earns[0].Goal, x.Source)
	}
	now.Now = nil
	script.get("/api/v1/telescopes/"+tel+"/now", &now)
	if now.Now != nil && now.Now.ID == x.ID {
		t.Error("a scan that is done is still to be done now")
	}
	sheets(t, w, ada, tel, x)
}

// firstThatMeetsACadence is a scan that earns from a cadence target alone of
// its goal.
func firstThatMeetsACadence(t *testing.T, scans []apiScan) apiScan {
	t.Helper()
	for _, x := range scans {
		for _, e := range x.Earns {
			if strings.HasSuffix(e.Unit, "#1") && e.Value > 0 && strings.HasPrefix(e.Goal, "c") {
				x.Earns[0] = e
				return x
			}
		}
	}
	t.Fatalf("none of %d scans meets a cadence target", len(scans))
	return apiScan{}
}

// dueNow tells whether a goal has a unit due before the end of the week.
func dueNow(t *testing.T, w *world, source, goal string) bool {
	t.Helper()
	c, _, err := w.store.LoadCampaign(t.Context(), w.ref.ID)
	if err != nil {
		t.Fatal(err)
	}
	from := w.clock.now().Add(time.Minute)
	set, err := units.Build(c, scheduler.Horizon{From: from, To: from.AddDate(0, 0, 1)})
	if err != nil {
		t.Fatal(err)
	}
	return set.ByName(goal+"#1") >= 0
}

// sheets looks at the night's run sheet as a page, as CSV and as JSON.
func sheets(t *testing.T, w *world, ada *client, tel string, x apiScan) {
	t.Helper()
	c, _, err := w.store.LoadCampaign(t.Context(), w.ref.ID)
	if err != nil {
		t.Fatal(err)
	}
	zone, err := c.TelescopeByCode(tel).Location()
	if err != nil {
		t.Fatal(err)
	}
	found := false
	for _, d := range []int{-1, 0} {
		night := x.Start.In(zone).AddDate(0, 0, d).Format(time.DateOnly)
		res, page := ada.do("GET", "/telescopes/"+tel+"/nights/"+night, nil)
		if res.StatusCode != 200 {
			t.Fatalf("run sheet: %s", res.Status)
		}
		res, body := ada.do("GET", "/telescopes/"+tel+"/nights/"+night+".csv", nil)
		if res.StatusCode != 200 || !strings.HasPrefix(res.Header.Get("Content-Type"), "text/csv") {
			t.Fatalf("CSV: %s %s", res.Status, res.Header.Get("Content-Type"))
		}
		lines, err := csv.NewReader(strings.NewReader(string(body))).ReadAll()
		if err != nil {
			t.Fatal(err)
		}
		var sheet struct {
			Blocks []struct{ Scans []struct{ ID string } }
		}
		ada.get("/api/v1/telescopes/"+tel+"/run-sheets/"+night, &sheet)
		n := 0
		for _, b := range sheet.Blocks {
			for _, s := range b.Scans {
				n++
				if s.ID == itoa(x.ID) {
					found = true
					if !strings.Contains(string(page), x.Source) || !strings.Contains(string(page), "This sheet commands nothing") {
						t.Error("the page lacks the scan or the cautions")
					}
				}
			}
		}
		if len(lines) != n+1 {
			t.Errorf("%d lines of CSV for %d scans", len(lines), n)
		}
	}
	if !found {
		t.Errorf("scan %d stands on no run sheet", x.ID)
	}
}
