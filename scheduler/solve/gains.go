package solve

import (
	"math"

	"cadencewright/scheduler"
	"cadencewright/scheduler/units"
)

// gains says what each candidate of one block would add to the score, the rest
// of the plan being as it is. For goals with one due window it is exact; for
// several windows, and for phases, the windows and orbits that the rest serves
// stay served as they are.
type gains struct {
	s     *state
	bi    int
	price []float64 // taken off, or nil
	scale []float64 // factor on each unit's gain, or nil: to vary a search
	held  []holding // what the rest of the plan earns, by unit
}

// holding is what a unit earns from the rest of the plan.
type holding struct {
	value float64
	at    float64 // of its event; NaN where it earns nothing
	times int     // phase: how often earned
}

// prepare works out the rest's holdings for all units. The block must be empty
// but for pins.
func (g *gains) prepare() {
	set := g.s.t.p.Units
	if len(g.held) < len(set.Units) {
		g.held = make([]holding, len(set.Units))
	}
	var list []taken
	done := map[int]bool{}
	for ci := range g.s.t.cells[g.bi] {
		src := g.s.t.cells[g.bi][ci].source
		if done[src] {
			continue
		}
		done[src] = true
		for _, ui := range set.BySource[src] {
			g.held[ui] = holding{at: math.NaN()}
		}
		for _, gi := range g.s.goals[src] {
			list = list[:0]
			g.s.earn.goal(gi, g.s.source[src], &list)
			for _, t := range list {
				h := &g.held[t.unit]
				h.value, h.at = h.value+t.value, t.event.at
				h.times++
			}
		}
	}
}

// cell leaves in out[k-from] the gain of the cell's scan at start k; all
// others are 0. It reports the range of starts with any gain.
func (g *gains) cell(c *cell, out []float64) (lo, hi int) {
	lo, hi = math.MaxInt, 0
	for i := 0; i < len(c.rows); {
		j := i
		for j < len(c.rows) && c.rows[j].group == c.rows[i].group {
			j++
		}
		g.goal(c, c.rows[i:j], out, &lo, &hi)
		i = j
	}
	return lo, hi
}

// goal adds the gain in one goal.
func (g *gains) goal(c *cell, rows []row, out []float64, lo, hi *int) {
	set := g.s.t.p.Units
	u := &set.Units[rows[0].unit]
	goal := &set.Goals[u.Goal]
	if g.price == nil && (goal.Kind == scheduler.KindOverlap || goal.Kind == scheduler.KindBandPair) {
		g.together(c, rows, out, lo, hi)
		return
	}
	if len(rows) == 1 {
		g.one(&rows[0], out, lo, hi, nil)
		return
	}
	// Several windows of one goal: the best of them at each start.
	best := map[int]float64{}
	for i := range rows {
		g.one(&rows[i], nil, lo, hi, best)
	}
	for k, v := range best {
		out[k] += v
	}
}

// one adds the gain of one unit to out, or offers it to best.
func (g *gains) one(r *row, out []float64, lo, hi *int, best map[int]float64) {
	h := g.held[r.unit]
	u := &g.s.t.p.Units.Units[r.unit]
	cost := g.cost(r, h)
	if r.max <= cost {
		return
	}
	f := g.factor(r.unit)
	full := u.Passages != nil && h.times >= u.N
	if full {
		return
	}
	for i, v := range r.val {
		if v -= cost; v <= 1e-9 {
			continue
		}
		k := r.from + i
		if u.Passages == nil && !g.spaced(u, g.minute(k)) {
			continue
		}
		*lo, *hi = min(*lo, k), max(*hi, k+1)
		if best != nil {
			best[k] = max(best[k], v*f)
		} else {
			out[k] += v * f
		}
	}
}

// cost is what has to be beaten for a gain in a unit.
func (g *gains) cost(r *row, h holding) float64 {
	u := &g.s.t.p.Units.Units[r.unit]
	cost := 0.0
	if u.Passages == nil {
		cost = h.value
		if r.load == 1 && u.Cap > 1 { // a share of what is held
			cost = h.value / float64(u.Cap)
		}
	}
	if g.price != nil {
		cost = math.Max(cost, float64(r.load)*g.price[r.unit])
	}
	return cost
}

func (g *gains) factor(unit int) float64 {
	if g.scale == nil {
		return 1
	}
	return g.scale[unit]
}

func (g *gains) minute(k int) float64 {
	return g.s.t.p.Blocks[g.bi].Minute(k, g.s.t.p.GridMin)
}

// spaced tells whether an event for a unit at an instant keeps half an interval
// from what the goal's other windows hold.
func (g *gains) spaced(u *units.Unit, at float64) bool {
	mine := g.s.t.p.Units.Goals[u.Goal].Units
	if len(mine) == 1 {
		return true
	}
	for _, oi := range mine {
		o := &g.s.t.p.Units.Units[oi]
		h := g.held[oi]
		if o.K == u.K || math.IsNaN(h.at) {
			continue
		}
		d := at - h.at
		if o.K > u.K {
			d = -d
		}
		if d < u.Every/2 {
			return false
		}
	}
	return true
}

// together is the true gain in an overlap or pair goal: the scan with partners
// that stand in the rest of the plan.
func (g *gains) together(c *cell, rows []row, out []float64, lo, hi *int) {
	set := g.s.t.p.Units
	u := &set.Units[rows[0].unit]
	goal := &set.Goals[u.Goal]
	b := &g.s.t.p.Blocks[g.bi]
	rest := g.s.source[c.source]
	both := set.Bands(goal, b.Telescope, b.Receivers[c.rx]) == goal.Wants() && goal.Kind == scheduler.KindBandPair
	if len(rest) == 0 && !both {
		return
	}
	held := g.s.earned[u.Goal]
	with := make([]*scan, 0, len(rest)+1)
	for _, run := range c.runs {
		for k := run.From; k < run.To; k++ {
			at := b.Minute(k, g.s.t.p.GridMin)
			if !both && !near(goal, rest, at, at+float64(c.steps*g.s.t.p.GridMin)) {
				continue
			}
			x := g.s.t.scan(g.bi, c.place, c.rx, k, c.steps, 0, -1)
			with = insert(with[:0], rest, x)
			if v := g.s.earn.goal(u.Goal, with, nil) - held; v > 1e-9 {
				out[k] += v * g.factor(rows[0].unit)
				*lo, *hi = min(*lo, k), max(*hi, k+1)
			}
		}
	}
}

// near tells whether any scan stands near enough to be a partner.
func near(g *units.Goal, rest []*scan, start, end float64) bool {
	for _, r := range rest {
		if g.Kind == scheduler.KindOverlap {
			if math.Min(end, r.endMin)-math.Max(start, r.startMin) >= g.OverlapMin-units.MS {
				return true
			}
		} else if math.Abs(start-r.startMin) <= g.WithinMin+units.MS {
			return true
		}
	}
	return false
}

// insert is list with x at its place, appended to dst.
func insert(dst, list []*scan, x *scan) []*scan {
	i := 0
	for i < len(list) && before(list[i], x) < 0 {
		i++
	}
	dst = append(dst, list[:i]...)
	dst = append(dst, x)
	return append(dst, list[i:]...)
}
