package solve

import (
	"sync"

	"cadencewright/scheduler/feasible"
)

// dual computes bound(p) of section 6: what all units' prices cost plus, block
// by block, the best total worth at those prices of any set of scans that the
// model cannot rule out. The exact per-block dynamic programme leaves travel
// out, so the bound holds for every plan.
type dual struct {
	t       *table
	workers int
	blocks  []dualBlock
}

// dualBlock is one block's part, with its own memory so that blocks can be
// worked on at the same time.
type dualBlock struct {
	worth [][]float64 // by length, then start: the best worth of any cell
	cell  [][]int32   // which cell that is
	best  []float64   // by step: of scans that end by then
	how   []int32     // the length of the scan that ends there, or -1
	total float64
	load  []unitLoad // of the chosen scans
	acc   []float64
	tmp   []float64
}

type unitLoad struct{ unit, load int }

func newDual(t *table, workers int) *dual {
	d := &dual{t: t, workers: max(1, workers), blocks: make([]dualBlock, len(t.p.Blocks))}
	for bi := range d.blocks {
		n := t.p.Blocks[bi].Steps + 1
		db := &d.blocks[bi]
		db.worth, db.cell = make([][]float64, len(t.lengths)), make([][]int32, len(t.lengths))
		for i := range t.cells[bi] {
			if li := t.cells[bi][i].lenIdx; db.worth[li] == nil {
				db.worth[li], db.cell[li] = make([]float64, n), make([]int32, n)
			}
		}
		db.best, db.how, db.acc, db.tmp = make([]float64, n), make([]int32, n), make([]float64, n), make([]float64, n)
	}
	return d
}

// bound is bound(p), and how much of every unit the chosen scans take. The
// result does not depend on the number of workers: blocks are summed in order.
func (d *dual) bound(price []float64, load []float64) float64 {
	next := make(chan int)
	var wg sync.WaitGroup
	for range min(d.workers, len(d.blocks)) {
		wg.Go(func() {
			for bi := range next {
				d.block(bi, price)
			}
		})
	}
	for bi := range d.blocks {
		next <- bi
	}
	close(next)
	wg.Wait()
	total := 0.0
	clear(load)
	for ui := range d.t.p.Units.Units {
		total += float64(d.t.p.Units.Units[ui].Cap) * price[ui]
	}
	for bi := range d.blocks {
		total += d.blocks[bi].total
		for _, l := range d.blocks[bi].load {
			load[l.unit] += float64(l.load)
		}
	}
	return total
}

// block solves one block at the given prices.
func (d *dual) block(bi int, price []float64) {
	db, b := &d.blocks[bi], &d.t.p.Blocks[bi]
	for li := range db.worth {
		clear(db.worth[li])
	}
	cells := d.t.cells[bi]
	for ci := range cells {
		db.offer(&cells[ci], int32(ci), price)
	}
	db.programme(d.t.lengths, b)
	db.collect(d.t.lengths, cells, b, price)
}

// offer enters a cell's worth at every start where it is the best so far.
func (db *dualBlock) offer(c *cell, ci int32, price []float64) {
	worth, cell := db.worth[c.lenIdx], db.cell[c.lenIdx]
	if c.goals == 1 && len(c.rows) == 1 {
		r := &c.rows[0]
		cost := float64(r.load) * price[r.unit]
		if r.max <= cost {
			return
		}
		w, cl := worth[r.from:], cell[r.from:]
		for i, v := range r.val {
			if v -= cost; v > w[i] {
				w[i], cl[i] = v, ci
			}
		}
		return
	}
	lo, hi := db.sum(c, price)
	for k := lo; k < hi; k++ {
		if db.acc[k] > worth[k] {
			worth[k], cell[k] = db.acc[k], ci
		}
	}
}

// sum leaves the cell's worth by start in acc[lo:hi]: the best option of each
// goal, where that is above its price, added up over goals.
func (db *dualBlock) sum(c *cell, price []float64) (lo, hi int) {
	lo, hi = len(db.acc), 0
	for _, r := range c.rows {
		lo, hi = min(lo, r.from), max(hi, r.from+len(r.val))
	}
	clear(db.acc[lo:hi])
	for i := 0; i < len(c.rows); {
		j := i + 1
		for j < len(c.rows) && c.rows[j].group == c.rows[i].group {
			j++
		}
		db.group(c.rows[i:j], price, lo, hi)
		i = j
	}
	return lo, hi
}

// group adds one goal's best option to acc.
func (db *dualBlock) group(rows []row, price []float64, lo, hi int) {
	if len(rows) == 1 {
		r := &rows[0]
		cost := float64(r.load) * price[r.unit]
		if r.max <= cost {
			return
		}
		for i, v := range r.val {
			if v > cost {
				db.acc[r.from+i] += v - cost
			}
		}
		return
	}
	clear(db.tmp[lo:hi])
	for ri := range rows {
		r := &rows[ri]
		cost := float64(r.load) * price[r.unit]
		if r.max <= cost {
			continue
		}
		for i, v := range r.val {
			if v-cost > db.tmp[r.from+i] {
				db.tmp[r.from+i] = v - cost
			}
		}
	}
	for k := lo; k < hi; k++ {
		db.acc[k] += db.tmp[k]
	}
}

// programme is the dynamic programme over the steps of the block.
func (db *dualBlock) programme(lengths []int, b *feasible.Block) {
	db.best[0], db.how[0] = 0, -1
	for t := 1; t < len(db.best); t++ {
		top, how := db.best[t-1], int32(-1)
		for li, n := range lengths {
			if n > t || db.worth[li] == nil {
				continue
			}
			v := db.worth[li][t-n]
			if v <= 0 {
				continue
			}
			if before := t - n - b.MinGap; before > 0 {
				v += db.best[before]
			}
			if v > top {
				top, how = v, int32(li)
			}
		}
		db.best[t], db.how[t] = top, how
	}
	db.total = db.best[len(db.best)-1]
}

// collect walks back over the chosen scans and adds up what they take.
func (db *dualBlock) collect(lengths []int, cells []cell, b *feasible.Block, price []float64) {
	db.load = db.load[:0]
	for t := len(db.best) - 1; t > 0; {
		li := db.how[t]
		if li < 0 {
			t--
			continue
		}
		start := t - lengths[li]
		c := &cells[db.cell[li][start]]
		db.take(c, start, price)
		t = max(start-b.MinGap, 0)
	}
}

// take notes the load of one scan: of each goal the option that counts.
func (db *dualBlock) take(c *cell, start int, price []float64) {
	for i := 0; i < len(c.rows); {
		best, which, j := 0.0, -1, i
		for ; j < len(c.rows) && c.rows[j].group == c.rows[i].group; j++ {
			r := &c.rows[j]
			if v := r.at(start) - float64(r.load)*price[r.unit]; v > best {
				best, which = v, j
			}
		}
		if which >= 0 {
			db.load = append(db.load, unitLoad{c.rows[which].unit, c.rows[which].load})
		}
		i = j
	}
}
