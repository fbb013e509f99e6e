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
	CampaignRevision int64 // 0: the campaign as it stands now
	Seed             int64
	Effort           int64
	Status           string
	Job              int64 // plan_job that made it; 0: none
}

const qPlanCampaign = `select name, revision from campaign where id = $1`
const qPlanAdd = `insert into plan (campaign_id, horizon, state, campaign_revision, score, possible, bound, prices, unmet, seed, effort, status, made_at, made_by)
values (@campaign, @horizon, 'draft', @revision, @score, @possible, @bound, @prices, @unmet, @seed, @effort, @status, @now, @actor) returning id`

// SavePlan stores a plan as a new draft. With a job in meta, the job is done in
// the same transaction; a job that has ended already is a conflict, and then
// nothing is stored. A plan that names things which the campaign has not is
// invalid.
func (s *Store) SavePlan(ctx context.Context, campaign int64, p *scheduler.Plan, meta PlanMeta, actor string) (int64, error) {
	if !p.From.Before(p.To) {
		return 0, &FieldError{"to", "the plan ends before it begins", scheduler.ErrInvalid}
	}
	var id int64
	err := s.tx(ctx, func(t *tx) error {
		var err error
		if id, err = t.addPlan(ctx, campaign, p, meta, actor); err != nil {
			return err
		}
		week := scheduler.WeekName(p.From)
		if meta.Job != 0 {
			if err := t.jobDone(ctx, meta.Job, id, p); err != nil {
				return err
			}
			if err := t.tell(ctx, Change{Kind: "job", Campaign: campaign, Week: week, Job: meta.Job}); err != nil {
				return err
			}
		}
		if err := t.note(ctx, campaign, actor, "draft", fmt.Sprintf("plan %d of %s", id, week), nil,
			map[string]any{"score": p.Score, "bound": p.Bound, "scans": len(p.Scans)}); err != nil {
			return err
		}
		return t.tell(ctx, Change{Kind: "draft", Campaign: campaign, Week: week, Plan: id})
	})
	return id, err
}

// addPlan writes the plan and its scans.
func (t *tx) addPlan(ctx context.Context, campaign int64, p *scheduler.Plan, meta PlanMeta, actor string) (id int64, err error) {
	var name string
	var revision int64
	if err := t.q.QueryRow(ctx, qPlanCampaign, campaign).Scan(&name, &revision); err != nil {
		return 0, missing(err, "there is no campaign %d", campaign)
	}
	if p.Campaign != name {
		return 0, &FieldError{"campaign", fmt.Sprintf("the plan is for campaign %q, not for %q", p.Campaign, name), scheduler.ErrInvalid}
	}
	if meta.CampaignRevision != 0 {
		revision = min(revision, meta.CampaignRevision)
	}
	prices := p.Certificate.Prices
	if prices == nil {
		prices = map[string]float64{}
	}
	err = t.q.QueryRow(ctx, qPlanAdd, pgx.NamedArgs{"campaign": campaign, "horizon": spanOf(p.From, p.To), "revision": revision,
		"score": p.Score, "possible": p.Possible, "bound": p.Bound, "prices": prices, "unmet": unmetDocs(p.Unmet),
		"seed": meta.Seed, "effort": meta.Effort, "status": meta.Status, "now": t.now, "actor": actor}).Scan(&id)
	if err != nil {
		return 0, err
	}
	names, err := t.namesOf(ctx, campaign, revision)
	if err != nil {
		return 0, err
	}
	return id, t.addScans(ctx, campaign, id, names, p.Scans)
}

// addScans writes the scans of a plan. What they refer to is found before the
// first is sent: an error in the middle would reach the caller as the
// database's.
func (t *tx) addScans(ctx context.Context, campaign, plan int64, of *names, scans []scheduler.Scan) error {
	refs := make([]scanRefs, len(scans))
	for i := range scans {
		var err error
		if refs[i], err = of.scan(i, &scans[i]); err != nil {
			return err
		}
	}
	columns := []string{"campaign_id", "plan_id", "telescope_id", "block_id", "source_id", "receiver_id", "ephemeris_id",
		"block_code", "source_name", "receiver", "span", "minutes", "motor_az_deg", "pinned", "toa_us", "earns"}
	_, err := t.q.CopyFrom(ctx, pgx.Identifier{"scan"}, columns, pgx.CopyFromSlice(len(scans), func(i int) ([]any, error) {
		x, id := &scans[i], refs[i]
		return []any{campaign, plan, id.telescope, id.block, id.source, id.receiver, id.ephemeris,
			x.Block, x.Source, x.Receiver, spanOf(x.Start, x.End()), x.Minutes, x.MotorAzDeg, x.Pinned, x.TOAUs, earningDocs(x.Earns)}, nil
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
	x.From, x.To, x.IssuedAt, x.SupersededAt = h.Lower, h.Upper, orZero(issued), orZero(superseded)
	return x, err
}

const qPlansOf = `select ` + planColumns + ` from plan p where p.campaign_id = $1 and p.horizon = $2 order by p.id desc limit $3`

// PlansOf lists the plans of a horizon, the newest first, at most 200.
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
const qPlanScans = `select ` + scanColumns + scanTables + ` where s.plan_id = $1 order by s.id`

// Plan reads a whole plan: its facts, its content, and its scans with their
// states in the order of the content's.
func (s *Store) Plan(ctx context.Context, id int64) (PlanInfo, *scheduler.Plan, []StoredScan, error) {
	var info PlanInfo
	var scans []StoredScan
	p := &scheduler.Plan{}
	err := s.snapshot(ctx, func(t *tx) error {
		var err error
		info, scans, err = t.loadPlan(ctx, id, p)
		return err
	})
	return info, p, scans, err
}

func (t *tx) loadPlan(ctx context.Context, id int64, p *scheduler.Plan) (info PlanInfo, scans []StoredScan, err error) {
	if info, err = t.planFacts(ctx, qPlan, id); err != nil {
		return info, nil, err
	}
	var unmet []unmetDoc
	if err := t.q.QueryRow(ctx, qPlanContent, id).Scan(&p.Certificate.Prices, &unmet, &p.Campaign); err != nil {
		return info, nil, err
	}
	rows, err := t.q.Query(ctx, qPlanScans, id)
	if err != nil {
		return info, nil, err
	}
	if scans, err = pgx.CollectRows(rows, scanStored); err != nil {
		return info, nil, err
	}
	p.From, p.To, p.Score, p.Possible, p.Bound = info.From, info.To, info.Score, info.Possible, info.Bound
	p.Certificate.Bound, p.Unmet = info.Bound, unmetOf(unmet)
	for i := range scans {
		p.Scans = append(p.Scans, scans[i].Scan)
	}
	return info, scans, nil
}

// planFacts runs a query for one plan's facts.
func (t *tx) planFacts(ctx context.Context, query string, id int64) (PlanInfo, error) {
	rows, err := t.q.Query(ctx, query, id)
	if err != nil {
		return PlanInfo{}, err
	}
	info, err := pgx.CollectExactlyOneRow(rows, scanPlanInfo)
	return info, missing(err, "there is no plan %d", id)
}

// PlanFacts is what is known of a plan, without its content.
func (s *Store) PlanFacts(ctx context.Context, id int64) (info PlanInfo, err error) {
	err = s.snapshot(ctx, func(t *tx) error {
		info, err = t.planFacts(ctx, qPlan, id)
		return err
	})
	return info, err
}
