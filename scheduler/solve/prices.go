package solve

import (
	"math"
	"slices"
)

// pricing lowers bound(p) by a proximal bundle method (Lemaréchal, Strodiot and
// Bihain 1981): each block's best worth is a convex function of the prices, of
// which every evaluation gives one supporting plane, a column. The next prices
// are the best for the planes known so far that lie not too far from the best
// prices found; how far is learnt from how well the planes foretold.
type pricing struct {
	d       *dual
	price   []float64 // where the bound was worked out last
	best    []float64 // the prices of the least bound
	bound   float64   // the least bound
	load    []float64
	columns [][]column // by block
	tight   float64    // weight of the distance from best
	stuck   int
	over    bool
	seeded  bool // the first prices are those of an earlier plan
	master  master
}

// column is one block's scans at some prices: what they are worth in all
// before prices, and what they take of each unit.
type column struct {
	value  float64
	load   []unitLoad
	lambda float64 // its part in the last mixture
	idle   int     // for how many steps it had none
}

func newPricing(d *dual) *pricing {
	n := len(d.t.p.Units.Units)
	p := &pricing{d: d, price: make([]float64, n), best: make([]float64, n), load: make([]float64, n),
		bound: math.Inf(1), columns: make([][]column, len(d.blocks))}
	for i := range p.price {
		u := &d.t.p.Units.Units[i]
		p.price[i] = 0.4 * u.Value / float64(max(1, u.Cap/max(1, u.N)))
	}
	for bi := range p.columns {
		p.columns[bi] = []column{{lambda: 1}} // no scan at all
	}
	p.master.p = p
	return p
}

// seed takes the prices of an earlier plan to begin with, where it has any: for
// a plan that changes little they prove nearly as much as the best.
func (p *pricing) seed(prices map[string]float64) {
	if p.seeded = len(prices) > 0; p.seeded {
		for i := range p.price {
			p.price[i] = max(0, prices[p.d.t.p.Units.Units[i].Name])
		}
	}
}

// Columns that have not been wanted for so many steps are forgotten.
const maxIdle = 25

// enough is the relative fall of the bound below which no more is looked for.
const enough = 2e-6

// step works the bound out at the next prices, and reports whether it fell.
func (p *pricing) step() bool {
	foretold := 0.0
	first := math.IsInf(p.bound, 1)
	if !first {
		foretold = p.bound - p.master.solve()
		if foretold <= enough*math.Abs(p.bound) {
			// Nothing to be had so near; look further away before giving up.
			p.tight *= 0.1
			p.stuck++
			p.over = p.stuck > 4
			return false
		}
	}
	b := p.d.bound(p.price, p.load)
	p.learn()
	fell := b < p.bound
	switch {
	case first:
		norm := 0.0
		for i, l := range p.load {
			g := float64(p.d.t.p.Units.Units[i].Cap) - l
			norm += g * g
		}
		p.tight = norm / (0.5*b + 1e-9)
		if p.tight <= 0 {
			p.tight = 1
		}
	case p.bound-b >= 0.5*foretold:
		p.tight *= 0.5
	case b-p.bound > foretold:
		p.tight *= 1.5
	}
	if p.bound-b > enough*p.bound {
		p.stuck = 0
	}
	if fell {
		p.bound = b
		copy(p.best, p.price)
	}
	return fell
}

// learn takes the blocks' scans as new columns.
func (p *pricing) learn() {
	for bi := range p.columns {
		db := &p.d.blocks[bi]
		c := column{value: db.total, load: gather(db.load)}
		for _, l := range c.load {
			c.value += float64(l.load) * p.price[l.unit]
		}
		p.columns[bi] = slices.DeleteFunc(p.columns[bi], func(c column) bool { return c.idle > maxIdle })
		p.columns[bi] = append(p.columns[bi], c)
	}
}

// gather adds loads up by unit.
func gather(list []unitLoad) []unitLoad {
	out := slices.Clone(list)
	slices.SortFunc(out, func(a, b unitLoad) int { return a.unit - b.unit })
	n := 0
	for _, l := range out {
		if n > 0 && out[n-1].unit == l.unit {
			out[n-1].load += l.load
			continue
		}
		out[n] = l
		n++
	}
	return out[:n]
}

