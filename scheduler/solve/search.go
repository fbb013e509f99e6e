package solve

import (
	"math"
	"math/rand/v2"
	"slices"

	"cadencewright/scheduler"
	"cadencewright/scheduler/units"
)

// search improves a plan by destroying a part of it and filling that again.
type search struct {
	s     *state
	bs    *blockSolver
	rng   *rand.Rand
	price []float64
	scale []float64
	top   float64 // best score so far
	kept  [][]*scan
	temp  float64
	cells [][]cellRef // by unit: the cells that can serve it
}

type cellRef struct{ block, cell, row int }

func newSearch(t *table, seed uint64) *search {
	s := newState(t)
	sr := &search{s: s, bs: &blockSolver{stride: 1}, rng: rand.New(rand.NewPCG(seed, 0x9e3779b97f4a7c15)),
		scale: make([]float64, len(t.p.Units.Units)), cells: make([][]cellRef, len(t.p.Units.Units))}
	sr.bs.g.s = s
	for bi := range t.cells {
		for ci := range t.cells[bi] {
			for ri := range t.cells[bi][ci].rows {
				u := t.cells[bi][ci].rows[ri].unit
				sr.cells[u] = append(sr.cells[u], cellRef{bi, ci, ri})
			}
		}
	}
	return sr
}

// refill fills one block anew around the scans that must stand; by price, each
// unit's gain is what it is worth above its price, so that a block leaves to
// others what they can serve better.
func (sr *search) refill(bi int, must []*scan, byPrice, vary bool) {
	sr.s.set(bi, must)
	sr.bs.g.price, sr.bs.g.scale = nil, nil
	if byPrice {
		sr.bs.g.price = sr.price
	}
	if vary {
		sr.bs.g.scale = sr.scale
	}
	sr.s.set(bi, sr.bs.solve(bi, must))
}

// build makes a first plan: every block by price, then every block by what it
// really adds, until nothing is gained.
func (sr *search) build(rounds int) {
	for bi := range sr.s.blocks {
		sr.refill(bi, sr.s.pins(bi), true, false)
	}
	for range rounds {
		before := sr.s.score
		for bi := range sr.s.blocks {
			sr.improve(bi)
		}
		if sr.s.score <= before+1e-9 {
			break
		}
	}
	sr.record()
}

// improve fills a block anew and keeps the result if it is no worse.
func (sr *search) improve(bi int) bool {
	blocks := []int{bi}
	kept, score := sr.s.keep(blocks), sr.s.score
	sr.refill(bi, sr.s.pins(bi), false, false)
	if sr.s.score < score-1e-12 {
		sr.s.restore(blocks, kept)
		return false
	}
	return sr.s.score > score+1e-9
}

// record keeps the plan if it is the best so far.
func (sr *search) record() {
	if sr.kept == nil || sr.s.score > sr.top+1e-9 {
		sr.top, sr.kept = sr.s.score, sr.s.best()
	}
}

// move makes one change and keeps it or takes it back.
func (sr *search) move() {
	switch x := sr.rng.IntN(10); {
	case x < 5:
		sr.want()
	case x < 8:
		if blocks := sr.related(); len(blocks) > 0 {
			sr.ruin(blocks)
		}
	default:
		sr.ruin(sr.neighbours())
	}
}

// attempt runs change, which may touch only the blocks, and takes it back if
// the score falls by more than the temperature allows.
func (sr *search) attempt(blocks []int, change func()) {
	blocks = slices.Clone(blocks) // change may reorder its own
	kept, score := sr.s.keep(blocks), sr.s.score
	change()
	d := sr.s.score - score
	if d < -1e-12 && (sr.temp <= 0 || sr.rng.Float64() >= math.Exp(d/sr.temp)) {
		sr.s.restore(blocks, kept)
		return
	}
	sr.record()
}

// ruin empties some blocks and fills them one after the other, the first ones
// by price or with varied gains.
func (sr *search) ruin(blocks []int) {
	sr.attempt(blocks, func() {
		for _, b := range blocks {
			sr.s.set(b, sr.s.pins(b))
		}
		sr.vary()
		sr.rng.Shuffle(len(blocks), func(i, j int) { blocks[i], blocks[j] = blocks[j], blocks[i] })
		byPrice := sr.rng.IntN(3) > 0
		for i, b := range blocks {
			sr.refill(b, sr.s.pins(b), byPrice && i < len(blocks)-1, true)
		}
		for _, b := range blocks[:len(blocks)-1] {
			sr.improve(b)
		}
	})
}

