package explain

import (
	"math"

	"cadencewright/scheduler/feasible"
)

// option is one candidate scan for a unit.
type option struct {
	block    int // into Problem.Blocks
	receiver int // position in Block.Receivers
	place    *feasible.Place
	bands    uint32 // of the goal's bands, bit i for the i-th
	start    int    // step
	steps    int
	startMin float64
	endMin   float64

	had      *planned // it stands in the plan already
	turnsDeg float64  // whole turns of the azimuth drive that cost least; set by cost
	toll     float64  // of what must be otherwise for it, set by cost; see explainer.toll
}

// reach is a block, receiver and time in which scans of a unit's source can
// start.
type reach struct {
	block    int
	receiver int
	place    *feasible.Place
	bands    uint32
	lo, hi   float64 // starts in [lo, hi], minutes
}

// bandsOf are the goal's bands that a receiver of a block can give it; 0 where
// its telescope is not allowed.
func (q *question) bandsOf(b *feasible.Block, ri int) uint32 {
	t := &q.Campaign.Telescopes[b.Telescope]
	if !q.wants.AllowsTelescope(t.Code) {
		return 0
	}
	var bits uint32
	for i, band := range q.wants.Bands {
		if t.Receivers[ri].HasBand(band) {
			bits |= 1 << i
		}
	}
	return bits
}

// allBands is the mask of all of the goal's bands.
func (q *question) allBands() uint32 { return 1<<len(q.wants.Bands) - 1 }

// each calls f for every option of a reach.
func (q *question) each(r *reach, f func(o *option)) {
	b := &q.Blocks[r.block]
	o := option{block: r.block, receiver: r.receiver, place: r.place, bands: r.bands}
	for i := range r.place.Lengths {
		l := &r.place.Lengths[i]
		for _, run := range l.Runs {
			for start := run.From; start < run.To; start++ {
				o.start, o.steps = start, l.Steps
				o.startMin, o.endMin = b.Minute(start, q.GridMin), b.Minute(start+l.Steps, q.GridMin)
				if o.startMin >= r.lo && o.startMin <= r.hi {
					f(&o)
				}
			}
		}
	}
}

// startsIn reports whether any scan of a place may start in [lo, hi].
func (q *question) startsIn(b *feasible.Block, pl *feasible.Place, lo, hi float64) bool {
	for i := range pl.Lengths {
		for _, run := range pl.Lengths[i].Runs {
			if b.Minute(run.To-1, q.GridMin) >= lo && b.Minute(run.From, q.GridMin) <= hi {
				return true
			}
		}
	}
	return false
}

// What an option costs is asked without planning anew: the scans that leave it
// no room would go, and nothing else would move. A planner that shifts them, or
// finds them another place, can do better; so the cost is one way to do it, and
// not always the cheapest.

// cost is what it takes to make room for an option: the scans that would have
// to go, least in what they earn over the turns that the azimuth drive may
// take. It is not possible where a pin is in the way.
func (e *explainer) cost(o *option) (displaced []*planned, possible bool) {
	if o.had != nil {
		return nil, true
	}
	b := &e.Blocks[o.block]
	lo, hi := b.Turns(o.place, o.start, o.steps)
	best := math.Inf(1)
	for turn := lo; turn <= hi; turn++ { // seldom more than two
		list, ok := e.conflicts(b, o, 360*float64(turn))
		if !ok {
			continue
		}
		if loss := e.loss(list); loss < best || loss == best && len(list) < len(displaced) {
			displaced, best, possible = list, loss, true
			o.turnsDeg = 360 * float64(turn)
		}
	}
	if e.toll != nil { // what is otherwise than it is must do without displacing what earns anything
		o.toll = e.toll(o)
		possible = possible && idle(displaced) && !math.IsInf(o.toll, 1)
	}
	return displaced, possible
}

// idle reports whether scans earn nothing: a planner fills free time with such.
func idle(scans []*planned) bool {
	for _, x := range scans {
		if len(x.scan.Earns) > 0 {
			return false
		}
	}
	return true
}

// conflicts are the scans of the block that leave no room for an option: from
// it outwards to the first on either side that does.
func (e *explainer) conflicts(b *feasible.Block, o *option, turnsDeg float64) ([]*planned, bool) {
	from, to := poses(o.place, o.start, o.steps, turnsDeg)
	row := e.planned[o.block]
	first := 0
	for first < len(row) && row[first].startMin < o.startMin {
		first++
	}
	var list []*planned
	// Scans beyond the first that leaves room are further away in time, and
	// have left each other room.
	for i := first - 1; i >= 0; i-- {
		x := row[i]
		if roomFor(b, x.to, from, x.receiver != o.receiver, (o.startMin-x.endMin)*60) {
			break
		}
		list = append(list, x)
	}
	for _, x := range row[first:] {
		if roomFor(b, to, x.from, x.receiver != o.receiver, (x.startMin-o.endMin)*60) {
			break
		}
		list = append(list, x)
	}
	for _, x := range list {
		if x.scan.Pinned {
			return nil, false
		}
	}
	return list, true
}

// roomFor reports whether some seconds are enough to get from one scan to the
// next.
func roomFor(b *feasible.Block, from, to pose, change bool, haveS float64) bool {
	need := b.Mount.SlewS(from.axis1, from.axis2, to.axis1, to.axis2) + b.Mount.CalS
	if change {
		need += b.Mount.SwitchS
	}
	return haveS >= need
}

// standing are the plan's scans of the unit's source that can take part, as
// options that cost nothing.
func (q *question) standing() []option {
	var list []option
	for bi, row := range q.planned {
		b := &q.Blocks[bi]
		for _, x := range row {
			if x.scan.Source != q.source.Name || x.receiver < 0 || !q.sees(b, b.Receivers[x.receiver]) {
				continue
			}
			if bands := q.bandsOf(b, b.Receivers[x.receiver]); bands != 0 {
				list = append(list, option{block: bi, receiver: x.receiver, bands: bands, steps: x.scan.Minutes / q.GridMin,
					startMin: x.startMin, endMin: x.endMin, had: x})
			}
		}
	}
	return list
}

// sees reports whether a receiver of the block's telescope detects the source.
func (q *question) sees(b *feasible.Block, ri int) bool {
	return q.Units.Detectable(q.goal.Source, b.Telescope, ri)
}
