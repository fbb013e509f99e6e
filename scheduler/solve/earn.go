package solve

import (
	"slices"

	"cadencewright/scheduler"
	"cadencewright/scheduler/units"
)

// event is something that can earn from one due window of a goal: a scan, or
// scans together. It counts at an instant and takes part with its members.
type event struct {
	at      float64
	quality float64
	a, b    *scan
	more    []*scan // of overlaps by more than two, the rest
}

func (e *event) each(f func(*scan)) {
	f(e.a)
	if e.b != nil {
		f(e.b)
	}
	for _, m := range e.more {
		f(m)
	}
}

// taken says which event earns from a unit, and how much.
type taken struct {
	unit  int
	event event
	value float64
}

// earner works out what the scans of one source earn from a goal at best. It
// is exact: for due windows a dynamic programme over windows and events, for
// phase windows a matching of scans to orbits.
type earner struct {
	events []event
	best   [][]float64 // by window, then event: of all windows and events up to there
	prev   []int       // by event: the last event that leaves half an interval
	match  [][2]int
	tried  []int
}

// value is the most that a goal can earn from the scans of its source, sorted
// by start.
func (e *earner) value(g *goal, scans []*scan) float64 {
	if len(scans) == 0 {
		return 0
	}
	if g.kind == scheduler.KindPhase {
		total := 0.0
		for i := range g.units {
			total += g.units[i].Value * float64(e.phase(g, &g.units[i], scans))
		}
		return total
	}
	if len(g.units) == 1 {
		return e.single(g, scans)
	}
	e.find(g, scans)
	if len(e.events) == 0 {
		return 0
	}
	return e.windows(g, nil)
}

// list appends to list the events that earn the goal's value.
func (e *earner) list(g *goal, scans []*scan, list []taken) []taken {
	if g.kind == scheduler.KindPhase {
		for i := range g.units {
			e.phase(g, &g.units[i], scans)
			for _, m := range e.match {
				x := scans[m[1]]
				list = append(list, taken{g.first + i, event{at: x.startMin, quality: 1, a: x}, g.units[i].Value})
			}
		}
		return list
	}
	if e.find(g, scans); len(e.events) > 0 {
		e.windows(g, &list)
	}
	return list
}

// single is value for a goal with one due window.
func (e *earner) single(g *goal, scans []*scan) float64 {
	u := &g.units[0]
	best := 0.0
	switch g.kind {
	case scheduler.KindCadence:
		for _, x := range scans {
			if g.of(x) != 0 {
				best = max(best, u.Timeliness(x.startMin)*g.quality(x))
			}
		}
	case scheduler.KindOverlap:
		for _, x := range scans {
			if v := u.Timeliness(x.startMin); v > best && e.overlaps(g, scans, x, nil) {
				best = v
			}
		}
	case scheduler.KindBandPair:
		for i, x := range scans {
			if v := u.Timeliness(x.startMin); v > best && e.paired(g, scans, i) {
				best = v
			}
		}
	}
	return u.Weight * best
}

// paired tells whether scan i is the later start of a pair, or all of one.
func (e *earner) paired(g *goal, scans []*scan, i int) bool {
	x := scans[i]
	mine := g.of(x)
	if mine == 0 || mine == g.wants {
		return mine != 0
	}
	for j := i - 1; j >= 0; j-- {
		if x.startMin-scans[j].startMin > g.within {
			return false
		}
		if mine|g.of(scans[j]) == g.wants {
			return true
		}
	}
	return false
}

// overlaps tells whether a common time begins with scan x; with out, its
// members are noted there.
func (e *earner) overlaps(g *goal, scans []*scan, x *scan, out *event) bool {
	if x.endMin-x.startMin < g.overlap {
		return false
	}
	for bands := g.of(x); bands != 0; bands &= bands - 1 {
		bit := bands & -bands
		n := 1
		var seen [8]int // telescopes; more are looked for in out
		seen[0] = x.tel
		ev := event{at: x.startMin, quality: 1, a: x}
		for _, o := range scans {
			if o.startMin > x.startMin {
				break
			}
			if o.tel == x.tel || o.endMin-x.startMin < g.overlap || g.of(o)&bit == 0 || slices.Contains(seen[:min(n, len(seen))], o.tel) {
				continue
			}
			if n < len(seen) {
				seen[n] = o.tel
			} else if ev.has(o.tel) {
				continue
			}
			if n == 1 {
				ev.b = o
			} else {
				ev.more = append(ev.more, o)
			}
			if n++; n == g.count {
				if out != nil {
					*out = ev
				}
				return true
			}
		}
	}
	return false
}

// has tells whether one of the event's scans is on a telescope.
func (e *event) has(tel int) bool {
	found := false
	e.each(func(x *scan) { found = found || x.tel == tel })
	return found
}

