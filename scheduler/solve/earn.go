package solve

import (
	"math"
	"slices"

	"cadencewright/scheduler"
	"cadencewright/scheduler/units"
)

// scan is a scan under consideration, with all that earning needs.
type scan struct {
	block, place int
	rx           int // position in Block.Receivers
	start, steps int // on the block's grid
	turn         int // whole turns added to the unwrapped azimuth
	pin          int // into Block.Pins, or -1

	source, tel, receiver int // indices into the campaign
	startMin, endMin      float64
	info                  float64
}

// event is something that can earn from one due window of a goal: a scan, or
// scans together. It counts at an instant and takes part with its members.
type event struct {
	at      float64
	quality float64
	members [2]*scan // of overlaps by more than two the rest is in more
	more    []*scan
}

func (e *event) each(f func(*scan)) {
	for _, m := range e.members {
		if m != nil {
			f(m)
		}
	}
	for _, m := range e.more {
		f(m)
	}
}

// taken says which event earns from a unit; orbit for phase windows.
type taken struct {
	unit  int
	event event
	value float64
}

// earner works out what scans of one source earn from its goals, at best.
// It is exact: for due windows a dynamic programme over windows and events, for
// phase windows a matching of scans to orbits.
type earner struct {
	set    *units.Set
	events []event
	f      [][]float64
	back   [][][2]int
}

// goal is the most that a goal can earn from the scans of its source, sorted
// by start. With list, the events that earn it are appended to it.
func (e *earner) goal(gi int, scans []*scan, list *[]taken) float64 {
	g := &e.set.Goals[gi]
	if len(g.Units) == 0 {
		return 0
	}
	if g.Kind == scheduler.KindPhase {
		total := 0.0
		for _, ui := range g.Units {
			total += e.phase(ui, scans, list)
		}
		return total
	}
	e.events = e.events[:0]
	e.find(g, scans)
	if len(e.events) == 0 {
		return 0
	}
	if len(g.Units) == 1 {
		return e.single(g.Units[0], list)
	}
	return e.windows(g, list)
}

// single is the best event for a goal with one window.
func (e *earner) single(ui int, list *[]taken) float64 {
	u := &e.set.Units[ui]
	best, which := 0.0, -1
	for i := range e.events {
		if v := u.Weight * u.Timeliness(e.events[i].at) * e.events[i].quality; v > best {
			best, which = v, i
		}
	}
	if which >= 0 && list != nil {
		*list = append(*list, taken{ui, e.events[which], best})
	}
	return best
}

// find lists the goal's events.
func (e *earner) find(g *units.Goal, scans []*scan) {
	switch g.Kind {
	case scheduler.KindCadence:
		for _, s := range scans {
			if e.bands(g, s) != 0 {
				if q := units.Quality(s.info, g.TOAUs); q > 0 {
					e.events = append(e.events, event{at: s.startMin, quality: q, members: [2]*scan{s}})
				}
			}
		}
	case scheduler.KindOverlap:
		for _, s := range scans {
			e.overlaps(g, scans, s)
		}
	case scheduler.KindBandPair:
		e.pairs(g, scans)
	}
}

// bands are what a scan can give to a goal; nothing where it detects nothing.
func (e *earner) bands(g *units.Goal, s *scan) units.BandSet {
	if s.info <= 0 {
		return 0
	}
	return e.set.Bands(g, s.tel, s.receiver)
}

// overlaps adds the events whose common time begins with scan s.
func (e *earner) overlaps(g *units.Goal, scans []*scan, s *scan) {
	if s.endMin-s.startMin < g.OverlapMin-units.MS {
		return
	}
	for bands := e.bands(g, s); bands != 0; bands &= bands - 1 {
		bit := bands & -bands
		ev := event{at: s.startMin, quality: 1, members: [2]*scan{s}}
		n := 1
		for _, o := range scans {
			if o.tel == s.tel || o.startMin > s.startMin || o.endMin < s.startMin+g.OverlapMin-units.MS || e.bands(g, o)&bit == 0 {
				continue
			}
			if n > 1 && hasTelescope(&ev, o.tel) {
				continue
			}
			if n == 1 {
				ev.members[1] = o
			} else {
				ev.more = append(ev.more, o)
			}
			if n++; n == g.Count {
				e.events = append(e.events, ev)
				return
			}
		}
	}
}

func hasTelescope(ev *event, tel int) bool {
	found := false
	ev.each(func(s *scan) { found = found || s.tel == tel })
	return found
}

