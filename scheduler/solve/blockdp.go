package solve

import (
	"math"
	"slices"
)

// label is the best known sequence of scans in a block that ends with one
// particular scan.
type label struct {
	value  float64 // gains of the whole sequence
	end    int     // step
	slot   int32   // place and receiver
	before int32   // label, or -1
	cell   int32
	start  int32
	turn   int32
	seen   uint64 // places in the sequence, one bit for every 64th: a hint
	must   int32  // index into the scans that must stand, or -1
}

// blockSolver fills one block by dynamic programming over its scans with true
// travel times, receiver changes and turns of the azimuth drive: for each
// source and receiver the best sequence that ends by each step. It is exact up
// to two simplifications: of two sequences that end with the same source and
// receiver only the better is followed, and gains of a second scan of one
// source are those beside the sequence that is followed.
type blockSolver struct {
	g      gains
	labels []label
	pre    [][]int32 // by slot, then step: the best label that ends by then
	ends   [][]int32 // labels by the step at which they end
	gain   [][]float64
	active []activeCell
	effort int64
	stride int
	must   []*scan
	chain  []*scan
	with   []*scan
}

type activeCell struct {
	cell   int32
	slot   int32
	gain   []float64
	lo, hi int
}

// scanCost keeps equal plans short: the worth of a step of telescope time.
const scanCost = 1e-7

// solve is the best scans for a block, the rest of the plan as it is and the
// must scans standing. The block's scans in the state must be exactly must.
func (bs *blockSolver) solve(bi int, must []*scan) []*scan {
	b := &bs.g.s.t.p.Blocks[bi]
	bs.g.bi, bs.must = bi, must
	bs.g.prepare()
	bs.activate()
	bs.labels = bs.labels[:0]
	slots := len(b.Places) * len(b.Receivers)
	bs.pre, bs.ends = resize(bs.pre, slots, b.Steps+1), resize(bs.ends, b.Steps+1, 0)
	for s := range slots {
		for t := range bs.pre[s] {
			bs.pre[s][t] = -1
		}
	}
	bs.run(b.Steps)
	return bs.result(bi)
}

func resize(x [][]int32, n, m int) [][]int32 {
	for len(x) < n {
		x = append(x, nil)
	}
	for i := range n {
		if cap(x[i]) < m {
			x[i] = make([]int32, m)
		}
		x[i] = x[i][:m]
	}
	return x
}

// activate lists the cells with any gain.
func (bs *blockSolver) activate() {
	g := &bs.g
	b := &g.s.t.p.Blocks[g.bi]
	bs.active = bs.active[:0]
	used := 0
	for ci := range g.s.t.cells[g.bi] {
		c := &g.s.t.cells[g.bi][ci]
		if c.pin >= 0 {
			continue
		}
		if used == len(bs.gain) {
			bs.gain = append(bs.gain, nil)
		}
		if len(bs.gain[used]) < b.Steps+1 {
			bs.gain[used] = make([]float64, b.Steps+1)
		}
		out := bs.gain[used]
		clear(out)
		lo, hi := g.cell(c, out)
		if lo < hi {
			bs.active = append(bs.active, activeCell{int32(ci), int32(c.place*len(b.Receivers) + c.rx), out, lo, hi})
			used++
		}
	}
}

// run goes through the starts in order.
func (bs *blockSolver) run(steps int) {
	b := &bs.g.s.t.p.Blocks[bs.g.bi]
	next := 0 // of must
	for k := range steps + 1 {
		for slot := range bs.pre[:len(b.Places)*len(b.Receivers)] {
			if k > 0 {
				bs.pre[slot][k] = bs.pre[slot][k-1]
			}
		}
		for _, li := range bs.ends[k] {
			l := &bs.labels[li]
			if p := bs.pre[l.slot][k]; p < 0 || l.value > bs.labels[p].value {
				bs.pre[l.slot][k] = li
			}
		}
		if next < len(bs.must) && bs.must[next].start == k {
			bs.standing(next)
			next++
			continue
		}
		limit := math.MaxInt
		if next < len(bs.must) {
			limit = bs.must[next].start
		}
		for i := range bs.active {
			a := &bs.active[i]
			if k < a.lo || k >= a.hi || a.gain[k] <= 0 || bs.stride > 1 && k%bs.stride != 0 {
				continue
			}
			c := &bs.g.s.t.cells[bs.g.bi][a.cell]
			if k+c.steps+b.MinGap <= limit {
				bs.extend(a, c, k, next)
			}
		}
	}
}

