package solve

import (
	"cmp"
	"math"
	"slices"

	"cadencewright/scheduler"
)

// fillIdle uses time that the best plan leaves free: scans grow to longer
// allowed lengths where nothing has to go for it, which makes their times of
// arrival better, and then sources that are due next get extra scans, which
// earn nothing in this horizon.
func (s *state) fillIdle() {
	s.lengthen()
	s.extras()
	s.lengthen()
}

// lengthen lets each scan grow by one allowed length at a time, in turn, until
// none can.
func (s *state) lengthen() {
	for grown := true; grown; {
		grown = false
		for bi := range s.blocks {
			for i := 0; i < len(s.blocks[bi]); i++ {
				if x := s.blocks[bi][i]; !x.fixed && s.grow(x) {
					grown = true
				}
			}
		}
	}
}

// grow puts a scan's next longer form in its place, if the plan earns no less.
func (s *state) grow(x *scan) bool {
	longer := 0
	for _, l := range s.t.lengthsOf(x.block, x.place) {
		if l.Steps > x.steps && (longer == 0 || l.Steps < longer) && l.Allowed(x.start) {
			longer = l.Steps
		}
	}
	if longer == 0 {
		return false
	}
	y := s.t.scan(x.block, x.place, x.rx, x.start, longer, 0, -1)
	if lo, hi := s.t.turns(y); x.turn >= lo && x.turn <= hi {
		s.t.orient(y, x.turn) // as before: the travel to it is known to fit
	} else {
		return false
	}
	s.open()
	s.remove(x)
	if s.room(y) {
		s.add(y)
		if s.weigh() > -leastLoss {
			s.accept()
			return true
		}
	}
	s.reject()
	return false
}

// leastLoss is more than what a step of telescope time costs over a whole
// block, and less than any unit is worth.
const leastLoss = 1e-4

// due is a source and when it is due next, after all that the plan does.
type due struct {
	source       int
	at, interval float64 // minutes
}

// extras puts scans that earn nothing into idle time, of what is due next.
func (s *state) extras() {
	next := s.nextDue()
	for bi := range s.blocks {
		for gap := 0; gap <= len(s.blocks[bi]); {
			if s.extra(bi, gap, next) {
				slices.SortStableFunc(next, func(a, b due) int { return cmp.Compare(a.at, b.at) })
				continue
			}
			gap++
		}
	}
}

// nextDue is when each source with a cadence is due next, the soonest first.
func (s *state) nextDue() []due {
	var list []due
	var earned []taken
	for source := range s.of {
		d := due{source: source, at: math.Inf(1)}
		for _, g := range s.of[source] {
			if g.kind != scheduler.KindCadence {
				continue
			}
			at := g.units[0].Due
			earned = s.earn.list(g, s.source[source], earned[:0])
			for _, t := range earned {
				at = max(at, t.event.at+g.every)
			}
			if at < d.at {
				d.at, d.interval = at, g.every
			}
		}
		if d.interval > 0 {
			list = append(list, d)
		}
	}
	slices.SortStableFunc(list, func(a, b due) int { return cmp.Compare(a.at, b.at) })
	return list
}

// extra puts one scan before the i-th of a block, and reports whether there was
// room for one.
func (s *state) extra(bi, i int, next []due) bool {
	b := &s.t.p.Blocks[bi]
	from, to := s.t.first[bi], b.Steps
	if i > 0 {
		prev := s.blocks[bi][i-1]
		from = max(from, prev.start+prev.steps+b.MinGap)
	}
	if i < len(s.blocks[bi]) {
		to = s.blocks[bi][i].start - b.MinGap
	}
	for k := range next {
		d := &next[k]
		place := b.PlaceIndex(d.source)
		if place < 0 || s.crowded(d, b.Minute(from, s.t.p.GridMin), b.Minute(to, s.t.p.GridMin)) {
			continue
		}
		if x := s.filler(bi, place, from, to); x != nil {
			s.open()
			s.add(x)
			s.weigh()
			s.accept()
			d.at = max(d.at, x.startMin) + d.interval
			return true
		}
	}
	return false
}

// crowded tells whether a source is observed within a quarter of its interval
// of some stretch of time: a scan there would add little.
func (s *state) crowded(d *due, from, to float64) bool {
	return slices.ContainsFunc(s.source[d.source], func(x *scan) bool {
		return x.startMin > from-d.interval/4 && x.startMin < to+d.interval/4
	})
}

// filler is the shortest scan of a place that fits between two steps as the
// plan stands, or nil.
func (s *state) filler(bi, place, from, to int) *scan {
	b := &s.t.p.Blocks[bi]
	for _, l := range s.t.lengthsOf(bi, place) {
		for rx := range b.Receivers {
			if b.Places[place].Info[rx] == nil {
				continue
			}
			x := s.t.scan(bi, place, rx, b.Places[place].Lo, l.Steps, 0, -1)
			// The travel to it depends on when it starts: some starts are tried.
			for start := x.earliest(from); start >= 0 && start+l.Steps <= to; start = x.earliest(start + 1) {
				s.t.time(x, start)
				s.face(x, s.slot(x))
				if s.room(x) && x.info > 0 {
					return x
				}
				if start > from+fillTries {
					break
				}
			}
		}
	}
	return nil
}

// fillTries is how many steps after the first possible start an extra scan may
// begin.
const fillTries = 60
