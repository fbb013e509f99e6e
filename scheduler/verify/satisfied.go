package verify

import "cadencewright/scheduler"

// lastSatisfied is the last instant at which the counted history satisfies a
// goal with due windows: a scan's start, the start of the common time, or the
// later start. It goes from the newest scan backwards, so it ends soon.
func (g *goal) lastSatisfied() (msec, bool) {
	var seen []*made // those that serve the goal, oldest first
	var longest msec
	for _, h := range g.source.history {
		if g.bands(h.receiver) != 0 {
			seen = append(seen, h)
			longest = max(longest, h.end-h.start)
		}
	}
	for i := len(seen) - 1; i >= 0; i-- {
		done := false
		switch g.kind {
		case scheduler.KindCadence:
			done = true
		case scheduler.KindOverlap:
			done = g.overlapsAt(seen, i, longest)
		case scheduler.KindBandPair:
			done = g.pairsAt(seen, i)
		}
		if done {
			return seen[i].start, true
		}
	}
	return 0, false
}

// overlapsAt reports whether enough telescopes were under way together, in one
// band, for long enough from the start of scan i on.
func (g *goal) overlapsAt(seen []*made, i int, longest msec) bool {
	from := seen[i].start
	to := from + g.overlap
	if seen[i].end < to {
		return false
	}
	own := g.bands(seen[i].receiver)
	for bit := uint32(1); bit <= own; bit <<= 1 {
		if own&bit == 0 {
			continue
		}
		together := map[*telescope]bool{}
		for j := lastAt(seen, i); j >= 0 && seen[j].start >= from-longest; j-- {
			if h := seen[j]; h.end >= to && g.bands(h.receiver)&bit != 0 {
				together[h.receiver.telescope] = true
			}
		}
		if len(together) >= g.count {
			return true
		}
	}
	return false
}

// pairsAt reports whether scan i, as the later one, makes a pair of both bands
// with one not longer before it than the goal allows, or by itself.
func (g *goal) pairsAt(seen []*made, i int) bool {
	own := g.bands(seen[i].receiver)
	for j := lastAt(seen, i); j >= 0 && seen[i].start-seen[j].start <= g.within; j-- {
		if own|g.bands(seen[j].receiver) == g.allBands() {
			return true
		}
	}
	return false
}

// lastAt is the last scan that starts together with scan i.
func lastAt(seen []*made, i int) int {
	for i+1 < len(seen) && seen[i+1].start == seen[i].start {
		i++
	}
	return i
}
