package jobs

import (
	"bytes"
	"context"
	"errors"
	"log/slog"
	"os"
	"strings"
	"sync"
	"testing"
	"time"

	"cadencewright/scheduler"
	"cadencewright/server/planning"
	"cadencewright/server/store"
	"cadencewright/server/store/storetest"
	"cadencewright/testdata"
)

func TestMain(m *testing.M) { storetest.Run(m) }

// endless is more effort than any test waits for.
const endless = 1 << 40

// office is a database with a test campaign in it, and what its queues log.
type office struct {
	t        testing.TB
	store    *store.Store
	campaign int64
	week     scheduler.Horizon

	mu  sync.Mutex
	log bytes.Buffer
}

func (o *office) Write(b []byte) (int, error) {
	o.mu.Lock()
	defer o.mu.Unlock()
	return o.log.Write(b)
}

func (o *office) logged() string {
	o.mu.Lock()
	defer o.mu.Unlock()
	return o.log.String()
}

func newOffice(t testing.TB) *office {
	t.Helper()
	o := &office{t: t, store: storetest.Open(t, nil)}
	data, err := os.ReadFile(testdata.Path("campaigns", "small-1.json"))
	if err != nil {
		t.Fatal(err)
	}
	c, err := scheduler.ReadCampaign(data)
	if err != nil {
		t.Fatal(err)
	}
	if o.campaign, err = o.store.ImportCampaign(t.Context(), c, "test"); err != nil {
		t.Fatal(err)
	}
	o.week = scheduler.Horizon{From: c.Start, To: c.End}
	return o
}

// queue is one more program that works on the database; nil: it only hands in.
func (o *office) queue(p *planning.Planner) *Queue {
	o.t.Helper()
	q, err := New(o.store, p, slog.New(slog.NewTextHandler(o, nil)))
	if err != nil {
		o.t.Fatal(err)
	}
	return q
}

// works starts a queue and stops it at the end of the test.
func (o *office) works(q *Queue) {
	o.t.Helper()
	if err := q.Start(context.WithoutCancel(o.t.Context())); err != nil {
		o.t.Fatal(err)
	}
	o.t.Cleanup(func() {
		if err := stop(q); err != nil {
			o.t.Error(err)
		}
	})
}

func stop(q *Queue) error {
	ctx, cancel := context.WithTimeout(context.Background(), 30*time.Second)
	defer cancel()
	return q.Stop(ctx)
}

// asks for a plan of the week.
func (o *office) asks(q *Queue) int64 {
	o.t.Helper()
	j, err := q.Plan(o.t.Context(), o.campaign, o.week, 1, "Ada")
	if err != nil {
		o.t.Fatal(err)
	}
	if j.State != store.JobQueued || j.AskedBy != "Ada" || !j.From.Equal(o.week.From) {
		o.t.Fatalf("job %+v", j)
	}
	return j.ID
}

func (o *office) job(id int64) store.PlanJob {
	o.t.Helper()
	j, err := o.store.Job(o.t.Context(), id)
	if err != nil {
		o.t.Fatal(err)
	}
	return j
}

// until waits until a job is as wanted.
func (o *office) until(id int64, what string, ok func(store.PlanJob) bool) store.PlanJob {
	o.t.Helper()
	for deadline := time.Now().Add(time.Minute); ; time.Sleep(20 * time.Millisecond) {
		j := o.job(id)
		if ok(j) {
			return j
		}
		if time.Now().After(deadline) {
			o.t.Fatalf("the job never was %s: %+v; log:\n%s", what, j, o.logged())
		}
	}
}

func ended(j store.PlanJob) bool { return !j.Active() }

// inQueue is what the queue itself says of the newest job.
func (o *office) inQueue() (state string, attempt int) {
	o.t.Helper()
	err := o.store.Pool().QueryRow(o.t.Context(), "select state::text, attempt from "+store.QueueSchema+".river_job order by id desc limit 1").Scan(&state, &attempt)
	if err != nil {
		o.t.Fatal(err)
	}
	return state, attempt
}

// exec runs SQL on the database.
func (o *office) exec(sql string, args ...any) {
	o.t.Helper()
	if _, err := o.store.Pool().Exec(o.t.Context(), sql, args...); err != nil {
		o.t.Fatal(err)
	}
}

// broken is a store in which something goes wrong for so many times.
type broken struct {
	*store.Store
	mu    sync.Mutex
	times int
	wrong func() error
}

func (b *broken) SavePlan(ctx context.Context, c int64, p *scheduler.Plan, m store.PlanMeta, actor string) (int64, error) {
	b.mu.Lock()
	b.times--
	left := b.times
	b.mu.Unlock()
	if left >= 0 {
		if err := b.wrong(); err != nil {
			return 0, err
		}
	}
	return b.Store.SavePlan(ctx, c, p, m, actor)
}

