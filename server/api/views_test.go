package api

import (
	"encoding/json"
	"net/http"
	"strings"
	"testing"
	"time"

	"cadencewright/scheduler"
	"cadencewright/server/httperr"
	"cadencewright/server/store"
)

// A telescope is shown with all that a script or a page needs of it; a list of
// receivers is never null.
func TestTelescopeViews(t *testing.T) {
	s := serve(t)
	var one Telescope
	s.get("/telescopes/BRM", &one)
	if one.Code != "BRM" || one.Name != "Bramstead" || one.LatitudeDeg != 53 || one.Mount != "equatorial" || one.ElevationMaxDeg != 90 || len(one.Receivers) != 1 ||
		one.Receivers[0].Code != "L1" || one.Receivers[0].FreqMHz != 1400 || one.Receivers[0].BandwidthMHz != 300 || one.Receivers[0].Bands[0] != "L" {
		t.Errorf("%+v", one)
	}
	s.campaign.Telescopes[0].Receivers = nil
	if got := s.do("GET", "/telescopes", "").Body.String(); !strings.Contains(got, `"receivers":[]`) {
		t.Errorf("no receivers: %s", got)
	}
	wantProblem(t, "another telescope", s.do("GET", "/telescopes/ZZZ", ""), 404, "not-found", "")
}

// A night's sheet is asked for by telescope and date.
func TestRunSheetIsAskedFor(t *testing.T) {
	s := serve(t)
	if w := s.do("GET", "/telescopes/BRM/run-sheets/2027-01-18", ""); w.Code != 200 || !json.Valid(w.Body.Bytes()) || s.asked["Sheet"][0] != "BRM" || s.asked["Sheet"][1] != "2027-01-18" {
		t.Errorf("%d %s", w.Code, w.Body)
	}
	s.fails["Sheet"] = scheduler.Errorf(scheduler.ErrInvalid, "night %q: must be a date", "tonight")
	wantProblem(t, "tonight", s.do("GET", "/telescopes/BRM/run-sheets/tonight", ""), 422, "invalid", "")
}

// What was reported, what is not known yet, and when a scan ends.
func TestScanAndPlanViews(t *testing.T) {
	s := serve(t)
	x := &s.scans[0]
	snr := 40.5
	x.State, x.Outcome = store.ScanLost, &store.Outcome{State: store.ScanLost, Cause: "wind", SNR: &snr, ReportedBy: "Bo", ReportedAt: x.Start}
	x.Earns = []scheduler.Earning{{Goal: "c1", Unit: "c1#1", Value: 0.5}}
	var scan Scan
	s.get("/scans/41", &scan)
	if !scan.End.Equal(scan.Start.Add(30*time.Minute)) || scan.Outcome == nil || scan.Outcome.Cause != "wind" || *scan.Outcome.SNR != 40.5 || scan.Outcome.TOAUs != nil ||
		scan.MotorAzDeg != nil || len(scan.Earns) != 1 || scan.Earns[0].Unit != "c1#1" || scan.Plan != 17 || scan.Revision != 2 {
		t.Errorf("%+v", scan)
	}
	body := s.do("GET", "/plans/17", "").Body.String()
	for _, absent := range []string{"issued_at", "issued_by", "superseded"} { // a draft
		if strings.Contains(body, absent) {
			t.Errorf("%s in %s", absent, body)
		}
	}
	if body = s.do("GET", "/jobs/5", "").Body.String(); strings.Contains(body, "bound") || strings.Contains(body, `"plan"`) || strings.Contains(body, "problem") {
		t.Errorf("a job that has found nothing yet: %s", body)
	}
}

// Every kind of problem that an answer may name is listed, with what to do.
func TestProblemKinds(t *testing.T) {
	var page struct{ Items []ProblemKind }
	s := serve(t)
	s.get("/problems", &page)
	if len(page.Items) != len(httperr.Kinds()) {
		t.Errorf("%d kinds, want %d", len(page.Items), len(httperr.Kinds()))
	}
	seen := map[string]bool{}
	for _, k := range page.Items {
		if k.Name == "" || seen[k.Name] || k.Status < 400 || http.StatusText(k.Status) == "" || k.Title == "" || k.Advice == "" {
			t.Errorf("%+v", k)
		}
		seen[k.Name] = true
	}
	if len(s.asked) > 0 {
		t.Errorf("the list asks the database: %v", s.asked)
	}
}
