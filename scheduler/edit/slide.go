package edit

import (
	"math"
	"time"

	"cadencewright/astro/sky"
	"cadencewright/scheduler"
	"cadencewright/scheduler/units"
)

// To find where a scan could start, its source is followed once through the
// whole block; each start is then a look-up of limits and a few travel times.
// The other scans stay where they are, but may take other turns of the azimuth
// drive, as they may when the scan is really moved.

// ranges finds where a scan could start in its block: between the scans next to
// it, and in all of the block.
func (s *Session) ranges(d *draft, x *scan) (slide, all []Range, err error) {
	if !x.gridded {
		return nil, nil, nil
	}
	f, err := s.field(x)
	if err != nil || f == nil {
		return nil, nil, err
	}
	f.neighbours(d.rows[x.block], x)
	mine := 0 // scans before it in time
	for mine < len(f.others) && inTime(f.others[mine], x) <= 0 {
		mine++
	}
	// Starts in order never change gap without passing a scan, so that a range
	// lies in one gap.
	gap, open := 0, -1 // scans before the start looked at; since when starts are possible
	close := func(k int) {
		if open < 0 {
			return
		}
		r := Range{f.instant(open), f.instant(k - 1)}
		all = append(all, r)
		if gap == mine {
			slide = append(slide, r)
		}
		open = -1
	}
	for k := 0; k+x.steps <= f.steps; k++ {
		if from := f.minute(k); gap < len(f.others) && f.others[gap].startMin <= from {
			close(k)
			for gap < len(f.others) && f.others[gap].startMin <= from {
				gap++
			}
		}
		switch possible := f.possible(k, gap); {
		case possible && open < 0:
			open = k
		case !possible:
			close(k)
		}
	}
	close(f.steps - x.steps + 1)
	return slide, all, nil
}

// field is one scan's source over the whole of its block.
type field struct {
	s       *Session
	x       *scan
	first   int // minutes of step 0
	steps   int
	track   sky.Track
	az      []float64 // unwrapped
	down    []int     // how many instants before each break a limit
	others  []*scan   // of the block, in order of start
	before  [][]bool  // by other scan and turn: can be reached from the scans before it
	after   [][]bool  // can be left for the scans after it
	probe   scan
	ready   float64 // minutes of setup and calibration
	isAltAz bool
}

// field follows a scan's source through its block; nil where the block has no
// grid step.
func (s *Session) field(x *scan) (*field, error) {
	b := &s.p.Blocks[x.block]
	t := &s.p.Campaign.Telescopes[x.tel]
	if b.Steps < 1 {
		return nil, nil
	}
	if s.windows[x.block] == nil {
		w, err := sky.NewWindow(t.Site(), units.Instant(float64(b.FirstMin)), time.Duration(s.p.GridMin)*time.Minute, b.Steps+1, s.p.Campaign.DUT1S)
		if err != nil {
			return nil, err
		}
		s.windows[x.block] = w
	}
	f := &field{s: s, x: x, first: b.FirstMin, steps: b.Steps, ready: (t.SetupS + t.CalS) / 60, isAltAz: t.Mount == scheduler.MountAltAz}
	s.windows[x.block].Track(s.p.Campaign.Sources[x.source].Star(), &f.track)
	if f.isAltAz {
		f.az = sky.UnwrapDeg(f.track.AzDeg, nil)
	}
	limits := s.limitsOf(x.tel, x.source)
	// Counted up from the block's start, so that a stretch is free of bad
	// instants where the counts at its ends agree.
	f.down = make([]int, b.Steps+2)
	for k := range b.Steps + 1 {
		f.down[k+1] = f.down[k]
		for li := range limits {
			if limits[li].beyond(&f.track, k) > slackDeg {
				f.down[k+1]++
				break
			}
		}
	}
	return f, nil
}

func (f *field) minute(k int) float64 { return float64(f.first + k*f.s.p.GridMin) }

func (f *field) instant(k int) time.Time { return units.Instant(f.minute(k)) }

// neighbours takes the other scans of the block, and on which of their turns
// each can be reached from the scans before it and left for those after it,
// with room for all of them. Where there is none, which is not the scan's fault,
// every turn counts.
func (f *field) neighbours(r *row, x *scan) {
	for _, y := range r.scans {
		if y != x {
			f.others = append(f.others, y)
		}
	}
	n := len(f.others)
	f.before, f.after = make([][]bool, n), make([][]bool, n)
	for i := range n {
		f.before[i] = f.chain(i, i-1, f.before)
	}
	for i := n - 1; i >= 0; i-- {
		f.after[i] = f.chain(i, i+1, f.after)
	}
}

