package solve

import (
	"slices"
)

// state is a plan under way: the scans of every block, and what each goal
// earns from them. It is changed by proposals: open, then changes, then weigh,
// then accept or reject.
type state struct {
	t      *table
	goals  []*goal   // by index of the goal; nil: without units
	of     [][]*goal // by source
	blocks [][]*scan // by block, in order of start
	source [][]*scan // by source, in order of start
	earned []float64 // by goal
	value  []float64 // by source: earned, bonuses and the cost of its time
	earn   earner
	bonus  map[scanKey]float64 // of scans that an earlier plan holds; may be nil
	stays  []scan              // those, in the order of that plan

	// The proposal under way.
	log     []change
	touched []touch   // sources
	opened  []shelf   // blocks
	saved   []float64 // earned of the touched sources' goals
	lists   []*scan   // of the touched sources and blocks
	stamp   []uint32  // by source, then block
	version []uint32  // by source: how often its scans have changed
	now     uint32
	free    []*scan
	scratch []*scan
}

// scanKey tells scans of a horizon apart.
type scanKey struct{ block, source, rx, start, steps int }

func (x *scan) key() scanKey { return scanKey{x.block, x.source, x.rx, x.start, x.steps} }

// change is one step of a proposal, so that it can be taken back.
type change struct {
	op          op
	x           *scan
	start, turn int // before, of a scan that was moved
}

type op uint8

const (
	added op = iota
	removed
	moved
)

// touch is a source whose scans a proposal changes.
type touch struct {
	shelf
	value float64 // before
	saved int     // where in state.saved what its goals earned begins
}

// shelf says where in state.lists the scans of a source or block begin as they
// were, and how many there are.
type shelf struct{ index, from, n int }

// scanCost keeps equal plans short: the worth of a step of telescope time.
const scanCost = 1e-7

func newState(t *table) *state {
	set, sources := t.p.Units, len(t.p.Campaign.Sources)
	s := &state{t: t, goals: t.goals, of: make([][]*goal, sources), blocks: make([][]*scan, len(t.p.Blocks)),
		source: make([][]*scan, sources), earned: make([]float64, len(set.Goals)), value: make([]float64, sources),
		stamp: make([]uint32, sources+len(t.p.Blocks)), version: make([]uint32, sources)}
	for gi, g := range s.goals {
		if g != nil {
			src := set.Goals[gi].Source
			s.of[src] = append(s.of[src], g)
		}
	}
	s.open()
	for bi := range t.p.Blocks {
		for _, x := range t.pins(bi) {
			s.add(x)
		}
	}
	s.weigh()
	s.accept()
	return s
}

// total is what the search maximises: the score, bonuses for scans that stay,
// and a small cost of telescope time.
func (s *state) total() float64 {
	total := 0.0
	for _, v := range s.value {
		total += v
	}
	return total
}

// score is what the plan earns.
func (s *state) score() float64 {
	total := 0.0
	for _, v := range s.earned {
		total += v
	}
	return total
}

// open begins a proposal.
func (s *state) open() {
	s.now++
	s.log, s.touched, s.opened, s.saved, s.lists = s.log[:0], s.touched[:0], s.opened[:0], s.saved[:0], s.lists[:0]
}

func (s *state) touch(source int) {
	if s.stamp[source] == s.now {
		return
	}
	s.stamp[source] = s.now
	s.touched = append(s.touched, touch{s.shelve(source, s.source[source]), s.value[source], len(s.saved)})
	for _, g := range s.of[source] {
		s.saved = append(s.saved, s.earned[g.index])
	}
}

func (s *state) shelve(index int, list []*scan) shelf {
	s.lists = append(s.lists, list...)
	return shelf{index, len(s.lists) - len(list), len(list)}
}

func (s *state) touchBlock(bi int) {
	if at := len(s.source) + bi; s.stamp[at] != s.now {
		s.stamp[at] = s.now
		s.opened = append(s.opened, s.shelve(bi, s.blocks[bi]))
	}
}

