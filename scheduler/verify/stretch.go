package verify

import (
	"math"
	"slices"
	"time"

	"cadencewright/astro/sky"
	"cadencewright/scheduler"
)

// field is the grid of one block: what the candidates of all its sources share.
type field struct {
	*block
	first int64 // first grid instant in the block
	steps int64 // grid steps in it; instants first … first+steps
	grid  msec
	gap   int64 // least steps between two scans
	free  []run // stretches that a scan may lie in: no lost part, no setup, no pin

	window *sky.Window // every half step from the first instant on
	hours  []int       // local hour at the middle of every step; nil: no receiver asks
}

// newField prepares a block; nil where no scan fits into it.
func (m *model) newField(b *block) (*field, error) {
	f := &field{block: b, first: ceilDiv(b.start, m.grid), grid: m.grid, gap: m.gap(b.telescope)}
	if f.steps = floorDiv(b.end, m.grid) - f.first; f.steps < 1 {
		return nil, nil
	}
	f.free = f.freeStretches()
	var err error
	half := time.Duration(m.grid) * time.Millisecond / 2
	f.window, err = sky.NewWindow(b.telescope.site, (msec(f.first) * m.grid).time(), half, int(2*f.steps)+1, m.campaign.DUT1S)
	if err != nil {
		return nil, scheduler.Errorf(scheduler.ErrInvalid, "block %s: %w", b.ID, err)
	}
	for _, r := range b.receivers {
		if len(r.RFILoss) > 0 && f.hours == nil {
			f.hours = make([]int, f.steps)
			for i := range f.hours {
				f.hours[i] = b.telescope.localHour(msec(f.first+int64(i))*m.grid + m.grid/2)
			}
		}
	}
	return f, nil
}

// freeStretches are the stretches of the block that lost parts, the setup they
// and the block's start ask for, and pins leave. A scan that is not a pin lies
// in one of them.
func (f *field) freeStretches() []run {
	ready, gap := f.telescope.ready(), msec(f.gap)*f.grid
	type span struct{ lo, hi msec }
	free := []span{{f.start + ready, f.end}}
	without := func(lo, hi msec) {
		var left []span
		for _, s := range free {
			if hi <= s.lo || lo >= s.hi {
				left = append(left, s)
				continue
			}
			left = append(left, span{s.lo, lo}, span{hi, s.hi})
		}
		free = left
	}
	for _, l := range f.lost {
		without(l[0], l[1]+ready)
	}
	for _, p := range f.pins {
		without(p.start-gap, p.end+gap)
	}
	var out []run
	for _, s := range free {
		if r := (run{ceilDiv(s.lo, f.grid), floorDiv(s.hi, f.grid)}); r.lo < r.hi {
			out = append(out, r)
		}
	}
	return out
}

// view is one source seen from one block.
type view struct {
	*field
	source    *source
	stretches []run     // a scan that is not a pin lies inside one of them; none holds another
	lengths   []int64   // of scans and pins, in grid steps, ascending
	sinEl     []float64 // every half step
	pins      []*pin    // of the source

	track sky.Track
	path  []float64
}

// look finds out where the source can be observed from the block; false where
// it cannot be and is not pinned. It reuses the view's memory.
func (v *view) look(f *field, s *source) bool {
	v.field, v.source, v.stretches = f, s, v.stretches[:0]
	v.pins, v.lengths = v.pins[:0], v.lengths[:0]
	for _, p := range f.pins {
		if p.source == s {
			v.pins = append(v.pins, p)
			v.lengths = append(v.lengths, int64((p.end-p.start)/f.grid))
		}
	}
	for _, minutes := range s.ScanMinutes {
		v.lengths = append(v.lengths, int64(msec(minutes)*minute/f.grid))
	}
	slices.Sort(v.lengths)
	v.lengths = slices.Compact(v.lengths)

	// Most sources are down in most blocks, and the sine of the elevation, which
	// costs little, tells.
	v.sinEl = f.window.SinElevation(s.star, v.sinEl)
	if v.maxSinEl() >= math.Sin((f.telescope.ElevationMinDeg-0.001)*math.Pi/180) {
		f.window.Track(s.star, &v.track)
		for _, free := range f.free {
			v.addStretches(free)
		}
	}
	return len(v.stretches) > 0 || len(v.pins) > 0
}

