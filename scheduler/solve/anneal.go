package solve

import (
	"math"
	"math/rand/v2"

	"cadencewright/scheduler"
)

// annealer improves a plan by small random changes: scans are put in for units
// that want them, moved, lengthened and shortened, and whatever stands in the
// way slides or goes. Changes for the worse are accepted by a temperature.
type annealer struct {
	drawer
	units  []int // that any cell can serve
	score  float64
	top    float64
	earned float64 // the score of the top
	kept   []scan
	temp   float64
	tries  int64
	oust   float64
	floor  float64
	party  []*scan
	reach  []float64 // by goal: the most that it could earn
	crowd  int       // a source that may have a scan too many, or -1
}

func newAnnealer(s *state, menus []menu, seed uint64) *annealer {
	a := &annealer{drawer: drawer{t: s.t, s: s, menus: menus, rng: rand.New(rand.NewPCG(seed, 0x9e3779b97f4a7c15))}, oust: 0.1}
	a.thrift = s.t.thrift
	a.reach = make([]float64, len(s.goals))
	for ui := range menus {
		a.reach[s.t.p.Units.Units[ui].Goal] += menus[ui].top
		if len(menus[ui].refs) > 0 {
			a.units = append(a.units, ui)
		}
	}
	a.score = s.total()
	a.record()
	return a
}

func (a *annealer) record() {
	a.top, a.earned = a.score, a.s.score()
	a.kept = a.s.copy(a.kept)
}

// try makes one change and keeps it or takes it back.
func (a *annealer) try() {
	a.tries++
	a.s.open()
	a.crowd = -1
	a.floor = a.temp * math.Log(1-a.rng.Float64())
	kind := a.change()
	if kind < 0 {
		a.s.reject()
		return
	}
	d := a.s.weigh()
	if d < a.floor {
		a.s.reject()
		return
	}
	if a.crowd >= 0 {
		a.s.prune(a.crowd)
		d = a.s.weigh()
	}
	a.s.accept()
	a.score += d
	if a.score > a.top+1e-9 {
		a.record()
	}
}

// change is one random change of the plan; it reports which kind, or -1 if it
// came to nothing.
func (a *annealer) change() int {
	if len(a.s.stays) > 0 && a.rng.IntN(4) == 0 {
		return a.restore()
	}
	switch k := a.rng.IntN(100); {
	case k < 55:
		return a.want()
	case k < 70:
		return a.shift()
	case k < 85:
		return a.resize()
	default:
		return a.relocate()
	}
}

// hunger is how much more than it does a goal should be able to earn to be drawn
// every time, in units of scale.
const hunger = 0.3

// wanting draws a unit, one whose goal could earn much more than it does rather
// than one whose goal could not.
func (a *annealer) wanting() int {
	for range 8 {
		ui := a.units[a.rng.IntN(len(a.units))]
		g := a.t.p.Units.Units[ui].Goal
		if a.reach[g]-a.s.earned[g] > hunger*a.rng.Float64()*a.t.scale() || a.rng.IntN(16) == 0 {
			return ui
		}
	}
	return -1
}

// want puts in what a unit needs.
func (a *annealer) want() int {
	ui := a.wanting()
	if ui < 0 {
		return -1
	}
	g := a.s.goals[a.t.p.Units.Units[ui].Goal]
	src := a.t.p.Units.Goals[g.index].Source
	if g.kind == scheduler.KindOverlap || g.kind == scheduler.KindBandPair {
		return a.together(ui, g, src)
	}
	x := a.single(ui)
	if x == nil {
		return -1
	}
	if a.put(x) {
		a.crowd = src
		return 0
	}
	return -1
}

// put puts in scans of a source, if they gain enough for what has to go; where
// they gain nothing beside what stands, one of the source's scans makes way.
func (a *annealer) put(list ...*scan) bool {
	ok := a.tryPut(list)
	for _, x := range list {
		a.s.recycle(x)
	}
	return ok
}

func (a *annealer) tryPut(list []*scan) bool {
	src := list[0].source
	gain := a.s.gain(src, list)
	if gain <= 1e-6 {
		if mine := a.s.source[src]; len(mine) > 0 {
			if z := mine[a.rng.IntN(len(mine))]; !z.fixed {
				a.s.remove(z)
				gain = a.s.gain(src, list)
			}
		}
	}
	budget := gain - a.floor
	if budget <= 0 {
		return false
	}
	for _, x := range list {
		if !a.s.insert(x, a.rng, a.oust, &budget) {
			return false
		}
	}
	return true
}

