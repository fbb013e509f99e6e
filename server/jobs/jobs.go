// Package jobs runs planning in the background, on a queue in Postgres: any
// copy of the program takes the next job, and one whose worker has died is
// taken up again.
package jobs

import (
	"context"
	"errors"
	"fmt"
	"log/slog"
	"runtime/debug"
	"time"

	"github.com/jackc/pgx/v5"
	"github.com/riverqueue/river"
	"github.com/riverqueue/river/riverdriver/riverpgxv5"

	"cadencewright/scheduler"
	"cadencewright/server/planning"
	"cadencewright/server/store"
)

const (
	// timeout bounds one job; a plan takes seconds, so this is far too long.
	timeout = 5 * time.Minute
	// attempts is how often a job is tried: once more after a dead worker or
	// a database that was away.
	attempts = 3
)

// PlanArgs names a planning job.
type PlanArgs struct {
	JobID int64 `json:"job_id"`
}

// Kind is the job's name in the queue.
func (PlanArgs) Kind() string { return "plan" }

// Queue is the client of the queue.
type Queue struct {
	store  *store.Store
	client *river.Client[pgx.Tx]
	work   bool
}

// New makes a queue whose jobs planner carries out, a few at a time; with no
// planner it only hands jobs in.
func New(s *store.Store, planner *planning.Planner, log *slog.Logger) (*Queue, error) {
	cfg := &river.Config{Schema: store.QueueSchema, Logger: slog.New(&warnings{log.Handler()}), MaxAttempts: attempts,
		JobTimeout: timeout, RescueStuckJobsAfter: timeout + time.Minute, FetchCooldown: 100 * time.Millisecond, FetchPollInterval: 500 * time.Millisecond}
	if planner != nil {
		workers := river.NewWorkers()
		if err := river.AddWorkerSafely(workers, &planWorker{planner: planner, store: s, log: log}); err != nil {
			return nil, err
		}
		cfg.Workers, cfg.Queues = workers, map[string]river.QueueConfig{river.QueueDefault: {MaxWorkers: 1}}
	}
	client, err := river.NewClient(riverpgxv5.New(s.Pool()), cfg)
	if err != nil {
		return nil, err
	}
	return &Queue{s, client, planner != nil}, nil
}

// Start begins to take jobs.
func (q *Queue) Start(ctx context.Context) error {
	if !q.work {
		return nil
	}
	return q.client.Start(ctx)
}

// Stop hands jobs under way back to the queue and waits for their workers, up
// to ctx's deadline.
func (q *Queue) Stop(ctx context.Context) error {
	if !q.work {
		return nil
	}
	return q.client.StopAndCancel(ctx)
}

// Plan asks for a plan of a horizon.
func (q *Queue) Plan(ctx context.Context, campaign int64, h scheduler.Horizon, seed int64, actor string) (store.PlanJob, error) {
	return q.store.AddJob(ctx, campaign, h, seed, actor, func(ctx context.Context, tx pgx.Tx, id int64) error {
		_, err := q.client.InsertTx(ctx, tx, PlanArgs{id}, nil)
		return err
	})
}

// planWorker carries out planning jobs.
type planWorker struct {
	river.WorkerDefaults[PlanArgs]
	planner *planning.Planner
	store   *store.Store
	log     *slog.Logger
}

// Work makes the plan. A job that fails for good says why; one that is worth
// another try goes back to the queue, and so does one whose program is going
// down.
func (w *planWorker) Work(ctx context.Context, job *river.Job[PlanArgs]) error {
	err := w.run(ctx, job.Args.JobID)
	if err == nil || errors.Is(ctx.Err(), context.Canceled) {
		return err
	}
	w.log.Warn("planning failed", "job", job.Args.JobID, "attempt", job.Attempt, "error", err)
	lasting := scheduler.KindOf(err) == scheduler.ErrInvalid || scheduler.KindOf(err) == scheduler.ErrNotFound
	if !lasting && job.Attempt < attempts {
		return err
	}
	c, cancel := context.WithTimeout(context.WithoutCancel(ctx), 10*time.Second)
	defer cancel()
	if err := w.store.EndJob(c, job.Args.JobID, store.JobFailed, err.Error()); !errors.Is(err, scheduler.ErrNotFound) {
		return err
	}
	return nil // somebody else has ended it already
}

// run carries the job out. A panic is a failure like others: left to the queue
// it would end the last attempt without a word to who waits for the plan.
func (w *planWorker) run(ctx context.Context, id int64) (err error) {
	defer func() {
		if p := recover(); p != nil {
			w.log.Error("planning panicked", "job", id, "panic", p, "stack", string(debug.Stack()))
			err = fmt.Errorf("a fault of the program: %v", p)
		}
	}()
	return w.planner.Run(ctx, id)
}

// warnings lets through what is a warning or worse: the queue is chatty.
type warnings struct{ slog.Handler }

// Enabled reports whether a line of a level is written.
func (h *warnings) Enabled(ctx context.Context, l slog.Level) bool {
	return l >= slog.LevelWarn && h.Handler.Enabled(ctx, l)
}
