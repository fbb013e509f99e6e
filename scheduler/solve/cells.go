package solve

import (
	"math"
	"slices"

	"cadencewright/scheduler"
	"cadencewright/scheduler/feasible"
	"cadencewright/scheduler/units"
)

// cell is all candidate scans of one block that have the source, receiver and
// length in common: one a start.
type cell struct {
	place  int // into Block.Places
	source int
	rx     int // position in Block.Receivers
	steps  int
	lenIdx int // into table.lengths
	pin    int // into Block.Pins, or -1
	runs   []feasible.Run
	rows   []row // by group
	goals  int   // how many groups
}

// row is what the starts of a cell are worth to one unit: value val[k-from] at
// start k, nothing outside. It takes load of the unit's price.
type row struct {
	unit, group int
	load        int
	from        int
	val         []float64
	max         float64
}

// at is the row's value at a start.
func (r *row) at(start int) float64 {
	if i := start - r.from; i >= 0 && i < len(r.val) {
		return r.val[i]
	}
	return 0
}

// table is the cells of every block: all candidate scans with what they can be
// worth at most, as section 6 of the planning model defines it.
type table struct {
	p       *feasible.Problem
	goals   []*goal               // by index of the goal; nil: without units
	flat    []int                 // by telescope: its first receiver among all
	lengths []int                 // distinct, in steps, ascending
	cells   [][]cell              // by block
	first   []int                 // by block: the first step at which a new scan may begin
	open    [][][]feasible.Length // by block, then place, where first is above 0

	thrift []float64 // by steps of a scan and the least gap after it: how much it is favoured in draws

	clockFrom int // minutes of instant 0 of the clock that all blocks share
	clockLen  int
	scratch   []float64
	cover     map[coverKey][]bool
	begin     map[beginKey][]bool
}

// coverKey is where a common time could start for an overlap goal with scans
// of one telescope in one band.
type coverKey struct {
	goal int
	band units.BandSet
	tel  int
}

// beginKey is where scans in one band of a pair goal could start.
type beginKey struct {
	goal int
	band units.BandSet
}

func newTable(p *feasible.Problem) *table {
	t := &table{p: p, cells: make([][]cell, len(p.Blocks)), first: make([]int, len(p.Blocks)),
		open: make([][][]feasible.Length, len(p.Blocks)), cover: map[coverKey][]bool{}, begin: map[beginKey][]bool{}}
	n := 0
	for i := range p.Campaign.Telescopes {
		t.flat = append(t.flat, n)
		n += len(p.Campaign.Telescopes[i].Receivers)
	}
	t.goals = newGoals(t)
	for bi := range p.Blocks {
		t.listCells(bi)
	}
	t.indexLengths()
	t.makeClock()
	t.thrift = make([]float64, 2)
	for bi := range p.Blocks {
		for n := len(t.thrift); n <= p.Blocks[bi].Steps+p.Blocks[bi].MinGap; n++ {
			t.thrift = append(t.thrift, 1/math.Sqrt(float64(n)))
		}
	}
	for bi := range p.Blocks {
		t.markPartners(bi)
	}
	for bi := range p.Blocks {
		for ci := range t.cells[bi] {
			t.fillRows(bi, &t.cells[bi][ci])
		}
		t.cells[bi] = slices.DeleteFunc(t.cells[bi], func(c cell) bool { return len(c.rows) == 0 })
	}
	t.cover, t.begin, t.scratch = nil, nil, nil // all that they were for is in the rows
	return t
}

// listCells makes the block's cells, without values yet.
func (t *table) listCells(bi int) {
	b := &t.p.Blocks[bi]
	for pi := range b.Places {
		pl := &b.Places[pi]
		for rx := range b.Receivers {
			if pl.Info[rx] == nil {
				continue
			}
			for li := range pl.Lengths {
				l := &pl.Lengths[li]
				t.cells[bi] = append(t.cells[bi], cell{place: pi, source: pl.Source, rx: rx, steps: l.Steps, pin: -1, runs: l.Runs})
			}
		}
	}
	for i, p := range b.Pins {
		pl := b.PlaceOf(p.Source)
		if pl == nil || pl.Info[p.Receiver] == nil {
			continue // it earns nothing
		}
		t.cells[bi] = append(t.cells[bi], cell{place: b.PlaceIndex(p.Source), source: p.Source, rx: p.Receiver, steps: p.Steps,
			pin: i, runs: []feasible.Run{{From: p.Start, To: p.Start + 1}}})
	}
}

