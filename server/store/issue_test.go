package store_test

import (
	"context"
	"errors"
	"strings"
	"sync"
	"testing"
	"time"

	"cadencewright/scheduler"
	"cadencewright/server/store"
)

// want checks the states of a plan's scans, and which of them are live.
func (w *world) want(what string, plan int64, want ...string) []store.StoredScan {
	w.Helper()
	list := w.scans(plan)
	for i := range list {
		got := list[i].State
		if list[i].Live {
			got += " live"
		}
		if i >= len(want) || got != want[i] {
			w.Errorf("%s: scan %d of plan %d (%s) is %s, want %q", what, i, plan, list[i].Start.Format("Mon 15:04"), got, want)
		}
	}
	if len(list) != len(want) {
		w.Errorf("%s: plan %d has %d scans, want %d", what, plan, len(list), len(want))
	}
	return list
}

func TestFirstIssue(t *testing.T) {
	t.Parallel()
	w := newWorld(t)
	id := w.draft(scan("a1", 30, 1), scan("a1", 90, 2), scan("b1", 30, 3))
	w.want("a draft", id, "planned", "planned", "planned")
	info, err := w.Issue(t.Context(), id, 1, "bo")
	if err != nil {
		t.Fatal(err)
	}
	if info.State != store.PlanIssued || info.Revision != 1 || info.Version != 2 || info.IssuedBy != "bo" || !info.IssuedAt.Equal(w.clock.now()) {
		t.Errorf("issued as %+v", info)
	}
	if facts, err := w.PlanFacts(t.Context(), id); err != nil || facts != info {
		t.Errorf("stored as %+v, %v, told as %+v", facts, err, info)
	}
	w.want("an issued plan", id, "planned live", "planned live", "planned live")
	if _, err := w.Issue(t.Context(), id, info.Version, "bo"); !errors.Is(err, scheduler.ErrConflict) {
		t.Errorf("issued twice: %v", err)
	}
}

// A plan that was not seen in its newest state cannot be issued: its own
// version, or that of another draft once one of them was issued.
func TestIssueOfAStalePlan(t *testing.T) {
	t.Parallel()
	w := newWorld(t)
	mine, theirs := w.draft(scan("a1", 30, 1)), w.draft(scan("a1", 60, 2))
	var stale *store.StaleError
	if _, err := w.Issue(t.Context(), mine, 7, "ada"); !errors.As(err, &stale) || stale.Current != 1 {
		t.Errorf("a version that never was: %v", err)
	}
	if _, err := w.Issue(t.Context(), theirs, 1, "bo"); err != nil {
		t.Fatal(err)
	}
	if _, err := w.Issue(t.Context(), mine, 1, "ada"); !errors.As(err, &stale) || stale.Current != 2 || !errors.Is(err, scheduler.ErrStale) {
		t.Errorf("over a plan that was not seen: %v", err)
	}
	w.want("nothing happened", theirs, "planned live")
	if _, err := w.Issue(t.Context(), mine, 2, "ada"); err != nil {
		t.Fatal(err)
	}
	old, err := w.PlanFacts(t.Context(), theirs)
	if err != nil || old.State != store.PlanSuperseded || old.SupersededBy != 2 || !old.SupersededAt.Equal(w.clock.now()) {
		t.Errorf("the plan before is %+v, %v", old, err)
	}
	w.want("the old plan", theirs, "dropped")
	w.want("the new plan", mine, "planned live")
}