// pairs adds the events of a band-pair goal; each counts at its later start.
func (e *earner) pairs(g *units.Goal, scans []*scan) {
	for i, s := range scans {
		mine := e.bands(g, s)
		if mine == 0 {
			continue
		}
		if mine == g.Wants() {
			e.events = append(e.events, event{at: s.startMin, quality: 1, members: [2]*scan{s}})
			continue
		}
		for _, o := range scans[:i] {
			if s.startMin-o.startMin <= g.WithinMin+units.MS && mine|e.bands(g, o) == g.Wants() {
				e.events = append(e.events, event{at: s.startMin, quality: 1, members: [2]*scan{s, o}})
			}
		}
	}
}

// windows serves the windows of a goal in order: the events of two windows are
// at least half an interval apart and have no scan in common.
func (e *earner) windows(g *units.Goal, list *[]taken) float64 {
	slices.SortStableFunc(e.events, func(a, b event) int {
		switch {
		case a.at < b.at:
			return -1
		case a.at > b.at:
			return 1
		}
		return 0
	})
	n, m := len(g.Units), len(e.events)
	e.grow(n, m)
	best, bw, be := 0.0, -1, -1
	for w := range n {
		u := &e.set.Units[g.Units[w]]
		for i := range m {
			e.f[w][i], e.back[w][i] = math.Inf(-1), [2]int{-1, -1}
			v := u.Weight * u.Timeliness(e.events[i].at) * e.events[i].quality
			if v <= 0 {
				continue
			}
			top := 0.0
			for pw := range w {
				for pi := 0; pi < i; pi++ {
					if e.f[pw][pi] > top && e.apart(pi, i, u.Every) {
						top, e.back[w][i] = e.f[pw][pi], [2]int{pw, pi}
					}
				}
			}
			e.f[w][i] = v + top
			if e.f[w][i] > best {
				best, bw, be = e.f[w][i], w, i
			}
		}
	}
	for list != nil && bw >= 0 {
		u := &e.set.Units[g.Units[bw]]
		ev := e.events[be]
		*list = append(*list, taken{g.Units[bw], ev, u.Weight * u.Timeliness(ev.at) * ev.quality})
		bw, be = e.back[bw][be][0], e.back[bw][be][1]
	}
	return best
}

// apart tells whether event i may serve a window after event p.
func (e *earner) apart(p, i int, every float64) bool {
	a, b := &e.events[p], &e.events[i]
	if b.at-a.at < every/2-units.MS/2 {
		return false
	}
	shared := false
	a.each(func(x *scan) { b.each(func(y *scan) { shared = shared || x == y }) })
	return !shared
}

func (e *earner) grow(n, m int) {
	for len(e.f) < n {
		e.f, e.back = append(e.f, nil), append(e.back, nil)
	}
	for w := range n {
		if len(e.f[w]) < m {
			e.f[w], e.back[w] = make([]float64, m), make([][2]int, m)
		}
	}
}

// phase matches scans to passages that no other scan has, as many as the unit
// can be earned.
func (e *earner) phase(ui int, scans []*scan, list *[]taken) float64 {
	u := &e.set.Units[ui]
	g := &e.set.Goals[u.Goal]
	var match [][2]int // passage, scan
	for si, s := range scans {
		if len(match) == u.N {
			break
		}
		if e.bands(g, s) == 0 {
			continue
		}
		e.augment(u, g, scans, si, &match, nil)
	}
	if list != nil {
		for _, m := range match {
			*list = append(*list, taken{ui, event{at: scans[m[1]].startMin, members: [2]*scan{scans[m[1]]}}, u.Value})
		}
	}
	return u.Value * float64(len(match))
}

// augment finds a passage for a scan, moving others to different ones where
// that makes room.
func (e *earner) augment(u *units.Unit, g *units.Goal, scans []*scan, si int, match *[][2]int, tried []int) bool {
	s := scans[si]
	lo, _ := slices.BinarySearchFunc(u.Passages, s.startMin, func(p units.Passage, t float64) int {
		if p.Leave < t {
			return -1
		}
		return 1
	})
	for pi := lo; pi < len(u.Passages) && u.Passages[pi].Enter < s.endMin; pi++ {
		if !u.Passages[pi].Covers(s.startMin, s.endMin, g.DwellMin) || slices.Contains(tried, pi) {
			continue
		}
		tried = append(tried, pi)
		at := slices.IndexFunc(*match, func(m [2]int) bool { return m[0] == pi })
		if at < 0 {
			*match = append(*match, [2]int{pi, si})
			return true
		}
		if e.augment(u, g, scans, (*match)[at][1], match, tried) {
			(*match)[at][1] = si
			return true
		}
	}
	return false
}