func (t *table) indexLengths() {
	for _, cells := range t.cells {
		for i := range cells {
			if !slices.Contains(t.lengths, cells[i].steps) {
				t.lengths = append(t.lengths, cells[i].steps)
			}
		}
	}
	slices.Sort(t.lengths)
	for _, cells := range t.cells {
		for i := range cells {
			cells[i].lenIdx, _ = slices.BinarySearch(t.lengths, cells[i].steps)
		}
	}
}

// makeClock lays one run of grid instants over all blocks.
func (t *table) makeClock() {
	if len(t.p.Blocks) == 0 {
		return
	}
	lo, hi := math.MaxInt, math.MinInt
	for i := range t.p.Blocks {
		b := &t.p.Blocks[i]
		lo, hi = min(lo, b.FirstMin), max(hi, b.FirstMin+b.Steps*t.p.GridMin)
	}
	t.clockFrom, t.clockLen = lo, (hi-lo)/t.p.GridMin+2
}

// tick is the clock's index of a block's step 0.
func (t *table) tick(b *feasible.Block) int { return (b.FirstMin - t.clockFrom) / t.p.GridMin }

// markPartners notes where each cell could be the partner of another scan.
func (t *table) markPartners(bi int) {
	b, set := &t.p.Blocks[bi], t.p.Units
	for ci := range t.cells[bi] {
		c := &t.cells[bi][ci]
		for _, g := range t.partnerGoals(c.source) {
			goal := &set.Goals[g]
			for bands := set.Bands(goal, b.Telescope, b.Receivers[c.rx]); bands != 0; bands &= bands - 1 {
				bit := bands & -bands
				if goal.Kind == scheduler.KindOverlap {
					t.markCover(coverKey{g, bit, b.Telescope}, c, t.tick(b), goal.OverlapMin)
				} else {
					t.markBegin(beginKey{g, bit}, c, t.tick(b))
				}
			}
		}
	}
}

// partnerGoals are a source's overlap and pair goals that have units.
func (t *table) partnerGoals(source int) []int {
	var list []int
	for _, u := range t.p.Units.BySource[source] {
		g := t.p.Units.Units[u].Goal
		if k := t.p.Units.Goals[g].Kind; (k == scheduler.KindOverlap || k == scheduler.KindBandPair) && !slices.Contains(list, g) {
			list = append(list, g)
		}
	}
	return list
}

// markCover marks every instant at which a common time could start during one
// of the cell's scans: from a start to its end less the overlap.
func (t *table) markCover(key coverKey, c *cell, tick int, overlapMin float64) {
	span := t.slack(c.steps, overlapMin)
	if span < 0 {
		return
	}
	marks := t.cover[key]
	if marks == nil {
		marks = make([]bool, t.clockLen)
		t.cover[key] = marks
	}
	for _, r := range c.runs {
		for k := r.From + tick; k < min(r.To+tick+span, t.clockLen); k++ {
			marks[k] = true
		}
	}
}

func (t *table) markBegin(key beginKey, c *cell, tick int) {
	marks := t.begin[key]
	if marks == nil {
		marks = make([]bool, t.clockLen)
		t.begin[key] = marks
	}
	for _, r := range c.runs {
		for k := r.From; k < r.To; k++ {
			marks[k+tick] = true
		}
	}
}

// slack is how many steps after its start a common time may begin in a scan;
// negative where the scan is too short.
func (t *table) slack(steps int, overlapMin float64) int {
	return int(math.Floor((float64(steps*t.p.GridMin) - overlapMin + units.MS) / float64(t.p.GridMin)))
}
