// Package planning makes plans: it reads a campaign as it stands at one
// moment, searches, has the result re-checked by code that shares nothing with
// the search, says why what is unmet is unmet, and stores the draft.
package planning

import (
	"context"
	"errors"
	"fmt"
	"math"
	"sync/atomic"
	"time"

	"cadencewright/scheduler"
	"cadencewright/scheduler/explain"
	"cadencewright/scheduler/feasible"
	"cadencewright/scheduler/solve"
	"cadencewright/scheduler/verify"
	"cadencewright/server/store"
)

// Store is what planning needs of the database.
type Store interface {
	LoadCampaign(ctx context.Context, id int64) (*scheduler.Campaign, store.CampaignRef, error)
	SavePlan(ctx context.Context, campaign int64, p *scheduler.Plan, meta store.PlanMeta, actor string) (int64, error)
	Job(ctx context.Context, id int64) (store.PlanJob, error)
	PlansOf(ctx context.Context, campaign int64, h scheduler.Horizon, limit int) ([]store.PlanInfo, error)
	Plan(ctx context.Context, id int64) (store.PlanInfo, *scheduler.Plan, []store.StoredScan, error)
	JobProgress(ctx context.Context, id, effort, of int64, score, bound float64) (stop bool, err error)
	EndJob(ctx context.Context, id int64, state, problem string) error
}

// Planner makes plans for jobs.
type Planner struct {
	Store   Store
	Effort  int64 // thousands of changes tried; 0: the solver's own
	Workers int
	// Clock tells the time, for weeks that have begun; nil: every week is
	// planned as if it were still to come.
	Clock func() time.Time
}

// heartbeat is how often a job that runs notes its progress.
const heartbeat = 400 * time.Millisecond

// Run carries a job out: it makes the plan and stores it as a draft. A job
// that is wanted to stop keeps its best plan so far; before there is one it is
// cancelled. A job that has ended already is left alone, so that it is safe to
// run one twice. After an error the job is still to end: the caller tries
// again or ends it with the reason.
func (p *Planner) Run(ctx context.Context, jobID int64) error {
	job, err := p.Store.Job(ctx, jobID)
	if errors.Is(err, scheduler.ErrNotFound) || err == nil && !job.Active() {
		return nil
	}
	if err != nil {
		return err
	}
	plan, meta, err := p.make(ctx, job)
	if errors.Is(err, feasible.ErrStopped) {
		return p.Store.EndJob(ctx, job.ID, store.JobCancelled, "stopped before the search began: there is no plan yet")
	}
	if err != nil {
		return err
	}
	_, err = p.Store.SavePlan(ctx, job.CampaignID, plan, meta, job.AskedBy)
	return err
}

// make searches for the job's plan, telling of its progress.
func (p *Planner) make(ctx context.Context, job store.PlanJob) (*scheduler.Plan, store.PlanMeta, error) {
	c, ref, err := p.Store.LoadCampaign(ctx, job.CampaignID)
	if err != nil {
		return nil, store.PlanMeta{}, err
	}
	c = c.Canonical() // the same plan however the rows came
	var stop atomic.Bool
	again, err := p.underWay(ctx, job)
	if err != nil {
		return nil, store.PlanMeta{}, err
	}
	var latest atomic.Pointer[solve.Progress]
	told := p.tell(ctx, job.ID, &latest, &stop)
	problem, result, err := p.search(ctx, c, job, again, &latest, &stop)
	// A stop may have come from progress that could not be noted.
	if terr := told(); terr != nil && (err == nil || errors.Is(err, feasible.ErrStopped)) {
		err = terr
	}
	if err != nil {
		return nil, store.PlanMeta{}, err
	}
	result.Plan.Unmet = explain.Unmet(problem, result.Plan)
	if err := p.recheck(ctx, c, result.Plan); err != nil {
		return nil, store.PlanMeta{}, err
	}
	return result.Plan, store.PlanMeta{CampaignRevision: ref.Revision, Seed: job.Seed, Effort: result.Effort, Status: string(result.Status), Job: job.ID}, nil
}

func (p *Planner) search(ctx context.Context, c *scheduler.Campaign, job store.PlanJob, again *solve.Replan, latest *atomic.Pointer[solve.Progress], stop *atomic.Bool) (*feasible.Problem, *solve.Result, error) {
	stopped := func() bool { return stop.Load() || ctx.Err() != nil }
	problem, err := feasible.BuildUntil(c, scheduler.Horizon{From: job.From, To: job.To}, stopped)
	if errors.Is(err, feasible.ErrStopped) && !stop.Load() {
		err = ctx.Err() // the program is going down: the job will be taken up again
	}
	if err != nil {
		return nil, nil, err
	}
	if len(problem.Blocks) == 0 {
		return nil, nil, scheduler.Errorf(scheduler.ErrInvalid, "no block starts in this week: bring in blocks first")
	}
	result, err := solve.Solve(problem, solve.Options{Seed: uint64(job.Seed), Effort: p.Effort, Workers: p.Workers, Replan: again,
		Stop:     stopped,
		Progress: func(q solve.Progress) { latest.Store(&q) }})
	if err == nil && ctx.Err() != nil && !stop.Load() {
		err = ctx.Err()
	}
	return problem, result, err
}

// tell notes the progress of a job at once and then at intervals, as a sign of
// life too, and learns whether it is wanted to stop. The function it returns
// ends that.
func (p *Planner) tell(ctx context.Context, job int64, latest *atomic.Pointer[solve.Progress], stop *atomic.Bool) func() error {
	done, ended := make(chan struct{}), make(chan error, 1)
	note := func() error {
		q := solve.Progress{Of: p.Effort, Bound: math.Inf(1)}
		if l := latest.Load(); l != nil {
			q = *l
		}
		if math.IsInf(q.Bound, 0) {
			q.Bound = 0
		}
		wanted, err := p.Store.JobProgress(ctx, job, q.Effort, q.Of, q.Score, q.Bound)
		if wanted {
			stop.Store(true)
		}
		return err
	}
	err := note() // before any work: a job may have been stopped while it was queued
	if err != nil {
		stop.Store(true)
	}
	go func() {
		tick := time.NewTicker(heartbeat)
		defer tick.Stop()
		for {
			select {
			case <-done:
				ended <- err
				return
			case <-tick.C:
				if e := note(); e != nil {
					err = e
					stop.Store(true) // the job was ended by somebody, or the database is away
				}
			}
		}
	}()
	return func() error { close(done); return <-ended }
}

// recheck refuses a plan that breaks a rule: a fault of the planner must not
// reach a telescope. A job that is wanted to stop is re-checked all the same;
// only the end of ctx ends that too.
func (p *Planner) recheck(ctx context.Context, c *scheduler.Campaign, plan *scheduler.Plan) error {
	report, err := verify.Check(c, plan, verify.Options{Workers: p.Workers, Stop: func() bool { return ctx.Err() != nil }})
	if errors.Is(err, verify.ErrStopped) {
		return ctx.Err()
	}
	if err != nil {
		return err
	}
	if !report.OK() {
		return fmt.Errorf("the plan that was made breaks %d rules, a fault of the program; the first: %s", len(report.Violations), report.Violations[0])
	}
	return nil
}
