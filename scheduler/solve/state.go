package solve

import "slices"

// state is a plan under way: the scans of every block, and what each goal
// earns from them. Its score is always exact.
type state struct {
	t      *table
	blocks [][]*scan // by block, in order of start
	source [][]*scan // by source, in order of start
	earned []float64 // by goal
	score  float64
	earn   earner
	goals  [][]int // by source: goals that have units
}

func newState(t *table) *state {
	set := t.p.Units
	s := &state{t: t, blocks: make([][]*scan, len(t.p.Blocks)), source: make([][]*scan, len(t.p.Campaign.Sources)),
		earned: make([]float64, len(set.Goals)), earn: earner{set: set}, goals: make([][]int, len(t.p.Campaign.Sources))}
	for gi := range set.Goals {
		if len(set.Goals[gi].Units) > 0 {
			s.goals[set.Goals[gi].Source] = append(s.goals[set.Goals[gi].Source], gi)
		}
	}
	for bi := range t.p.Blocks {
		s.set(bi, s.pins(bi))
	}
	return s
}

// scan fills a scan's derived fields.
func (t *table) scan(bi, place, rx, start, steps, turn, pin int) *scan {
	b := &t.p.Blocks[bi]
	pl := &b.Places[place]
	return &scan{block: bi, place: place, rx: rx, start: start, steps: steps, turn: turn, pin: pin,
		source: pl.Source, tel: b.Telescope, receiver: b.Receivers[rx],
		startMin: b.Minute(start, t.p.GridMin), endMin: b.Minute(start+steps, t.p.GridMin), info: pl.InfoOf(rx, start, steps)}
}

// pins are the pinned scans of a block, each on the turn nearest to the one
// before it.
func (s *state) pins(bi int) []*scan {
	b := &s.t.p.Blocks[bi]
	var list []*scan
	for i, p := range b.Pins {
		place := b.PlaceIndex(p.Source)
		if place < 0 {
			continue
		}
		lo, hi := b.Turns(&b.Places[place], p.Start, p.Steps)
		turn := lo
		for k := lo; k <= hi; k++ {
			if abs(k) < abs(turn) {
				turn = k
			}
		}
		list = append(list, s.t.scan(bi, place, p.Receiver, p.Start, p.Steps, turn, i))
	}
	slices.SortFunc(list, func(a, b *scan) int { return a.start - b.start })
	return list
}

func abs(x int) int {
	if x < 0 {
		return -x
	}
	return x
}

// set gives a block new scans and brings the score up to date.
func (s *state) set(bi int, scans []*scan) {
	var touched []int
	for _, x := range s.blocks[bi] {
		s.source[x.source] = slices.DeleteFunc(s.source[x.source], func(y *scan) bool { return y == x })
		touched = append(touched, x.source)
	}
	s.blocks[bi] = scans
	for _, x := range scans {
		list := s.source[x.source]
		i, _ := slices.BinarySearchFunc(list, x, before)
		s.source[x.source] = slices.Insert(list, i, x)
		touched = append(touched, x.source)
	}
	slices.Sort(touched)
	for _, src := range slices.Compact(touched) {
		s.update(src)
	}
}

// before orders scans by start, then by block.
func before(a, b *scan) int {
	switch {
	case a.startMin < b.startMin:
		return -1
	case a.startMin > b.startMin:
		return 1
	}
	return a.block - b.block
}

// update works out anew what a source's goals earn.
func (s *state) update(source int) {
	for _, g := range s.goals[source] {
		s.earned[g] = s.earn.goal(g, s.source[source], nil)
	}
	s.score = 0
	for _, v := range s.earned { // summed anew in order: no drift, the same on every path
		s.score += v
	}
}

// keep remembers the scans of some blocks; restore brings them back.
func (s *state) keep(blocks []int) [][]*scan {
	kept := make([][]*scan, len(blocks))
	for i, b := range blocks {
		kept[i] = s.blocks[b]
	}
	return kept
}

func (s *state) restore(blocks []int, kept [][]*scan) {
	for i, b := range blocks {
		s.set(b, kept[i])
	}
}

// ceilSteps is seconds in grid steps, rounded up; a rounding error of the
// sum does not cost a step.
func ceilSteps(s float64, gridMin int) int {
	g := 60 * float64(gridMin)
	n := int(s / g)
	if float64(n)*g < s-1e-7 {
		n++
	}
	return n
}

// best is a copy of the state's scans, to come back to.
func (s *state) best() [][]*scan {
	return slices.Clone(s.blocks)
}

func (s *state) resume(blocks [][]*scan) {
	for bi := range blocks {
		if !slices.Equal(s.blocks[bi], blocks[bi]) {
			s.set(bi, blocks[bi])
		}
	}
}
