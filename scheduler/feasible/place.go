package feasible

import (
	"slices"

	"cadencewright/astro/sky"
	"cadencewright/scheduler"
	"cadencewright/scheduler/units"
)

// place works out one source in one block from its track at half steps, and
// appends it to the block if any scan of it is possible or pinned.
func (b *builder) place(out *Block, bl *scheduler.Block, lims *limits, s int, fractions [][]float64) {
	src := &b.p.Campaign.Sources[s]
	n := out.Steps + 1
	b.ok, b.bad = grow(b.ok, n), grow(b.bad, n+1)
	rej := Reject{Source: s, MaxElDeg: -90, SunDeg: 180}
	for k := range n {
		b.ok[k] = lims.check(&b.track, 2*k, src.SunMinDeg, &rej)
	}
	lo, hi := n, 0
	b.bad[0] = 0
	run := 0
	for k, ok := range b.ok[:n] {
		b.bad[k+1] = b.bad[k]
		if !ok {
			b.bad[k+1]++
			run = 0
			continue
		}
		run++
		rej.Longest = max(rej.Longest, run-1)
		lo, hi = min(lo, k), k+1
	}
	out.Rejects = append(out.Rejects, rej)
	for _, p := range out.Pins {
		if p.Source == s && p.Start >= 0 && p.Start+p.Steps < n { // a pin stands even where it is not up
			lo, hi = min(lo, p.Start), max(hi, p.Start+p.Steps+1)
		}
	}
	if lo >= hi {
		return
	}
	pl := Place{Source: s, Lo: lo}
	b.axes(&pl, out, lo, hi)
	pl.Lengths = b.lengths(out, bl, src, &pl, hi)
	if len(pl.Lengths) == 0 && !pinned(out, s) {
		return
	}
	b.info(&pl, out, hi, fractions)
	out.at[s] = len(out.Places)
	out.Places = append(out.Places, pl)
}

func grow[T any](s []T, n int) []T {
	if cap(s) < n {
		return make([]T, n)
	}
	return s[:n]
}

// axes copies the mount's coordinates at the steps [lo, hi).
func (b *builder) axes(pl *Place, out *Block, lo, hi int) {
	pl.Axis1, pl.Axis2 = make([]float64, hi-lo), make([]float64, hi-lo)
	for k := lo; k < hi; k++ {
		switch out.Mount.Kind {
		case scheduler.MountAltAz:
			pl.Axis1[k-lo], pl.Axis2[k-lo] = b.track.AzDeg[2*k], b.track.ElDeg[2*k]
		case scheduler.MountEquatorial:
			pl.Axis1[k-lo], pl.Axis2[k-lo] = b.track.HADeg[2*k], b.track.DecDeg[2*k]
		default:
			pl.Axis2[k-lo] = b.track.DecDeg[2*k]
		}
	}
	if out.Mount.Kind == scheduler.MountAltAz {
		sky.UnwrapDeg(pl.Axis1, pl.Axis1)
		pl.rising = make([]int32, hi-lo)
		for i := 1; i < hi-lo; i++ {
			pl.rising[i] = pl.rising[i-1]
			if pl.Axis1[i] >= pl.Axis1[i-1] {
				pl.rising[i]++
			}
		}
	}
}

// lengths finds the allowed starts of every allowed length.
func (b *builder) lengths(out *Block, bl *scheduler.Block, src *scheduler.Source, pl *Place, hi int) []Length {
	use := usableOf(&b.p.Campaign.Telescopes[out.Telescope], bl)
	var list []Length
	for _, minutes := range src.ScanMinutes {
		steps := minutes / b.p.GridMin
		l := Length{Minutes: minutes, Steps: steps}
		for k := pl.Lo; k+steps < hi; k++ {
			if b.allowed(out, pl, use, k, steps) {
				if m := len(l.Runs); m > 0 && l.Runs[m-1].To == k {
					l.Runs[m-1].To = k + 1
				} else {
					l.Runs = append(l.Runs, Run{k, k + 1})
				}
			}
		}
		if len(l.Runs) > 0 {
			list = append(list, l)
		}
	}
	return list
}

func usableOf(t *scheduler.Telescope, bl *scheduler.Block) *usable {
	need := (t.SetupS + t.CalS) / 60
	u := &usable{readyMin: units.Minutes(bl.Start) + need, endMin: units.Minutes(bl.End)}
	for _, l := range bl.Lost {
		to := units.Minutes(l.End)
		u.lost = append(u.lost, lostPart{units.Minutes(l.Start), to, to + need})
	}
	return u
}

// allowed tells whether a scan may start at a step: up throughout, in usable
// time, within the mount's range as a whole, and clear of every pin.
func (b *builder) allowed(out *Block, pl *Place, use *usable, k, steps int) bool {
	if b.bad[k+steps+1] != b.bad[k] {
		return false
	}
	g := b.p.GridMin
	if !use.span(out.Minute(k, g), out.Minute(k+steps, g)) {
		return false
	}
	switch out.Mount.Kind {
	case scheduler.MountAltAz:
		if lo, hi := out.Turns(pl, k, steps); lo > hi {
			return false
		}
	case scheduler.MountEquatorial:
		if pl.Axis1[k+steps-pl.Lo] < pl.Axis1[k-pl.Lo] { // passes 12 h
			return false
		}
	}
	for _, p := range out.Pins {
		if k < p.Start+p.Steps+out.MinGap && k+steps+out.MinGap > p.Start {
			return false
		}
	}
	return true
}

// Turns are the whole turns that a scan's motor azimuth may have; {0, 0} for
// mounts without a cable wrap.
func (b *Block) Turns(pl *Place, start, steps int) (lo, hi int) {
	if b.Mount.Kind != scheduler.MountAltAz {
		return 0, 0
	}
	lo, hi = start-pl.Lo, start+steps-pl.Lo
	path := pl.Axis1[lo : hi+1]
	from, to := path[0], path[steps]
	switch pl.rising[hi] - pl.rising[lo] {
	case int32(steps): // turns one way throughout, as nearly all tracks do
	case 0:
		from, to = to, from
	default:
		from, to = slices.Min(path), slices.Max(path)
	}
	return sky.MotorTurns(from, to, b.Mount.AzRange)
}

// Allowed tells whether a scan of a length may start at a step.
func (l *Length) Allowed(step int) bool {
	for _, r := range l.Runs {
		if step < r.To {
			return step >= r.From
		}
	}
	return false
}

// Allows tells whether a scan of a number of steps may start at a step.
func (p *Place) Allows(steps, start int) bool {
	for i := range p.Lengths {
		if p.Lengths[i].Steps == steps {
			return p.Lengths[i].Allowed(start)
		}
	}
	return false
}
