package explain

import (
	"math"

	"cadencewright/scheduler/feasible"
	"cadencewright/scheduler/units"
)

// Every option is looked at, on the full grid: a week has some thousand for a
// unit, and each costs little. The figures are then exact, and "there is no"
// means that.

// cadence explains a unit that one scan of enough precision serves.
func (q *question) cadence() {
	lo, hi := q.unit.Window()
	best := q.newChoice()
	for _, block := range byBlock(q.reaches(q.allBands(), lo, hi)) {
		before := best.possible
		tooClose, top, topOf := 0, 0.0, option{}
		for i := range block {
			q.each(&block[i], func(o *option) {
				timely := q.unit.Timeliness(o.startMin)
				info := o.place.InfoOf(o.receiver, o.start, o.steps)
				if timely == 0 {
					return
				}
				if info > top { // told even where it is enough, but too near a neighbour
					top, topOf = info, *o
				}
				quality := units.Quality(info, q.goal.TOAUs)
				switch {
				case quality == 0:
				case !q.spaced(o.startMin):
					tooClose++
				default:
					best.consider(q.unit.Weight*timely*quality, o)
				}
			})
		}
		switch {
		case best.possible > before:
			best.blocks++
		case tooClose > 0:
			q.tooClose(false)
		case top > 0:
			q.imprecise(top, topOf)
		}
	}
	best.tell()
}

// imprecise notes that no scan of a block reaches half of the wanted quality.
func (q *question) imprecise(info float64, o option) {
	us := 1e6 / math.Sqrt(info)
	q.found(Precision, info, func(n int) string {
		return sentence("Precision out of reach in %s: %.3g us at best (%s), %g us wanted; a scan counts from %.3g us.",
			blocks(n), us, q.titled(&o), q.goal.TOAUs, q.goal.TOAUs*math.Sqrt2)
	})
}

// byBlock groups reaches, which come in the order of blocks.
func byBlock(list []reach) [][]reach {
	var groups [][]reach
	for i, r := range list {
		if i == 0 || r.block != list[i-1].block {
			groups = append(groups, nil)
		}
		last := len(groups) - 1
		groups[last] = append(groups[last], r)
	}
	return groups
}

// A later window's scan may not be moved to make room for an earlier one here:
// the plan's own scans are taken as they stand.

// spaced reports whether an instant keeps half an interval from those at which
// the plan earns the neighbouring windows of the goal.
func (q *question) spaced(at float64) bool {
	for _, ui := range q.goal.Units {
		u := &q.Units.Units[ui]
		if ui == q.ui || len(q.earners[ui]) == 0 {
			continue
		}
		apart := at - q.instant(ui)
		if u.K > q.unit.K {
			apart = -apart
		}
		if apart < u.Every/2-units.MS {
			return false
		}
	}
	return true
}

// instant is when the plan earns a due window: the latest start of the scans
// that share it, which is a scan's start, the start of the common time or the
// later start.
func (q *question) instant(ui int) float64 {
	at := math.Inf(-1)
	for _, x := range q.earners[ui] {
		at = max(at, x.startMin)
	}
	return at
}

// tooClose notes that a block's scans, or all together, come too soon before or
// after those of a neighbouring window.
func (q *question) tooClose(whole bool) {
	var other *units.Unit
	at, gap := 0.0, 0
	for _, ui := range q.goal.Units {
		u := &q.Units.Units[ui]
		if ui == q.ui || len(q.earners[ui]) == 0 {
			continue
		}
		if d := max(u.K-q.unit.K, q.unit.K-u.K); other == nil || d < gap {
			other, at, gap = u, q.instant(ui), d
		}
	}
	if other == nil {
		return
	}
	from := sentence("is less than half of the interval (%.2f d) from that of %s, which the plan has at %s.", other.Every/2/1440, other.Name, clock(at))
	if whole {
		q.foundWhole(TooClose, "Every possible start %s", from)
		return
	}
	q.found(TooClose, 0, func(n int) string { return sentence("Every possible start in %s %s", blocks(n), from) })
}

// phase explains a window of orbital phase.
func (q *question) phase() {
	if len(q.unit.Passages) == 0 {
		q.noPassage()
		return
	}
	open := q.openPassages()
	if len(open) == 0 {
		q.foundWhole(NoPassage, "The orbit passes %s %s in this horizon in orbits that are still wanted, and the plan uses all of them.",
			q.window(), times(len(q.unit.Passages)))
		return
	}
	best := q.newChoice()
	for _, block := range byBlock(q.reaches(q.allBands(), math.Inf(-1), math.Inf(1))) {
		before := best.possible
		miss := near{short: math.Inf(1)}
		for i := range block {
			q.each(&block[i], func(o *option) {
				if o.place.InfoOf(o.receiver, o.start, o.steps) <= 0 {
					return
				}
				for _, p := range around(open, o.startMin, o.endMin) {
					if p.Covers(o.startMin, o.endMin, q.goal.DwellMin) {
						best.consider(q.unit.Value, o)
						return
					}
					miss.take(p, o, q.goal.DwellMin)
				}
			})
		}
		switch {
		case best.possible > before:
			best.blocks++
		case !math.IsInf(miss.short, 1):
			q.missed(&q.Blocks[block[0].block], miss)
		}
	}
	best.tell()
}

// Where the plan earns the unit in some orbits already, those are spoken for.

// openPassages are those that no scan of the plan that earns the unit covers.
func (q *question) openPassages() []units.Passage {
	var open []units.Passage
	for _, p := range q.unit.Passages {
		had := false
		for _, x := range q.earners[q.ui] {
			had = had || p.Covers(x.startMin, x.endMin, q.goal.DwellMin)
		}
		if !had {
			open = append(open, p)
		}
	}
	return open
}

// around are the passages, in time order, that a scan touches, and the one on
// either side.
func around(list []units.Passage, start, end float64) []units.Passage {
	lo := 0
	for lo+1 < len(list) && list[lo+1].Leave < start {
		lo++
	}
	hi := lo
	for hi < len(list) && list[hi].Enter <= end {
		hi++
	}
	return list[lo:min(hi+1, len(list))]
}

// near is the passage that scans of a block come nearest to covering.
type near struct {
	short   float64 // minutes that are missing
	in      float64 // minutes in the window; negative: how far off
	passage units.Passage
	option  option
}

func (m *near) take(p units.Passage, o *option, dwellMin float64) {
	in := math.Min(o.endMin, p.Leave) - math.Max(o.startMin, p.Enter)
	if short := math.Min(dwellMin, p.Leave-p.Enter) - in; short < m.short {
		*m = near{short, in, p, *o}
	}
}

// missed notes by how much a block misses the window.
func (q *question) missed(b *feasible.Block, m near) {
	needs := math.Min(q.goal.DwellMin, m.passage.Leave-m.passage.Enter)
	q.found(Phase, -m.short, func(n int) string {
		text := sentence("No scan in %s is at %s for %.0f min: ", blocks(n), q.window(), needs)
		passage := sentence("the passage from %s to %s", clock(m.passage.Enter), clock(m.passage.Leave))
		if m.in > 0 {
			return text + sentence("at best for %.0f min of %s (%s).", m.in, passage, q.titled(&m.option))
		}
		how := "before the first scan"
		if m.option.endMin <= m.passage.Enter {
			how = "after the last scan"
		}
		return text + sentence("the nearest is %s, %s %s that is possible in %s.", passage, span(-m.in), how, block(q, b))
	})
}