// vary draws a factor for every unit's gain.
func (sr *search) vary() {
	width := 0.5 * sr.rng.Float64()
	for i := range sr.scale {
		sr.scale[i] = 1 + width*(sr.rng.Float64()-0.5)
	}
}

// related is a few blocks that can serve the units of one source, or stand
// near in time to one block.
func (sr *search) related() []int {
	n := 2 + sr.rng.IntN(3)
	ui := sr.rng.IntN(len(sr.cells))
	set := sr.s.t.p.Units
	src := set.Goals[set.Units[ui].Goal].Source
	var able []int
	for _, u := range set.BySource[src] {
		for _, c := range sr.cells[u] {
			if !slices.Contains(able, c.block) {
				able = append(able, c.block)
			}
		}
	}
	return sr.choose(able, n)
}

// neighbours is a block and others near to it in time.
func (sr *search) neighbours() []int {
	n := len(sr.s.blocks)
	at := sr.rng.IntN(n)
	b := &sr.s.t.p.Blocks[at]
	mid := b.FirstMin + b.Steps*sr.s.t.p.GridMin/2
	var able []int
	for bi := range sr.s.t.p.Blocks {
		o := &sr.s.t.p.Blocks[bi]
		if d := o.FirstMin + o.Steps*sr.s.t.p.GridMin/2 - mid; d > -24*60 && d < 24*60 {
			able = append(able, bi)
		}
	}
	return sr.choose(able, 2+sr.rng.IntN(2))
}

// choose draws up to n of the blocks.
func (sr *search) choose(able []int, n int) []int {
	sr.rng.Shuffle(len(able), func(i, j int) { able[i], able[j] = able[j], able[i] })
	return able[:min(n, len(able))]
}

// want draws a unit that earns less than it could, and forces a scan for it,
// or the scans together that an overlap or a pair needs, into the plan; the
// blocks are filled around them and those that lost a scan are filled again.
func (sr *search) want() {
	set := sr.s.t.p.Units
	for range 8 {
		ui := sr.rng.IntN(len(sr.cells))
		if len(sr.cells[ui]) == 0 {
			continue
		}
		u := &set.Units[ui]
		g := &set.Goals[u.Goal]
		if len(g.Units) == 1 && sr.s.earned[u.Goal] >= 0.98*u.Weight {
			continue
		}
		forced := sr.draw(ui, g)
		if len(forced) > 0 {
			sr.force(forced)
			return
		}
	}
}

// draw draws scans that together would earn from a unit.
func (sr *search) draw(ui int, g *units.Goal) []*scan {
	x := sr.candidate(ui)
	if x == nil {
		return nil
	}
	switch g.Kind {
	case scheduler.KindOverlap:
		return sr.overlapping(ui, g, x)
	case scheduler.KindBandPair:
		bands := sr.s.t.p.Units.Bands(g, x.tel, x.receiver)
		if bands == g.Wants() {
			return []*scan{x}
		}
		y := sr.partner(ui, func(o *scan) bool {
			return sr.s.t.p.Units.Bands(g, o.tel, o.receiver)|bands == g.Wants() && math.Abs(o.startMin-x.startMin) <= g.WithinMin+units.MS
		}, x)
		if y == nil {
			return nil
		}
		return []*scan{x, y}
	}
	return []*scan{x}
}

// overlapping adds the partners that an overlap needs.
func (sr *search) overlapping(ui int, g *units.Goal, x *scan) []*scan {
	set := sr.s.t.p.Units
	list := []*scan{x}
	bands := set.Bands(g, x.tel, x.receiver)
	lo, hi := x.startMin, x.endMin
	for len(list) < g.Count {
		y := sr.partner(ui, func(o *scan) bool {
			if set.Bands(g, o.tel, o.receiver)&bands == 0 {
				return false
			}
			for _, z := range list {
				if z.tel == o.tel {
					return false
				}
			}
			return math.Min(hi, o.endMin)-math.Max(lo, o.startMin) >= g.OverlapMin-units.MS
		}, x)
		if y == nil {
			return nil
		}
		bands &= set.Bands(g, y.tel, y.receiver)
		lo, hi = math.Max(lo, y.startMin), math.Min(hi, y.endMin)
		list = append(list, y)
	}
	return list
}

