package explain

import (
	"math"
	"slices"

	"cadencewright/scheduler"
	"cadencewright/scheduler/feasible"
	"cadencewright/scheduler/units"
)

// planned is a scan of the plan on its block's grid.
type planned struct {
	scan         *scheduler.Scan
	block        int // into Problem.Blocks
	receiver     int // position in Block.Receivers
	start, steps int
	startMin     float64
	endMin       float64
	from, to     pose // at start and end
}

// pose is where a mount's axes stand, the azimuth that of the motor.
type pose struct{ axis1, axis2 float64 }

func newExplainer(p *feasible.Problem, plan *scheduler.Plan) *explainer {
	e := &explainer{Problem: p, index: scheduler.NewIndex(p.Campaign), planned: make([][]*planned, len(p.Blocks)),
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
			if x := e.place(bi, s); x != nil {
				e.planned[bi] = append(e.planned[bi], x)
				e.book(x)
			}
		}
	}
	for _, row := range e.planned {
		slices.SortStableFunc(row, func(a, b *planned) int { return a.start - b.start })
	}
	return e
}

// place puts a scan on its block's grid; nil where it does not belong there.
func (e *explainer) place(bi int, s *scheduler.Scan) *planned {
	b := &e.Blocks[bi]
	t := &e.Campaign.Telescopes[b.Telescope]
	x := &planned{scan: s, block: bi, receiver: -1, startMin: units.Minutes(s.Start), endMin: units.Minutes(s.End()),
		start: int(math.Round((units.Minutes(s.Start) - float64(b.FirstMin)) / float64(e.GridMin))), steps: s.Minutes / e.GridMin}
	for j, ri := range b.Receivers {
		if t.Receivers[ri].Code == s.Receiver {
			x.receiver = j
		}
	}
	pl := e.placeOf(b, s.Source)
	if x.receiver < 0 || pl == nil || x.start < pl.Lo || x.start+x.steps >= pl.Lo+len(pl.Axis1) {
		return nil
	}
	turns := 0.0
	if s.MotorAzDeg != nil {
		turns = 360 * math.Round((*s.MotorAzDeg-pl.Axis1[x.start-pl.Lo])/360)
	}
	x.from, x.to = poses(pl, x.start, x.steps, turns)
	return x
}

// poses are where the axes stand at the start and the end of a scan.
func poses(pl *feasible.Place, start, steps int, turnsDeg float64) (from, to pose) {
	i, j := start-pl.Lo, start+steps-pl.Lo
	return pose{pl.Axis1[i] + turnsDeg, pl.Axis2[i]}, pose{pl.Axis1[j] + turnsDeg, pl.Axis2[j]}
}

// placeOf is the place of a source in a block by its name, or nil.
func (e *explainer) placeOf(b *feasible.Block, source string) *feasible.Place {
	for i := range b.Places {
		if e.Campaign.Sources[b.Places[i].Source].Name == source {
			return &b.Places[i]
		}
	}
	return nil
}

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
