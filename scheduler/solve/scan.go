package solve

import (
	"cadencewright/scheduler/feasible"
)

// scan is a scan under consideration, with all that earning and travelling
// need worked out.
type scan struct {
	block, place int
	rx           int // position in Block.Receivers
	start, steps int // on the block's grid
	turn         int // whole turns added to the unwrapped azimuth
	pin          int // into Block.Pins, or -1
	fixed        bool
	in, free     bool // it stands in the plan; it waits to be used again

	source, tel, receiver int // indices into the campaign
	flat                  int // the receiver, counted over all telescopes
	runs                  []feasible.Run
	startMin, endMin      float64
	info                  float64
	stake                 float64 // what its source loses without it
	staked                uint32  // the version of the source for which that is so, and 1
	// Where the mount points at its start and at its end, the motor's turn
	// included, degrees.
	from1, from2, to1, to2 float64
}

// fill makes x a scan.
func (t *table) fill(x *scan, bi, place, rx, start, steps int) {
	b := &t.p.Blocks[bi]
	pl := &b.Places[place]
	*x = scan{block: bi, place: place, rx: rx, steps: steps, pin: -1, source: pl.Source, tel: b.Telescope,
		receiver: b.Receivers[rx], flat: t.flat[b.Telescope] + b.Receivers[rx]}
	lengths := t.lengthsOf(bi, place)
	for i := range lengths {
		if lengths[i].Steps == steps {
			x.runs = lengths[i].Runs
		}
	}
	t.time(x, start)
}

// scan is a new scan.
func (t *table) scan(bi, place, rx, start, steps, turn, pin int) *scan {
	x := new(scan)
	t.fill(x, bi, place, rx, start, steps)
	x.pin, x.fixed = pin, pin >= 0
	t.orient(x, turn)
	return x
}

// time gives a scan another start; its turn is 0 until orient.
func (t *table) time(x *scan, start int) {
	b := &t.p.Blocks[x.block]
	g := t.p.GridMin
	x.startMin, x.endMin = b.Minute(start, g), b.Minute(start+x.steps, g)
	x.info = b.Places[x.place].InfoOf(x.rx, start, x.steps)
	t.aim(x, start)
}

// aim is the part of time that travel needs.
func (t *table) aim(x *scan, start int) {
	pl := &t.p.Blocks[x.block].Places[x.place]
	x.start = start
	i, j := start-pl.Lo, start+x.steps-pl.Lo
	x.turn = 0
	x.from1, x.from2, x.to1, x.to2 = pl.Axis1[i], pl.Axis2[i], pl.Axis1[j], pl.Axis2[j]
}

// orient gives a scan another turn of the azimuth drive.
func (t *table) orient(x *scan, turn int) {
	d := 360 * float64(turn-x.turn)
	x.turn = turn
	x.from1, x.to1 = x.from1+d, x.to1+d
}

// gap is the least number of steps between the end of one scan and the start
// of the next in a block: travel, receiver change and calibration.
func (t *table) gap(a, z *scan) int {
	m := &t.p.Blocks[a.block].Mount
	s := m.SlewS(a.to1, a.to2, z.from1, z.from2) + m.CalS
	if a.rx != z.rx {
		s += m.SwitchS
	}
	return ceilSteps(s, t.p.GridMin)
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

// latest is the last allowed start not after limit, or -1.
func (x *scan) latest(limit int) int {
	for i := len(x.runs) - 1; i >= 0; i-- {
		r := &x.runs[i]
		if limit >= r.From {
			return min(limit, r.To-1)
		}
	}
	return -1
}

// earliest is the first allowed start not before limit, or -1.
func (x *scan) earliest(limit int) int {
	for i := range x.runs {
		r := &x.runs[i]
		if limit < r.To {
			return max(limit, r.From)
		}
	}
	return -1
}

// middle orders the scans of a block: twice the middle step.
func (x *scan) middle() int { return 2*x.start + x.steps }

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
