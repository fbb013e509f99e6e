package planning

import (
	"context"
	"time"

	"cadencewright/scheduler"
	"cadencewright/scheduler/solve"
	"cadencewright/server/store"
)

// lead is how long before its start a scan is left alone: a new plan takes some
// minutes to be looked at and issued, and a telescope that is about to begin is
// not called back.
const lead = 15 * time.Minute

// mostPlans is how many plans of a week are looked through for the issued one.
const mostPlans = 200

// underWay says what is asked of a plan for a week that has begun: what has
// begun of the issued plan stays, and nothing is planned in the past. It is nil
// for a week that is still to come, which is planned from nothing.
func (p *Planner) underWay(ctx context.Context, job store.PlanJob) (*solve.Replan, error) {
	if p.Clock == nil {
		return nil, nil
	}
	at := p.Clock().Add(lead)
	if !at.After(job.From) || !at.Before(job.To) {
		return nil, nil
	}
	r := &solve.Replan{From: &scheduler.Plan{From: job.From, To: job.To}, At: at, Forgive: true}
	list, err := p.Store.PlansOf(ctx, job.CampaignID, scheduler.Horizon{From: job.From, To: job.To}, mostPlans)
	if err != nil {
		return nil, err
	}
	for _, info := range list {
		if info.State != store.PlanIssued {
			continue
		}
		_, plan, scans, err := p.Store.Plan(ctx, info.ID)
		if err != nil {
			return nil, err
		}
		r.From = standing(plan, scans)
		break
	}
	return r, nil
}

// standing is a plan without what was lost and what never went to a telescope.
func standing(plan *scheduler.Plan, scans []store.StoredScan) *scheduler.Plan {
	p := *plan
	p.Scans = nil
	for i := range scans {
		if s := scans[i].State; s != store.ScanLost && s != store.ScanDropped {
			p.Scans = append(p.Scans, scans[i].Scan)
		}
	}
	return &p
}