// In the middle of the week: what has begun stays, what stands in both plans is
// carried over, the rest gives way.
func TestIssueInTheMiddle(t *testing.T) {
	t.Parallel()
	w := newWorld(t)
	first := w.issue(scan("a1", 0, 1), scan("a1", 60, 2), scan("a1", 120, 3), scan("a1", 180, 1), scan("a1", 240, 2), scan("a2", 0, 3), scan("b1", 120, 1))
	ids := w.scans(first)
	w.clock.set(monday.Add(130 * time.Minute))
	w.must(ids[0].ID, store.ScanDone)
	w.must(ids[2].ID, store.ScanObserving)
	second := w.issue(
		scan("a1", 0, 1),        // done: carried
		scan("a1", 30, 3),       // over, never told to anybody
		scan("a1", 125, 2),      // overlaps the one under way
		scan("a1", 180, 1),      // as before
		scan("a1", 240, 3),      // another source in its place
		scan("a2", 5, 3),        // moved
		scan("b1", 125, 2, 120), // overlaps one that has begun by the clock, unreported
		scan("b1", 300, 2),      // new
	)
	w.want("the old plan", first, "done", "planned live", "observing live", "planned", "dropped", "dropped", "planned live")
	list := w.want("the new plan", second, "done live", "dropped", "dropped", "planned live", "planned live", "planned live", "dropped", "planned live")
	for i, old := range w.scans(first) {
		want := map[int]int64{0: list[0].ID, 3: list[3].ID}[i]
		if old.CarriedTo != want {
			t.Errorf("scan %d was carried to %d, want %d", i, old.CarriedTo, want)
		}
	}
	if list[0].Outcome == nil || list[0].Outcome.State != store.ScanDone {
		t.Errorf("the outcome was left behind: %+v", list[0].Outcome)
	}
	if old := w.scans(first)[0]; old.Outcome == nil || old.Outcome.State != store.ScanDone {
		t.Errorf("the old plan no longer shows the outcome: %+v", old.Outcome)
	}
	if n := w.number("select count(*) from history where scan_id = $1", list[0].ID); n != 1 {
		t.Errorf("the history knows the carried scan %d times", n)
	}
	// What is under way ends, on the old plan.
	w.must(ids[2].ID, store.ScanDone)
	w.want("the old plan later", first, "done", "planned live", "done live", "planned", "dropped", "dropped", "planned live")
	// Whoever holds the id of a carried scan can report it still.
	w.clock.set(monday.Add(190 * time.Minute))
	x := w.must(ids[3].ID, store.ScanObserving)
	if x.ID != list[3].ID || x.PlanID != second || x.State != store.ScanObserving {
		t.Errorf("the report was entered for %+v", x)
	}
	if old, err := w.Scan(t.Context(), ids[3].ID); err != nil || old.State != store.ScanObserving || old.Outcome == nil {
		t.Errorf("under its old id it is %+v, %v", old, err)
	}
	if _, err := w.report(ids[4].ID, store.ScanDone); !errors.Is(err, scheduler.ErrConflict) {
		t.Errorf("a dropped scan was reported: %v", err)
	}
}

// Over many revisions the id of the first still leads to the last, and an old
// plan still reads as it was issued.
func TestManyRevisions(t *testing.T) {
	t.Parallel()
	w := newWorld(t)
	plans := []int64{w.issue(scan("a1", 0, 1), scan("a1", 60, 2))}
	first := w.scans(plans[0])
	for i := range 4 {
		plans = append(plans, w.issue(scan("a1", 0, 1), scan("a1", 120+30*i, 3)))
	}
	last := w.scans(plans[4])
	for i, p := range plans[:4] {
		old := w.scans(p)
		if old[0].CarriedTo != last[0].ID || old[0].State != store.ScanPlanned || old[1].State != store.ScanDropped {
			t.Errorf("revision %d: %+v", i+1, old)
		}
	}
	w.clock.set(monday)
	if x := w.must(first[0].ID, store.ScanDone); x.ID != last[0].ID || x.Revision != 5 {
		t.Errorf("reported for %+v", x)
	}
	_, p, _, err := w.Plan(t.Context(), plans[0])
	if err != nil || len(p.Scans) != 2 || p.Scans[1].Source != "SIM J0200+2000" || p.Scans[1].Earns[0].Unit != "c2#1" {
		t.Errorf("the first plan reads %+v, %v", p, err)
	}
	w.want("live at the end", plans[4], "done live", "planned live")
}

