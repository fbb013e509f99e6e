package verify

import "cadencewright/scheduler"

// appraiser works out the best worth of a scan of every length and start in
// one block, at given prices.
type appraiser struct {
	model    *model
	partners *partners
	prices   []float64
	field    *field

	rows []row // a row for every length that has candidates

	info   []float64 // information before each step, of one source and receiver
	worth  []float64 // of one source, receiver and length, by start
	option []float64 // the best option of one group, by start
	view   *view
}

// row is the best worth of a scan of one length, in steps, by its start counted
// from the block's first instant.
type row struct {
	length int64
	best   []float64
}

// row is the row of a length, made if there is none.
func (a *appraiser) row(length int64) []float64 {
	for _, r := range a.rows {
		if r.length == length {
			return r.best
		}
	}
	a.rows = append(a.rows, row{length, make([]float64, a.field.steps+1)})
	return a.rows[len(a.rows)-1].best
}

// add appraises all candidates of a source.
func (a *appraiser) add(v *view) {
	a.view = v
	for _, r := range v.receivers {
		if !v.source.sees(r) {
			continue
		}
		a.addUpInfo(r)
		for _, length := range v.lengths {
			if starts := v.starts(length, r); len(starts) > 0 {
				a.addLength(r, length, starts)
			}
		}
	}
}

// addUpInfo sums the information up over the block's steps.
func (a *appraiser) addUpInfo(r *receiver) {
	v := a.view
	rad, stepS := &v.source.radiometer[r.index], v.grid.seconds()
	a.info = sized(a.info, v.steps+1)
	a.info[0] = 0
	usable := 1.0
	for i := range v.steps {
		if len(r.RFILoss) > 0 {
			usable = r.usable(v.hours[i])
		}
		a.info[i+1] = a.info[i] + rad.InfoRate(max(v.sinEl[2*i+1], lowestSinEl), usable)*stepS
	}
}

// Of one source and length only the best receiver at each start matters, since
// a block's programme takes one scan at a time; so does only the best source.

// addLength appraises the candidates of one source, receiver and length.
func (a *appraiser) addLength(r *receiver, length int64, starts runs) {
	first := a.field.first
	lo, hi := starts[0].lo-first, starts[len(starts)-1].hi-first
	a.worth, a.option = sized(a.worth, a.field.steps+1), sized(a.option, a.field.steps+1)
	clear(a.worth[lo : hi+1])
	for _, g := range a.view.source.groups {
		bands := g.goal.bands(r)
		if bands == 0 {
			continue
		}
		clear(a.option[lo : hi+1])
		if a.offer(g, bands, length, starts) {
			for i := lo; i <= hi; i++ {
				a.worth[i] += a.option[i]
			}
		}
	}
	row := a.row(length)
	for _, s := range starts {
		for i := s.lo - first; i <= s.hi-first; i++ {
			row[i] = max(row[i], a.worth[i])
		}
	}
}

// offer raises the best option of a group at every start; false where it has
// none.
func (a *appraiser) offer(g *group, bands uint32, length int64, starts runs) bool {
	switch g.goal.kind {
	case scheduler.KindCadence:
		a.offerCadence(g, length, starts)
	case scheduler.KindPhase:
		a.offerPhase(g.units[0], length, starts)
	case scheduler.KindOverlap:
		spare := floorDiv(msec(length)*a.field.grid-g.goal.overlap, a.field.grid)
		if spare < 0 {
			return false
		}
		lo, hi := starts[0].lo, starts[len(starts)-1].hi+spare
		common := a.partners.commonStarts(a.model, g.goal, a.field.telescope, bands, lo, hi)
		if len(common) == 0 {
			return false
		}
		a.offerOverlap(g, spare, starts, common)
	case scheduler.KindBandPair:
		a.offerPair(g, bands, starts)
	}
	return true
}

// take raises the option at a start to value - load·price, if that is more.
func (a *appraiser) take(start int64, value, load float64, u *unit) {
	i := start - a.field.first
	a.option[i] = max(a.option[i], value-load*a.prices[u.index])
}

