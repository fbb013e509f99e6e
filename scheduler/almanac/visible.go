package almanac

import (
	"fmt"
	"time"

	"cadencewright/astro/sky"
	"cadencewright/astro/timescale"
	"cadencewright/scheduler"
)

// Limits on one question.
const (
	MaxSpan    = 366 * 24 * time.Hour
	MaxSamples = 200_000
)

// fine is how finely a stretch of time is searched; a source that is up or
// down for less may be missed. Edges are then narrowed to edgeError.
const (
	fine      = time.Minute
	edgeError = 500 * time.Millisecond
)

// Sample is where a source stands at one instant.
type Sample struct {
	At     time.Time
	LSTDeg float64 // local apparent sidereal time, [0, 360)
	AzDeg  float64 // from north through east, [0, 360)
	ElDeg  float64
	HADeg  float64 // west-positive, (-180, 180]
	DecDeg float64 // apparent
	SunDeg float64 // separation from the Sun
	Down   Cause   // what keeps it from being up; 0: it is up
}

// UpSpan is a stretch of time [Start, End) in which a source is up.
type UpSpan struct {
	Start, End             time.Time
	StartLSTDeg, EndLSTDeg float64
	HighestDeg             float64 // greatest elevation in it
	// Cut tells that it is up before Start or after End too, outside the
	// time that was asked for.
	CutStart, CutEnd bool
}

// Visible says when a source is up at a telescope.
type Visible struct {
	Up       []UpSpan
	Transits []Sample // upper transits
	Highest  Sample   // the highest sample, up or not
	SunMin   float64  // least separation from the Sun
	// Down is for how long each cause held, alone or with others.
	Down map[Cause]time.Duration
}

// checkSpan keeps questions within bounds.
func checkSpan(from, to time.Time) error {
	switch {
	case !from.Before(to):
		return scheduler.Errorf(scheduler.ErrInvalid, "the time asked for ends (%s) before it begins (%s)",
			to.UTC().Format(time.RFC3339), from.UTC().Format(time.RFC3339))
	case to.Sub(from) > MaxSpan:
		return scheduler.Errorf(scheduler.ErrInvalid, "the time asked for is %.0f days long; at most %d days are allowed",
			to.Sub(from).Hours()/24, int(MaxSpan.Hours()/24))
	}
	return nil
}

// Track samples a source at from, from+step and so on up to to, which is
// included where a step falls on it.
func Track(tel *scheduler.Telescope, src *scheduler.Source, dut1S float64, from, to time.Time, step time.Duration) ([]Sample, error) {
	if err := checkSpan(from, to); err != nil {
		return nil, err
	}
	if step <= 0 || to.Sub(from)/step >= MaxSamples {
		return nil, scheduler.Errorf(scheduler.ErrInvalid, "a step of %v is too short for %v: at most %d samples are allowed",
			step, to.Sub(from), MaxSamples)
	}
	n := int(to.Sub(from)/step) + 1
	// One window for the whole stretch: sidereal time, precession, nutation and
	// the Sun are worked out once and shared by its samples.
	w, err := sky.NewWindow(tel.Site(), from, step, n, dut1S)
	if err != nil {
		return nil, fmt.Errorf("source %s at %s: %w", src.Name, tel.Code, err)
	}
	var track sky.Track
	w.Track(src.Star(), &track)
	l := newLimits(tel, src)
	samples := make([]Sample, n)
	for i := range samples {
		samples[i] = Sample{At: from.Add(time.Duration(i) * step).UTC(), LSTDeg: w.LSTDeg(i), AzDeg: track.AzDeg[i], ElDeg: track.ElDeg[i],
			HADeg: track.HADeg[i], DecDeg: track.DecDeg[i], SunDeg: track.SunDeg[i]}
		samples[i].Down = l.check(&samples[i])
	}
	return samples, nil
}

// At is where a source stands at one instant.
func At(tel *scheduler.Telescope, src *scheduler.Source, dut1S float64, t time.Time) (Sample, error) {
	p, err := sky.Observe(tel.Site(), src.Star(), t, dut1S)
	if err != nil {
		return Sample{}, err
	}
	lst, err := timescale.LST(t, dut1S, tel.Site().Lon)
	if err != nil {
		return Sample{}, err
	}
	s := Sample{At: t.UTC(), LSTDeg: lst.Deg(), AzDeg: p.AzDeg, ElDeg: p.ElDeg, HADeg: p.HADeg, DecDeg: p.DecDeg, SunDeg: p.SunDeg}
	s.Down = newLimits(tel, src).check(&s)
	return s, nil
}

