package store

import (
	"context"
	"fmt"
	"time"

	"github.com/jackc/pgx/v5"
	"github.com/jackc/pgx/v5/pgtype"

	"cadencewright/scheduler"
)

const qPlanLock = `select ` + planColumns + ` from plan p where p.id = $1 for update of p`
const qIssuedNow = `select p.id from plan p where p.campaign_id = $1 and p.state = 'issued' and p.horizon && $2 for update`
const qHorizonOf = `select horizon from plan where id = $1`
const qNextRevision = `select coalesce(max(revision), 0) + 1 from plan where campaign_id = $1 and horizon = $2`
const qSupersede = `update plan set state = 'superseded', superseded_at = @now, superseded_by = @by, version = version + 1 where id = @id`
const qRetire = `update scan set live = false, state = 'dropped', version = version + 1
where plan_id = @plan and live and state = 'planned' and lower(span) > @now`
const qIssue = `update plan set state = 'issued', revision = @revision, issued_at = @now, issued_by = @actor, version = version + 1 where id = @id`

// A scan of the new plan is what the telescope does unless a scan of the old
// plan has begun and stays; one that the old plan has begun in just this way
// takes over its state as a reading.
const qGoLive = `update scan n set live = true where n.plan_id = @plan and not exists (
    select from scan o where o.live and o.plan_id <> @plan and o.telescope_id = n.telescope_id and o.span && n.span and o.state <> 'dropped')`
const qTakeState = `update scan n set state = o.state from scan o
where n.plan_id = @plan and not n.live and o.live and o.plan_id <> @plan and o.telescope_id = n.telescope_id
    and o.span = n.span and o.source_name = n.source_name and o.receiver = n.receiver`
const qShutOut = `update scan n set state = 'dropped' where n.plan_id = @plan and not n.live and n.state = 'planned'`
const qBumpCampaign = `update campaign set revision = revision + 1 where id = $1`

// Issue makes a draft the plan that the telescopes follow, in one transaction.
// The plan before it is superseded from now on; its scans that have begun
// stay. The draft's version must be the given one, or the error is a
// *StaleError.
func (s *Store) Issue(ctx context.Context, plan, version int64, actor string) (PlanInfo, error) {
	var info PlanInfo
	err := s.tx(ctx, func(t *tx) error {
		rows, err := t.q.Query(ctx, qPlanLock, plan)
		if err != nil {
			return err
		}
		if info, err = pgx.CollectExactlyOneRow(rows, scanPlanInfo); err != nil {
			return err
		}
		if info.Version != version {
			return &StaleError{fmt.Sprintf("plan %d", plan), info.Version}
		}
		if info.State != PlanDraft {
			return scheduler.Errorf(scheduler.ErrConflict, "plan %d is %s already", plan, info.State)
		}
		horizon := spanOf(info.From, info.To)
		if err := t.supersede(ctx, info, horizon); err != nil {
			return err
		}
		var revision int
		if err := t.q.QueryRow(ctx, qNextRevision, info.CampaignID, horizon).Scan(&revision); err != nil {
			return err
		}
		if _, err := t.q.Exec(ctx, qIssue, pgx.NamedArgs{"id": plan, "revision": revision, "now": t.now, "actor": actor}); err != nil {
			return err
		}
		for _, q := range []string{qGoLive, qTakeState, qShutOut} {
			if _, err := t.q.Exec(ctx, q, pgx.NamedArgs{"plan": plan}); err != nil {
				return err
			}
		}
		info.State, info.Revision, info.IssuedAt, info.IssuedBy, info.Version = PlanIssued, revision, t.now, actor, info.Version+1
		week := scheduler.WeekName(info.From)
		if err := t.note(ctx, info.CampaignID, actor, "issue", "plan of "+week, nil, map[string]any{"plan": plan, "revision": revision}); err != nil {
			return err
		}
		return t.tell(ctx, Change{Kind: "issued", Campaign: info.CampaignID, Week: week, Plan: plan, Revision: revision})
	})
	return info, err
}

// supersede ends the plan that is issued for the same horizon.
func (t *tx) supersede(ctx context.Context, info PlanInfo, horizon pgtype.Range[time.Time]) error {
	rows, err := t.q.Query(ctx, qIssuedNow, info.CampaignID, horizon)
	if err != nil {
		return err
	}
	old, err := pgx.CollectRows(rows, pgx.RowTo[int64])
	if err != nil {
		return err
	}
	for _, id := range old {
		var h pgtype.Range[time.Time]
		if err := t.q.QueryRow(ctx, qHorizonOf, id).Scan(&h); err != nil {
			return err
		}
		if !h.Lower.Equal(info.From) || !h.Upper.Equal(info.To) {
			return &FieldError{"horizon", fmt.Sprintf("plan %d is issued for %s to %s, which overlaps this plan's time", id,
				h.Lower.Format(time.RFC3339), h.Upper.Format(time.RFC3339)), scheduler.ErrConflict}
		}
		if _, err := t.q.Exec(ctx, qSupersede, pgx.NamedArgs{"id": id, "by": info.ID, "now": t.now}); err != nil {
			return err
		}
		if _, err := t.q.Exec(ctx, qRetire, pgx.NamedArgs{"plan": id, "now": t.now}); err != nil {
			return err
		}
	}
	return nil
}
