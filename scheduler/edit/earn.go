package edit

import (
	"slices"

	"cadencewright/scheduler"
	"cadencewright/scheduler/units"
)

// award is a unit earned once by scans together.
type award struct {
	unit  int // into Units.Units
	value float64
	by    []*scan
}

// event is a scan, or scans together, that can earn from one due window of a
// goal; it counts at an instant.
type event struct {
	at, quality float64
	by          []*scan
}

// A plan's list of earnings may be one of several that the scans allow. Units
// earn from the best one here, so that a difference shows what the change does
// and not how the list was made. A source has a handful of scans in a week, so
// exactness costs little.

// earn gives the scans of one source, in order of start, to its units so that
// they earn the most.
func (s *Session) earn(source int, scans []*scan) []award {
	if len(scans) == 0 {
		return nil
	}
	var list []award
	for _, gi := range s.goals[source] {
		g := &s.p.Units.Goals[gi]
		able := s.able(g, scans)
		if g.Kind == scheduler.KindPhase {
			for _, ui := range g.Units {
				list = append(list, s.passages(g, ui, able)...)
			}
			continue
		}
		list = append(list, s.serve(g, s.events(g, able))...)
	}
	return list
}

// candidate is a scan with the bands that it gives a goal.
type candidate struct {
	*scan
	bands units.BandSet
}

// able are the scans that a goal can use at all.
func (s *Session) able(g *units.Goal, scans []*scan) []candidate {
	var list []candidate
	for _, x := range scans {
		if x.info <= 0 {
			continue
		}
		if bands := s.p.Units.Bands(g, x.tel, x.rx); bands != 0 {
			list = append(list, candidate{x, bands})
		}
	}
	return list
}

// events lists what can earn from a goal with due windows, by instant.
func (s *Session) events(g *units.Goal, scans []candidate) []event {
	var list []event
	for i, x := range scans {
		switch g.Kind {
		case scheduler.KindCadence:
			if q := units.Quality(x.info, g.TOAUs); q > 0 {
				list = append(list, event{x.startMin, q, []*scan{x.scan}})
			}
		case scheduler.KindOverlap:
			if by := together(g, scans, i); by != nil {
				list = append(list, event{x.startMin, 1, by})
			}
		case scheduler.KindBandPair:
			if x.bands == g.Wants() {
				list = append(list, event{x.startMin, 1, []*scan{x.scan}})
				continue // a partner would add nothing
			}
			for j := i - 1; j >= 0 && x.startMin-scans[j].startMin <= g.WithinMin+units.MS; j-- {
				if x.bands|scans[j].bands == g.Wants() {
					list = append(list, event{x.startMin, 1, []*scan{x.scan, scans[j].scan}})
				}
			}
		}
	}
	return list
}

// together are scans on enough telescopes, in one band, whose common time
// begins with scan i; nil where there are too few.
func together(g *units.Goal, scans []candidate, i int) []*scan {
	x := scans[i]
	under := func(y candidate) bool { return y.endMin-x.startMin >= g.OverlapMin-units.MS }
	if !under(x) {
		return nil
	}
	// Band by band: all must share one. Scans come in order of start, and those
	// that start after this one begin a common time of their own.
	for bands := x.bands; bands != 0; bands &= bands - 1 {
		bit := bands & -bands
		by := []*scan{x.scan}
		for _, y := range scans {
			if y.startMin > x.startMin || len(by) == g.Count {
				break
			}
			had := slices.ContainsFunc(by, func(z *scan) bool { return z.tel == y.tel })
			if !had && y.bands&bit != 0 && under(y) {
				by = append(by, y.scan)
			}
		}
		if len(by) == g.Count {
			return by
		}
	}
	return nil
}

// link is a sequence of windows served, by its last.
type link struct {
	total      float64 // of the sequence
	value      float64
	window, ev int
	back       int // the link before, or -1
}

// serve gives events to the due windows of a goal in order, the events of two windows
// at least half an interval apart and without a scan in common. Of two sequences
// that end alike only the better is followed.
func (s *Session) serve(g *units.Goal, events []event) []award {
	var links []link
	best := -1
	for w, ui := range g.Units {
		u := &s.p.Units.Units[ui]
		for ei := range events {
			v := u.Weight * u.Timeliness(events[ei].at) * events[ei].quality
			if v <= 0 {
				continue
			}
			l := link{total: v, value: v, window: w, ev: ei, back: -1}
			for b := range links {
				if k := &links[b]; k.window < w && k.total+v > l.total && follows(events, links, b, ei, g.EveryMin) {
					l.total, l.back = k.total+v, b
				}
			}
			links = append(links, l)
			if best < 0 || l.total > links[best].total {
				best = len(links) - 1
			}
		}
	}
	var list []award
	for i := best; i >= 0; i = links[i].back {
		l := &links[i]
		list = append(list, award{g.Units[l.window], l.value, events[l.ev].by})
	}
	slices.Reverse(list)
	return list
}

// follows reports whether an event may serve a window after a sequence.
func follows(events []event, links []link, last, ei int, everyMin float64) bool {
	if events[ei].at-events[links[last].ev].at < everyMin/2-units.MS/2 {
		return false
	}
	for i := last; i >= 0; i = links[i].back {
		for _, x := range events[links[i].ev].by {
			if slices.Contains(events[ei].by, x) {
				return false
			}
		}
	}
	return true
}

// passages matches scans with the passages of a phase window, one orbit to
// each, as many as are wanted.
func (s *Session) passages(g *units.Goal, ui int, scans []candidate) []award {
	u := &s.p.Units.Units[ui]
	m := matching{owner: map[int]int{}, reach: make([][]int, len(scans))}
	for i, x := range scans {
		for pi := range u.Passages {
			if p := &u.Passages[pi]; p.Enter < x.endMin && p.Leave > x.startMin && p.Covers(x.startMin, x.endMin, g.DwellMin) {
				m.reach[i] = append(m.reach[i], pi)
			}
		}
	}
	// Every scan covers windows for the same value, so that the number counts
	// alone, and any largest matching will do.
	n := 0
	for i := range scans {
		if n == u.N {
			break
		}
		if m.place(i, map[int]bool{}) {
			n++
		}
	}
	// A map has no order; the scans' own is taken.
	var by []int
	for _, i := range m.owner {
		by = append(by, i)
	}
	slices.Sort(by)
	var list []award
	for _, i := range by {
		list = append(list, award{ui, u.Value, []*scan{scans[i].scan}})
	}
	return list
}

// matching pairs scans with passages by augmenting paths.
type matching struct {
	reach [][]int     // by scan: the passages it covers
	owner map[int]int // passage → scan
}

// place finds a passage for a scan, moving others to different ones where that
// makes room.
func (m *matching) place(i int, visited map[int]bool) bool {
	for _, p := range m.reach[i] {
		if visited[p] {
			continue
		}
		visited[p] = true
		if other, taken := m.owner[p]; !taken || m.place(other, visited) {
			m.owner[p] = i
			return true
		}
	}
	return false
}

// times is how often a list of awards earns a unit.
func times(list []award, unit int) int {
	n := 0
	for i := range list {
		if list[i].unit == unit {
			n++
		}
	}
	return n
}
