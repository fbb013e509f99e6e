package store_test

import (
	"context"
	"errors"
	"sync"
	"testing"
	"time"

	"cadencewright/scheduler"
	"cadencewright/scheduler/feasible"
	"cadencewright/scheduler/solve"
	"cadencewright/server/store"
	"cadencewright/server/store/storetest"
)

func TestMain(m *testing.M) {
	store.SetDSN(storetest.DSN, storetest.SchemaDSN)
	storetest.Run(m)
}

// planned is a store with small-1 live, and two plans of it as drafts.
func planned(t testing.TB, clock func() time.Time) (*store.Store, *scheduler.Campaign, []store.PlanInfo) {
	t.Helper()
	s := storetest.Open(t, clock)
	ctx := context.Background()
	c := campaign(t, "small-1")
	id, err := s.ImportCampaign(ctx, c, "tester")
	if err != nil {
		t.Fatal(err)
	}
	h := scheduler.Horizon{From: c.Start, To: c.End}
	p, err := feasible.Build(c, h)
	if err != nil {
		t.Fatal(err)
	}
	for seed := range uint64(2) {
		r, err := solve.Solve(p, solve.Options{Seed: seed, Effort: 50})
		if err != nil {
			t.Fatal(err)
		}
		r.Plan.Unmet = append(r.Plan.Unmet, scheduler.Unmet{Goal: "c001", Unit: "c001#1", Weight: 1, Reasons: []scheduler.Reason{{Code: "x", Text: "because", Count: 3}}})
		if _, err := s.SavePlan(ctx, id, r.Plan, store.PlanMeta{CampaignRevision: 1, Seed: int64(seed)}, "tester"); err != nil {
			t.Fatal(err)
		}
	}
	list, err := s.PlansOf(ctx, id, h, 10)
	if err != nil || len(list) != 2 {
		t.Fatalf("%d plans, %v", len(list), err)
	}
	return s, c, list
}

func TestPlanComesBack(t *testing.T) {
	s, c, plans := planned(t, nil)
	info, p, scans, err := s.Plan(t.Context(), plans[0].ID)
	if err != nil {
		t.Fatal(err)
	}
	if info.State != store.PlanDraft || p.Campaign != c.Name || len(scans) == 0 || len(p.Certificate.Prices) == 0 {
		t.Errorf("plan %+v of %q with %d scans", info, p.Campaign, len(scans))
	}
	total := 0.0
	for _, x := range scans {
		for _, e := range x.Earns {
			total += e.Value
		}
		if x.State != store.ScanPlanned || x.Live {
			t.Errorf("scan %d is %s, live %v", x.ID, x.State, x.Live)
		}
	}
	if d := total - p.Score; d > 1e-6 || d < -1e-6 {
		t.Errorf("the scans earn %g, the plan's score is %g", total, p.Score)
	}
	if last := p.Unmet[len(p.Unmet)-1]; last.Reasons[0].Text != "because" || last.Reasons[0].Count != 3 {
		t.Errorf("the reasons came back as %+v", last)
	}
}

func TestIssueSupersedes(t *testing.T) {
	now := time.Date(2027, 2, 20, 12, 0, 0, 0, time.UTC)
	s, c, plans := planned(t, func() time.Time { return now })
	ctx := t.Context()
	first, err := s.Issue(ctx, plans[0].ID, plans[0].Version, "ada")
	if err != nil {
		t.Fatal(err)
	}
	if first.Revision != 1 || first.State != store.PlanIssued {
		t.Errorf("issued %+v", first)
	}
	if _, err := s.Issue(ctx, plans[0].ID, plans[0].Version, "ada"); !errors.Is(err, scheduler.ErrStale) {
		t.Errorf("issuing with the old version: %v", err)
	}
	if _, err := s.Issue(ctx, plans[0].ID, first.Version, "ada"); !errors.Is(err, scheduler.ErrConflict) {
		t.Errorf("issuing an issued plan: %v", err)
	}
	before, err := s.LiveScans(ctx, "", c.Start, c.End)
	if err != nil || len(before) == 0 {
		t.Fatalf("%d live scans, %v", len(before), err)
	}
	// In the middle of the week, with the first scan done, the second plan.
	now = before[3].Start.Add(time.Minute)
	if _, err := s.ReportOutcome(ctx, before[0].ID, store.Report{State: store.ScanDone}, "key", before[0].Telescope, store.Idempotency{}); err != nil {
		t.Fatal(err)
	}
	if _, err := s.Issue(ctx, plans[1].ID, plans[1].Version, "bo"); !errors.Is(err, scheduler.ErrStale) {
		t.Errorf("issuing over a plan that was not seen: %v", err)
	}
	second, err := s.Issue(ctx, plans[1].ID, plans[1].Version+1, "ada")
	if err != nil {
		t.Fatal(err)
	}
	if second.Revision != 2 {
		t.Errorf("revision %d, want 2", second.Revision)
	}
	old, _, scans, err := s.Plan(ctx, plans[0].ID)
	if err != nil {
		t.Fatal(err)
	}
	if old.State != store.PlanSuperseded || old.SupersededBy != 2 || !old.SupersededAt.Equal(now) {
		t.Errorf("the plan before is %+v", old)
	}
	for _, x := range scans {
		begun := !x.Start.After(now)
		if begun && !x.Live && x.CarriedTo == 0 {
			t.Errorf("scan at %s has begun and is neither live nor carried over", x.Start)
		}
		if !begun && x.Live {
			t.Errorf("scan at %s of the old plan is live", x.Start)
		}
	}
}

