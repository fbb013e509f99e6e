package store

import (
	"context"
	"fmt"
	"time"

	"github.com/jackc/pgx/v5"

	"cadencewright/scheduler"
)

// Check is what a plan must pass at the moment it is issued: the campaign as
// it stands then, and the plan. It must be pure and quick, for it runs in the
// transaction.
type Check func(*scheduler.Campaign, *scheduler.Plan) error

const qCampaignLock = `select name from campaign where id = (select campaign_id from plan where id = $1) for no key update`
const qPlanLock = `select ` + planColumns + ` from plan p where p.id = $1 for update of p`
const qIssuedOverlap = `select p.id, lower(p.horizon), upper(p.horizon) from plan p where p.campaign_id = $1 and p.state = 'issued' and p.horizon && $2`
const qNextRevision = `select coalesce(max(revision), 0) + 1 from plan where campaign_id = $1 and horizon = $2`
const qSupersede = `update plan set state = 'superseded', superseded_at = @now, superseded_by = @by, version = version + 1 where id = @id`
const qIssue = `update plan set state = 'issued', revision = @revision, issued_at = @now, issued_by = @actor, version = version + 1 where id = @id`
const qOutdateDrafts = `update plan set version = version + 1 where campaign_id = @campaign and horizon = @horizon and state = 'draft' and id <> @id`

// Issue makes a draft the plan that the telescopes follow, in one transaction,
// one plan of a campaign at a time. The draft's version must be the given one,
// or the error is a *StaleError; since every other draft of the horizon gets a
// new version, of two people who issue different drafts at once one has to look
// again.
//
// The plan before it is superseded from now on. What has begun stays: a scan
// that is under way or over is live still, and a scan of the new plan that
// would overlap one under way is dropped. A scan that stands in both plans is
// carried over with its state and reports. Scans of the new plan that are over
// already were never given to anybody and are dropped too.
func (s *Store) Issue(ctx context.Context, plan, version int64, actor string) (PlanInfo, error) {
	return s.IssueChecked(ctx, plan, version, actor, nil)
}

// IssueChecked is Issue of a plan that passes a check of the campaign as it
// stands in the same transaction. An error of the check is returned as it is,
// and nothing is issued.
func (s *Store) IssueChecked(ctx context.Context, plan, version int64, actor string, check Check) (PlanInfo, error) {
	var info PlanInfo
	err := s.tx(ctx, func(t *tx) error {
		var err error
		if info, err = t.lockDraft(ctx, plan, version); err != nil {
			return err
		}
		if check != nil {
			if err := t.check(ctx, info, check); err != nil {
				return err
			}
		}
		if err := t.supersede(ctx, info); err != nil {
			return err
		}
		if info, err = t.issue(ctx, info, actor); err != nil {
			return err
		}
		if err := t.goLive(ctx, info); err != nil {
			return err
		}
		week := scheduler.WeekName(info.From)
		if err := t.note(ctx, info.CampaignID, actor, "issue", "plan of "+week, nil, map[string]any{"plan": plan, "revision": info.Revision}); err != nil {
			return err
		}
		return t.tell(ctx, Change{Kind: "issued", Campaign: info.CampaignID, Week: week, Plan: plan, Revision: info.Revision})
	})
	return info, err
}

// lockDraft takes the campaign, which makes issues of one campaign take turns
// and keeps it from changing, and then the draft.
func (t *tx) lockDraft(ctx context.Context, plan, version int64) (PlanInfo, error) {
	var name string
	if err := t.q.QueryRow(ctx, qCampaignLock, plan).Scan(&name); err != nil {
		return PlanInfo{}, missing(err, "there is no plan %d", plan)
	}
	info, err := t.planFacts(ctx, qPlanLock, plan)
	if err != nil {
		return info, err
	}
	if info.Version != version {
		return info, &StaleError{fmt.Sprintf("plan %d", plan), info.Version}
	}
	if info.State != PlanDraft {
		return info, scheduler.Errorf(scheduler.ErrConflict, "plan %d is %s already", plan, info.State)
	}
	return info, nil
}

// check gives the check what it wants.
func (t *tx) check(ctx context.Context, info PlanInfo, check Check) error {
	c, _, err := t.loadCampaign(ctx, info.CampaignID)
	if err != nil {
		return err
	}
	p := &scheduler.Plan{}
	if _, _, err := t.loadPlan(ctx, info.ID, p); err != nil {
		return err
	}
	return check(c, p)
}

