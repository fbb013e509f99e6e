package api

import (
	"encoding/json"
	"fmt"
	"slices"
	"strings"
	"testing"
	"time"

	"cadencewright/scheduler"
	"cadencewright/server/store"
)

// A list that holds nothing is an empty one, not null.
func TestEmptyLists(t *testing.T) {
	for _, path := range []string{"/telescopes", "/sources", "/telescopes/BRM/scans", "/weeks/2027-W03/plans", "/journal"} {
		s := serve(t)
		s.scans, s.plans, s.entries = nil, nil, nil
		if path != "/telescopes/BRM/scans" {
			s.campaign = &scheduler.Campaign{Name: "Empty", Start: monday, End: monday.AddDate(0, 1, 0), GridMin: 5}
		}
		if w := s.do("GET", path, ""); w.Code != 200 || strings.TrimSpace(w.Body.String()) != `{"items":[]}` {
			t.Errorf("%s: %d %s", path, w.Code, w.Body)
		}
	}
}

// What is due, by hand: two goals every seven days; one source was observed
// nine days ago, the other five days, and a scan that did not count is none.
func TestWhatIsDue(t *testing.T) {
	s := serve(t)
	s.at = monday.Add(20*time.Hour + 300*time.Microsecond)
	had := func(source int, daysAgo float64, counted bool) {
		s.campaign.History = append(s.campaign.History, scheduler.HistoryScan{Source: s.campaign.Sources[source].Name, Telescope: "BRM", Receiver: "L1",
			Start: monday.Add(20*time.Hour - time.Duration(daysAgo*24*float64(time.Hour))), Minutes: 30, Counted: counted})
	}
	had(0, 9, true)
	had(0, 20, true)
	had(0, 1, false)
	had(1, 5, true)
	var page struct{ Items []Source }
	s.get("/sources", &page)
	if len(page.Items) != 2 {
		t.Fatalf("%d sources", len(page.Items))
	}
	for i, want := range []struct {
		last, due float64 // days from now
		dueNow    bool
	}{{-9, 0, true}, {-5, 2, false}} {
		x := page.Items[i]
		at := func(days float64) time.Time {
			return monday.Add(20*time.Hour + time.Duration(days*24*float64(time.Hour)))
		}
		if x.LastScan == nil || !x.LastScan.Equal(at(want.last)) || x.DueNow != want.dueNow || len(x.Goals) != 1 || x.OrbitD != 0 {
			t.Errorf("source %+v", x)
			continue
		}
		if g := x.Goals[0]; g.Due == nil || !g.Due.Equal(at(want.due)) || g.DueNow != want.dueNow || g.Kind != "cadence" || g.EveryD != 7 || g.Priority != 2 || !slices.Equal(g.Bands, []string{"L"}) {
			t.Errorf("goal %+v", g)
		}
	}
	var due struct{ Items []Source }
	if s.get("/sources?due=true", &due); len(due.Items) != 1 || due.Items[0].Name != "SIM J0412+1833" {
		t.Errorf("due: %+v", due.Items)
	}
	var one Source
	if s.get("/sources/SIM%20J0601%2B3011", &one); one.Name != "SIM J0601+3011" {
		t.Errorf("one source: %+v", one)
	}
	wantProblem(t, "another source", s.do("GET", "/sources/nobody", ""), 404, "not-found", "")
}

// A goal of orbital phase is due at the passages that still count, and now
// while one is going on; a goal that is due in more than a week has no instant.
func TestPhaseGoalsThatAreDue(t *testing.T) {
	s := serve(t)
	s.campaign.CadenceTargets[0].EveryD = 30
	s.campaign.History = []scheduler.HistoryScan{{Source: "SIM J0412+1833", Telescope: "BRM", Receiver: "L1", Start: s.at.AddDate(0, 0, -10), Minutes: 30, Counted: true}}
	s.campaign.Sources[1].Binary = &scheduler.Binary{Model: scheduler.BinaryKepler, PbD: 4, A1Ls: 1, T0MJD: 61423} // 2027-01-18
	s.campaign.CadenceTargets = s.campaign.CadenceTargets[:1]
	for _, c := range []struct {
		from, to float64
		days     float64 // from monday to the passage
		dueNow   bool
	}{{0.1, 0.4, 0.4, true}, {0.5, 0.6, 2, false}, {0.9, 1.1, 3.6, false}} { // now is 0.83 d, phase 0.21
		s.campaign.PhaseGoals = []scheduler.PhaseGoal{{Goal: scheduler.Goal{ID: "p", Source: "SIM J0601+3011", Bands: []string{"L"}, Priority: 1}, Reference: scheduler.RefPeriastron,
			DwellMin: 20, PerHorizon: 1, Windows: []scheduler.PhaseWindow{{From: c.from, To: c.to, Need: 3}}}}
		var page struct{ Items []Source }
		s.get("/sources", &page)
		if g := page.Items[0].Goals[0]; g.Due != nil || g.DueNow || page.Items[0].DueNow {
			t.Errorf("due in twenty days: %+v", g)
		}
		x := page.Items[1]
		if g := x.Goals[0]; x.OrbitD != 4 || g.Kind != "phase" || g.EveryD != 0 || g.Due == nil || g.DueNow != c.dueNow || x.DueNow != c.dueNow ||
			g.Due.Sub(monday.Add(time.Duration(c.days*24*float64(time.Hour)))).Abs() > 10*time.Minute { // light takes eight minutes
			t.Errorf("phase %g to %g: %+v", c.from, c.to, g)
		}
	}
}

