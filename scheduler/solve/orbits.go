package solve

import (
	"cadencewright/scheduler/units"
)

// phase is how many times scans can earn from a phase window, each in an orbit
// of its own; e.match says by which passages and scans.
func (e *earner) phase(g *goal, u *units.Unit, scans []*scan) int {
	e.match = e.match[:0]
	for si, x := range scans {
		if len(e.match) == u.N {
			break
		}
		if g.of(x) == 0 {
			continue
		}
		e.tried = e.tried[:0]
		e.augment(g, u, scans, si)
	}
	return len(e.match)
}

// augment finds a passage for a scan, moving others to different ones where
// that makes room.
func (e *earner) augment(g *goal, u *units.Unit, scans []*scan, si int) bool {
	x := scans[si]
	for pi := open(u.Passages, x.startMin); pi < len(u.Passages) && u.Passages[pi].Enter < x.endMin; pi++ {
		if !u.Passages[pi].Covers(x.startMin, x.endMin, g.dwell) || has(e.tried, pi) {
			continue
		}
		e.tried = append(e.tried, pi)
		at := -1
		for i, m := range e.match {
			if m[0] == pi {
				at = i
			}
		}
		if at < 0 {
			e.match = append(e.match, [2]int{pi, si})
			return true
		}
		if e.augment(g, u, scans, e.match[at][1]) {
			e.match[at][1] = si
			return true
		}
	}
	return false
}

func has(list []int, x int) bool {
	for _, y := range list {
		if x == y {
			return true
		}
	}
	return false
}

// open is the first of some passages, in order of time, that ends after t.
func open(list []units.Passage, t float64) int {
	lo, hi := 0, len(list)
	for lo < hi {
		if mid := (lo + hi) / 2; list[mid].Leave > t {
			hi = mid
		} else {
			lo = mid + 1
		}
	}
	return lo
}