// standing enters a scan that must stand, and lets no sequence pass it by.
func (bs *blockSolver) standing(mi int) {
	b := &bs.g.s.t.p.Blocks[bs.g.bi]
	m := bs.must[mi]
	l := label{end: m.start + m.steps, slot: int32(m.place*len(b.Receivers) + m.rx), before: -1, cell: -1,
		start: int32(m.start), turn: int32(m.turn), must: int32(mi)}
	if best := bs.predecessor(m, math.Inf(-1)); best >= 0 {
		p := &bs.labels[best]
		l.value, l.before, l.seen = p.value, best, p.seen
	}
	l.seen |= 1 << (m.place & 63)
	for s := range bs.pre {
		for t := range bs.pre[s] {
			bs.pre[s][t] = -1
		}
	}
	for t := range bs.ends {
		if t >= m.start {
			bs.ends[t] = bs.ends[t][:0]
		}
	}
	bs.push(l)
}

func (bs *blockSolver) push(l label) {
	li := int32(len(bs.labels))
	bs.labels = append(bs.labels, l)
	bs.ends[l.end] = append(bs.ends[l.end], li)
}

// predecessor is the best label that a scan can follow, of those worth more
// than least.
func (bs *blockSolver) predecessor(x *scan, least float64) int32 {
	b := &bs.g.s.t.p.Blocks[bs.g.bi]
	best := int32(-1)
	top := x.start - b.MinGap
	if top < 0 {
		return -1
	}
	for slot := range len(b.Places) * len(b.Receivers) {
		t := top
		for range 5 {
			li := bs.pre[slot][t]
			if li < 0 || bs.labels[li].value <= least {
				break
			}
			bs.effort++
			need := bs.gapAfter(li, x)
			if bs.labels[li].end+need <= x.start {
				best, least = li, bs.labels[li].value
				break
			}
			if t = min(x.start-need, bs.labels[li].end-1); t < 0 {
				break
			}
		}
	}
	return best
}

// gapAfter is the gap between a label's last scan and x.
func (bs *blockSolver) gapAfter(li int32, x *scan) int {
	b := &bs.g.s.t.p.Blocks[bs.g.bi]
	l := &bs.labels[li]
	n := len(b.Receivers)
	place, rx := int(l.slot)/n, int(l.slot)%n
	pa, pz := &b.Places[place], &b.Places[x.place]
	ia, iz := l.end-pa.Lo, x.start-pz.Lo
	a1 := pa.Axis1[ia] + 360*float64(l.turn)
	z1 := pz.Axis1[iz]
	if x.pin < 0 && x.turn == anyTurn {
		z1 += 360 * float64(bs.nearest(x, a1-z1))
	} else {
		z1 += 360 * float64(x.turn)
	}
	s := b.Mount.SlewS(a1, pa.Axis2[ia], z1, pz.Axis2[iz]) + b.Mount.CalS
	if rx != x.rx {
		s += b.Mount.SwitchS
	}
	return ceilSteps(s, bs.g.s.t.p.GridMin)
}

// anyTurn marks a scan whose turn of the azimuth drive is still open.
const anyTurn = math.MinInt32

// nearest is the allowed turn of a scan that is nearest to a shift in degrees.
func (bs *blockSolver) nearest(x *scan, shiftDeg float64) int {
	b := &bs.g.s.t.p.Blocks[bs.g.bi]
	lo, hi := b.Turns(&b.Places[x.place], x.start, x.steps)
	return min(max(int(math.Round(shiftDeg/360)), lo), hi)
}

