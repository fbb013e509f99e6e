package store_test

import (
	"context"
	"errors"
	"math"
	"reflect"
	"strings"
	"testing"
	"time"

	"pgregory.net/rapid"

	"cadencewright/scheduler"
	"cadencewright/server/store"
)

// anyPlan is a plan of the small campaign with any numbers in it.
func anyPlan(t *rapid.T) *scheduler.Plan {
	p := planOf("Array")
	p.Score, p.Possible, p.Bound = number(t, 0, 1e6), number(t, 0, 1e6), number(t, 0, 1e6)
	p.Certificate = scheduler.Certificate{Prices: map[string]float64{}, Bound: p.Bound}
	for i := range rapid.IntRange(0, 8).Draw(t, "scans") {
		x := scan([]string{"a1", "a2", "b1"}[i%3], 5*rapid.IntRange(0, 100).Draw(t, "start"), 1+i%3, rapid.IntRange(1, 20160).Draw(t, "minutes"))
		x.Pinned, x.TOAUs, x.Earns = rapid.Bool().Draw(t, "pinned"), number(t, 0, 1e9), nil
		if rapid.Bool().Draw(t, "altaz") {
			az := number(t, -720, 720)
			x.MotorAzDeg = &az
		}
		for range rapid.IntRange(0, 3).Draw(t, "earns") {
			x.Earns = append(x.Earns, scheduler.Earning{Goal: anyName(t), Unit: anyName(t), Value: number(t, 0, 1e6)})
		}
		p.Scans = append(p.Scans, x)
	}
	for range rapid.IntRange(0, 3).Draw(t, "unmet") {
		u := scheduler.Unmet{Goal: anyName(t), Unit: anyName(t), Weight: positive(t, 1e6)}
		for range rapid.IntRange(0, 3).Draw(t, "reasons") {
			u.Reasons = append(u.Reasons, scheduler.Reason{Code: scheduler.ReasonCode(anyName(t)), Text: anyName(t), Count: rapid.IntRange(0, 1e6).Draw(t, "count")})
		}
		p.Unmet = append(p.Unmet, u)
		p.Certificate.Prices[u.Unit] = number(t, 0, 1e6)
	}
	return p
}

// Any plan comes back as it was, its scans in the same order.
func TestAnyPlanComesBack(t *testing.T) {
	t.Parallel()
	w := newWorld(t)
	rapid.Check(t, func(rt *rapid.T) {
		p := anyPlan(rt)
		meta := store.PlanMeta{CampaignRevision: 1, Seed: rapid.Int64().Draw(rt, "seed"), Effort: rapid.Int64().Draw(rt, "effort"), Status: anyName(rt)}
		id, err := w.SavePlan(context.Background(), w.id, p, meta, "ada")
		if err != nil {
			rt.Fatal(err)
		}
		info, back, scans, err := w.Plan(context.Background(), id)
		if err != nil {
			rt.Fatal(err)
		}
		if !reflect.DeepEqual(back.Clone(), p.Clone()) {
			rt.Fatalf("%+v came back as %+v", p, back)
		}
		want := store.PlanInfo{ID: id, CampaignID: w.id, From: p.From, To: p.To, State: store.PlanDraft, Version: 1, CampaignRevision: 1, Score: p.Score,
			Possible: p.Possible, Bound: p.Bound, Status: meta.Status, Seed: meta.Seed, Effort: meta.Effort, MadeAt: w.clock.now(), MadeBy: "ada"}
		if info != want || len(scans) != len(p.Scans) {
			rt.Fatalf("its facts are %+v, want %+v", info, want)
		}
		if facts, err := w.PlanFacts(context.Background(), id); err != nil || facts != want {
			rt.Fatalf("its facts alone are %+v, %v", facts, err)
		}
		for i := range scans {
			if scans[i].State != store.ScanPlanned || scans[i].Live || scans[i].PlanID != id || scans[i].Outcome != nil {
				rt.Fatalf("scan %+v of a draft", scans[i])
			}
		}
	})
}

