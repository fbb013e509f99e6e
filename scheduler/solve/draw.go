package solve

import (
	"math"
	"math/rand/v2"

	"cadencewright/scheduler"
	"cadencewright/scheduler/units"
)

// menu is the cells that can serve a unit, block by block.
type menu struct {
	refs   []cellRef
	blocks []blockRefs
	top    float64 // the largest value of any
}

// cellRef is a cell and its row for the unit: val[i] is what a start at from+i
// is worth at most.
type cellRef struct {
	block, cell int32
	steps, busy int32 // of the scan; with the least gap after it
	from        int32
	val         []float64
}

// at is the row's value at a start.
func (r *cellRef) at(start int) float64 {
	if i := start - int(r.from); i >= 0 && i < len(r.val) {
		return r.val[i]
	}
	return 0
}

// last is the row's last start.
func (r *cellRef) last() int { return int(r.from) + len(r.val) - 1 }

// blockRefs are the refs [from, to) of one block, and when their scans may
// start and end, minutes.
type blockRefs struct {
	block, from, to  int
	earliest, latest float64
}

// newMenus lists every unit's cells.
func newMenus(t *table) []menu {
	menus := make([]menu, len(t.p.Units.Units))
	for bi := range t.cells {
		b := &t.p.Blocks[bi]
		for ci := range t.cells[bi] {
			c := &t.cells[bi][ci]
			if c.pin >= 0 {
				continue
			}
			for ri := range c.rows {
				r := &c.rows[ri]
				cut := max(0, t.first[bi]-r.from)
				if cut >= len(r.val) {
					continue
				}
				from, val := r.from+cut, r.val[cut:]
				m := &menus[r.unit]
				if n := len(m.refs); n > 0 && m.refs[n-1].block == int32(bi) && m.refs[n-1].cell == int32(ci) {
					continue // of two options of a pair the first is enough
				}
				lo, hi := b.Minute(from, t.p.GridMin), b.Minute(from+len(val)-1+c.steps, t.p.GridMin)
				if n := len(m.blocks); n == 0 || m.blocks[n-1].block != bi {
					m.blocks = append(m.blocks, blockRefs{bi, len(m.refs), len(m.refs), lo, hi})
				}
				br := &m.blocks[len(m.blocks)-1]
				m.top = max(m.top, r.max*float64(t.p.Units.Units[r.unit].Cap)/float64(r.load))
				m.refs = append(m.refs, cellRef{int32(bi), int32(ci), int32(c.steps), int32(c.steps + b.MinGap), int32(from), val})
				br.to++
				br.earliest, br.latest = min(br.earliest, lo), max(br.latest, hi)
			}
		}
	}
	return menus
}

// drawer draws scans for units at random.
type drawer struct {
	t      *table
	s      *state
	menus  []menu
	rng    *rand.Rand
	probe  scan      // to weigh travel with
	thrift []float64 // by steps: how much a scan is favoured for being short
}

// make fills a scan of a cell.
func (d *drawer) make(ref *cellRef, start int) *scan {
	c := &d.t.cells[ref.block][ref.cell]
	x := d.s.fresh()
	d.t.fill(x, int(ref.block), c.place, c.rx, start, c.steps)
	return x
}

// single draws a scan that could earn from a unit, the better of a few by
// value and length.
func (d *drawer) single(ui int) *scan {
	m := &d.menus[ui]
	if len(m.refs) == 0 {
		return nil
	}
	var best *cellRef
	at, top := -1, 0.0
	for range 3 {
		ref := &m.refs[d.rng.IntN(len(m.refs))]
		i := d.rng.IntN(len(ref.val))
		if ref.val[i] <= 0 {
			continue
		}
		if v := ref.val[i] * d.thrift[ref.busy] * (0.5 + 0.5*d.rng.Float64()); v > top {
			best, at, top = ref, int(ref.from)+i, v
		}
	}
	if best == nil {
		return nil
	}
	if d.rng.IntN(2) == 0 {
		if k := d.snug(best); k >= 0 {
			at = k
		}
	}
	return d.make(best, at)
}

// partner draws a scan for unit ui that stands with x: for an overlap they
// have the time in common, for a pair their starts are near and it has the
// other band.
func (d *drawer) partner(ui int, g *goal, x *scan) *scan {
	m := &d.menus[ui]
	g0 := float64(d.t.p.GridMin)
	mine := g.of(x)
	for range 4 {
		// Choose among the blocks that are near in time.
		n, which := 0, -1
		for i := range m.blocks {
			br := &m.blocks[i]
			if !d.near(g, x, br) {
				continue
			}
			if n++; d.rng.IntN(n) == 0 {
				which = i
			}
		}
		if which < 0 {
			return nil
		}
		br := &m.blocks[which]
		ref := &m.refs[br.from+d.rng.IntN(br.to-br.from)]
		b := &d.t.p.Blocks[ref.block]
		c := &d.t.cells[ref.block][ref.cell]
		bands := g.bands[d.t.flat[b.Telescope]+b.Receivers[c.rx]]
		var lo, hi float64 // of the start
		if g.kind == scheduler.KindOverlap {
			if bands&mine == 0 {
				continue
			}
			lo, hi = x.startMin+g.overlap-float64(c.steps)*g0, x.endMin-g.overlap
		} else {
			if bands|mine != g.wants {
				continue
			}
			lo, hi = x.startMin-g.within, x.startMin+g.within
			if int(ref.block) == x.block {
				gap := float64(b.MinGap) * g0
				if c.rx != x.rx {
					gap = math.Ceil((b.Mount.SettleS+b.Mount.CalS+b.Mount.SwitchS)/60/g0) * g0
				}
				if d.rng.IntN(2) == 0 {
					lo = x.endMin + gap
				} else {
					hi = x.startMin - gap - float64(c.steps)*g0
				}
				if lo > hi {
					continue
				}
				switch d.rng.IntN(4) { // right beside
				case 0, 1:
					if lo >= x.endMin {
						hi = lo
					} else {
						lo = hi
					}
				}
			}
		}
		from := max(int(ref.from), int(math.Ceil((lo-units.MS-float64(b.FirstMin))/g0)))
		to := min(ref.last(), int(math.Floor((hi+units.MS-float64(b.FirstMin))/g0)))
		if from > to {
			continue
		}
		k := from + d.rng.IntN(to-from+1)
		if ref.at(k) <= 0 {
			continue
		}
		return d.make(ref, k)
	}
	return nil
}

// near tells whether a partner of x could stand in a block.
func (d *drawer) near(g *goal, x *scan, br *blockRefs) bool {
	if g.kind == scheduler.KindOverlap {
		return d.t.p.Blocks[br.block].Telescope != x.tel && br.earliest < x.endMin-g.overlap && br.latest > x.startMin+g.overlap
	}
	return br.earliest <= x.startMin+g.within && br.latest >= x.startMin-g.within
}