// inTime are the starts from which, up to some steps later, the unit's
// timeliness is not 0.
func (u *unit) inTime(starts runs, later int64, grid msec) runs {
	return starts.within(ceilDiv(u.due-u.goal.early, grid)-later, ceilDiv(u.due+u.goal.every, grid)-1)
}

func (a *appraiser) offerCadence(g *group, length int64, starts runs) {
	for _, u := range g.units {
		for _, s := range u.inTime(starts, 0, a.field.grid) {
			for at := s.lo; at <= s.hi; at++ {
				i := at - a.field.first
				q := quality(a.info[i+length]-a.info[i], g.goal.toaUs)
				a.take(at, u.weight*u.timeliness(msec(at)*a.field.grid)*q, 1, u)
			}
		}
	}
}

// offerPhase offers the window to the starts that leave time enough in one of
// its passages.
func (a *appraiser) offerPhase(u *unit, length int64, starts runs) {
	long := msec(length) * a.field.grid
	lo, hi := msec(starts[0].lo)*a.field.grid, msec(starts[len(starts)-1].hi)*a.field.grid
	for _, p := range u.passages {
		needs := p.needs(u.goal.dwell)
		if p.leave < lo || p.enter > hi+long || long < needs {
			continue
		}
		// Late enough that the passage has begun, and early enough that it goes
		// on, for as long as is needed before the scan or the passage ends.
		from, to := ceilDiv(p.enter+needs-long, a.field.grid), floorDiv(p.leave-needs, a.field.grid)
		for _, s := range starts.within(from, to) {
			for at := s.lo; at <= s.hi; at++ {
				a.take(at, u.value, 1, u)
			}
		}
	}
}

// offerOverlap offers each window at the best instant from which the common
// time could run: the one next to when it is due, on either side.
func (a *appraiser) offerOverlap(g *group, spare int64, starts, common runs) {
	for _, u := range g.units {
		for _, s := range u.inTime(starts, spare, a.field.grid) {
			for at := s.lo; at <= s.hi; at++ {
				if v := u.bestIn(common, at, at+spare, a.field.grid); v > 0 {
					a.take(at, u.weight*v/float64(g.goal.count), 1, u)
				}
			}
		}
	}
}

// offerPair offers each window with a partner that starts later, with one that
// started earlier, and, where the receiver has both bands, alone.
func (a *appraiser) offerPair(g *group, bands uint32, starts runs) {
	grid := a.field.grid
	reach := floorDiv(g.goal.within, grid)
	other := a.partners.otherStarts(g.goal, bands, starts[0].lo-reach, starts[len(starts)-1].hi+reach)
	for _, u := range g.units {
		for _, s := range u.inTime(starts, reach, grid) {
			for at := s.lo; at <= s.hi; at++ {
				own := u.timeliness(msec(at) * grid)
				v := u.bestIn(other, at, at+reach, grid)
				if own > v && other.meets(at-reach, at) {
					v = own
				}
				a.take(at, u.weight*v/2, 1, u)
				if bands == g.goal.allBands() {
					a.take(at, u.weight*own, 2, u)
				}
			}
		}
	}
}

// bestIn is the largest timeliness at an instant of the set within [lo, hi].
// Timeliness rises to when the unit is due and falls after, so only the last
// instant before and the first after can be best.
func (u *unit) bestIn(set runs, lo, hi int64, grid msec) float64 {
	best := 0.0
	if x, ok := set.atOrBefore(min(hi, floorDiv(u.due, grid))); ok && x >= lo {
		best = u.timeliness(msec(x) * grid)
	}
	if x, ok := set.atOrAfter(max(lo, ceilDiv(u.due, grid))); ok && x <= hi {
		best = max(best, u.timeliness(msec(x)*grid))
	}
	return best
}

// sized is a slice of length n, reusing s where that is long enough.
func sized(s []float64, n int64) []float64 {
	if int64(cap(s)) < n {
		return make([]float64, n)
	}
	return s[:n]
}
