package planning

import (
	"context"
	"strconv"
	"time"

	"cadencewright/scheduler"
	"cadencewright/server/runsheet"
	"cadencewright/server/store"
)

// SheetStore is what run sheets need of the database.
type SheetStore interface {
	LiveCampaign(ctx context.Context) (store.CampaignRef, error)
	LoadCampaign(ctx context.Context, id int64) (*scheduler.Campaign, store.CampaignRef, error)
	LiveScans(ctx context.Context, telescope string, from, to time.Time) ([]store.StoredScan, error)
	PlanFacts(ctx context.Context, id int64) (store.PlanInfo, error)
}

// Sheets makes run sheets of what is issued.
type Sheets struct{ Store SheetStore }

// Sheet is a telescope's run sheet of the night that begins on a local date.
func (s Sheets) Sheet(ctx context.Context, telescope, night string) (*runsheet.Sheet, error) {
	ref, err := s.Store.LiveCampaign(ctx)
	if err != nil {
		return nil, err
	}
	c, _, err := s.Store.LoadCampaign(ctx, ref.ID)
	if err != nil {
		return nil, err
	}
	tel := c.TelescopeByCode(telescope)
	if tel == nil {
		return nil, scheduler.Errorf(scheduler.ErrNotFound, "there is no telescope %s in the live campaign", telescope)
	}
	n, err := runsheet.NightNamed(tel, night)
	if err != nil {
		return nil, scheduler.Errorf(scheduler.ErrInvalid, "%w", err)
	}
	// A block that begins in the night may last into the next day.
	scans, err := s.Store.LiveScans(ctx, telescope, n.From, n.To.Add(24*time.Hour))
	if err != nil {
		return nil, err
	}
	in := runsheet.Input{Campaign: c, Telescope: telescope, Night: night}
	held := map[string]bool{}
	for i := range c.Blocks {
		if c.Blocks[i].Telescope == telescope && n.Holds(c.Blocks[i].Start) {
			held[c.Blocks[i].ID] = true
		}
	}
	plan := int64(0)
	for i := range scans {
		x := &scans[i]
		if !held[x.Block] || x.State == store.ScanDropped {
			continue
		}
		plan = max(plan, x.PlanID)
		in.Scans = append(in.Scans, runsheet.PlannedScan{Scan: x.Scan, ID: strconv.FormatInt(x.ID, 10), State: x.State, Notes: notes(x)})
	}
	if plan != 0 {
		info, err := s.Store.PlanFacts(ctx, plan)
		if err != nil {
			return nil, err
		}
		in.Plan = runsheet.PlanInfo{Week: scheduler.WeekName(info.From), Revision: info.Revision, IssuedAt: info.IssuedAt, IssuedBy: info.IssuedBy}
	}
	return runsheet.Build(in)
}

// notes are what has been reported of a scan already.
func notes(x *store.StoredScan) []string {
	if x.Outcome == nil {
		return nil
	}
	var list []string
	if x.Outcome.Cause != "" {
		list = append(list, x.Outcome.State+": "+x.Outcome.Cause)
	}
	if x.Outcome.Note != "" {
		list = append(list, x.Outcome.Note)
	}
	return list
}