// together puts in scans that earn together: partners for one that stands, or
// all of them anew.
func (a *annealer) together(ui int, g *goal, src int) int {
	a.party = a.party[:0]
	kind := 1
	var x *scan
	if list := a.s.source[src]; len(list) > 0 && a.rng.IntN(2) == 0 {
		x = list[a.rng.IntN(len(list))]
		if g.of(x) == 0 {
			return -1
		}
	} else {
		if x = a.single(ui); x == nil {
			return -1
		}
		a.party = append(a.party, x)
		kind = 2
	}
	n := g.count - 1
	if g.kind == scheduler.KindBandPair {
		n = 1
		if g.of(x) == g.wants {
			n = 0
		}
	}
	for range n {
		if y := a.partner(ui, g, x); y != nil {
			a.party = append(a.party, y)
		}
	}
	if len(a.party) == 0 || !a.put(a.party...) {
		return -1
	}
	a.crowd = src
	return kind
}

// standing draws a scan of the plan that may be changed.
func (a *annealer) standing() *scan {
	for range 4 {
		list := a.s.blocks[a.rng.IntN(len(a.s.blocks))]
		if len(list) > 0 {
			if x := list[a.rng.IntN(len(list))]; !x.fixed {
				return x
			}
		}
	}
	return nil
}

// again puts a scan in once more at another start, or in another form.
func (a *annealer) again(x *scan, place, rx, start, steps int) bool {
	if pl := &a.t.p.Blocks[x.block].Places[place]; start < a.t.first[x.block] || !pl.Allows(steps, start) {
		return false
	}
	y := a.s.fresh()
	a.t.fill(y, x.block, place, rx, start, steps)
	a.s.remove(x)
	budget := a.gain1(y) - a.floor
	if budget <= 0 {
		a.s.recycle(y)
		return false
	}
	return a.s.insert(y, a.rng, a.oust, &budget)
}

// shift moves a scan in its block.
func (a *annealer) shift() int {
	x := a.standing()
	if x == nil {
		return -1
	}
	reach := 3
	if a.rng.IntN(3) == 0 {
		reach = a.t.p.Blocks[x.block].Steps / 3
	}
	to := x.start + a.rng.IntN(2*reach+1) - reach
	if to = x.earliest(to); to < 0 || to == x.start {
		return -1
	}
	if !a.again(x, x.place, x.rx, to, x.steps) {
		return -1
	}
	return 3
}

// resize gives a scan another length or receiver.
func (a *annealer) resize() int {
	x := a.standing()
	if x == nil {
		return -1
	}
	b := &a.t.p.Blocks[x.block]
	pl := &b.Places[x.place]
	steps, rx := x.steps, x.rx
	if a.rng.IntN(3) > 0 {
		steps = pl.Lengths[a.rng.IntN(len(pl.Lengths))].Steps
	} else {
		rx = a.rng.IntN(len(b.Receivers))
	}
	if pl.Info[rx] == nil || steps == x.steps && rx == x.rx {
		return -1
	}
	start := x.start
	if a.rng.IntN(2) == 0 {
		start += x.steps - steps
	}
	if start < 0 || !a.again(x, x.place, rx, start, steps) {
		return -1
	}
	a.crowd = x.source
	return 4
}

// relocate takes a scan out and puts in another one for the same source.
func (a *annealer) relocate() int {
	x := a.standing()
	if x == nil {
		return -1
	}
	list := a.t.p.Units.BySource[x.source]
	ui := list[a.rng.IntN(len(list))]
	y := a.single(ui)
	if y == nil {
		return -1
	}
	a.s.remove(x)
	budget := a.gain1(y) - a.floor
	if budget <= 0 {
		a.s.recycle(y)
		return -1
	}
	if !a.s.insert(y, a.rng, a.oust, &budget) {
		return -1
	}
	return 5
}

// gain1 is what one scan gains.
func (a *annealer) gain1(x *scan) float64 {
	a.party = append(a.party[:0], x)
	return a.s.gain(x.source, a.party)
}