func (v *view) maxSinEl() float64 {
	top := math.Inf(-1)
	for _, s := range v.sinEl {
		top = max(top, s)
	}
	return top
}

// addStretches splits a free stretch where the source is not up or the mount
// cannot follow from one instant to the next.
func (v *view) addStretches(free run) {
	want := limits(v.telescope, v.source)
	wraps := v.telescope.Mount == scheduler.MountEquatorial
	open := false
	var from int64
	for at := free.lo; at <= free.hi; at++ {
		i := 2 * (at - v.first)
		up := v.up(want, i)
		through12h := wraps && open && v.track.HADeg[i] < v.track.HADeg[i-2]
		if open && (!up || through12h) {
			v.addFollowed(run{from, at - 1})
			open = false
		}
		if up && !open {
			open, from = true, at
		}
	}
	if open {
		v.addFollowed(run{from, free.hi})
	}
}

// up reports whether all limits hold at a half step, strictly.
func (v *view) up(want []limit, i int64) bool {
	p := sky.Place{AzDeg: v.track.AzDeg[i], ElDeg: v.track.ElDeg[i], HADeg: v.track.HADeg[i],
		DecDeg: v.track.DecDeg[i], SunDeg: v.track.SunDeg[i]}
	for _, l := range want {
		if l.excess(p) > 0 {
			return false
		}
	}
	return true
}

// A motor range wider than a turn allows some azimuths twice, and a scan may
// then begin in either. What it may not do is unwind on the way, so the parts
// that one number of turns can follow are looked for one number at a time.

// addFollowed adds the parts of a stretch that the motor azimuth can follow
// without unwinding: for each whole number of turns the parts that stay inside
// the range. Such parts may overlap.
func (v *view) addFollowed(r run) {
	if r.lo == r.hi {
		return
	}
	if v.telescope.Mount != scheduler.MountAltAz {
		v.stretches = append(v.stretches, r)
		return
	}
	az := v.path[:0]
	for at := r.lo; at <= r.hi; at++ {
		az = append(az, v.track.AzDeg[2*(at-v.first)])
	}
	v.path = az
	path := sky.UnwrapDeg(az, az)
	lo, hi := slices.Min(path), slices.Max(path)
	const rounding = 1e-9
	allowed := v.telescope.AzimuthRangeDeg
	var parts []run
	for turn := math.Ceil((allowed[0] - hi) / 360); turn <= math.Floor((allowed[1]-lo)/360); turn++ {
		from := int64(-1)
		for i := 0; i <= len(path); i++ {
			in := i < len(path) && path[i]+360*turn >= allowed[0]-rounding && path[i]+360*turn <= allowed[1]+rounding
			switch {
			case in && from < 0:
				from = int64(i)
			case !in && from >= 0:
				parts = append(parts, run{r.lo + from, r.lo + int64(i) - 1})
				from = -1
			}
		}
	}
	v.stretches = append(v.stretches, widest(parts)...)
}

// widest leaves out the runs that lie inside another.
func widest(parts []run) []run {
	slices.SortFunc(parts, func(a, b run) int {
		if a.lo != b.lo {
			return cmp64(a.lo, b.lo)
		}
		return cmp64(b.hi, a.hi)
	})
	var out []run
	for _, p := range parts {
		if n := len(out); n == 0 || p.hi > out[n-1].hi {
			out = append(out, p)
		}
	}
	return out
}

// starts are the instants at which a candidate of the given length, in steps,
// may start on a receiver; a length that only pins have is for pins alone.
func (v *view) starts(length int64, r *receiver) runs {
	var list []run
	if allowsLength(v.source.Source, int(msec(length)*v.grid/minute)) {
		for _, s := range v.stretches {
			list = append(list, run{s.lo, s.hi - length})
		}
	}
	for _, p := range v.pins {
		if p.receiver == r && int64((p.end-p.start)/v.grid) == length {
			at := int64(p.start / v.grid)
			list = append(list, run{at, at})
		}
	}
	return unite(list)
}
