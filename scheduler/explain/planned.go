package explain

import (
	"cmp"
	"math"
	"slices"
	"time"

	"cadencewright/astro/sky"
	"cadencewright/scheduler"
	"cadencewright/scheduler/almanac"
	"cadencewright/scheduler/feasible"
	"cadencewright/scheduler/units"
)

// planned is a scan of the plan in its block.
type planned struct {
	scan     *scheduler.Scan
	receiver int // position in Block.Receivers; -1: none of them
	startMin float64
	endMin   float64
	from, to pose // at start and end
}

// pose is where a mount's axes stand, the azimuth that of the motor.
type pose struct{ axis1, axis2 float64 }

func newExplainer(p *feasible.Problem, plan *scheduler.Plan) *explainer {
	e := &explainer{Problem: p, plan: plan, index: scheduler.NewIndex(p.Campaign), planned: make([][]*planned, len(p.Blocks)),
		earners: make([][]*planned, len(p.Units.Units)), total: make([]float64, len(p.Units.Units))}
	byID := map[string]int{}
	for i := range p.Blocks {
		byID[p.Campaign.Blocks[p.Blocks[i].Index].ID] = i
		at := map[int]*feasible.Reject{}
		for j := range p.Blocks[i].Rejects {
			at[p.Blocks[i].Rejects[j].Source] = &p.Blocks[i].Rejects[j]
		}
		e.rejects = append(e.rejects, at)
	}
	for i := range plan.Scans {
		s := &plan.Scans[i]
		if bi, ok := byID[s.Block]; ok {
			if x := e.place(&p.Blocks[bi], s); x != nil {
				e.planned[bi] = append(e.planned[bi], x)
				e.book(x)
			}
		}
	}
	for _, row := range e.planned {
		slices.SortStableFunc(row, func(a, b *planned) int { return cmp.Compare(a.startMin, b.startMin) })
	}
	return e
}

// place finds out where the telescope stands at the ends of a scan; nil where
// the campaign does not have its source. The scan may be of any source and any
// length, also where the planner has nothing to gain: it takes its time.
func (e *explainer) place(b *feasible.Block, s *scheduler.Scan) *planned {
	t, source := &e.Campaign.Telescopes[b.Telescope], e.index.Source(s.Source)
	if source == nil || s.Minutes <= 0 {
		return nil
	}
	track, err := almanac.Track(t, source, e.Campaign.DUT1S, s.Start, s.End(), time.Duration(e.GridMin)*time.Minute)
	if err != nil {
		return nil
	}
	x := &planned{scan: s, receiver: -1, startMin: units.Minutes(s.Start), endMin: units.Minutes(s.End())}
	for j, ri := range b.Receivers {
		if t.Receivers[ri].Code == s.Receiver {
			x.receiver = j
		}
	}
	first, last := track[0], track[len(track)-1]
	switch t.Mount {
	case scheduler.MountEquatorial:
		x.from, x.to = pose{first.HADeg, first.DecDeg}, pose{last.HADeg, last.DecDeg}
	case scheduler.MountTransit:
		x.from, x.to = pose{0, first.DecDeg}, pose{0, last.DecDeg}
	default:
		az := make([]float64, len(track))
		for i := range track {
			az[i] = track[i].AzDeg
		}
		az = sky.UnwrapDeg(az, az)
		turns := 0.0
		if s.MotorAzDeg != nil {
			turns = 360 * math.Round((*s.MotorAzDeg-az[0])/360)
		}
		x.from, x.to = pose{az[0] + turns, first.ElDeg}, pose{az[len(az)-1] + turns, last.ElDeg}
	}
	return x
}

// poses are where the axes stand at the start and the end of a scan.
func poses(pl *feasible.Place, start, steps int, turnsDeg float64) (from, to pose) {
	i, j := start-pl.Lo, start+steps-pl.Lo
	return pose{pl.Axis1[i] + turnsDeg, pl.Axis2[i]}, pose{pl.Axis1[j] + turnsDeg, pl.Axis2[j]}
}

// A reason compares what a unit would earn with what other scans do earn, so
// the plan's own earnings are booked as they are listed; whether they are right
// is for a check to say.

// book notes what a scan earns.
func (e *explainer) book(x *planned) {
	for _, earn := range x.scan.Earns {
		if ui := e.Units.ByName(earn.Unit); ui >= 0 {
			e.earners[ui] = append(e.earners[ui], x)
			e.total[ui] += earn.Value
		}
	}
}

// loss is what the plan would earn less without some scans: their own part,
// and for units that several scans share all of it.
func (e *explainer) loss(scans []*planned) float64 {
	sum, whole := 0.0, map[int]bool{}
	for _, x := range scans {
		for _, earn := range x.scan.Earns {
			ui := e.Units.ByName(earn.Unit)
			switch {
			case ui < 0:
			case e.Units.Goals[e.Units.Units[ui].Goal].Kind == scheduler.KindPhase:
				sum += earn.Value
			case !whole[ui]:
				whole[ui] = true
				sum += e.total[ui]
			}
		}
	}
	return sum
}
