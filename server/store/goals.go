package store

import (
	"context"
	"fmt"

	"github.com/jackc/pgx/v5"

	"cadencewright/scheduler"
)

// goalRow is a goal of any kind; the columns of other kinds are nil.
type goalRow struct {
	Code       string
	Kind       string
	Source     string
	Bands      []string
	Priority   float64
	EveryD     *float64
	EarlyD     *float64
	TOAUs      *float64 `db:"toa_us"`
	Reference  *string
	DwellMin   *float64
	PerHorizon *int
	Count      *int
	OverlapMin *float64
	WithinH    *float64
	Telescopes []string
	Windows    []windowRow
}

// windowRow is a window of a phase goal.
type windowRow struct {
	From float64 `json:"from"`
	To   float64 `json:"to"`
	Need int     `json:"need"`
}

// goalRows are all goals of a campaign.
func goalRows(c *scheduler.Campaign) []goalRow {
	var rows []goalRow
	c.EachGoal(func(kind scheduler.GoalKind, i int, g *scheduler.Goal) {
		r := goalRow{Code: g.ID, Kind: string(kind), Source: g.Source, Bands: g.Bands, Priority: g.Priority, Telescopes: g.Telescopes}
		switch kind {
		case scheduler.KindCadence:
			t := &c.CadenceTargets[i]
			r.EveryD, r.EarlyD, r.TOAUs = &t.EveryD, &t.EarlyD, only(t.TOAUs != 0, t.TOAUs)
		case scheduler.KindPhase:
			t := &c.PhaseGoals[i]
			r.Reference, r.DwellMin, r.PerHorizon = (*string)(&t.Reference), &t.DwellMin, &t.PerHorizon
			for _, w := range t.Windows {
				r.Windows = append(r.Windows, windowRow(w))
			}
		case scheduler.KindOverlap:
			t := &c.OverlapGoals[i]
			r.EveryD, r.Count, r.OverlapMin = &t.EveryD, &t.Count, &t.OverlapMin
		case scheduler.KindBandPair:
			t := &c.BandPairGoals[i]
			r.EveryD, r.WithinH = &t.EveryD, &t.WithinH
		}
		rows = append(rows, r)
	})
	return rows
}

const qGoalAdd = `insert into goal (campaign_id, code, kind, source_id, bands, priority,
    every_d, early_d, toa_us, reference, dwell_min, per_horizon, count, overlap_min, within_h)
values (@campaign, @code, @kind, @source, @bands, @priority,
    @every_d, @early_d, @toa_us, @reference, @dwell_min, @per_horizon, @count, @overlap_min, @within_h) returning id`
const qGoalTelescopeAdd = `insert into goal_telescope (goal_id, number, campaign_id, telescope_id) values (@goal, @number, @campaign, @telescope)`
const qWindowAdd = `insert into phase_window (goal_id, number, from_cycle, to_cycle, need) values (@goal, @number, @from, @to, @need)`

func (im *importer) addGoals(ctx context.Context, c *scheduler.Campaign) error {
	rows, ids, batch := goalRows(c), map[string]int64{}, &pgx.Batch{}
	for i := range rows {
		r := &rows[i]
		batch.Queue(qGoalAdd, pgx.NamedArgs{"campaign": im.id, "code": r.Code, "kind": r.Kind, "source": im.sources[r.Source],
			"bands": r.Bands, "priority": r.Priority, "every_d": r.EveryD, "early_d": r.EarlyD, "toa_us": r.TOAUs,
			"reference": r.Reference, "dwell_min": r.DwellMin, "per_horizon": r.PerHorizon, "count": r.Count,
			"overlap_min": r.OverlapMin, "within_h": r.WithinH}).QueryRow(keep(func(id int64) { ids[r.Code] = id }))
	}
	if err := im.send(ctx, batch); err != nil {
		return err
	}
	batch = &pgx.Batch{}
	for i := range rows {
		r := &rows[i]
		for j, code := range r.Telescopes {
			batch.Queue(qGoalTelescopeAdd, pgx.NamedArgs{"goal": ids[r.Code], "number": j, "campaign": im.id, "telescope": im.telescopes[code]})
		}
		for j, w := range r.Windows {
			batch.Queue(qWindowAdd, pgx.NamedArgs{"goal": ids[r.Code], "number": j, "from": w.From, "to": w.To, "need": w.Need})
		}
	}
	return im.send(ctx, batch)
}

const qGoals = `select g.code, g.kind, s.name as source, g.bands, g.priority, g.every_d, g.early_d, g.toa_us, g.reference,
    g.dwell_min, g.per_horizon, g.count, g.overlap_min, g.within_h,
    array(select t.code from goal_telescope x join telescope t on t.id = x.telescope_id where x.goal_id = g.id order by x.number) as telescopes,
    (select coalesce(jsonb_agg(jsonb_build_object('from', w.from_cycle, 'to', w.to_cycle, 'need', w.need) order by w.number), '[]')
        from phase_window w where w.goal_id = g.id) as windows
from goal g join source s on s.id = g.source_id where g.campaign_id = $1 order by g.id`

func (t *tx) loadGoals(ctx context.Context, id int64, c *scheduler.Campaign) error {
	rows, err := t.q.Query(ctx, qGoals, id)
	if err != nil {
		return err
	}
	list, err := pgx.CollectRows(rows, pgx.RowToStructByName[goalRow])
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

// into adds the goal to its list in the campaign.
func (r *goalRow) into(c *scheduler.Campaign) error {
	g := scheduler.Goal{ID: r.Code, Source: r.Source, Bands: r.Bands, Telescopes: r.Telescopes, Priority: r.Priority}
	switch scheduler.GoalKind(r.Kind) {
	case scheduler.KindCadence:
		c.CadenceTargets = append(c.CadenceTargets, scheduler.CadenceTarget{Goal: g, EveryD: orZero(r.EveryD), EarlyD: orZero(r.EarlyD), TOAUs: orZero(r.TOAUs)})
	case scheduler.KindPhase:
		p := scheduler.PhaseGoal{Goal: g, Reference: scheduler.PhaseReference(orZero(r.Reference)), DwellMin: orZero(r.DwellMin), PerHorizon: orZero(r.PerHorizon)}
		for _, w := range r.Windows {
			p.Windows = append(p.Windows, scheduler.PhaseWindow(w))
		}
		c.PhaseGoals = append(c.PhaseGoals, p)
	case scheduler.KindOverlap:
		c.OverlapGoals = append(c.OverlapGoals, scheduler.OverlapGoal{Goal: g, Count: orZero(r.Count), OverlapMin: orZero(r.OverlapMin), EveryD: orZero(r.EveryD)})
	case scheduler.KindBandPair:
		c.BandPairGoals = append(c.BandPairGoals, scheduler.BandPairGoal{Goal: g, WithinH: orZero(r.WithinH), EveryD: orZero(r.EveryD)})
	default:
		return fmt.Errorf("goal %s is of kind %q, which this program does not know", r.Code, r.Kind)
	}
	return nil
}
