package store

import (
	"context"
	"fmt"

	"github.com/jackc/pgx/v5"

	"cadencewright/scheduler"
)

const qGoalAdd = `insert into goal (campaign_id, code, kind, position, source_id, bands, telescopes, priority,
    every_d, early_d, toa_us, reference, dwell_min, per_horizon, windows, count, overlap_min, within_h)
values (@campaign, @code, @kind, @position, @source, @bands, @telescopes, @priority,
    @every_d, @early_d, @toa_us, @reference, @dwell_min, @per_horizon, @windows, @count, @overlap_min, @within_h)`

// goalRow is a goal of any kind; the fields of other kinds are nil.
type goalRow struct {
	Code, Kind, Source string
	Bands, Telescopes  []string
	Priority           float64
	EveryD, EarlyD     *float64
	TOAUs              *float64
	Reference          *string
	DwellMin           *float64
	PerHorizon         *int
	Windows            []scheduler.PhaseWindow
	Count              *int
	OverlapMin         *float64
	WithinH            *float64
}

func goalArgs(kind string, g *scheduler.Goal) goalRow {
	return goalRow{Code: g.ID, Kind: kind, Source: g.Source, Bands: g.Bands, Telescopes: notNil(g.Telescopes), Priority: g.Priority}
}

// rowsOf are all goals of a campaign as rows.
func rowsOf(c *scheduler.Campaign) []goalRow {
	var rows []goalRow
	for i := range c.CadenceTargets {
		t := &c.CadenceTargets[i]
		r := goalArgs("cadence", &t.Goal)
		r.EveryD, r.EarlyD = &t.EveryD, &t.EarlyD
		if t.TOAUs != 0 {
			r.TOAUs = &t.TOAUs
		}
		rows = append(rows, r)
	}
	for i := range c.PhaseGoals {
		t := &c.PhaseGoals[i]
		r, ref := goalArgs("phase", &t.Goal), string(t.Reference)
		r.Reference, r.DwellMin, r.PerHorizon, r.Windows = &ref, &t.DwellMin, &t.PerHorizon, t.Windows
		rows = append(rows, r)
	}
	for i := range c.OverlapGoals {
		t := &c.OverlapGoals[i]
		r := goalArgs("overlap", &t.Goal)
		r.EveryD, r.Count, r.OverlapMin = &t.EveryD, &t.Count, &t.OverlapMin
		rows = append(rows, r)
	}
	for i := range c.BandPairGoals {
		t := &c.BandPairGoals[i]
		r := goalArgs("pair", &t.Goal)
		r.EveryD, r.WithinH = &t.EveryD, &t.WithinH
		rows = append(rows, r)
	}
	return rows
}

func (im *importer) goals(ctx context.Context, c *scheduler.Campaign) error {
	batch := &pgx.Batch{}
	for i, r := range rowsOf(c) {
		var windows any
		if r.Windows != nil {
			windows = r.Windows
		}
		batch.Queue(qGoalAdd, pgx.NamedArgs{"campaign": im.id, "code": r.Code, "kind": r.Kind, "position": i, "source": im.src[r.Source],
			"bands": r.Bands, "telescopes": r.Telescopes, "priority": r.Priority, "every_d": r.EveryD, "early_d": r.EarlyD, "toa_us": r.TOAUs,
			"reference": r.Reference, "dwell_min": r.DwellMin, "per_horizon": r.PerHorizon, "windows": windows, "count": r.Count,
			"overlap_min": r.OverlapMin, "within_h": r.WithinH})
	}
	return im.t.q.SendBatch(ctx, batch).Close()
}

const qGoals = `select g.code, g.kind, s.name as source, g.bands, g.telescopes, g.priority, g.every_d, g.early_d, g.toa_us, g.reference,
    g.dwell_min, g.per_horizon, g.windows, g.count, g.overlap_min, g.within_h
from goal g join source s on s.id = g.source_id where g.campaign_id = $1 order by g.position, g.id`

// loadGoals reads all goals into the campaign.
func (t *tx) loadGoals(ctx context.Context, id int64, c *scheduler.Campaign) error {
	rows, err := t.q.Query(ctx, qGoals, id)
	if err != nil {
		return err
	}
	list, err := pgx.CollectRows(rows, pgx.RowToStructByPos[goalRow])
	if err != nil {
		return err
	}
	for i := range list {
		if err := list[i].into(c); err != nil {
			return err
		}
	}
	return nil
}

func (r *goalRow) into(c *scheduler.Campaign) error {
	g := scheduler.Goal{ID: r.Code, Source: r.Source, Bands: r.Bands, Priority: r.Priority}
	if len(r.Telescopes) > 0 {
		g.Telescopes = r.Telescopes
	}
	switch r.Kind {
	case "cadence":
		t := scheduler.CadenceTarget{Goal: g, EveryD: *r.EveryD, EarlyD: *r.EarlyD}
		if r.TOAUs != nil {
			t.TOAUs = *r.TOAUs
		}
		c.CadenceTargets = append(c.CadenceTargets, t)
	case "phase":
		c.PhaseGoals = append(c.PhaseGoals, scheduler.PhaseGoal{Goal: g, Reference: scheduler.PhaseReference(*r.Reference), Windows: r.Windows,
			DwellMin: *r.DwellMin, PerHorizon: *r.PerHorizon})
	case "overlap":
		c.OverlapGoals = append(c.OverlapGoals, scheduler.OverlapGoal{Goal: g, EveryD: *r.EveryD, Count: *r.Count, OverlapMin: *r.OverlapMin})
	case "pair":
		c.BandPairGoals = append(c.BandPairGoals, scheduler.BandPairGoal{Goal: g, EveryD: *r.EveryD, WithinH: *r.WithinH})
	default:
		return fmt.Errorf("goal %s: kind %q", r.Code, r.Kind)
	}
	return nil
}
