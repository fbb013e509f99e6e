package jobs

import (
	"context"
	"errors"
	"log/slog"
	"strings"
	"testing"
	"time"

	"github.com/riverqueue/river"
	"github.com/riverqueue/river/rivertype"

	"cadencewright/scheduler"
	"cadencewright/server/planning"
	"cadencewright/server/store"
)

// tries is a worker whose attempt is made by hand.
func (o *office) tries(ctx context.Context, s planning.Store, id int64, attempt int) error {
	w := &planWorker{planner: &planning.Planner{Store: s, Effort: 10, Workers: 1}, store: o.store, log: slog.New(slog.NewTextHandler(o, nil))}
	return w.Work(ctx, &river.Job[PlanArgs]{JobRow: &rivertype.JobRow{Attempt: attempt}, Args: PlanArgs{id}})
}

// The last try of what always fails ends the job with its reason; the ones
// before leave it to the queue.
func TestTheLastTry(t *testing.T) {
	for name, c := range map[string]struct {
		wrong func() error
		says  string
	}{
		"away":  {func() error { return scheduler.Errorf(scheduler.ErrUnavailable, "the database is away") }, "the database is away"},
		"panic": {func() error { panic("out of bounds") }, "a fault of the program: out of bounds"},
	} {
		o := newOffice(t)
		id := o.asks(o.queue(nil))
		b := &broken{Store: o.store, times: 10, wrong: c.wrong}
		for attempt := 1; attempt < attempts; attempt++ {
			if err := o.tries(t.Context(), b, id, attempt); err == nil || !o.activeJob(id) {
				t.Errorf("%s: attempt %d: %v, the job is %s", name, attempt, err, o.job(id).State)
			}
		}
		if err := o.tries(t.Context(), b, id, attempts); err != nil {
			t.Errorf("%s: the last attempt: %v", name, err)
		}
		if j := o.job(id); j.State != store.JobFailed || j.Problem != c.says {
			t.Errorf("%s: job %+v", name, j)
		}
	}
}

func (o *office) activeJob(id int64) bool {
	j := o.job(id)
	return j.Active()
}

// A job that takes longer than any may fails like others: it does not stay
// under way for ever. One whose program goes down is left to the queue even at
// its last attempt.
func TestTimeOverAndGoingDown(t *testing.T) {
	o := newOffice(t)
	id := o.asks(o.queue(nil))
	down, cancel := context.WithCancel(t.Context())
	cancel()
	if err := o.tries(down, o.store, id, attempts); !errors.Is(err, context.Canceled) || !o.activeJob(id) {
		t.Errorf("going down: %v, the job is %s", err, o.job(id).State)
	}
	over, cancel := context.WithDeadline(t.Context(), time.Now().Add(-time.Second))
	defer cancel()
	if err := o.tries(over, o.store, id, 1); err == nil || !o.activeJob(id) {
		t.Errorf("time over once: %v, the job is %s", err, o.job(id).State)
	}
	if err := o.tries(over, o.store, id, attempts); err != nil {
		t.Errorf("time over for the last time: %v", err)
	}
	if j := o.job(id); j.State != store.JobFailed || j.Problem == "" {
		t.Errorf("job %+v", j)
	}
}

// A job that somebody else ended meanwhile is no failure of this one.
func TestEndedByAnother(t *testing.T) {
	o := newOffice(t)
	id := o.asks(o.queue(nil))
	b := &broken{Store: o.store, times: 1, wrong: func() error {
		if err := o.store.EndJob(context.Background(), id, store.JobCancelled, "not wanted"); err != nil {
			return err
		}
		return scheduler.Errorf(scheduler.ErrInvalid, "the campaign has changed")
	}}
	if err := o.tries(t.Context(), b, id, 1); err != nil {
		t.Error(err)
	}
	if j := o.job(id); j.State != store.JobCancelled || j.Problem != "not wanted" {
		t.Errorf("job %+v", j)
	}
	if err := o.tries(t.Context(), o.store, id, 1); err != nil || o.job(id).State != store.JobCancelled {
		t.Errorf("a job that has ended: %v", err)
	}
}

// A program that stops hands its job back; another takes it up and finishes.
func TestAJobOfAProgramThatStopped(t *testing.T) {
	o := newOffice(t)
	first := o.queue(&planning.Planner{Store: o.store, Effort: endless, Workers: 1})
	if err := first.Start(context.WithoutCancel(t.Context())); err != nil {
		t.Fatal(err)
	}
	id := o.asks(first)
	o.until(id, "under way", func(j store.PlanJob) bool { return j.State == store.JobRunning && j.Effort > 0 })
	if err := stop(first); err != nil {
		t.Fatal(err)
	}
	if state, _ := o.inQueue(); !o.activeJob(id) || state == "running" || state == "completed" {
		t.Fatalf("after the stop the job is %s, in the queue %s", o.job(id).State, state)
	}
	o.works(o.queue(&planning.Planner{Store: o.store, Effort: 10, Workers: 1}))
	if j := o.until(id, "over", ended); j.State != store.JobDone || j.PlanID == 0 {
		t.Errorf("job %+v", j)
	}
}

// A program that was killed says nothing any more. Its job, still running by
// the books, is taken up by another when its time is over.
func TestAJobOfAProgramThatWasKilled(t *testing.T) {
	o := newOffice(t)
	id := o.asks(o.queue(nil))
	if _, err := o.store.JobProgress(t.Context(), id, 3, 10, 0, 0); err != nil {
		t.Fatal(err)
	}
	o.exec("update " + store.QueueSchema + ".river_job set state = 'running', attempt = 1, attempted_by = array['gone'], attempted_at = now() - interval '20 minutes'")
	o.works(o.queue(&planning.Planner{Store: o.store, Effort: 10, Workers: 1}))
	if j := o.until(id, "over", ended); j.State != store.JobDone || j.PlanID == 0 {
		t.Errorf("job %+v", j)
	}
	// The queue counts its attempts: it was not begun from nothing.
	if _, attempt := o.inQueue(); attempt != 2 {
		t.Errorf("done at attempt %d, want 2", attempt)
	}
}

// Who does not want to wait so long asks again after a minute's silence: the
// dead job is reported as failed, and a new one takes its place.
func TestAskingAgainAfterAKill(t *testing.T) {
	o := newOffice(t)
	asker := o.queue(nil)
	id := o.asks(asker)
	if _, err := o.store.JobProgress(t.Context(), id, 3, 10, 0, 0); err != nil {
		t.Fatal(err)
	}
	if _, err := asker.Plan(t.Context(), o.campaign, o.week, 1, "Ada"); !errors.Is(err, scheduler.ErrConflict) {
		t.Errorf("a job that has only just spoken: %v", err)
	}
	o.exec("update plan_job set changed_at = changed_at - interval '61 seconds' where id = $1", id)
	o.asks(asker)
	if j := o.job(id); j.State != store.JobFailed || !strings.Contains(j.Problem, "the program that worked on it ended") {
		t.Errorf("the dead job: %+v", j)
	}
}