// add puts a scan into the plan. There must be room for it.
func (s *state) add(x *scan) {
	s.touch(x.source)
	s.touchBlock(x.block)
	s.log = append(s.log, change{op: added, x: x})
	s.enter(x)
}

// remove takes a scan out of the plan.
func (s *state) remove(x *scan) {
	s.touch(x.source)
	s.touchBlock(x.block)
	s.log = append(s.log, change{op: removed, x: x})
	s.leave(x)
}

// move gives a scan another start, and the turn that was nearest to the one it
// had. Its place among the scans of its block must stay the same.
func (s *state) move(x *scan, start int) {
	s.touch(x.source)
	s.log = append(s.log, change{op: moved, x: x, start: x.start, turn: x.turn})
	s.retime(x, start, x.turn)
}

func (s *state) retime(x *scan, start, turn int) {
	list := s.source[x.source]
	s.t.time(x, start)
	if lo, hi := s.t.turns(x); turn < lo || turn > hi {
		turn = min(max(turn, lo), hi)
	}
	s.t.orient(x, turn)
	i := slices.Index(list, x)
	for ; i > 0 && before(list[i-1], x) > 0; i-- {
		list[i-1], list[i] = x, list[i-1]
	}
	for ; i+1 < len(list) && before(list[i+1], x) < 0; i++ {
		list[i+1], list[i] = x, list[i+1]
	}
}

func (s *state) enter(x *scan) {
	x.in = true
	s.source[x.source] = enter(s.source[x.source], x, before)
	s.blocks[x.block] = enter(s.blocks[x.block], x, func(a, b *scan) int { return a.start - b.start })
}

func (s *state) leave(x *scan) {
	x.in = false
	s.source[x.source] = leave(s.source[x.source], x)
	s.blocks[x.block] = leave(s.blocks[x.block], x)
}

func enter(list []*scan, x *scan, order func(a, b *scan) int) []*scan {
	list = append(list, x)
	i := len(list) - 1
	for ; i > 0 && order(list[i-1], x) > 0; i-- {
		list[i] = list[i-1]
	}
	list[i] = x
	return list
}

func leave(list []*scan, x *scan) []*scan {
	i := slices.Index(list, x)
	copy(list[i:], list[i+1:])
	return list[:len(list)-1]
}

// weigh works out what the touched sources earn now, and by how much the plan
// is better than when the proposal was opened.
func (s *state) weigh() float64 {
	d := 0.0
	for _, t := range s.touched {
		s.value[t.index] = s.worth(t.index, s.source[t.index], true)
		d += s.value[t.index] - t.value
	}
	return d
}

// worth is what scans of a source earn at best, less the cost of their time;
// with note, what each goal earns is noted.
func (s *state) worth(source int, scans []*scan, note bool) float64 {
	total := 0.0
	for _, g := range s.of[source] {
		v := s.earn.value(g, scans)
		if note {
			s.earned[g.index] = v
		}
		total += v
	}
	for _, x := range scans {
		total -= scanCost * float64(x.steps)
		if s.bonus != nil {
			total += s.bonus[x.key()]
		}
	}
	return total
}

// stake is what a source loses without one of its scans, as of before the
// proposal.
func (s *state) stake(x *scan) float64 {
	if x.staked != s.version[x.source]+1 {
		s.scratch = s.scratch[:0]
		for _, y := range s.source[x.source] {
			if y != x {
				s.scratch = append(s.scratch, y)
			}
		}
		x.staked = s.version[x.source] + 1
		x.stake = s.value[x.source] - s.worth(x.source, s.scratch, false)
	}
	return x.stake
}

// gain is what a source wins by more scans.
func (s *state) gain(source int, list []*scan) float64 {
	s.scratch = append(s.scratch[:0], s.source[source]...)
	for _, x := range list {
		s.scratch = enter(s.scratch, x, before)
	}
	return s.worth(source, s.scratch, false) - s.value[source]
}