// A week at a glance shows the issued plan and the newest draft, wherever they
// stand among its plans.
func TestWeekShowsTheNewest(t *testing.T) {
	s := serve(t)
	p := s.plans[0]
	plan := func(id int64, state string) store.PlanInfo { p.ID, p.State = id, state; return p }
	s.plans = []store.PlanInfo{plan(21, store.PlanDraft), plan(20, store.PlanSuperseded), plan(19, store.PlanDraft), plan(18, store.PlanIssued), plan(17, store.PlanSuperseded)}
	var w Week
	s.get("/weeks/2027-W03", &w)
	if w.Week != "2027-W03" || !w.From.Equal(monday) || !w.To.Equal(monday.AddDate(0, 0, 7)) || w.Draft == nil || w.Draft.ID != 21 || w.Issued == nil || w.Issued.ID != 18 ||
		w.Job == nil || w.Job.ID != 5 {
		t.Errorf("%+v", w)
	}
	if asked := s.asked["PlansOf"]; asked[0] != int64(1) || asked[2] != maxPlans {
		t.Errorf("asked for %v", asked)
	}
	s.plans, s.job = nil, nil
	if got := s.do("GET", "/weeks/2027-W03", "").Body.String(); strings.Contains(got, "issued") || strings.Contains(got, "draft") || strings.Contains(got, "job") {
		t.Errorf("an empty week: %s", got)
	}
}

// Plans come in pages that stay in step while plans are added in front and
// taken away.
func TestPlansInPages(t *testing.T) {
	s := serve(t)
	p := s.plans[0]
	s.plans = nil
	for id := int64(9); id > 0; id-- {
		p.ID = id
		s.plans = append(s.plans, p)
	}
	var got []int64
	next := ""
	for range 9 {
		var page struct {
			Items []Plan
			Next  string
		}
		s.get("/weeks/2027-W03/plans?limit=2&cursor="+next, &page)
		for _, x := range page.Items {
			got = append(got, x.ID)
		}
		if next = page.Next; next == "" {
			break
		}
		p.ID = 100 + int64(len(got))
		s.plans = append([]store.PlanInfo{p}, s.plans...)                                                    // a new one
		s.plans = slices.DeleteFunc(s.plans, func(x store.PlanInfo) bool { return x.ID == got[len(got)-1] }) // and the last one that was shown is gone
	}
	if fmt.Sprint(got) != "[9 8 7 6 5 4 3 2 1]" {
		t.Errorf("plans %v", got)
	}
}

// The journal is read backwards, one line more than is shown each time.
func TestJournalPages(t *testing.T) {
	s := serve(t)
	var page struct {
		Items []Entry
		Next  string
	}
	s.get("/journal?limit=2", &page)
	if len(page.Items) != 2 || page.Items[0].ID != 9 || page.Next != cursorOf("7") {
		t.Fatalf("%+v", page)
	}
	if asked := s.asked["Journal"]; asked[1] != int64(0) || asked[2] != 3 {
		t.Errorf("asked for %v", asked)
	}
	s.entries = s.entries[2:]
	page.Next = ""
	s.get("/journal?limit=2&cursor="+cursorOf("7"), &page)
	if len(page.Items) != 1 || page.Items[0].ID != 3 || page.Next != "" || s.asked["Journal"][1] != int64(7) {
		t.Errorf("%+v, asked for %v", page, s.asked["Journal"])
	}
	for _, key := range []string{"0", "-3", "x", "9223372036854775808", "7 "} {
		wantProblem(t, "after "+key, s.do("GET", "/journal?cursor="+cursorOf(key), ""), 422, "invalid", "cursor")
	}
	s.entries[0].Before, s.entries[0].After = json.RawMessage(`{"state":"planned"}`), json.RawMessage(`{"state":"done"}`)
	if got := s.do("GET", "/journal", "").Body.String(); !strings.Contains(got, `"before":{"state":"planned"},"after":{"state":"done"}`) {
		t.Errorf("%s", got)
	}
}

// Files come as attachments under names that tell them apart, and can be read
// back.
func TestFiles(t *testing.T) {
	s := serve(t)
	w := s.do("GET", "/campaigns/1/file", "")
	if w.Header().Get("Content-Disposition") != `attachment; filename="campaign-1.json"` {
		t.Errorf("%v", w.Header())
	}
	if c, err := scheduler.ReadCampaign(w.Body.Bytes()); err != nil || !c.Equal(s.campaign) {
		t.Errorf("the campaign's file: %v", err)
	}
	w = s.do("GET", "/plans/17/file", "")
	if w.Header().Get("Content-Disposition") != `attachment; filename="plan-2027-W03-17.json"` {
		t.Errorf("%v", w.Header())
	}
	if p, err := scheduler.ReadPlan(w.Body.Bytes()); err != nil || p.Score != 3 || p.Campaign != "Array" {
		t.Errorf("the plan's file: %v", err)
	}
}

// Planning a week hands down the campaign, the week, the seed and who asked; a
// body is not needed.
func TestAskingForAPlan(t *testing.T) {
	for body, seed := range map[string]int64{"": 0, "{}": 0, `{"seed":9007199254740991}`: 9007199254740991} {
		s := serve(t)
		w := s.do("POST", "/weeks/2027-W03/plan", body)
		if w.Code != 202 || !strings.Contains(w.Body.String(), `"state":"running"`) {
			t.Errorf("%q: %d %s", body, w.Code, w.Body)
			continue
		}
		if asked := s.asked["Planner"]; asked[0] != int64(1) || asked[1] != (scheduler.Horizon{From: monday, To: monday.AddDate(0, 0, 7)}) || asked[2] != seed || asked[3] != "Ada" {
			t.Errorf("%q: asked for %v", body, asked)
		}
	}
}
