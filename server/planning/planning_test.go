package planning

import (
	"bytes"
	"context"
	"errors"
	"math/rand/v2"
	"strings"
	"testing"
	"time"

	"cadencewright/scheduler"
	"cadencewright/scheduler/solve"
	"cadencewright/scheduler/verify"
	"cadencewright/server/store"
)

// endless is more effort than any test waits for.
const endless = 1 << 40

// A job becomes a draft that holds every rule, with a reason for each unit that
// it leaves unmet, and with what it was made from.
func TestAJobBecomesADraft(t *testing.T) {
	f := newFake(t, "small-1")
	if err := f.run(t, 50); err != nil {
		t.Fatal(err)
	}
	if f.saved == nil || f.ended != "" || f.actor != "Ada" {
		t.Fatalf("saved %v for %q, ended %q", f.saved != nil, f.actor, f.ended)
	}
	if f.meta.CampaignRevision != 12 || f.meta.Seed != 7 || f.meta.Job != 5 || f.meta.Effort < 50 || f.meta.Status != string(solve.EffortSpent) && f.meta.Status != string(solve.Proven) {
		t.Errorf("made from %+v", f.meta)
	}
	report, err := verify.Check(f.campaign, f.saved, verify.Options{})
	if err != nil || !report.OK() {
		t.Errorf("re-check: %v, %+v", err, report)
	}
	for _, u := range f.saved.Unmet {
		if len(u.Reasons) == 0 {
			t.Errorf("unit %s is unmet for no reason", u.Unit)
		}
	}
	if len(f.told) == 0 || f.told[0] != (noted{of: 50}) {
		t.Errorf("told %+v; want the first before any work, with no bound yet", f.told)
	}
}

// However the rows come out of the database, the same seed gives the same plan.
func TestTheOrderOfRowsDoesNotMatter(t *testing.T) {
	f := newFake(t, "small-2")
	if err := f.run(t, 20); err != nil {
		t.Fatal(err)
	}
	want := written(t, f.saved)
	g := newFake(t, "small-2")
	r := rand.New(rand.NewPCG(1, 2))
	c := g.campaign
	r.Shuffle(len(c.Sources), func(i, j int) { c.Sources[i], c.Sources[j] = c.Sources[j], c.Sources[i] })
	r.Shuffle(len(c.Blocks), func(i, j int) { c.Blocks[i], c.Blocks[j] = c.Blocks[j], c.Blocks[i] })
	r.Shuffle(len(c.History), func(i, j int) { c.History[i], c.History[j] = c.History[j], c.History[i] })
	r.Shuffle(len(c.CadenceTargets), func(i, j int) { c.CadenceTargets[i], c.CadenceTargets[j] = c.CadenceTargets[j], c.CadenceTargets[i] })
	if err := g.run(t, 20); err != nil {
		t.Fatal(err)
	}
	if !bytes.Equal(written(t, g.saved), want) {
		t.Error("another order of rows made another plan")
	}
}

// A job that is gone or has ended is not carried out again.
func TestEndedJobsAreLeftAlone(t *testing.T) {
	for _, state := range []string{store.JobDone, store.JobFailed, store.JobCancelled, "gone"} {
		f := newFake(t, "small-1")
		f.job.State = state
		if state == "gone" {
			f.fails["Job"] = scheduler.Errorf(scheduler.ErrNotFound, "there is no planning job 5")
		}
		if err := f.run(t, 10); err != nil || f.loaded > 0 || len(f.told) > 0 || !f.untouched() {
			t.Errorf("%s: %v; loaded %d times, told %d times", state, err, f.loaded, len(f.told))
		}
	}
}

// What the database cannot do is worth another try: the job is neither ended
// nor given a plan.
func TestTroubleWithTheDatabaseIsReturned(t *testing.T) {
	for _, method := range []string{"Job", "LoadCampaign", "JobProgress", "SavePlan"} {
		f := newFake(t, "small-1")
		away := scheduler.Errorf(scheduler.ErrUnavailable, "the database is away")
		f.fails[method] = away
		if err := f.run(t, 10); !errors.Is(err, away) || !f.untouched() {
			t.Errorf("%s: %v, saved %t, ended %q", method, err, f.saved != nil, f.ended)
		}
	}
}

