package verify

import (
	"sync"
	"sync/atomic"
)

// bound is bound(p) of section 6: what the units cost at their prices, and the
// largest total worth of candidates in every block, apart by settling and
// calibration.
//
// Blocks are taken one at a time and forgotten, so the memory needed is that
// of one block a worker and, for the partners of overlaps and pairs, a few
// runs a block and source.
func (m *model) bound(prices []float64, o Options) (float64, error) {
	total := 0.0
	for _, u := range m.units {
		total += u.load * prices[u.index]
	}
	p, err := m.findPartners(o)
	if err != nil {
		return 0, err
	}
	best := make([]float64, len(m.blocks))
	err = m.eachBlock(o, func(i int, b *block, v *view) error {
		worth, err := m.bestOf(b, v, &appraiser{model: m, partners: p, prices: prices})
		best[i] = worth
		return err
	})
	for _, w := range best { // in one order, so that the sum is always the same
		total += w
	}
	return total, err
}

// bestOf is the largest total worth of candidates of one block.
func (m *model) bestOf(b *block, v *view, a *appraiser) (float64, error) {
	f, err := m.newField(b)
	if f == nil {
		return 0, err
	}
	a.field = f
	for _, s := range m.wanted(b, func(*goal) bool { return true }) {
		if v.look(f, s) {
			a.add(v)
		}
	}
	return a.chain(), nil
}

// chain is the best sum of scans that keep the gap between them, by dynamic
// programming from the block's end backwards: from[i] is the best that scans
// starting at instant i or later can give.
func (a *appraiser) chain() float64 {
	steps := a.field.steps
	from := make([]float64, steps+2)
	for i := steps; i >= 0; i-- {
		from[i] = from[i+1]
		for _, r := range a.rows {
			if i+r.length > steps || r.best[i] == 0 {
				continue
			}
			next := min(i+r.length+a.field.gap, steps+1)
			from[i] = max(from[i], r.best[i]+from[next])
		}
	}
	return from[0]
}

// eachBlock calls f for every block, with a view to reuse, from as many
// goroutines as asked for. It ends at the first error.
func (m *model) eachBlock(o Options, f func(i int, b *block, v *view) error) error {
	workers := min(max(o.Workers, 1), len(m.blocks))
	var (
		next   atomic.Int64
		failed atomic.Bool
		errs   = make([]error, len(m.blocks))
		wait   sync.WaitGroup
	)
	work := func() {
		var v view
		for {
			i := int(next.Add(1)) - 1
			if i >= len(m.blocks) || failed.Load() {
				return
			}
			err := o.stopped()
			if err == nil {
				err = f(i, m.blocks[i], &v)
			}
			if err != nil {
				errs[i] = err
				failed.Store(true)
			}
		}
	}
	for range workers - 1 {
		wait.Go(work)
	}
	work()
	wait.Wait()
	for _, err := range errs {
		if err != nil {
			return err
		}
	}
	return nil
}