// Of many who issue at once, one wins each revision and no scans overlap.
func TestConcurrentIssue(t *testing.T) {
	s, _, plans := planned(t, nil)
	var wg sync.WaitGroup
	var mu sync.Mutex
	won := 0
	for i := range 12 {
		wg.Go(func() {
			p := plans[i%2]
			_, err := s.Issue(context.Background(), p.ID, p.Version, "somebody")
			switch {
			case err == nil:
				mu.Lock()
				won++
				mu.Unlock()
			case scheduler.KindOf(err) == nil:
				t.Errorf("an error of no kind: %v", err)
			}
		})
	}
	wg.Wait()
	if won == 0 || won > 2 {
		t.Errorf("%d of two drafts were issued", won)
	}
}

func TestReports(t *testing.T) {
	now := time.Date(2027, 2, 20, 12, 0, 0, 0, time.UTC)
	s, c, plans := planned(t, func() time.Time { return now })
	ctx := t.Context()
	if _, err := s.Issue(ctx, plans[0].ID, plans[0].Version, "ada"); err != nil {
		t.Fatal(err)
	}
	scans, err := s.LiveScans(ctx, "BRM", c.Start, c.End)
	if err != nil || len(scans) < 4 {
		t.Fatalf("%d scans, %v", len(scans), err)
	}
	now = scans[0].Start.Add(time.Minute)
	at, following, err := s.NowNext(ctx, "BRM", now)
	if err != nil || at == nil || at.ID != scans[0].ID || following == nil || following.ID != scans[1].ID {
		t.Fatalf("now %v, next %v, %v", at, following, err)
	}
	id := scans[0].ID
	steps := []struct {
		name  string
		r     store.Report
		tel   string
		key   string
		kind  error
		state string
	}{
		{"another telescope", store.Report{State: store.ScanDone}, "KAV", "", scheduler.ErrForbidden, store.ScanPlanned},
		{"no such state", store.Report{State: "finished"}, "BRM", "", scheduler.ErrInvalid, store.ScanPlanned},
		{"lost without a cause", store.Report{State: store.ScanLost}, "BRM", "", scheduler.ErrInvalid, store.ScanPlanned},
		{"begun", store.Report{State: store.ScanObserving}, "BRM", "k1", nil, store.ScanObserving},
		{"begun, sent twice", store.Report{State: store.ScanObserving}, "BRM", "k1", nil, store.ScanObserving},
		{"the key with another body", store.Report{State: store.ScanDone}, "BRM", "k1", scheduler.ErrInvalid, store.ScanObserving},
		{"begun again", store.Report{State: store.ScanObserving}, "BRM", "k2", scheduler.ErrConflict, store.ScanObserving},
		{"done", store.Report{State: store.ScanDone, Note: "fine"}, "BRM", "k3", nil, store.ScanDone},
		{"lost after all", store.Report{State: store.ScanLost, Cause: "wind"}, "BRM", "k4", scheduler.ErrConflict, store.ScanDone},
	}
	for _, st := range steps {
		_, err := s.ReportOutcome(ctx, id, st.r, "key", st.tel, store.Idempotency{Key: st.key, Body: []byte(st.r.State)})
		if !errors.Is(err, st.kind) {
			t.Errorf("%s: %v, want %v", st.name, err, st.kind)
		}
		got, err := s.Scan(ctx, id)
		if err != nil || got.State != st.state {
			t.Errorf("%s: the scan is %s (%v), want %s", st.name, got.State, err, st.state)
		}
	}
	back, _, err := s.LoadCampaign(ctx, plans[0].CampaignID)
	if err != nil {
		t.Fatal(err)
	}
	if len(back.History) != len(c.History)+1 {
		t.Errorf("the history grew by %d, want 1", len(back.History)-len(c.History))
	}
	lines, err := s.Journal(ctx, plans[0].CampaignID, 0, 10)
	if err != nil || len(lines) < 3 || lines[0].Action != "report" {
		t.Errorf("journal %+v, %v", lines, err)
	}
}