// A scan that was lost before its time may be planned again in its place.
func TestLostScanPlannedAgain(t *testing.T) {
	t.Parallel()
	w := newWorld(t)
	first := w.issue(scan("a1", 0, 1), scan("a1", 60, 2))
	ids := w.scans(first)
	w.must(ids[0].ID, store.ScanLost) // the forecast says storm
	w.must(ids[1].ID, store.ScanLost)
	second := w.issue(scan("a1", 0, 1), scan("a1", 70, 2))
	w.want("the old plan", first, "lost live", "lost live")
	list := w.want("the new plan", second, "planned live", "planned live")
	w.clock.set(monday)
	w.must(list[0].ID, store.ScanLost)
	w.clock.set(monday.Add(2 * time.Hour))
	third := w.issue(scan("a1", 0, 1), scan("a1", 200, 3))
	w.want("after its time", third, "lost live", "planned live")
}

// Two scans at once can not become what a telescope does, nor two plans of one
// time.
func TestIssueGuards(t *testing.T) {
	t.Parallel()
	w := newWorld(t)
	id := w.draft(scan("a1", 0, 1), scan("a1", 29, 2))
	_, err := w.Issue(t.Context(), id, 1, "ada")
	wantField(t, "two scans at once", err, scheduler.ErrConflict, "start")
	w.want("nothing happened", id, "planned", "planned")
	w.issue(scan("a1", 0, 1), scan("a1", 30, 2), scan("b1", 0, 3)) // back to back is fine
	odd := planOf("Array")
	odd.From, odd.To = monday.AddDate(0, 0, 3), monday.AddDate(0, 0, 10)
	other, err := w.SavePlan(t.Context(), w.id, odd, store.PlanMeta{}, "ada")
	if err != nil {
		t.Fatal(err)
	}
	_, err = w.Issue(t.Context(), other, 1, "ada")
	wantField(t, "half of a week that is issued", err, scheduler.ErrConflict, "horizon")
}

// Of many who issue at once, each with a plan they have seen, one wins.
func TestIssuesAtOnce(t *testing.T) {
	t.Parallel()
	w := newWorld(t)
	var drafts []int64
	for i := range 6 {
		drafts = append(drafts, w.draft(scan("a1", 30*i, 1), scan("a1", 300, 2)))
	}
	for round := range 3 {
		var group sync.WaitGroup
		results := make(chan error, 24)
		for i := range 24 {
			group.Go(func() {
				_, err := w.Issue(context.Background(), drafts[i%6], int64(1+round), "somebody")
				results <- err
			})
		}
		group.Wait()
		close(results)
		won := 0
		for err := range results {
			if err == nil {
				won++
			} else if k := scheduler.KindOf(err); k != scheduler.ErrStale && k != scheduler.ErrConflict {
				t.Errorf("a loser is told %v", err)
			}
		}
		if won != 1 {
			t.Errorf("round %d: %d won", round, won)
		}
		if n := w.number("select count(*) from plan where state = 'issued'"); n != 1 {
			t.Errorf("round %d: %d plans are issued", round, n)
		}
		if n := w.number("select max(revision) from plan"); n != round+1 {
			t.Errorf("round %d: revision %d", round, n)
		}
	}
}

