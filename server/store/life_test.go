package store_test

import (
	"context"
	"errors"
	"testing"
	"time"

	"pgregory.net/rapid"

	"cadencewright/scheduler"
	"cadencewright/server/store"
	"cadencewright/server/store/storetest"
)

// life is the living week as a test plays it: time goes on, plans are issued,
// scans are reported by any id that was ever given out.
type life struct {
	*rapid.T
	s     *store.Store
	clock *clock
	id    int64
	plans []int64
	given []int64          // ids of scans of issued plans
	told  map[int64]string // the state that was last acknowledged, by the id that it was reported for
}

// Whatever happens in a week, in whatever order: no two scans of one telescope
// are to be done at once, what was acknowledged stays, the history holds what
// was made and nothing else, and every id leads somewhere.
func TestAnyWeekIsLived(t *testing.T) {
	t.Parallel()
	clk := &clock{}
	s := storetest.Open(t, clk.now)
	round := 0
	rapid.Check(t, func(rt *rapid.T) {
		round++
		clk.set(monday.Add(-time.Hour))
		id, err := s.ImportCampaign(context.Background(), array("Week "+time.Duration(round).String()), "ada")
		if err != nil {
			rt.Fatal(err)
		}
		l := &life{T: rt, s: s, clock: clk, id: id, told: map[int64]string{}}
		for range rapid.IntRange(3, 12).Draw(rt, "steps") {
			switch rapid.IntRange(0, 4).Draw(rt, "step") {
			case 0:
				clk.set(clk.now().Add(time.Duration(rapid.IntRange(1, 180).Draw(rt, "minutes")) * time.Minute))
			case 1, 2:
				l.issue()
			default:
				l.report()
			}
			l.check()
		}
	})
}

// issue issues a plan of a few scans on a coarse grid, so that plans often hold
// the same.
func (l *life) issue() {
	p := planOf("")
	c, _, err := l.s.LoadCampaign(context.Background(), l.id)
	if err != nil {
		l.Fatal(err)
	}
	p.Campaign = c.Name
	for _, block := range []string{"a1", "b1"} {
		at := 0
		for range rapid.IntRange(0, 5).Draw(l.T, "scans") {
			at += 30 * rapid.IntRange(0, 2).Draw(l.T, "pause")
			length := rapid.SampledFrom([]int{30, 60}).Draw(l.T, "minutes")
			p.Scans = append(p.Scans, scan(block, at, rapid.IntRange(1, 2).Draw(l.T, "source"), length))
			at += length
		}
	}
	id, err := l.s.SavePlan(context.Background(), l.id, p, store.PlanMeta{}, "ada")
	if err != nil {
		l.Fatal(err)
	}
	if _, err := l.s.Issue(context.Background(), id, 1, "ada"); err != nil {
		l.Fatal(err)
	}
	l.plans = append(l.plans, id)
	_, _, scans, err := l.s.Plan(context.Background(), id)
	if err != nil {
		l.Fatal(err)
	}
	for i := range scans {
		l.given = append(l.given, scans[i].ID)
	}
}

// report reports something of a scan by any id; it may be refused.
func (l *life) report() {
	if len(l.given) == 0 {
		return
	}
	id := rapid.SampledFrom(l.given).Draw(l.T, "scan")
	r := store.Report{State: rapid.SampledFrom([]string{store.ScanObserving, store.ScanDone, store.ScanLost}).Draw(l.T, "state")}
	if r.State == store.ScanLost {
		r.Cause = "wind"
	}
	x, err := l.s.ReportOutcome(context.Background(), id, r, "key", "", store.Idempotency{})
	if errors.Is(err, scheduler.ErrConflict) {
		return
	}
	if err != nil {
		l.Fatal(err)
	}
	if x.State != r.State {
		l.Fatalf("%s was acknowledged as %s", r.State, x.State)
	}
	l.told[id] = r.State
}

// check looks at everything that must hold.
func (l *life) check() {
	ctx := context.Background()
	made := 0
	for _, plan := range l.plans {
		info, _, scans, err := l.s.Plan(ctx, plan)
		if err != nil {
			l.Fatal(err)
		}
		if want := map[bool]string{true: store.PlanIssued, false: store.PlanSuperseded}[plan == l.plans[len(l.plans)-1]]; info.State != want {
			l.Fatalf("plan %d is %s, want %s", plan, info.State, want)
		}
		for i := range scans {
			x := &scans[i]
			if x.Live && (x.State == store.ScanDone || x.State == store.ScanPartial) {
				made++
			}
			if x.Live && x.CarriedTo != 0 || x.State == store.ScanDropped && x.Live {
				l.Fatalf("scan %+v", x)
			}
			if told, ok := l.told[x.ID]; ok && x.State != told && !l.laterTold(x, told) {
				l.Fatalf("scan %d was acknowledged as %s and is %s", x.ID, told, x.State)
			}
		}
		if info.State == store.PlanIssued {
			l.nothingAtOnce(scans)
		}
	}
	c, _, err := l.s.LoadCampaign(ctx, l.id)
	if err != nil {
		l.Fatal(err)
	}
	if len(c.History) != made {
		l.Fatalf("%d scans were made, %d are in the history", made, len(c.History))
	}
	l.nowIsOfThePlan()
}

// laterTold allows what a scan may have become since, reported under another of
// its ids.
func (l *life) laterTold(x *store.StoredScan, told string) bool {
	return told == store.ScanObserving && (x.State == store.ScanDone || x.State == store.ScanLost)
}

// nothingAtOnce checks that of the issued plan no two scans of one telescope
// that are still to be done share time.
func (l *life) nothingAtOnce(scans []store.StoredScan) {
	for i := range scans {
		for j := range i {
			a, b := &scans[i], &scans[j]
			todo := func(x *store.StoredScan) bool {
				return x.Live && (x.State == store.ScanPlanned || x.State == store.ScanObserving)
			}
			if todo(a) && todo(b) && a.Telescope == b.Telescope && a.Start.Before(b.End()) && b.Start.Before(a.End()) {
				l.Fatalf("two at once: %+v and %+v", a, b)
			}
		}
	}
}

// nowIsOfThePlan checks what the telescope is told against all scans by a
// search.
func (l *life) nowIsOfThePlan() {
	if err := l.s.SetLive(context.Background(), l.id, "test"); err != nil {
		l.Fatal(err)
	}
	at := l.clock.now()
	now, next, err := l.s.NowNext(context.Background(), "AAA", at)
	if err != nil {
		l.Fatal(err)
	}
	list, err := l.s.LiveScans(context.Background(), "AAA", week.From, week.To)
	if err != nil {
		l.Fatal(err)
	}
	var wantNow, wantNext int64
	for i := range list {
		x := &list[i]
		if x.State != store.ScanPlanned && x.State != store.ScanObserving || !x.End().After(at) {
			continue
		}
		switch {
		case !x.Start.After(at):
			wantNow = x.ID
		case wantNext == 0:
			wantNext = x.ID
		}
	}
	if idOf(now) != wantNow || idOf(next) != wantNext {
		l.Fatalf("at %s: now %d, next %d; want %d and %d", at, idOf(now), idOf(next), wantNow, wantNext)
	}
}
