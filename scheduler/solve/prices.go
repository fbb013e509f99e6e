package solve

import "math"

// pricing lowers bound(p) by a deflected subgradient method with Polyak's step
// (Camerini, Fratta and Maffioli 1975, Mathematical Programming Study 3, 26):
// the step aims at a target between the best bound and the best score known.
type pricing struct {
	d     *dual
	price []float64 // where the search stands
	best  []float64 // the prices of the least bound
	bound float64   // the least bound
	load  []float64
	dir   []float64
	theta float64
	stale int
}

func newPricing(d *dual) *pricing {
	n := len(d.t.p.Units.Units)
	p := &pricing{d: d, price: make([]float64, n), best: make([]float64, n), load: make([]float64, n),
		dir: make([]float64, n), bound: math.Inf(1), theta: 1}
	for i := range p.price {
		u := &d.t.p.Units.Units[i]
		p.price[i] = 0.4 * u.Value / float64(max(1, u.Cap/max(1, u.N)))
	}
	return p
}

// step makes one step with a target below the bound, and reports whether the
// least bound fell.
func (p *pricing) step(target float64) bool {
	b := p.d.bound(p.price, p.load)
	better := b < p.bound-1e-9*math.Abs(p.bound) || math.IsInf(p.bound, 1)
	if better {
		if b > p.bound*(1-2e-5) {
			p.stale++
		} else {
			p.stale = 0
		}
		p.bound = b
		copy(p.best, p.price)
	} else {
		p.stale++
	}
	if p.stale >= staleSteps {
		p.theta /= 2
		p.stale = 0
		copy(p.price, p.best)
		p.bound = math.Min(p.bound, p.d.bound(p.price, p.load))
		clear(p.dir)
	}
	p.move(b, target)
	return better
}

// staleSteps is after how many steps without gain the step is halved.
const staleSteps = 12

// move takes the deflected subgradient step from where the search stands.
func (p *pricing) move(at, target float64) {
	norm := 0.0
	for i := range p.price {
		g := float64(p.d.t.p.Units.Units[i].Cap) - p.load[i]
		if p.price[i] == 0 && g > 0 { // the price cannot fall below 0
			g = 0
		}
		p.dir[i] = 0.7*p.dir[i] + g
		norm += p.dir[i] * p.dir[i]
	}
	if norm == 0 {
		return
	}
	step := p.theta * math.Max(at-target, 1e-4*math.Abs(at)) / norm
	for i := range p.price {
		p.price[i] = math.Max(0, p.price[i]-step*p.dir[i])
	}
}

// done tells whether the steps have become too small to matter.
func (p *pricing) done() bool { return p.theta < 1e-3 }