// extend enters the best sequence that ends with the cell's scan at start k.
func (bs *blockSolver) extend(a *activeCell, c *cell, k, passed int) {
	b := &bs.g.s.t.p.Blocks[bs.g.bi]
	x := &scan{block: bs.g.bi, place: c.place, rx: c.rx, start: k, steps: c.steps, turn: anyTurn, pin: -1}
	least := 0.0
	if passed > 0 {
		least = math.Inf(-1)
	}
	best := bs.predecessor(x, least)
	if best < 0 && passed > 0 {
		return
	}
	l := label{end: k + c.steps, slot: a.slot, before: best, cell: a.cell, start: int32(k), must: -1}
	gain := a.gain[k]
	if best >= 0 {
		p := &bs.labels[best]
		l.value, l.seen = p.value, p.seen
		if l.seen&(1<<(c.place&63)) != 0 {
			gain = bs.beside(best, c, k, gain)
		}
		pl := &b.Places[int(p.slot)/len(b.Receivers)]
		shift := pl.Axis1[p.end-pl.Lo] + 360*float64(p.turn) - b.Places[c.place].Axis1[k-b.Places[c.place].Lo]
		l.turn = int32(bs.nearest(x, shift))
	} else {
		l.turn = int32(bs.nearest(x, 0))
	}
	if gain <= 0 {
		return
	}
	l.value += gain - scanCost*float64(c.steps)
	l.seen |= 1 << (c.place & 63)
	bs.push(l)
}

// beside is a scan's gain where the sequence before it may hold its source
// already.
func (bs *blockSolver) beside(li int32, c *cell, k int, gain float64) float64 {
	t := bs.g.s.t
	bs.chain = bs.chain[:0]
	for ; li >= 0; li = bs.labels[li].before {
		l := &bs.labels[li]
		if l.cell < 0 || t.cells[bs.g.bi][l.cell].source != c.source {
			continue
		}
		o := &t.cells[bs.g.bi][l.cell]
		bs.chain = append(bs.chain, t.scan(bs.g.bi, o.place, o.rx, int(l.start), o.steps, int(l.turn), -1))
	}
	if len(bs.chain) == 0 {
		return gain
	}
	rest := slices.Clone(bs.g.s.source[c.source])
	for _, o := range bs.chain {
		rest = insert(nil, rest, o)
	}
	x := t.scan(bs.g.bi, c.place, c.rx, k, c.steps, 0, -1)
	with := insert(bs.with[:0], rest, x)
	bs.with = with
	total := 0.0
	for _, gi := range bs.g.s.goals[c.source] {
		total += bs.g.s.earn.goal(gi, with, nil) - bs.g.s.earn.goal(gi, rest, nil)
	}
	return total
}

// result is the best sequence as scans.
func (bs *blockSolver) result(bi int) []*scan {
	t := bs.g.s.t
	best := int32(-1)
	value := 0.0
	if len(bs.must) > 0 {
		value = math.Inf(-1)
	}
	for i := range bs.labels {
		l := &bs.labels[i]
		if l.value > value && bs.passes(int32(i)) {
			best, value = int32(i), l.value
		}
	}
	var list []*scan
	for li := best; li >= 0; li = bs.labels[li].before {
		l := &bs.labels[li]
		if l.must >= 0 {
			list = append(list, bs.must[l.must])
			continue
		}
		c := &t.cells[bi][l.cell]
		list = append(list, t.scan(bi, c.place, c.rx, int(l.start), c.steps, int(l.turn), -1))
	}
	if best < 0 {
		// The scans that should stand leave one another too little room: only
		// the pins, which the campaign answers for, stay.
		return bs.g.s.pins(bi)
	}
	slices.Reverse(list)
	return list
}

// passes tells whether a sequence holds every scan that must stand.
func (bs *blockSolver) passes(li int32) bool {
	n := 0
	for ; li >= 0; li = bs.labels[li].before {
		if bs.labels[li].must >= 0 {
			n++
		}
	}
	return n == len(bs.must)
}
