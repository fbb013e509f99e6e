package store

import (
	"context"
	"fmt"
	"time"

	"github.com/jackc/pgx/v5"
	"github.com/jackc/pgx/v5/pgtype"

	"cadencewright/scheduler"
)

// The states of a plan.
const (
	PlanDraft      = "draft"
	PlanIssued     = "issued"
	PlanSuperseded = "superseded"
)

// PlanInfo is what is known of a stored plan besides its content.
type PlanInfo struct {
	ID               int64
	CampaignID       int64
	From, To         time.Time
	State            string
	Revision         int   // counts the issued plans of a week from 1; 0: a draft
	Version          int64 // counts changes
	CampaignRevision int64 // what it was made from
	Score            float64
	Possible         float64
	Bound            float64
	Status           string // why the search ended
	Seed             int64
	Effort           int64
	MadeAt           time.Time
	MadeBy           string
	IssuedAt         time.Time // zero: never
	IssuedBy         string
	SupersededAt     time.Time // zero: not
	SupersededBy     int       // revision
}

// PlanMeta is how a plan was made.
type PlanMeta struct {
	CampaignRevision int64
	Seed             int64
	Effort           int64
	Status           string
	Job              int64 // plan_job that made it; 0: none
}

const qPlanAdd = `insert into plan (campaign_id, horizon, state, campaign_revision, score, possible, bound, prices, unmet, seed, effort, status, made_at, made_by)
values (@campaign, @horizon, 'draft', @revision, @score, @possible, @bound, @prices, @unmet, @seed, @effort, @status, @now, @actor) returning id`

const qJobDone = `update plan_job set state = 'done', plan_id = @plan, score = @score, bound = @bound, changed_at = @now
where id = @job and state in ('queued', 'running')`

// SavePlan stores a plan as a new draft. With a job in meta, the job is done in
// the same transaction.
func (s *Store) SavePlan(ctx context.Context, campaign int64, p *scheduler.Plan, meta PlanMeta, actor string) (int64, error) {
	var id int64
	err := s.tx(ctx, func(t *tx) error {
		err := t.q.QueryRow(ctx, qPlanAdd, pgx.NamedArgs{"campaign": campaign, "horizon": spanOf(p.From, p.To), "revision": meta.CampaignRevision,
			"score": p.Score, "possible": p.Possible, "bound": p.Bound, "prices": notNilMap(p.Certificate.Prices), "unmet": notNil(p.Unmet),
			"seed": meta.Seed, "effort": meta.Effort, "status": meta.Status, "now": t.now, "actor": actor}).Scan(&id)
		if err != nil {
			return err
		}
		if err := t.addScans(ctx, campaign, id, p.Scans); err != nil {
			return err
		}
		if meta.Job != 0 {
			if _, err := t.q.Exec(ctx, qJobDone, pgx.NamedArgs{"plan": id, "score": p.Score, "bound": p.Bound, "now": t.now, "job": meta.Job}); err != nil {
				return err
			}
		}
		if err := t.note(ctx, campaign, actor, "draft", fmt.Sprintf("plan %d of %s", id, scheduler.WeekName(p.From)), nil,
			map[string]any{"score": p.Score, "bound": p.Bound, "scans": len(p.Scans)}); err != nil {
			return err
		}
		return t.tell(ctx, Change{Kind: "draft", Campaign: campaign, Week: scheduler.WeekName(p.From), Plan: id})
	})
	return id, err
}

func notNilMap(m map[string]float64) map[string]float64 {
	if m == nil {
		return map[string]float64{}
	}
	return m
}

const qTelescopeIDs = `select code, id from telescope where campaign_id = $1`

// addScans writes the scans of a plan.
func (t *tx) addScans(ctx context.Context, campaign, plan int64, scans []scheduler.Scan) error {
	ids := map[string]int64{}
	rows, err := t.q.Query(ctx, qTelescopeIDs, campaign)
	if err != nil {
		return err
	}
	var code string
	var id int64
	if _, err := pgx.ForEachRow(rows, []any{&code, &id}, func() error { ids[code] = id; return nil }); err != nil {
		return err
	}
	cols := []string{"plan_id", "telescope_id", "block_code", "source_name", "receiver", "span", "minutes", "motor_az_deg", "pinned", "toa_us", "earns"}
	_, err = t.q.CopyFrom(ctx, pgx.Identifier{"scan"}, cols, pgx.CopyFromSlice(len(scans), func(i int) ([]any, error) {
		x := &scans[i]
		tel, ok := ids[x.Telescope]
		if !ok {
			return nil, &FieldError{"telescope", fmt.Sprintf("scan %d: there is no telescope %s", i, x.Telescope), scheduler.ErrInvalid}
		}
		return []any{plan, tel, x.Block, x.Source, x.Receiver, spanOf(x.Start, x.End()), x.Minutes, x.MotorAzDeg, x.Pinned, x.TOAUs, notNil(x.Earns)}, nil
	}))
	return err
}