// chain are the turns of a scan that go with the turns of the one next to it.
func (f *field) chain(i, next int, reached [][]bool) []bool {
	y := f.others[i]
	ok, any := make([]bool, y.turnHi-y.turnLo+1), false
	for o := range ok {
		if next < 0 || next >= len(f.others) {
			ok[o], any = true, true
			continue
		}
		z := f.others[next]
		for k, good := range reached[next] {
			a, aTurn, b, bTurn := z, z.turnLo+k, y, y.turnLo+o
			if next > i {
				a, aTurn, b, bTurn = b, bTurn, a, aTurn
			}
			if good && f.room(a, aTurn, b, bTurn) {
				ok[o], any = true, true
			}
		}
	}
	if !any {
		for o := range ok {
			ok[o] = true
		}
	}
	return ok
}

func (f *field) room(a *scan, aTurn int, z *scan, zTurn int) bool {
	need, _ := f.s.needS(a, aTurn, z, zTurn)
	return 60*(z.startMin-a.endMin) >= need-roomS
}

// possible reports whether the scan could start at a step, after the first gap
// of the other scans.
func (f *field) possible(k, gap int) bool {
	end := k + f.x.steps
	if f.down[end+1] != f.down[k] || !f.inTime(f.minute(k), f.minute(end)) {
		return false
	}
	p := &f.probe
	*p = scan{block: f.x.block, rx: f.x.rx, startMin: f.minute(k), endMin: f.minute(end)}
	tr := &f.track
	switch f.s.p.Campaign.Telescopes[f.x.tel].Mount {
	case scheduler.MountAltAz:
		lo, hi := math.Inf(1), math.Inf(-1)
		for _, a := range f.az[k : end+1] {
			lo, hi = math.Min(lo, a), math.Max(hi, a)
		}
		p.from1, p.from2, p.to1, p.to2 = f.az[k], tr.ElDeg[k], f.az[end], tr.ElDeg[end]
		if p.turnLo, p.turnHi = turnsIn(lo, hi, f.s.mount(f.x.block).AzRange); p.turnLo > p.turnHi {
			return false
		}
	case scheduler.MountEquatorial:
		if tr.HADeg[end] < tr.HADeg[k] {
			return false
		}
		p.from1, p.from2, p.to1, p.to2 = tr.HADeg[k], tr.DecDeg[k], tr.HADeg[end], tr.DecDeg[end]
	default:
		p.from2, p.to2 = tr.DecDeg[k], tr.DecDeg[end]
	}
	// Before and after may ask for different turns of the same scan: one must
	// do for both.
	for turn := p.turnLo; turn <= p.turnHi; turn++ {
		if f.reached(turn, gap) && f.left(turn, gap) {
			return true
		}
	}
	return false
}

// inTime reports whether a scan keeps to the block's time and out of what is
// lost.
func (f *field) inTime(start, end float64) bool {
	const ms = msS / 60
	bl := &f.s.p.Campaign.Blocks[f.s.p.Blocks[f.x.block].Index]
	if start-units.Minutes(bl.Start) < f.ready-ms || end > units.Minutes(bl.End)+ms {
		return false
	}
	for _, l := range bl.Lost {
		from, to := units.Minutes(l.Start), units.Minutes(l.End)
		if math.Min(end, to)-math.Max(start, from) > ms || start-to >= -ms && start-to < f.ready-ms {
			return false
		}
	}
	return true
}

// reached reports whether there is room after the scan before.
func (f *field) reached(turn, gap int) bool {
	if gap == 0 {
		return true
	}
	a := f.others[gap-1]
	for o, good := range f.before[gap-1] {
		if good && f.room(a, a.turnLo+o, &f.probe, turn) {
			return true
		}
	}
	return false
}

// left reports whether there is room before the scan after.
func (f *field) left(turn, gap int) bool {
	if gap == len(f.others) {
		return true
	}
	z := f.others[gap]
	for o, good := range f.after[gap] {
		if good && f.room(&f.probe, turn, z, z.turnLo+o) {
			return true
		}
	}
	return false
}