// find lists the goal's events by instant.
func (e *earner) find(g *goal, scans []*scan) {
	e.events = e.events[:0]
	for i, x := range scans {
		switch g.kind {
		case scheduler.KindCadence:
			if q := g.quality(x); q > 0 && g.of(x) != 0 {
				e.events = append(e.events, event{at: x.startMin, quality: q, a: x})
			}
		case scheduler.KindOverlap:
			var ev event
			if e.overlaps(g, scans, x, &ev) {
				e.events = append(e.events, ev)
			}
		case scheduler.KindBandPair:
			e.pairs(g, scans, i)
		}
	}
}

// pairs adds the events of a pair goal that count at scan i.
func (e *earner) pairs(g *goal, scans []*scan, i int) {
	x := scans[i]
	mine := g.of(x)
	if mine == 0 {
		return
	}
	if mine == g.wants {
		e.events = append(e.events, event{at: x.startMin, quality: 1, a: x})
		return
	}
	for j := i - 1; j >= 0 && x.startMin-scans[j].startMin <= g.within; j-- {
		if mine|g.of(scans[j]) == g.wants {
			e.events = append(e.events, event{at: x.startMin, quality: 1, a: x, b: scans[j]})
			if !g.entangled {
				return
			}
		}
	}
}

// windows serves the windows of a goal in order, the events of two windows at
// least half an interval apart.
func (e *earner) windows(g *goal, list *[]taken) float64 {
	if g.entangled && len(g.units) > 1 {
		return e.chains(g, list)
	}
	n, m := len(g.units), len(e.events)
	e.grow(n, m)
	for i, p := 0, -1; i < m; i++ {
		for p+1 < i && e.events[i].at-e.events[p+1].at >= g.every/2-units.MS/2 {
			p++
		}
		e.prev[i] = p
	}
	for w := range n {
		u := &g.units[w]
		for i := range m {
			top := 0.0
			if w > 0 {
				top = e.best[w-1][i]
			}
			if i > 0 {
				top = max(top, e.best[w][i-1])
			}
			if v := u.Weight * u.Timeliness(e.events[i].at) * e.events[i].quality; v > 0 {
				if p := e.prev[i]; w > 0 && p >= 0 {
					v += e.best[w-1][p]
				}
				top = max(top, v)
			}
			e.best[w][i] = top
		}
	}
	total := e.best[n-1][m-1]
	for w, i := n-1, m-1; list != nil && w >= 0 && i >= 0; {
		switch here := e.best[w][i]; {
		case here == 0:
			return total
		case w > 0 && e.best[w-1][i] == here:
			w--
		case i > 0 && e.best[w][i-1] == here:
			i--
		default:
			u, ev := &g.units[w], e.events[i]
			*list = append(*list, taken{g.first + w, ev, u.Weight * u.Timeliness(ev.at) * ev.quality})
			w, i = w-1, e.prev[i]
		}
	}
	return total
}

func (e *earner) grow(n, m int) {
	for len(e.best) < n {
		e.best = append(e.best, nil)
	}
	for w := range n {
		if len(e.best[w]) < m {
			e.best[w] = make([]float64, 2*m)
		}
	}
	if len(e.prev) < m {
		e.prev = make([]int, 2*m)
	}
}

// link is a sequence of windows served, for chains.
type link struct {
	value      float64
	window, ev int
	back       int // into the links before, or -1
}

// chains is windows for goals whose events may have scans in common. Of two
// sequences that end alike only the better is followed.
func (e *earner) chains(g *goal, list *[]taken) float64 {
	var links []link
	best := -1
	for w := range g.units {
		u := &g.units[w]
		for i := range e.events {
			v := u.Weight * u.Timeliness(e.events[i].at) * e.events[i].quality
			if v <= 0 {
				continue
			}
			top, back := 0.0, -1
			for li := range links {
				if l := &links[li]; l.window < w && l.value > top && e.follows(links, li, i, g.every) {
					top, back = l.value, li
				}
			}
			links = append(links, link{v + top, w, i, back})
			if best < 0 || links[len(links)-1].value > links[best].value {
				best = len(links) - 1
			}
		}
	}
	if best < 0 {
		return 0
	}
	for li := best; list != nil && li >= 0; li = links[li].back {
		u, ev := &g.units[links[li].window], e.events[links[li].ev]
		*list = append(*list, taken{g.first + links[li].window, ev, u.Weight * u.Timeliness(ev.at) * ev.quality})
	}
	return links[best].value
}

// follows tells whether event i may serve a window after a sequence.
func (e *earner) follows(links []link, li, i int, every float64) bool {
	if e.events[i].at-e.events[links[li].ev].at < every/2-units.MS/2 {
		return false
	}
	shared := false
	for ; li >= 0; li = links[li].back {
		e.events[links[li].ev].each(func(x *scan) { e.events[i].each(func(y *scan) { shared = shared || x == y }) })
	}
	return !shared
}
