package solve

import (
	"slices"

	"cadencewright/scheduler"
	"cadencewright/scheduler/feasible"
	"cadencewright/scheduler/units"
)

// fill works out the rows of a cell: for each unit of its source, the most
// that a scan can be worth to it at each start.
func (t *table) fillRows(bi int, c *cell) {
	b, set := &t.p.Blocks[bi], t.p.Units
	for _, ui := range set.BySource[c.source] {
		u := &set.Units[ui]
		g := &set.Goals[u.Goal]
		bands := set.Bands(g, b.Telescope, b.Receivers[c.rx])
		if bands == 0 {
			continue
		}
		switch g.Kind {
		case scheduler.KindCadence:
			t.cadence(b, c, ui)
		case scheduler.KindPhase:
			t.phase(b, c, ui)
		case scheduler.KindOverlap:
			t.overlap(b, c, ui, bands)
		case scheduler.KindBandPair:
			t.pair(b, c, ui, bands)
		}
	}
	slices.SortStableFunc(c.rows, func(x, y row) int { return x.group - y.group })
	for i := range c.rows {
		if i == 0 || c.rows[i].group != c.rows[i-1].group {
			c.goals++
		}
	}
}

// add appends a row made by value, cut to where it is above 0.
func (t *table) add(c *cell, ui, load int, value func(start int) float64) {
	first, last := c.runs[0].From, c.runs[len(c.runs)-1].To
	r := row{unit: ui, group: t.p.Units.Units[ui].Group, load: load}
	// Values are worked out in a buffer and kept no longer than they must be:
	// over weeks, most of the memory is theirs.
	if len(t.scratch) < last-first {
		t.scratch = make([]float64, last-first)
	}
	vals := t.scratch[:last-first]
	clear(vals)
	lo, hi := len(vals), 0
	for _, run := range c.runs {
		for k := run.From; k < run.To; k++ {
			if v := value(k); v > 0 {
				vals[k-first] = v
				lo, hi = min(lo, k-first), k-first+1
				r.max = max(r.max, v)
			}
		}
	}
	if lo < hi {
		r.from, r.val = first+lo, slices.Clone(vals[lo:hi])
		c.rows = append(c.rows, r)
	}
}

// outside tells whether all starts of a cell lie outside [from, to] minutes.
func (t *table) outside(b *feasible.Block, c *cell, from, to float64) bool {
	g := t.p.GridMin
	return b.Minute(c.runs[len(c.runs)-1].To-1, g) < from || b.Minute(c.runs[0].From, g) > to
}

func (t *table) cadence(b *feasible.Block, c *cell, ui int) {
	u := &t.p.Units.Units[ui]
	if from, to := u.Window(); t.outside(b, c, from, to) {
		return
	}
	pl, toa := &b.Places[c.place], t.p.Units.Goals[u.Goal].TOAUs
	t.add(c, ui, 1, func(k int) float64 {
		v := u.Timeliness(b.Minute(k, t.p.GridMin))
		if v == 0 {
			return 0
		}
		return u.Weight * v * units.Quality(pl.InfoOf(c.rx, k, c.steps), toa)
	})
}

func (t *table) phase(b *feasible.Block, c *cell, ui int) {
	u := &t.p.Units.Units[ui]
	dwell := t.p.Units.Goals[u.Goal].DwellMin
	g := t.p.GridMin
	from, to := b.Minute(c.runs[0].From, g), b.Minute(c.runs[len(c.runs)-1].To-1+c.steps, g)
	var near []units.Passage
	for _, p := range u.Passages {
		if p.Leave > from && p.Enter < to {
			near = append(near, p)
		}
	}
	if len(near) == 0 {
		return
	}
	t.add(c, ui, 1, func(k int) float64 {
		start, end := b.Minute(k, g), b.Minute(k+c.steps, g)
		for _, p := range near {
			if p.Covers(start, end, dwell) {
				return u.Value
			}
		}
		return 0
	})
}

