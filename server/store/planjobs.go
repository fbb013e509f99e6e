package store

import (
	"context"
	"errors"
	"fmt"
	"time"

	"github.com/jackc/pgx/v5"
	"github.com/jackc/pgx/v5/pgtype"

	"cadencewright/scheduler"
)

// The states of a planning job.
const (
	JobQueued    = "queued"
	JobRunning   = "running"
	JobDone      = "done"
	JobFailed    = "failed"
	JobCancelled = "cancelled"
)

// PlanJob is a planning job as people see it.
type PlanJob struct {
	ID         int64
	CampaignID int64
	From, To   time.Time
	State      string
	Effort     int64
	EffortOf   int64
	Score      float64
	Bound      *float64
	Seed       int64
	PlanID     int64  // 0: none yet
	Problem    string // why it failed
	StopWanted bool
	AskedBy    string
	AskedAt    time.Time
	ChangedAt  time.Time
}

// Active tells whether the job is still to end.
func (j *PlanJob) Active() bool { return j.State == JobQueued || j.State == JobRunning }

const jobColumns = `id, campaign_id, horizon, state, effort, effort_of, score, bound, seed, coalesce(plan_id, 0), problem, stop_wanted, asked_by, asked_at, changed_at`

func scanJob(r pgx.CollectableRow) (PlanJob, error) {
	var j PlanJob
	var h pgtype.Range[time.Time]
	err := r.Scan(&j.ID, &j.CampaignID, &h, &j.State, &j.Effort, &j.EffortOf, &j.Score, &j.Bound, &j.Seed, &j.PlanID, &j.Problem,
		&j.StopWanted, &j.AskedBy, &j.AskedAt, &j.ChangedAt)
	j.From, j.To = h.Lower, h.Upper
	return j, err
}

// Enqueue hands a job to the queue in the transaction that makes it.
type Enqueue = func(ctx context.Context, tx pgx.Tx, job int64) error

const qJobAdd = `insert into plan_job (campaign_id, horizon, state, seed, asked_by, asked_at, changed_at)
values (@campaign, @horizon, 'queued', @seed, @actor, @now, @now) returning ` + jobColumns

// A running job notes its progress many times a minute. One that has been
// silent for jobSilence is dead: it must not keep its week from being planned.
const jobSilence = time.Minute
const qJobsDead = `update plan_job set state = 'failed', problem = 'the program that worked on it ended', changed_at = $2
where campaign_id = $1 and state = 'running' and changed_at < $3`

// AddJob makes a planning job and hands it to the queue by enqueue, in one
// transaction. A week has at most one job under way: a second is a conflict.
func (s *Store) AddJob(ctx context.Context, campaign int64, h scheduler.Horizon, seed int64, actor string, enqueue Enqueue) (PlanJob, error) {
	if !h.From.Before(h.To) {
		return PlanJob{}, &FieldError{"to", "the end is not after the start", scheduler.ErrInvalid}
	}
	var j PlanJob
	err := s.tx(ctx, func(t *tx) error {
		var name string
		var revision int64
		if err := t.q.QueryRow(ctx, qPlanCampaign, campaign).Scan(&name, &revision); err != nil {
			return missing(err, "there is no campaign %d", campaign)
		}
		if _, err := t.q.Exec(ctx, qJobsDead, campaign, t.now, t.now.Add(-jobSilence)); err != nil {
			return err
		}
		rows, err := t.q.Query(ctx, qJobAdd, pgx.NamedArgs{"campaign": campaign, "horizon": spanOf(h.From, h.To), "seed": seed, "actor": actor, "now": t.now})
		if err != nil {
			return err
		}
		if j, err = pgx.CollectExactlyOneRow(rows, scanJob); err != nil {
			return err
		}
		if err := t.note(ctx, campaign, actor, "plan", "week "+scheduler.WeekName(h.From), nil, map[string]int64{"job": j.ID}); err != nil {
			return err
		}
		if err := t.tellJob(ctx, campaign, h.From, j.ID); err != nil {
			return err
		}
		return enqueue(ctx, t.q, j.ID)
	})
	return j, err
}

func (t *tx) tellJob(ctx context.Context, campaign int64, from time.Time, job int64) error {
	return t.tell(ctx, Change{Kind: "job", Campaign: campaign, Week: scheduler.WeekName(from), Job: job})
}

const qJob = `select ` + jobColumns + ` from plan_job where id = $1`
const qJobLast = `select ` + jobColumns + ` from plan_job where campaign_id = $1 and horizon = $2 order by id desc limit 1`