// done tells whether the bound has come as low as it will.
func (p *pricing) done() bool { return p.over }

// master is the quadratic programme of a step: prices that are best for the
// planes, tight·|price-best|²/2 added. Its dual mixes each block's columns; it
// is solved by moving weight from a block's worst column to its best.
type master struct {
	p     *pricing
	slope []float64 // cap less the mixture's load, by unit
}

// Sweeps over the blocks of one solution of the master.
const maxSweeps = 1000

// solve finds the next prices and returns the least that the planes allow
// there, the distance left out.
func (m *master) solve() float64 {
	p := m.p
	units := p.d.t.p.Units.Units
	if m.slope == nil {
		m.slope = make([]float64, len(units))
	}
	for i := range m.slope {
		m.slope[i] = float64(units[i].Cap)
		m.price(i)
	}
	for bi := range p.columns {
		for ci := range p.columns[bi] {
			if c := &p.columns[bi][ci]; c.lambda > 0 {
				m.shift(c, c.lambda)
			}
		}
	}
	for range maxSweeps {
		open := 0.0 // between the mixture and the best columns
		for bi := range p.columns {
			open += m.improve(p.columns[bi])
		}
		if open <= max(0.3*enough*p.bound, 0.05*(p.bound-m.value())) {
			break
		}
	}
	for bi := range p.columns {
		for ci := range p.columns[bi] {
			c := &p.columns[bi][ci]
			if c.idle++; c.lambda > 0 {
				c.idle = 0
			}
		}
	}
	return m.value()
}

// value is the bound at the current prices as far as the columns tell.
func (m *master) value() float64 {
	total := 0.0
	for i, price := range m.p.price {
		total += float64(m.p.d.t.p.Units.Units[i].Cap) * price
	}
	for bi := range m.p.columns {
		top := 0.0
		for ci := range m.p.columns[bi] {
			top = max(top, m.net(&m.p.columns[bi][ci]))
		}
		total += top
	}
	return total
}

// shift adds a part of a column to the mixture.
func (m *master) shift(c *column, by float64) {
	for _, l := range c.load {
		m.slope[l.unit] -= by * float64(l.load)
		m.price(l.unit)
	}
}

// price brings one unit's price up to date.
func (m *master) price(u int) {
	m.p.price[u] = max(0, m.p.best[u]-m.slope[u]/m.p.tight)
}

// net is a column's worth at the current prices.
func (m *master) net(c *column) float64 {
	v := c.value
	for _, l := range c.load {
		v -= float64(l.load) * m.p.price[l.unit]
	}
	return v
}

// improve moves weight between two columns of a block, and returns by how
// much its best column was better than its mixture.
func (m *master) improve(list []column) float64 {
	best, worst := -1, -1
	top, least, mean := math.Inf(-1), math.Inf(1), 0.0
	for i := range list {
		v := m.net(&list[i])
		mean += v * list[i].lambda
		if v > top {
			best, top = i, v
		}
		if list[i].lambda > 0 && v < least {
			worst, least = i, v
		}
	}
	if best == worst || top-least <= 0 {
		return 0
	}
	a, b := &list[best], &list[worst]
	curve := apart2(a.load, b.load) / m.p.tight
	by := b.lambda
	if curve > 0 {
		by = min(by, (top-least)/curve)
	}
	a.lambda += by
	m.shift(a, by)
	m.shift(b, -by)
	if b.lambda -= by; b.lambda < 1e-12 {
		b.lambda = 0
	}
	return top - mean
}

// apart2 is the squared distance between two loads.
func apart2(a, b []unitLoad) float64 {
	d := 0.0
	for len(a) > 0 || len(b) > 0 {
		var x int
		switch {
		case len(b) == 0 || len(a) > 0 && a[0].unit < b[0].unit:
			x, a = a[0].load, a[1:]
		case len(a) == 0 || b[0].unit < a[0].unit:
			x, b = b[0].load, b[1:]
		default:
			x = a[0].load - b[0].load
			a, b = a[1:], b[1:]
		}
		d += float64(x * x)
	}
	return d
}
