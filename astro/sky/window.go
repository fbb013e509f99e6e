package sky

import (
	"fmt"
	"math"
	"time"

	"cadencewright/astro"
	"cadencewright/astro/timescale"
)

// How far apart the instants are at which apparent places are worked out;
// between them directions are taken along the chord. In half a day that is good
// to 0.002 arcsec for a star (aberration, and the fortnightly term of
// nutation, bend by 0.04 arcsec a day squared). The Sun's separation is taken
// linear over two hours: 0.2 arcsec, more only within a few degrees of the Sun
// and of the point opposite (3 at one degree).
const (
	knotSpan = 12 * time.Hour
	sunSpan  = 2 * time.Hour
)

// maxWindow bounds the samples of one window, so that a wrong step cannot ask
// for all of memory: six weeks at half-minute steps.
const maxWindow = 1 << 17

// Window is a uniform run of instants at one site. What all stars share over
// it (sidereal time, precession and nutation, the Earth's velocity, the Sun)
// is worked out once; a star then costs a rotation a sample. A Window does not
// change after NewWindow and may be used by several goroutines.
type Window struct {
	n              int
	sinPhi, cosPhi float64
	sinLST, cosLST []float64
	lstDeg         []float64 // continuous, not wrapped
	knots          []frame   // perKnot samples apart, from the first sample on
	perKnot        float64
	suns           []astro.Vec3 // apparent, true of date; sunsPerKnot to each interval
	sunsPerKnot    int
}

// NewWindow prepares n instants from start on, step apart (up to a day), at a
// site; dut1S is UT1-UTC in seconds, taken as constant over the window (it moves
// by a millisecond or two a day). A week at half-minute steps takes about a
// millisecond and half a megabyte, whatever the number of stars then tracked.
func NewWindow(site astro.Geodetic, start time.Time, step time.Duration, n int, dut1S float64) (*Window, error) {
	if n < 1 || n > maxWindow {
		return nil, &astro.RangeError{Quantity: "number of samples", Value: fmt.Sprint(n), Allowed: fmt.Sprintf("1 to %d", maxWindow)}
	}
	if step <= 0 || step > 24*time.Hour {
		return nil, &astro.RangeError{Quantity: "step", Value: step.String(), Allowed: "above 0 to 24h"}
	}
	if err := checkSite(site); err != nil {
		return nil, err
	}
	// No more intervals than there are between samples, and none beyond the
	// last sample: it may be the last instant that can be used.
	last := max(1, n-1)
	intervals := min(last, intervalsOf(time.Duration(n-1)*step, knotSpan))
	if step > sunSpan {
		intervals = last // a knot for each sample, nothing in between
	}
	w := &Window{n: n, perKnot: float64(last) / float64(intervals)}
	w.sinPhi, w.cosPhi = math.Sincos(float64(site.Lat))
	at := func(sample float64) time.Time {
		return start.Add(time.Duration(math.Min(sample, float64(n-1)) * float64(step)))
	}
	lst, err := w.place(site, dut1S, intervals, at)
	if err != nil {
		return nil, err
	}
	if err := w.placeSuns(step, at); err != nil {
		return nil, err
	}
	w.spread(lst)
	return w, nil
}

// intervalsOf is into how many equal parts, none longer than each, a span goes.
func intervalsOf(span, each time.Duration) int {
	return max(1, int(math.Ceil(float64(span)/float64(each))))
}

// place works out the knots, and the local sidereal time at each in degrees,
// continuous.
func (w *Window) place(site astro.Geodetic, dut1S float64, intervals int, at func(float64) time.Time) ([]float64, error) {
	w.knots = make([]frame, 0, intervals+1)
	lst := make([]float64, intervals+1)
	for k := range lst {
		t := at(float64(k) * w.perKnot)
		tt, err := timescale.TT(t)
		if err != nil {
			return nil, err
		}
		l, err := timescale.LST(t, dut1S, site.Lon)
		if err != nil {
			return nil, err
		}
		w.knots = append(w.knots, newFrame(tt))
		lst[k] = l.Deg()
		if k > 0 {
			// The whole turns that the interval holds, since a step may be long.
			turned := t.Sub(at(float64(k-1)*w.perKnot)).Hours() * 15 * siderealRate
			lst[k] += 360 * math.Round((lst[k-1]+turned-lst[k])/360)
		}
	}
	return lst, nil
}

// placeSuns works out the Sun some times in each interval between knots, in the
// frame of the nearest of them.
func (w *Window) placeSuns(step time.Duration, at func(float64) time.Time) error {
	w.sunsPerKnot = 1
	if step <= sunSpan {
		w.sunsPerKnot = intervalsOf(time.Duration(w.perKnot*float64(step)), sunSpan)
	}
	each := w.perKnot / float64(w.sunsPerKnot)
	w.suns = make([]astro.Vec3, (len(w.knots)-1)*w.sunsPerKnot+1)
	for j := range w.suns {
		tt, err := timescale.TT(at(float64(j) * each))
		if err != nil {
			return err
		}
		nearest := (j + w.sunsPerKnot/2) / w.sunsPerKnot
		w.suns[j] = w.knots[min(nearest, len(w.knots)-1)].apparentSun(tt)
	}
	return nil
}

// siderealRate is the turn of the Earth in a mean solar day, in turns.
const siderealRate = 1.00273790935

// spread fills the sidereal time of every sample from that at the knots. In
// half a day nutation bends it by 0.001 arcsec.
func (w *Window) spread(lst []float64) {
	w.lstDeg = make([]float64, w.n)
	w.sinLST, w.cosLST = make([]float64, w.n), make([]float64, w.n)
	for i := range w.n {
		x := float64(i) / w.perKnot
		k := min(int(x), len(lst)-2)
		w.lstDeg[i] = lst[k] + (x-float64(k))*(lst[k+1]-lst[k])
		w.sinLST[i], w.cosLST[i] = math.Sincos(w.lstDeg[i] * (math.Pi / 180))
	}
}

// Len is the number of samples.
func (w *Window) Len() int { return w.n }

// LSTDeg is the local apparent sidereal time at a sample, [0, 360).
func (w *Window) LSTDeg(i int) float64 { return astro.FromDeg(w.lstDeg[i]).Wrap().Deg() }
