package solve

// snug finds a start for a cell's scan between scans that stand, where the
// least travel and the least pushing are needed, give or take some chance; -1
// if there is none.
func (d *drawer) snug(ref *cellRef) int {
	c := &d.t.cells[ref.block][ref.cell]
	d.probe.block, d.probe.place, d.probe.rx, d.probe.steps = int(ref.block), c.place, c.rx, c.steps
	list := d.s.blocks[ref.block]
	first, last := int(ref.from), ref.last()
	best, at := 0.0, -1
	for i := 0; i <= len(list); i++ {
		if i > 0 && list[i-1].start >= last {
			break
		}
		if i < len(list) && list[i].start+list[i].steps <= first {
			continue
		}
		k, cost := d.detour(list, i, first, last)
		if k < 0 || ref.at(k) <= 0 {
			continue
		}
		cost *= 0.4 + d.rng.Float64()
		if at < 0 || cost < best {
			best, at = cost, k
		}
	}
	return at
}

// detour is a start for the probe before the i-th scan of its block, and
// the steps it costs: what it and its travel take, less the travel saved, and
// what is missing.
func (d *drawer) detour(list []*scan, i, first, last int) (int, float64) {
	x := &d.probe
	b := &d.t.p.Blocks[x.block]
	var prev, next *scan
	k := first
	before, after, direct := b.MinGap, b.MinGap, 0
	if i > 0 {
		prev = list[i-1]
		k = max(k, prev.start+prev.steps+b.MinGap)
	}
	if i < len(list) {
		next = list[i]
	}
	if k > last {
		k = last
	}
	if prev != nil && next != nil {
		direct = d.t.gap(prev, next)
	}
	d.t.aim(x, k)
	d.s.face(x, i)
	if prev != nil {
		before = d.t.gap(prev, x)
		if to := min(prev.start+prev.steps+before, last); to > k {
			k = to
		}
	}
	if next != nil {
		after = d.t.gap(x, next)
	}
	cost := before + after - direct
	if next != nil {
		if prev != nil {
			cost += 2 * max(0, prev.start+prev.steps+before+x.steps+after-next.start)
		} else {
			cost += 2 * max(0, k+x.steps+after-next.start)
		}
		// Somewhere in the free time, not always at its start.
		if free := min(next.start-after-x.steps, last) - k; free > 0 {
			k += d.rng.IntN(free + 1)
		}
	} else if free := min(last-k, 6); free > 0 {
		k += d.rng.IntN(free + 1)
	}
	return k, float64(cost + 1)
}