// supersede ends the plan that is issued for the same horizon, if there is one.
// An issued plan of another horizon must not share time with this one.
func (t *tx) supersede(ctx context.Context, info PlanInfo) error {
	rows, err := t.q.Query(ctx, qIssuedOverlap, info.CampaignID, spanOf(info.From, info.To))
	if err != nil {
		return err
	}
	type issued struct {
		id       int64
		from, to time.Time
	}
	old, err := pgx.CollectRows(rows, func(r pgx.CollectableRow) (x issued, err error) {
		return x, r.Scan(&x.id, &x.from, &x.to)
	})
	if err != nil {
		return err
	}
	for _, x := range old {
		if !x.from.Equal(info.From) || !x.to.Equal(info.To) {
			return &FieldError{"horizon", fmt.Sprintf("plan %d is issued for %s to %s, which overlaps this plan's time", x.id,
				x.from.Format(time.RFC3339), x.to.Format(time.RFC3339)), scheduler.ErrConflict}
		}
		if _, err := t.q.Exec(ctx, qSupersede, pgx.NamedArgs{"id": x.id, "by": info.ID, "now": t.now}); err != nil {
			return err
		}
	}
	return nil
}

// issue gives the plan its revision.
func (t *tx) issue(ctx context.Context, info PlanInfo, actor string) (PlanInfo, error) {
	horizon := spanOf(info.From, info.To)
	if err := t.q.QueryRow(ctx, qNextRevision, info.CampaignID, horizon).Scan(&info.Revision); err != nil {
		return info, err
	}
	if _, err := t.q.Exec(ctx, qIssue, pgx.NamedArgs{"id": info.ID, "revision": info.Revision, "now": t.now, "actor": actor}); err != nil {
		return info, err
	}
	if _, err := t.q.Exec(ctx, qOutdateDrafts, pgx.NamedArgs{"campaign": info.CampaignID, "horizon": horizon, "id": info.ID}); err != nil {
		return info, err
	}
	info.State, info.IssuedAt, info.IssuedBy, info.Version = PlanIssued, t.now, actor, info.Version+1
	return info, nil
}

// The live scans of earlier plans of the horizon give their place to the same
// scan of the new plan, where that holds it. What was lost and can still be done
// is not carried: the new plan wants it tried again.
const qCarryFrom = `update scan o set live = false, carried_to = n.id, version = o.version + 1
from scan n, plan p
where n.plan_id = @plan and p.id = o.plan_id and p.campaign_id = @campaign and p.horizon = @horizon and o.live and o.plan_id <> @plan
    and o.telescope_id = n.telescope_id and o.span = n.span and o.source_id = n.source_id and o.receiver_id = n.receiver_id
    and (o.state <> 'lost' or upper(o.span) <= @now)`

// The new scan takes over what has become of the old. Of two that were lost and
// planned again, the last counts.
const qCarryTo = `update scan n set live = true, state = o.state, version = n.version + 1
from (select distinct on (carried_to) carried_to, state from scan where carried_to in (select id from scan where plan_id = @plan)
    order by carried_to, id desc) o where n.id = o.carried_to`
const qCarryOutcomes = `update outcome x set scan_id = o.carried_to from scan o, scan n where x.scan_id = o.id and o.carried_to = n.id and n.plan_id = @plan`
const qCarryHistory = `update history x set scan_id = o.carried_to from scan o, scan n where x.scan_id = o.id and o.carried_to = n.id and n.plan_id = @plan`

// Who holds the id of a scan of long ago is led to the last one in one step.
const qCarryOn = `update scan a set carried_to = b.carried_to from scan b, scan n
where a.carried_to = b.id and b.carried_to = n.id and n.plan_id = @plan`

// What has not begun and was not carried is no longer to be done.
const qRetire = `update scan o set live = false, state = 'dropped', version = o.version + 1
from plan p where p.id = o.plan_id and p.campaign_id = @campaign and p.horizon = @horizon and o.plan_id <> @plan
    and o.live and o.state = 'planned' and lower(o.span) > @now`

// The rest of the new plan goes live where it can still be done and nothing
// that is under way is in its place.
const qGoLive = `update scan n set live = true, version = n.version + 1
where n.plan_id = @plan and not n.live and upper(n.span) > @now and not exists (
    select from scan o where o.telescope_id = n.telescope_id and o.span && n.span and o.live and o.state in ('planned', 'observing') and o.id <> n.id)`
const qShutOut = `update scan n set state = 'dropped', version = n.version + 1 where n.plan_id = @plan and not n.live and n.state = 'planned'`

// goLive makes the new plan's scans what the telescopes do.
func (t *tx) goLive(ctx context.Context, info PlanInfo) error {
	args := pgx.NamedArgs{"plan": info.ID, "campaign": info.CampaignID, "horizon": spanOf(info.From, info.To), "now": t.now}
	for _, q := range []string{qCarryFrom, qCarryTo, qCarryOutcomes, qCarryHistory, qCarryOn, qRetire, qGoLive, qShutOut} {
		if _, err := t.q.Exec(ctx, q, args); err != nil {
			return err
		}
	}
	return nil
}