// overlap values a share of the best timeliness that a common time beginning
// within the scan can have, over the instants at which enough other telescopes
// could be under way in one band.
func (t *table) overlap(b *feasible.Block, c *cell, ui int, bands units.BandSet) {
	u := &t.p.Units.Units[ui]
	g := &t.p.Units.Goals[u.Goal]
	span := t.slack(c.steps, g.OverlapMin)
	from, to := u.Window()
	if span < 0 || t.outside(b, c, from-float64(span*t.p.GridMin), to) {
		return
	}
	lo := c.runs[0].From
	n := c.runs[len(c.runs)-1].To - lo + span
	tick := t.tick(b)
	best := make([]float64, n)
	for i := range best {
		if at := lo + i + tick; at < t.clockLen && t.covered(u.Goal, bands, b.Telescope, g.Count-1, at) {
			best[i] = u.Timeliness(float64(t.clockFrom + at*t.p.GridMin))
		}
	}
	windowMax(best, span)
	t.add(c, ui, 1, func(k int) float64 { return u.Weight * best[k-lo] / float64(g.Count) })
}

// covered tells whether at an instant a common time could begin with need
// other telescopes in one of the bands.
func (t *table) covered(goal int, bands units.BandSet, tel, need, at int) bool {
	for ; bands != 0; bands &= bands - 1 {
		n := 0
		for other := range t.p.Campaign.Telescopes {
			if other == tel {
				continue
			}
			if m := t.cover[coverKey{goal, bands & -bands, other}]; m != nil && m[at] {
				n++
			}
		}
		if n >= need {
			return true
		}
	}
	return false
}

// pair values half the best timeliness with a partner in the other band, later
// or earlier, and all of it for a scan that has both bands.
func (t *table) pair(b *feasible.Block, c *cell, ui int, bands units.BandSet) {
	u := &t.p.Units.Units[ui]
	g := &t.p.Units.Goals[u.Goal]
	span := int((g.WithinMin + units.MS) / float64(t.p.GridMin))
	from, to := u.Window()
	if t.outside(b, c, from-float64(span*t.p.GridMin), to) {
		return
	}
	v := func(k int) float64 { return u.Timeliness(b.Minute(k, t.p.GridMin)) }
	other := g.Wants() &^ bands
	if bands == g.Wants() {
		t.add(c, ui, 2, func(k int) float64 { return u.Weight * v(k) })
		other = bands
	}
	tick, lo := t.tick(b), c.runs[0].From
	n := c.runs[len(c.runs)-1].To - lo
	later, earlier := make([]float64, n+span), make([]float64, n+span)
	for i := range n + span {
		if at := lo + i + tick; at < t.clockLen && t.begins(u.Goal, other, at) {
			later[i] = u.Timeliness(float64(t.clockFrom + at*t.p.GridMin))
		}
		if at := lo + i + tick - span; at >= 0 && t.begins(u.Goal, other, at) {
			earlier[i] = 1
		}
	}
	windowMax(later, span)
	windowMax(earlier, span)
	t.add(c, ui, 1, func(k int) float64 {
		best := later[k-lo]
		if earlier[k-lo] > 0 {
			best = max(best, v(k))
		}
		return u.Weight * best / 2
	})
}

// begins tells whether a scan in one of the bands could start at an instant.
func (t *table) begins(goal int, bands units.BandSet, at int) bool {
	for ; bands != 0; bands &= bands - 1 {
		if m := t.begin[beginKey{goal, bands & -bands}]; m != nil && m[at] {
			return true
		}
	}
	return false
}

// windowMax replaces x[i] by the largest of x[i] to x[i+span], cut at the end.
func windowMax(x []float64, span int) {
	for width := 1; width < span+1; {
		move := min(width, span+1-width)
		for i := 0; i+move < len(x); i++ {
			x[i] = max(x[i], x[i+move])
		}
		width += move
	}
}