// A plan that does not fit the campaign is refused with the place of the fault,
// and nothing of it is stored.
func TestPlanOfAnotherCampaign(t *testing.T) {
	t.Parallel()
	w := newWorld(t)
	fine := scan("a1", 30, 1)
	for _, x := range []struct {
		name, field string
		change      func(*scheduler.Plan)
	}{
		{"another campaign's", "campaign", func(p *scheduler.Plan) { p.Campaign = "Other" }},
		{"ends before it begins", "to", func(p *scheduler.Plan) { p.To = p.From }},
		{"block", "scans/1/block", func(p *scheduler.Plan) { p.Scans[1].Block = "a9" }},
		{"block of another telescope", "scans/1/telescope", func(p *scheduler.Plan) { p.Scans[1].Telescope = "BBB" }},
		{"source", "scans/1/source", func(p *scheduler.Plan) { p.Scans[1].Source = "SIM J0900+2000" }},
		{"receiver", "scans/1/receiver", func(p *scheduler.Plan) { p.Scans[1].Receiver = "X9" }},
	} {
		p := planOf("Array", fine, fine)
		x.change(p)
		_, err := w.SavePlan(t.Context(), w.id, p, store.PlanMeta{}, "ada")
		wantField(t, x.name, err, scheduler.ErrInvalid, x.field)
	}
	for name, change := range map[string]func(*scheduler.Plan){
		"a score that is no number":   func(p *scheduler.Plan) { p.Score = math.NaN() },
		"an infinite bound":           func(p *scheduler.Plan) { p.Bound = math.Inf(1) },
		"a scan of no time":           func(p *scheduler.Plan) { p.Scans[0].Minutes = 0 },
		"a negative TOA uncertainty":  func(p *scheduler.Plan) { p.Scans[0].TOAUs = -1 },
		"an earning that is infinite": func(p *scheduler.Plan) { p.Scans[0].Earns[0].Value = math.Inf(1) },
	} {
		p := planOf("Array", scan("a1", 30, 1))
		change(p)
		if id, err := w.SavePlan(t.Context(), w.id, p, store.PlanMeta{}, "ada"); err == nil {
			t.Errorf("%s: stored as plan %d", name, id)
		}
	}
	if _, err := w.SavePlan(t.Context(), 4711, planOf("Array"), store.PlanMeta{}, "ada"); !errors.Is(err, scheduler.ErrNotFound) {
		t.Errorf("a campaign that is not there: %v", err)
	}
	if n := w.number("select (select count(*) from plan) + (select count(*) from scan) + (select count(*) from journal where action = 'draft')"); n != 0 {
		t.Errorf("%d rows of refused plans are stored", n)
	}
}

func TestPlansOfAWeek(t *testing.T) {
	t.Parallel()
	w := newWorld(t)
	for range 3 {
		w.draft(scan("a1", 30, 1))
	}
	next := planOf("Array")
	next.From, next.To = week.To, week.To.Add(scheduler.Week)
	other, err := w.SavePlan(t.Context(), w.id, next, store.PlanMeta{}, "ada")
	if err != nil {
		t.Fatal(err)
	}
	for limit, want := range map[int]int{0: 1, 2: 2, 10: 3, 100000: 3} {
		list, err := w.PlansOf(t.Context(), w.id, week, limit)
		if err != nil || len(list) != want {
			t.Errorf("limit %d: %d plans, want %d (%v)", limit, len(list), want, err)
		}
		for i := range list {
			if list[i].ID == other || i > 0 && list[i].ID >= list[i-1].ID {
				t.Errorf("limit %d: plan %d at place %d", limit, list[i].ID, i)
			}
		}
	}
	if list, err := w.PlansOf(t.Context(), 4711, week, 10); err != nil || len(list) != 0 {
		t.Errorf("plans of a campaign that is not there: %v, %v", list, err)
	}
	for what, f := range map[string]func() error{
		"facts": func() error { _, err := w.PlanFacts(t.Context(), 4711); return err },
		"plan":  func() error { _, _, _, err := w.Plan(t.Context(), 4711); return err },
		"issue": func() error { _, err := w.Issue(t.Context(), 4711, 1, "ada"); return err },
	} {
		if err := f(); !errors.Is(err, scheduler.ErrNotFound) || !strings.Contains(err.Error(), "plan 4711") {
			t.Errorf("%s of a plan that is not there: %v", what, err)
		}
	}
}