// prune removes scans of a source that add nothing.
func (s *state) prune(source int) {
	if len(s.source[source]) < 2 {
		return
	}
	whole := s.worth(source, s.source[source], false)
	for i := len(s.source[source]) - 1; i >= 0; i-- {
		x := s.source[source][i]
		if x.fixed {
			continue
		}
		s.scratch = append(append(s.scratch[:0], s.source[source][:i]...), s.source[source][i+1:]...)
		if v := s.worth(source, s.scratch, false); v >= whole {
			whole = v
			s.remove(x)
		}
	}
}

// accept makes the proposal the plan.
func (s *state) accept() {
	for _, t := range s.touched {
		s.version[t.index]++
	}
	for _, c := range s.log {
		s.recycle(c.x)
	}
	s.log = s.log[:0]
}

// recycle keeps a scan that is in no plan to be filled anew.
func (s *state) recycle(x *scan) {
	if !x.in && !x.free {
		x.free = true
		s.free = append(s.free, x)
	}
}

// reject takes the proposal back.
func (s *state) reject() {
	for i := len(s.log) - 1; i >= 0; i-- {
		switch c := &s.log[i]; c.op {
		case added:
			c.x.in = false
		case removed:
			c.x.in = true
		case moved:
			s.t.time(c.x, c.start)
			s.t.orient(c.x, c.turn)
		}
	}
	for _, c := range s.log {
		s.recycle(c.x)
	}
	s.log = s.log[:0]
	for _, h := range s.opened {
		s.blocks[h.index] = append(s.blocks[h.index][:0], s.lists[h.from:h.from+h.n]...)
	}
	for _, t := range s.touched {
		s.source[t.index] = append(s.source[t.index][:0], s.lists[t.from:t.from+t.n]...)
		s.value[t.index] = t.value
		for i, g := range s.of[t.index] {
			s.earned[g.index] = s.saved[t.saved+i]
		}
	}
}

// fresh is a scan to fill, used before or new.
func (s *state) fresh() *scan {
	if n := len(s.free); n > 0 {
		x := s.free[n-1]
		s.free = s.free[:n-1]
		return x
	}
	return new(scan)
}

// set gives a block other scans.
func (s *state) set(bi int, scans []*scan) {
	for len(s.blocks[bi]) > 0 {
		s.remove(s.blocks[bi][len(s.blocks[bi])-1])
	}
	for _, x := range scans {
		s.add(x)
	}
}

// copy are the plan's scans by value, to come back to.
func (s *state) copy(dst []scan) []scan {
	dst = dst[:0]
	for _, list := range s.blocks {
		for _, x := range list {
			dst = append(dst, *x)
		}
	}
	return dst
}

// resume makes a copied plan the plan again.
func (s *state) resume(kept []scan) {
	s.open()
	for bi := range s.blocks {
		s.set(bi, nil)
	}
	for i := range kept {
		x := new(scan)
		*x = kept[i]
		s.add(x)
	}
	s.weigh()
	s.accept()
}

// pins are the pinned scans of a block, each on the turn nearest to none.
func (t *table) pins(bi int) []*scan {
	b := &t.p.Blocks[bi]
	var list []*scan
	for i, p := range b.Pins {
		place := b.PlaceIndex(p.Source)
		if place < 0 {
			continue
		}
		x := t.scan(bi, place, p.Receiver, p.Start, p.Steps, 0, i)
		lo, hi := t.turns(x)
		t.orient(x, min(max(0, lo), hi))
		list = append(list, x)
	}
	slices.SortFunc(list, func(a, b *scan) int { return a.start - b.start })
	return list
}

// turns are the whole turns that a scan's motor azimuth may have.
func (t *table) turns(x *scan) (lo, hi int) {
	b := &t.p.Blocks[x.block]
	return b.Turns(&b.Places[x.place], x.start, x.steps)
}