const planColumns = `p.id, p.campaign_id, p.horizon, p.state, coalesce(p.revision, 0), p.version, p.campaign_revision, p.score, p.possible, p.bound,
    p.status, p.seed, p.effort, p.made_at, p.made_by, p.issued_at, coalesce(p.issued_by, ''), p.superseded_at,
    coalesce((select o.revision from plan o where o.id = p.superseded_by), 0)`

func scanPlanInfo(r pgx.CollectableRow) (PlanInfo, error) {
	var x PlanInfo
	var h pgtype.Range[time.Time]
	var issued, superseded *time.Time
	err := r.Scan(&x.ID, &x.CampaignID, &h, &x.State, &x.Revision, &x.Version, &x.CampaignRevision, &x.Score, &x.Possible, &x.Bound,
		&x.Status, &x.Seed, &x.Effort, &x.MadeAt, &x.MadeBy, &issued, &x.IssuedBy, &superseded, &x.SupersededBy)
	x.From, x.To = h.Lower, h.Upper
	if issued != nil {
		x.IssuedAt = *issued
	}
	if superseded != nil {
		x.SupersededAt = *superseded
	}
	return x, err
}

const qPlansOf = `select ` + planColumns + ` from plan p where p.campaign_id = $1 and p.horizon = $2 order by p.id desc limit $3`

// PlansOf lists the plans of a horizon, the newest first.
func (s *Store) PlansOf(ctx context.Context, campaign int64, h scheduler.Horizon, limit int) ([]PlanInfo, error) {
	rows, err := s.pool.Query(ctx, qPlansOf, campaign, spanOf(h.From, h.To), min(max(limit, 1), 200))
	if err != nil {
		return nil, fault("plans", err)
	}
	list, err := pgx.CollectRows(rows, scanPlanInfo)
	return list, classify(err)
}

const qPlan = `select ` + planColumns + ` from plan p where p.id = $1`
const qPlanContent = `select p.prices, p.unmet, c.name from plan p join campaign c on c.id = p.campaign_id where p.id = $1`
const qPlanScans = `select ` + scanColumns + ` from scan s join telescope t on t.id = s.telescope_id join plan p on p.id = s.plan_id
left join lateral (select * from outcome o where o.scan_id = s.id order by o.id desc limit 1) o on true
where s.plan_id = $1 order by lower(s.span), s.block_code, s.id`

// Plan reads a whole plan: its facts, its content, and its scans with their
// states in the order of the content's.
func (s *Store) Plan(ctx context.Context, id int64) (PlanInfo, *scheduler.Plan, []StoredScan, error) {
	var info PlanInfo
	var scans []StoredScan
	p := &scheduler.Plan{}
	err := s.snapshot(ctx, func(t *tx) error {
		rows, err := t.q.Query(ctx, qPlan, id)
		if err != nil {
			return err
		}
		if info, err = pgx.CollectExactlyOneRow(rows, scanPlanInfo); err != nil {
			return err
		}
		if err := t.q.QueryRow(ctx, qPlanContent, id).Scan(&p.Certificate.Prices, &p.Unmet, &p.Campaign); err != nil {
			return err
		}
		rows, err = t.q.Query(ctx, qPlanScans, id)
		if err != nil {
			return err
		}
		scans, err = pgx.CollectRows(rows, scanStored)
		return err
	})
	p.From, p.To, p.Score, p.Possible, p.Bound = info.From, info.To, info.Score, info.Possible, info.Bound
	p.Certificate.Bound = info.Bound
	for i := range scans {
		p.Scans = append(p.Scans, scans[i].Scan)
	}
	return info, p, scans, err
}

// PlanFacts is what is known of a plan, without its content.
func (s *Store) PlanFacts(ctx context.Context, id int64) (PlanInfo, error) {
	rows, err := s.pool.Query(ctx, qPlan, id)
	if err != nil {
		return PlanInfo{}, fault("plan", err)
	}
	info, err := pgx.CollectExactlyOneRow(rows, scanPlanInfo)
	return info, classify(err)
}