// A plan keeps the ephemeris that was in force when its campaign was read.
func TestPlanKeepsItsEphemeris(t *testing.T) {
	t.Parallel()
	w := newWorld(t)
	w.exec(`insert into ephemeris (source_id, number, revision, ra_deg, dec_deg, pos_epoch_mjd, pm_ra_mas_yr, pm_dec_mas_yr, created_at, created_by)
		select id, 2, 5, 16, 21, 51544.5, 0, 0, now(), 'ada' from source where name = 'SIM J0100+2000'`)
	w.exec("update campaign set revision = 5")
	for revision, want := range map[int64]int{1: 1, 4: 1, 5: 2, 9: 2, 0: 2} {
		id, err := w.SavePlan(t.Context(), w.id, planOf("Array", scan("a1", 30, 1)), store.PlanMeta{CampaignRevision: revision}, "ada")
		if err != nil {
			t.Fatal(err)
		}
		if got := w.number("select e.number from scan s join ephemeris e on e.id = s.ephemeris_id where s.plan_id = $1", id); got != want {
			t.Errorf("made at revision %d: ephemeris %d, want %d", revision, got, want)
		}
	}
	c, _, err := w.LoadCampaign(t.Context(), w.id)
	if err != nil || c.Sources[0].RADeg != 16 {
		t.Errorf("the campaign has the place of ephemeris 1: %g, %v", c.Sources[0].RADeg, err)
	}
}

// A plan and the end of its job are one change.
func TestPlanEndsItsJob(t *testing.T) {
	t.Parallel()
	w := newWorld(t)
	ctx := t.Context()
	job, err := w.AddJob(ctx, w.id, week, 7, "ada", notQueued)
	if err != nil {
		t.Fatal(err)
	}
	p := planOf("Array", scan("a1", 30, 1))
	id, err := w.SavePlan(ctx, w.id, p, store.PlanMeta{Job: job.ID}, "ada")
	if err != nil {
		t.Fatal(err)
	}
	done, err := w.Job(ctx, job.ID)
	if err != nil || done.State != store.JobDone || done.PlanID != id || done.Score != p.Score || done.Bound == nil || *done.Bound != p.Bound {
		t.Errorf("the job is %+v, %v", done, err)
	}
	// A worker that was taken for dead comes late with its plan.
	_, err = w.SavePlan(ctx, w.id, p, store.PlanMeta{Job: job.ID}, "ada")
	if !errors.Is(err, scheduler.ErrConflict) || !strings.Contains(err.Error(), "done") {
		t.Errorf("a plan for a job that has ended: %v", err)
	}
	if _, err = w.SavePlan(ctx, w.id, p, store.PlanMeta{Job: 4711}, "ada"); !errors.Is(err, scheduler.ErrNotFound) {
		t.Errorf("a plan for a job that is not there: %v", err)
	}
	if list, err := w.PlansOf(ctx, w.id, week, 10); err != nil || len(list) != 1 {
		t.Errorf("%d plans are stored (%v), want 1", len(list), err)
	}
}

// Every instant comes back in UTC, whatever the machine's zone.
func TestInstantsAreUTC(t *testing.T) {
	t.Parallel()
	w := newWorld(t)
	plan := w.issue(scan("a1", 30, 1))
	w.clock.set(monday.Add(time.Hour).In(time.FixedZone("", 7200)))
	x := w.must(w.scans(plan)[0].ID, store.ScanPartial)
	info, err := w.PlanFacts(t.Context(), plan)
	if err != nil {
		t.Fatal(err)
	}
	c, ref, err := w.LoadCampaign(t.Context(), w.id)
	if err != nil {
		t.Fatal(err)
	}
	for name, at := range map[string]time.Time{"scan": x.Start, "report": x.Outcome.ReportedAt, "end": *x.Outcome.EndedAt, "issue": info.IssuedAt,
		"horizon": info.From, "campaign": ref.Start, "block": c.Blocks[0].Start, "history": c.History[0].Start} {
		if at.Location() != time.UTC {
			t.Errorf("%s: %v is in %v", name, at, at.Location())
		}
	}
}