// candidate draws a scan that could earn from a unit, the better of a few.
func (sr *search) candidate(ui int) *scan {
	var best *scan
	top := 0.0
	for range 6 {
		ref := sr.cells[ui][sr.rng.IntN(len(sr.cells[ui]))]
		c := &sr.s.t.cells[ref.block][ref.cell]
		if c.pin >= 0 {
			continue
		}
		r := &c.rows[ref.row]
		i := sr.rng.IntN(len(r.val))
		if v := r.val[i] * (0.7 + 0.3*sr.rng.Float64()); v > top {
			top = v
			best = sr.s.t.scan(ref.block, c.place, c.rx, r.from+i, c.steps, sr.turn(ref.block, c, r.from+i), -1)
		}
	}
	return best
}

// turn is the allowed turn of the azimuth drive nearest to none.
func (sr *search) turn(bi int, c *cell, start int) int {
	b := &sr.s.t.p.Blocks[bi]
	lo, hi := b.Turns(&b.Places[c.place], start, c.steps)
	return min(max(0, lo), hi)
}

// partner draws another candidate for a unit, near to x, that ok accepts.
func (sr *search) partner(ui int, ok func(*scan) bool, x *scan) *scan {
	g := sr.s.t.p.GridMin
	for range 24 {
		ref := sr.cells[ui][sr.rng.IntN(len(sr.cells[ui]))]
		c := &sr.s.t.cells[ref.block][ref.cell]
		b := &sr.s.t.p.Blocks[ref.block]
		if c.pin >= 0 {
			continue
		}
		// Start somewhere near x, within what the cell allows.
		r := &c.rows[ref.row]
		k := int(x.startMin)/g - b.FirstMin/g + sr.rng.IntN(2*x.steps+1) - x.steps
		k = min(max(k, r.from), r.from+len(r.val)-1)
		if r.at(k) <= 0 {
			continue
		}
		y := sr.s.t.scan(ref.block, c.place, c.rx, k, c.steps, sr.turn(ref.block, c, k), -1)
		if y.block == x.block && (y.start < x.start+x.steps+b.MinGap && x.start < y.start+y.steps+b.MinGap) {
			continue
		}
		if ok(y) {
			return y
		}
	}
	return nil
}

// force puts scans into the plan, fills their blocks around them, and fills
// again some of the blocks that can serve what was displaced.
func (sr *search) force(scans []*scan) {
	blocks := []int{}
	for _, x := range scans {
		if !slices.Contains(blocks, x.block) {
			blocks = append(blocks, x.block)
		}
	}
	lost := sr.displaced(blocks)
	extra := sr.choose(lost, 2)
	all := append(slices.Clone(blocks), extra...)
	sr.attempt(all, func() {
		for _, b := range all {
			if slices.Contains(blocks, b) {
				sr.s.set(b, sr.s.pins(b))
			}
		}
		for _, b := range blocks {
			must := sr.s.pins(b)
			for _, x := range scans {
				if x.block == b {
					must = append(must, x)
				}
			}
			slices.SortFunc(must, func(a, b *scan) int { return a.start - b.start })
			sr.refill(b, must, false, false)
		}
		for _, b := range extra {
			sr.improve(b)
		}
		for _, b := range blocks { // the forced scan may now shift, or go
			sr.improve(b)
		}
	})
}

// displaced are other blocks that can serve the sources of some blocks' scans.
func (sr *search) displaced(blocks []int) []int {
	var list []int
	for _, b := range blocks {
		for _, x := range sr.s.blocks[b] {
			for _, u := range sr.s.t.p.Units.BySource[x.source] {
				for _, c := range sr.cells[u] {
					if !slices.Contains(blocks, c.block) && !slices.Contains(list, c.block) {
						list = append(list, c.block)
					}
				}
			}
		}
	}
	return list
}