// When finds when a source is up in [from, to), to half a second. Stretches of
// less than a minute, up or down, may be missed.
func When(tel *scheduler.Telescope, src *scheduler.Source, dut1S float64, from, to time.Time) (*Visible, error) {
	samples, err := Track(tel, src, dut1S, from, to, fine)
	if err != nil {
		return nil, err
	}
	// The end itself, where no whole minute falls on it.
	last, err := At(tel, src, dut1S, to)
	if err != nil {
		return nil, err
	}
	if samples[len(samples)-1].At.Before(to) {
		samples = append(samples, last)
	}
	// Walk along the samples; where one is up and its neighbour is not, the
	// edge between them is narrowed down.
	v := &Visible{Highest: samples[0], SunMin: 180, Down: map[Cause]time.Duration{}}
	for i, s := range samples {
		v.note(samples, i)
		begins := s.Down == 0 && (i == 0 || samples[i-1].Down != 0)
		ends := s.Down != 0 && i > 0 && samples[i-1].Down == 0
		if !begins && !ends {
			continue
		}
		edge := s
		if i > 0 {
			if edge, err = findEdge(tel, src, dut1S, samples[i-1], s); err != nil {
				return nil, err
			}
		}
		if begins {
			v.Up = append(v.Up, UpSpan{Start: edge.At, StartLSTDeg: edge.LSTDeg, CutStart: i == 0, HighestDeg: edge.ElDeg})
		} else {
			open := &v.Up[len(v.Up)-1]
			open.End, open.EndLSTDeg = edge.At, edge.LSTDeg
		}
	}
	// Still up when the time asked for ends.
	if n := len(v.Up); n > 0 && v.Up[n-1].End.IsZero() {
		v.Up[n-1].End, v.Up[n-1].EndLSTDeg, v.Up[n-1].CutEnd = last.At, last.LSTDeg, true
	}
	v.highestOfSpans(samples)
	v.Transits, err = transits(tel, src, dut1S, from, to)
	return v, err
}

// note gathers the extremes and how long each cause holds: a sample stands for
// the time up to the next one.
func (v *Visible) note(samples []Sample, i int) {
	s := samples[i]
	if s.ElDeg > v.Highest.ElDeg {
		v.Highest = s
	}
	v.SunMin = min(v.SunMin, s.SunDeg)
	if i+1 < len(samples) {
		for _, c := range s.Down.Each() {
			v.Down[c] += samples[i+1].At.Sub(s.At)
		}
	}
}

// highestOfSpans finds the greatest elevation in each stretch.
func (v *Visible) highestOfSpans(samples []Sample) {
	k := 0
	for _, s := range samples {
		for k < len(v.Up) && !s.At.Before(v.Up[k].End) {
			k++
		}
		if k < len(v.Up) && !s.At.Before(v.Up[k].Start) {
			v.Up[k].HighestDeg = max(v.Up[k].HighestDeg, s.ElDeg)
		}
	}
}

// findEdge narrows down where being up begins or ends between two samples of
// which one is up; it is the side that is up.
func findEdge(tel *scheduler.Telescope, src *scheduler.Source, dut1S float64, a, b Sample) (Sample, error) {
	for b.At.Sub(a.At) > edgeError {
		mid, err := At(tel, src, dut1S, a.At.Add(b.At.Sub(a.At)/2))
		if err != nil {
			return Sample{}, err
		}
		if (mid.Down == 0) == (a.Down == 0) {
			a = mid
		} else {
			b = mid
		}
	}
	if a.Down == 0 {
		return a, nil
	}
	return b, nil
}

// transits are the upper transits in [from, to).
func transits(tel *scheduler.Telescope, src *scheduler.Source, dut1S float64, from, to time.Time) ([]Sample, error) {
	var list []Sample
	for t := from; ; {
		at, _, err := sky.UpperTransit(tel.Site(), src.Star(), t, dut1S)
		if err != nil {
			return nil, err
		}
		if !at.Before(to) {
			return list, nil
		}
		s, err := At(tel, src, dut1S, at)
		if err != nil {
			return nil, err
		}
		list = append(list, s)
		t = at.Add(time.Hour) // the next is a sidereal day later
	}
}