// Job is one job.
func (s *Store) Job(ctx context.Context, id int64) (PlanJob, error) {
	rows, err := s.pool.Query(ctx, qJob, id)
	if err != nil {
		return PlanJob{}, fault("job", err)
	}
	j, err := pgx.CollectExactlyOneRow(rows, scanJob)
	return j, missing(err, "there is no planning job %d", id)
}

// LastJob is the newest job of a horizon, or nil.
func (s *Store) LastJob(ctx context.Context, campaign int64, h scheduler.Horizon) (*PlanJob, error) {
	rows, err := s.pool.Query(ctx, qJobLast, campaign, spanOf(h.From, h.To))
	if err != nil {
		return nil, fault("job", err)
	}
	list, err := pgx.CollectRows(rows, scanJob)
	if err != nil || len(list) == 0 {
		return nil, classify(err)
	}
	return &list[0], nil
}

const qJobProgress = `update plan_job set state = 'running', effort = @effort, effort_of = @of, score = @score, bound = @bound, changed_at = @now
where id = @id and state in ('queued', 'running') returning stop_wanted, lower(horizon), campaign_id`

// JobProgress notes how far a job is, and tells whether it is wanted to stop.
// A bound of 0 is none yet. A job that is not under way is ErrNotFound.
func (s *Store) JobProgress(ctx context.Context, id, effort, of int64, score, bound float64) (stop bool, err error) {
	err = s.tx(ctx, func(t *tx) error {
		var from time.Time
		var campaign int64
		err := t.q.QueryRow(ctx, qJobProgress, pgx.NamedArgs{"id": id, "effort": effort, "of": of, "score": score,
			"bound": only(bound > 0, bound), "now": t.now}).Scan(&stop, &from, &campaign)
		if err != nil {
			return missing(err, "planning job %d is not under way", id)
		}
		return t.tellJob(ctx, campaign, from, id)
	})
	return stop, err
}

const qJobEnd = `update plan_job set state = @state, problem = @problem, changed_at = @now
where id = @id and state in ('queued', 'running') returning lower(horizon), campaign_id`

// EndJob ends a job that made no plan: failed with its reason, or cancelled. A
// job that is not under way is ErrNotFound.
func (s *Store) EndJob(ctx context.Context, id int64, state, problem string) error {
	if state != JobFailed && state != JobCancelled {
		return fmt.Errorf("planning job %d cannot end as %q without a plan", id, state)
	}
	return s.tx(ctx, func(t *tx) error {
		var from time.Time
		var campaign int64
		err := t.q.QueryRow(ctx, qJobEnd, pgx.NamedArgs{"id": id, "state": state, "problem": problem, "now": t.now}).Scan(&from, &campaign)
		if err != nil {
			return missing(err, "planning job %d is not under way", id)
		}
		return t.tellJob(ctx, campaign, from, id)
	})
}

const qJobStop = `update plan_job set stop_wanted = true where id = @id and state in ('queued', 'running') returning lower(horizon), campaign_id`

// StopJob asks a job to stop and keep its best plan so far. A job that is not
// under way is ErrNotFound.
func (s *Store) StopJob(ctx context.Context, id int64, actor string) error {
	return s.tx(ctx, func(t *tx) error {
		var from time.Time
		var campaign int64
		if err := t.q.QueryRow(ctx, qJobStop, pgx.NamedArgs{"id": id}).Scan(&from, &campaign); err != nil {
			return missing(err, "planning job %d is not under way", id)
		}
		if err := t.note(ctx, campaign, actor, "stop", fmt.Sprintf("planning job %d", id), nil, nil); err != nil {
			return err
		}
		return t.tellJob(ctx, campaign, from, id)
	})
}

const qJobDone = `update plan_job set state = 'done', plan_id = @plan, score = @score, bound = @bound, changed_at = @now
where id = @job and state in ('queued', 'running') returning id`
const qJobState = `select state from plan_job where id = $1`

// jobDone ends a job with its plan; a job that has ended already is a conflict.
func (t *tx) jobDone(ctx context.Context, job, plan int64, p *scheduler.Plan) error {
	err := t.q.QueryRow(ctx, qJobDone, pgx.NamedArgs{"plan": plan, "score": p.Score, "bound": p.Bound, "now": t.now, "job": job}).Scan(&job)
	if !errors.Is(err, pgx.ErrNoRows) {
		return err
	}
	var state string
	if err := t.q.QueryRow(ctx, qJobState, job).Scan(&state); err != nil {
		return missing(err, "there is no planning job %d", job)
	}
	return scheduler.Errorf(scheduler.ErrConflict, "planning job %d has ended already: it is %s", job, state)
}