// A job that was stopped while it was queued ends as cancelled, without a look
// at the sky.
func TestStoppedBeforeTheSearch(t *testing.T) {
	f := newFake(t, "large-1")
	f.progress = func(int) bool { return true }
	if err := f.run(t, endless); err != nil {
		t.Fatal(err)
	}
	if f.ended != store.JobCancelled || f.saved != nil || !strings.Contains(f.reason, "before the search began") {
		t.Errorf("ended %q: %s", f.ended, f.reason)
	}
	f.fails["EndJob"] = scheduler.Errorf(scheduler.ErrUnavailable, "away")
	f.job.State = store.JobRunning
	if err := f.run(t, endless); !errors.Is(err, scheduler.ErrUnavailable) {
		t.Errorf("cancelling while the database is away: %v", err)
	}
}

// A job stopped in its search keeps the best plan so far, and has told of its
// progress: effort and score never fall, and the bound never rises.
func TestStoppedInTheSearch(t *testing.T) {
	f := newFake(t, "medium-1")
	f.progress = func(n int) bool { return n > 1 && f.told[n-1].score > 0 && f.told[n-1].bound > 0 }
	if err := f.run(t, endless); err != nil {
		t.Fatal(err)
	}
	if f.saved == nil || f.meta.Status != string(solve.Stopped) || f.ended != "" || len(f.saved.Scans) == 0 {
		t.Fatalf("saved %t, %+v, ended %q", f.saved != nil, f.meta, f.ended)
	}
	for i, q := range f.told {
		if q.of != endless || i > 0 && (q.effort < f.told[i-1].effort || q.score < f.told[i-1].score-1e-9) ||
			q.bound != 0 && i > 0 && f.told[i-1].bound != 0 && q.bound > f.told[i-1].bound+1e-9 || q.bound != 0 && q.bound < q.score-1e-6 {
			t.Errorf("told %+v", f.told)
			break
		}
	}
}

// A program that goes down leaves the job for another one.
func TestAProgramThatGoesDown(t *testing.T) {
	for _, at := range []int{1, 2} { // before the sky is read, and in the search
		f := newFake(t, "small-1")
		ctx, cancel := context.WithTimeout(t.Context(), time.Minute)
		f.progress = func(n int) bool {
			if n == at {
				cancel()
			}
			return false
		}
		err := (&Planner{Store: f, Effort: endless, Workers: 1}).Run(ctx, 5)
		if !errors.Is(err, context.Canceled) || !f.untouched() || f.job.State != store.JobRunning {
			t.Errorf("gone down at %d: %v; saved %t, ended %q", at, err, f.saved != nil, f.ended)
		}
		cancel()
	}
}

// A week without blocks cannot be planned: the reason is the asker's to mend.
func TestAWeekWithoutBlocks(t *testing.T) {
	f := newFake(t, "small-1")
	f.job.From, f.job.To = f.campaign.End.AddDate(0, 1, 0), f.campaign.End.AddDate(0, 1, 7)
	if err := f.run(t, 10); scheduler.KindOf(err) != scheduler.ErrInvalid || !strings.Contains(err.Error(), "no block starts in this week") || !f.untouched() {
		t.Errorf("%v", err)
	}
}

// No plan that breaks a rule gets past the re-check.
func TestRecheckRefuses(t *testing.T) {
	f := newFake(t, "small-1")
	if err := f.run(t, 20); err != nil {
		t.Fatal(err)
	}
	p, planner := f.saved, &Planner{Workers: 2}
	if err := planner.recheck(t.Context(), f.campaign, p); err != nil {
		t.Fatal(err)
	}
	for name, spoil := range map[string]func(){
		"score":       func() { p.Score += 0.5 },
		"bound":       func() { p.Certificate.Bound, p.Bound = p.Score/2, p.Score/2 },
		"before time": func() { p.Scans[0].Start = p.Scans[0].Start.Add(-48 * time.Hour) },
	} {
		kept, scans := *p, append([]scheduler.Scan(nil), p.Scans...)
		spoil()
		if err := planner.recheck(t.Context(), f.campaign, p); err == nil || !strings.Contains(err.Error(), "a fault of the program") {
			t.Errorf("%s: %v", name, err)
		}
		*p = kept
		p.Scans = scans
	}
	p.Campaign = "another"
	if err := planner.recheck(t.Context(), f.campaign, p); err == nil {
		t.Error("a plan of another campaign passes")
	}
	p.Campaign = f.campaign.Name
	down, cancel := context.WithCancel(t.Context())
	cancel()
	if err := planner.recheck(down, f.campaign, p); !errors.Is(err, context.Canceled) {
		t.Errorf("a program that goes down: %v", err)
	}
}