// A check sees the campaign and the plan as they stand in the transaction; if
// it refuses, nothing is issued.
func TestCheckedIssue(t *testing.T) {
	t.Parallel()
	w := newWorld(t)
	id := w.draft(scan("a1", 0, 1), scan("b1", 0, 2))
	refusal := scheduler.Errorf(scheduler.ErrConflict, "scan 1 sets too early")
	_, err := w.IssueChecked(t.Context(), id, 1, "ada", func(c *scheduler.Campaign, p *scheduler.Plan) error {
		if c.Name != "Array" || len(c.Sources) != 3 || len(p.Scans) != 2 || p.Certificate.Bound != 9 {
			t.Errorf("the check sees %+v and %+v", c, p)
		}
		return refusal
	})
	if !errors.Is(err, refusal) {
		t.Errorf("refused with %v", err)
	}
	w.want("nothing happened", id, "planned", "planned")
	if _, err := w.IssueChecked(t.Context(), id, 1, "ada", func(*scheduler.Campaign, *scheduler.Plan) error { return nil }); err != nil {
		t.Fatal(err)
	}
	w.want("issued", id, "planned live", "planned live")
}

// A connection that is cut in the middle of an issue leaves nothing behind, and
// the store goes on.
func TestConnectionCutInTheMiddle(t *testing.T) {
	t.Parallel()
	w := newWorld(t)
	old, id := w.issue(scan("a1", 0, 1)), w.draft(scan("a1", 0, 2))
	cut := func(*scheduler.Campaign, *scheduler.Plan) error {
		w.exec("select pg_terminate_backend(pid) from pg_stat_activity where datname = current_database() and state like 'idle in transaction%'")
		return nil
	}
	_, err := w.IssueChecked(t.Context(), id, 1, "ada", cut)
	if !errors.Is(err, scheduler.ErrUnavailable) || strings.Contains(err.Error(), "57P01") {
		t.Errorf("cut off: %v", err)
	}
	w.want("the old plan", old, "planned live")
	w.want("the draft", id, "planned")
	if _, err := w.Issue(t.Context(), id, 1, "ada"); err != nil {
		t.Errorf("after that: %v", err)
	}
	// Whoever asked for it going away is no different.
	ctx, cancel := context.WithCancel(t.Context())
	again := w.draft(scan("a1", 0, 3))
	_, err = w.IssueChecked(ctx, again, 1, "ada", func(*scheduler.Campaign, *scheduler.Plan) error { cancel(); return nil })
	if !errors.Is(err, context.Canceled) {
		t.Errorf("cancelled: %v", err)
	}
	w.want("the plan in use", id, "planned live")
	if n := w.number("select count(*) from pg_stat_activity where datname = current_database() and state like 'idle in transaction%'"); n != 0 {
		t.Errorf("%d transactions are left open", n)
	}
}

// Reports and issues at the same time wait for each other and do not block each
// other for good; every acknowledged report is there.
func TestReportsDuringIssues(t *testing.T) {
	t.Parallel()
	w := newWorld(t)
	var all []scheduler.Scan
	for i := range 20 {
		all = append(all, scan("a1", 30*i, 1+i%3))
	}
	first := w.scans(w.issue(all...))
	w.clock.set(monday.Add(11 * time.Hour))
	var group sync.WaitGroup
	for i := range first {
		group.Go(func() {
			for _, state := range []string{store.ScanObserving, store.ScanDone} {
				if _, err := w.report(first[i].ID, state); err != nil {
					t.Errorf("scan %d: %v", i, err)
				}
			}
		})
	}
	group.Go(func() {
		for range 5 {
			id := w.draft(all...)
			if _, err := w.Issue(context.Background(), id, 1, "ada"); err != nil {
				t.Error(err)
			}
		}
	})
	group.Wait()
	if n := w.number("select count(*) from scan where live and state = 'done'"); n != len(all) {
		t.Errorf("%d scans are done, want %d", n, len(all))
	}
	if n := w.number("select count(*) from history h join scan s on s.id = h.scan_id and s.live"); n != len(all) {
		t.Errorf("%d scans are in the history, want %d", n, len(all))
	}
	for i := range first {
		if x, err := w.Scan(t.Context(), first[i].ID); err != nil || x.State != store.ScanDone {
			t.Errorf("scan %d reads %s under its first id (%v)", i, x.State, err)
		}
	}
}