// A job that is asked for by one program and worked on by another ends with a
// draft; its week takes another one only then.
func TestAJobEndsWithADraft(t *testing.T) {
	o := newOffice(t)
	asker := o.queue(nil)
	if err := errors.Join(asker.Start(t.Context()), asker.Stop(t.Context())); err != nil {
		t.Errorf("a queue that only hands in: %v", err)
	}
	id := o.asks(asker)
	if _, err := asker.Plan(t.Context(), o.campaign, o.week, 1, "Bob"); !errors.Is(err, scheduler.ErrConflict) {
		t.Errorf("a second job for the week: %v", err)
	}
	if _, err := asker.Plan(t.Context(), 999, o.week, 1, "Bob"); !errors.Is(err, scheduler.ErrNotFound) {
		t.Errorf("a job for no campaign: %v", err)
	}
	o.works(o.queue(&planning.Planner{Store: o.store, Effort: 50, Workers: 1}))
	j := o.until(id, "done", ended)
	if j.State != store.JobDone || j.PlanID == 0 || j.Problem != "" || j.Score <= 0 || j.Bound == nil || *j.Bound < j.Score-1e-6 {
		t.Errorf("job %+v", j)
	}
	if p, err := o.store.PlanFacts(t.Context(), j.PlanID); err != nil || p.State != store.PlanDraft || p.MadeBy != "Ada" || p.Seed != 1 {
		t.Errorf("plan %+v, %v", p, err)
	}
	o.asks(asker)
}

// A search that is stopped tells of its progress while it lasts and keeps the
// best plan.
func TestAJobIsStopped(t *testing.T) {
	o := newOffice(t)
	q := o.queue(&planning.Planner{Store: o.store, Effort: endless, Workers: 2})
	o.works(q)
	id := o.asks(q)
	j := o.until(id, "under way", func(j store.PlanJob) bool {
		return j.State == store.JobRunning && j.Effort > 0 && j.Score > 0 && j.Bound != nil
	})
	if j.EffortOf != endless {
		t.Errorf("of %d thousand changes", j.EffortOf)
	}
	if err := o.store.StopJob(t.Context(), id, "Ada"); err != nil {
		t.Fatal(err)
	}
	if j = o.until(id, "over", ended); j.State != store.JobDone || j.PlanID == 0 {
		t.Fatalf("job %+v", j)
	}
	if p, err := o.store.PlanFacts(t.Context(), j.PlanID); err != nil || p.Status != "stopped" {
		t.Errorf("plan %+v, %v", p, err)
	}
}

// A job that is stopped while it waits never begins.
func TestAWaitingJobIsStopped(t *testing.T) {
	o := newOffice(t)
	id := o.asks(o.queue(nil))
	if err := o.store.StopJob(t.Context(), id, "Ada"); err != nil {
		t.Fatal(err)
	}
	o.works(o.queue(&planning.Planner{Store: o.store, Effort: endless, Workers: 1}))
	if j := o.until(id, "over", ended); j.State != store.JobCancelled || j.PlanID != 0 || j.Problem == "" {
		t.Errorf("job %+v", j)
	}
}

// What no other try can mend is not tried again: the asker is told why.
func TestAJobThatCannotBeDone(t *testing.T) {
	o := newOffice(t)
	o.week = scheduler.Horizon{From: o.week.From.AddDate(0, 0, 70), To: o.week.To.AddDate(0, 0, 70)}
	q := o.queue(&planning.Planner{Store: o.store, Effort: 10, Workers: 1})
	o.works(q)
	j := o.until(o.asks(q), "over", ended)
	if j.State != store.JobFailed || !strings.Contains(j.Problem, "no block starts in this week") {
		t.Errorf("job %+v", j)
	}
	if !strings.Contains(o.logged(), "planning failed") || strings.Contains(o.logged(), "attempt=2") {
		t.Errorf("log:\n%s", o.logged())
	}
}

// A database that is away for a moment, or a fault that does not come again,
// costs another try and no more.
func TestATryThatFailsIsRepeated(t *testing.T) {
	for name, wrong := range map[string]func() error{
		"away":  func() error { return scheduler.Errorf(scheduler.ErrUnavailable, "the database is away") },
		"panic": func() error { panic("out of bounds") },
	} {
		t.Run(name, func(t *testing.T) {
			o := newOffice(t)
			q := o.queue(&planning.Planner{Store: &broken{Store: o.store, times: 1, wrong: wrong}, Effort: 10, Workers: 1})
			o.works(q)
			j := o.until(o.asks(q), "over", ended)
			if j.State != store.JobDone || j.PlanID == 0 {
				t.Errorf("job %+v", j)
			}
			if !strings.Contains(o.logged(), "planning failed") {
				t.Errorf("log:\n%s", o.logged())
			}
		})
	}
}
