package edit

import (
	"fmt"
	"math"
)

// Which whole turn of the azimuth drive a scan has is nothing that a person
// plans. So the turns of a touched block are chosen anew: those with which the
// least is broken, of these the ones that leave most scans as they were, and
// of these the ones with the least travel.

// burden is what a choice of turns costs up to some scan of a block.
type burden struct {
	short  int     // scans that have too little time before them
	lackMs int     // milliseconds that are missing, all together: whole ones, so that ways that miss as much are alike
	moved  int     // scans that are not on the turn that the plan has
	travel float64 // seconds of slewing
}

func (a burden) less(b burden) bool {
	switch {
	case a.short != b.short:
		return a.short < b.short
	case a.lackMs != b.lackMs:
		return a.lackMs < b.lackMs
	case a.moved != b.moved:
		return a.moved < b.moved
	}
	return a.travel < b.travel
}

// needS is the time in seconds that must lie between two scans of a block at
// given turns, and how much of it is slewing and settling.
func (s *Session) needS(a *scan, aTurn int, z *scan, zTurn int) (need, slew float64) {
	m := s.mount(a.block)
	slew = m.SlewS(a.to1+360*float64(aTurn), a.to2, z.from1+360*float64(zTurn), z.from2)
	need = slew + m.CalS
	if a.rx != z.rx {
		need += m.SwitchS
	}
	return need, slew
}

// roomS is a rounding error of sums of seconds.
const roomS = 1e-6

// turn chooses the turns of a block's scans, by a dynamic programme along the
// block.
func (s *Session) turn(r *row) {
	n := len(r.scans)
	best := make([][]burden, n) // by scan and turn
	back := make([][]int, n)
	for i, x := range r.scans {
		options := x.turnHi - x.turnLo + 1
		best[i], back[i] = make([]burden, options), make([]int, options)
		for o := range options {
			best[i][o], back[i][o] = s.onto(r, best, i, o)
			if turn := x.turnLo + o; x.wanted != noTurn && turn != x.wanted || x.wanted == noTurn && turn != 0 {
				best[i][o].moved++
			}
		}
	}
	// From the best end backwards along the choices that led there.
	r.turns = make([]int, n)
	for i, o := n-1, 0; i >= 0; i-- {
		if i == n-1 {
			for k := range best[i] {
				if best[i][k].less(best[i][o]) {
					o = k
				}
			}
		}
		r.turns[i] = r.scans[i].turnLo + o
		o = back[i][o]
	}
}

// onto is the least burden with which scan i of a block can be reached on its
// o-th turn, and the turn of the scan before.
func (s *Session) onto(r *row, best [][]burden, i, o int) (burden, int) {
	if i == 0 {
		return burden{}, 0
	}
	a, z := r.scans[i-1], r.scans[i]
	have := 60 * (z.startMin - a.endMin)
	top, from := burden{short: math.MaxInt}, 0
	for k, b := range best[i-1] {
		need, slew := s.needS(a, a.turnLo+k, z, z.turnLo+o)
		if lack := need - have; lack > roomS {
			b.short, b.lackMs = b.short+1, b.lackMs+int(math.Round(1000*lack))
		}
		b.travel += slew
		if b.less(top) {
			top, from = b, k
		}
	}
	return top, from
}

// crowded reports too little room between scan i of a block and the one before.
func (s *Session) crowded(r *row, i int, pins []pin) (Violation, bool) {
	a, z := r.scans[i-1], r.scans[i]
	have := 60 * (z.startMin - a.endMin)
	need, slew := s.needS(a, r.turns[i-1], z, r.turns[i])
	if have >= need-roomS {
		return Violation{}, false
	}
	// Whoever reads it wants to know what is in the way, and whether it may be
	// moved.
	before := s.ref(a)
	why := fmt.Sprintf("%.0f s are needed, of which %.0f s to slew and settle", need, slew)
	v := s.breach(RuleRoom, z, figures{have, need, "s"}, "begins %.0f s after the end of %s at %s, and %s: %.0f s are missing",
		have, before.Source, clock(a.startMin), why, math.Ceil(need-have))
	if have < 0 {
		v = s.breach(RuleOverlap, z, figures{have, need, "s"}, "begins %.0f s before the end of %s at %s, and after it %s",
			-have, before.Source, clock(a.startMin), why)
	}
	before.Pinned, v.Scan.Pinned = isPin(pins, a), isPin(pins, z)
	switch {
	case before.Pinned:
		v.Text += "; " + before.Source + " is pinned"
	case v.Scan.Pinned:
		v.Text += "; " + v.Scan.Source + " is pinned"
	}
	v.Other = &before
	return v, true
}
