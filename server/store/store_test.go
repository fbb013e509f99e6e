package store_test

import (
	"context"
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
