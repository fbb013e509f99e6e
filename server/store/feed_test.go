package store_test

import (
	"context"
	"testing"
	"time"

	"cadencewright/scheduler"
	"cadencewright/server/store"
	"cadencewright/server/store/storetest"
)

// listener is another copy of the program that hears changes.
type listener struct {
	testing.TB
	got chan store.Change
}

// listen begins to hear the changes of a database; it returns once it does.
func listen(t testing.TB, s *store.Store) *listener {
	t.Helper()
	ctx, cancel := context.WithCancel(context.Background())
	l, ended := &listener{t, make(chan store.Change, 1000)}, make(chan struct{})
	go func() {
		s.Listen(ctx, func(c store.Change) { l.got <- c })
		close(ended)
	}()
	t.Cleanup(func() {
		cancel()
		select {
		case <-ended:
		case <-time.After(15 * time.Second):
			t.Error("the listener does not end")
		}
	})
	l.want(store.Change{})
	return l
}

// want waits for a change, and takes no other.
func (l *listener) want(want store.Change) {
	l.Helper()
	select {
	case c := <-l.got:
		if c != want {
			l.Errorf("heard %+v, want %+v", c, want)
		}
	case <-time.After(20 * time.Second):
		l.Fatalf("heard nothing, want %+v", want)
	}
}

// Every change is told to every copy of the program, in its order, and only once
// it is true.
func TestFeedTellsEveryChange(t *testing.T) {
	t.Parallel()
	w := newWorld(t)
	ctx := t.Context()
	const week8 = "2027-W08"
	all := []*listener{listen(t, w.Store), listen(t, storetest.OpenDSN(t, w.dsn, nil))}
	hear := func(c store.Change) {
		t.Helper()
		for _, l := range all {
			c.Campaign = w.id
			l.want(c)
		}
	}
	job, err := w.AddJob(ctx, w.id, week, 1, "ada", notQueued)
	if err != nil {
		t.Fatal(err)
	}
	hear(store.Change{Kind: "job", Week: week8, Job: job.ID})
	if _, err := w.JobProgress(ctx, job.ID, 1, 10, 1, 2); err != nil {
		t.Fatal(err)
	}
	hear(store.Change{Kind: "job", Week: week8, Job: job.ID})
	if err := w.StopJob(ctx, job.ID, "ada"); err != nil {
		t.Fatal(err)
	}
	hear(store.Change{Kind: "job", Week: week8, Job: job.ID})
	plan, err := w.SavePlan(ctx, w.id, planOf("Array", scan("a1", 0, 1)), store.PlanMeta{Job: job.ID}, "ada")
	if err != nil {
		t.Fatal(err)
	}
	hear(store.Change{Kind: "job", Week: week8, Job: job.ID})
	hear(store.Change{Kind: "draft", Week: week8, Plan: plan})
	if _, err := w.Issue(ctx, plan, 7, "ada"); scheduler.KindOf(err) != scheduler.ErrStale {
		t.Fatal(err)
	}
	if _, err := w.Issue(ctx, plan, 1, "ada"); err != nil { // what was refused is not told
		t.Fatal(err)
	}
	hear(store.Change{Kind: "issued", Week: week8, Plan: plan, Revision: 1})
	w.clock.set(monday)
	x := w.must(w.scans(plan)[0].ID, store.ScanObserving)
	hear(store.Change{Kind: "outcome", Week: week8, Telescope: "AAA", Scan: x.ID})
	if err := w.SetLive(ctx, w.id, "ada"); err != nil {
		t.Fatal(err)
	}
	hear(store.Change{Kind: "campaign"})
}

// A listener whose connection is lost comes back and says that something may
// have been missed.
func TestFeedComesBack(t *testing.T) {
	t.Parallel()
	w := newWorld(t)
	l := listen(t, w.Store)
	for range 3 {
		w.exec("select pg_terminate_backend(pid) from pg_stat_activity where datname = current_database() and query ilike 'listen%'")
		l.want(store.Change{})
		plan := w.draft()
		l.want(store.Change{Kind: "draft", Campaign: w.id, Week: "2027-W08", Plan: plan})
	}
}

// Silence alone does not end a connection, and changes after it are heard.
func TestFeedAfterSilence(t *testing.T) {
	t.Parallel()
	w := newWorld(t)
	w.SetFeedSilence(20 * time.Millisecond)
	l := listen(t, w.Store)
	before := w.number("select pid from pg_stat_activity where datname = current_database() and query ~* 'listen|^-- ping'")
	time.Sleep(200 * time.Millisecond)
	plan := w.draft()
	l.want(store.Change{Kind: "draft", Campaign: w.id, Week: "2027-W08", Plan: plan})
	if after := w.number("select count(*) from pg_stat_activity where datname = current_database() and pid = $1", before); after != 1 {
		t.Error("the connection was given up for its silence")
	}
}
