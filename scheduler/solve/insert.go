package solve

import "math/rand/v2"

// insert puts a scan into its block and makes room for it: neighbours slide
// away as far as they must and may, and those that cannot, or by chance, are
// removed. It reports false where a scan that must stay stands in the way; the
// proposal must then be rejected.
//
// What is removed may be worth up to budget; insert takes it off, and reports
// false where that does not suffice.
func (s *state) insert(x *scan, rng *rand.Rand, oust float64, budget *float64) bool {
	i := s.slot(x)
	s.face(x, i)
	if !s.left(x, i-1, rng, oust, budget) {
		return false
	}
	if !s.right(x, s.slot(x), rng, oust, budget) {
		return false
	}
	s.add(x)
	return true
}

// spend takes a scan out on a budget.
func (s *state) spend(x *scan, budget *float64) bool {
	if *budget -= s.stake(x); *budget < 0 {
		return false
	}
	s.remove(x)
	return true
}

// slot is where in its block's order a scan belongs.
func (s *state) slot(x *scan) int {
	list, mid := s.blocks[x.block], x.middle()
	i := 0
	for i < len(list) && list[i].middle() < mid {
		i++
	}
	return i
}

// face chooses the turn of the azimuth drive that makes the travel from and to
// the neighbours shortest.
func (s *state) face(x *scan, i int) {
	lo, hi := s.t.turns(x)
	if lo >= hi {
		s.t.orient(x, min(lo, hi))
		return
	}
	list := s.blocks[x.block]
	best, turn := 0.0, lo
	for k := lo; k <= hi; k++ {
		s.t.orient(x, k)
		cost := 0.0
		if i > 0 {
			cost += travel(list[i-1].to1 - x.from1)
		}
		if i < len(list) {
			cost += travel(x.to1 - list[i].from1)
		}
		if k == lo || cost < best {
			best, turn = cost, k
		}
	}
	s.t.orient(x, turn)
}

func travel(d float64) float64 {
	if d < 0 {
		return -d
	}
	return d
}

// left makes room before x, going back from the i-th scan of its block.
func (s *state) left(x *scan, i int, rng *rand.Rand, oust float64, budget *float64) bool {
	for edge := x; i >= 0; i-- {
		a := s.blocks[x.block][i]
		if a.start+a.steps+s.t.gap(a, edge) <= edge.start {
			return true
		}
		if a.fixed {
			return false
		}
		if (oust <= 0 || rng.Float64() >= oust) && s.slideLeft(a, edge) {
			edge = a
			continue
		}
		if !s.spend(a, budget) {
			return false
		}
	}
	return true
}

// right makes room after x, going on from the i-th scan of its block.
func (s *state) right(x *scan, i int, rng *rand.Rand, oust float64, budget *float64) bool {
	for edge := x; i < len(s.blocks[x.block]); {
		a := s.blocks[x.block][i]
		if edge.start+edge.steps+s.t.gap(edge, a) <= a.start {
			return true
		}
		if a.fixed {
			return false
		}
		if (oust <= 0 || rng.Float64() >= oust) && s.slideRight(a, edge) {
			edge = a
			i++
			continue
		}
		if !s.spend(a, budget) {
			return false
		}
	}
	return true
}

// slides is how often a slide looks again for a start after its travel time
// has changed.
const slides = 4

// slideLeft moves a to the last start at which it is done in time for edge.
func (s *state) slideLeft(a, edge *scan) bool {
	first := true
	limit := edge.start - a.steps - s.t.gap(a, edge)
	for range slides {
		to := a.latest(limit)
		if to < 0 {
			break
		}
		if first {
			s.move(a, to)
		} else {
			s.retime(a, to, a.turn)
		}
		first = false
		limit = edge.start - a.steps - s.t.gap(a, edge)
		if a.start <= limit {
			return true
		}
	}
	return false
}

// slideRight moves a to the first start at which edge and the travel from it
// are over.
func (s *state) slideRight(a, edge *scan) bool {
	first := true
	limit := edge.start + edge.steps + s.t.gap(edge, a)
	for range slides {
		to := a.earliest(limit)
		if to < 0 {
			break
		}
		if first {
			s.move(a, to)
		} else {
			s.retime(a, to, a.turn)
		}
		first = false
		limit = edge.start + edge.steps + s.t.gap(edge, a)
		if a.start >= limit {
			return true
		}
	}
	return false
}
