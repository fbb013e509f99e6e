package sky

import (
	"fmt"
	"math"
	"time"

	"cadencewright/astro"
	"cadencewright/astro/timescale"
)

// knotSpan is how far apart the instants are at which apparent places are
// worked out; between them directions are taken along the chord. Aberration
// and the Sun move by less than 0.1 and 300 arcsec in that time, so the chord
// is good to 0.001 arcsec for a star and 0.2 for the Sun.
const knotSpan = 2 * time.Hour

// maxWindow bounds the samples of one window, so that a wrong step cannot ask
// for all of memory: a fortnight at half-minute steps, and some more.
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
	knots          []frame
	perKnot        float64 // samples from knot to knot
}

// NewWindow prepares n instants from start on, step apart, at a site; dut1S is
// UT1-UTC in seconds.
func NewWindow(site astro.Geodetic, start time.Time, step time.Duration, n int, dut1S float64) (*Window, error) {
	if n < 1 || n > maxWindow {
		return nil, &astro.RangeError{Quantity: "number of samples", Value: fmt.Sprint(n), Allowed: fmt.Sprintf("1 to %d", maxWindow)}
	}
	if step <= 0 || step > 24*time.Hour {
		return nil, &astro.RangeError{Quantity: "step", Value: step.String(), Allowed: "above 0 to 24h"}
	}
	span := step * time.Duration(n-1)
	pieces := int(math.Ceil(float64(span)/float64(knotSpan))) + 1
	w := &Window{n: n, perKnot: math.Max(1, float64(n-1)/float64(pieces))}
	w.sinPhi, w.cosPhi = math.Sincos(float64(site.Lat))
	lst := make([]float64, pieces+1)
	for k := range pieces + 1 {
		t := start.Add(time.Duration(float64(k) * w.perKnot * float64(step)))
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
			turned := w.perKnot * step.Hours() * 15 * siderealRate
			lst[k] += 360 * math.Round((lst[k-1]+turned-lst[k])/360)
		}
	}
	w.spread(lst)
	return w, nil
}

// siderealRate is the turn of the Earth in a mean solar day, in turns.
const siderealRate = 1.00273790935

// spread fills the sidereal time of every sample from that at the knots.
func (w *Window) spread(lst []float64) {
	w.lstDeg = make([]float64, w.n)
	w.sinLST, w.cosLST = make([]float64, w.n), make([]float64, w.n)
	for i := range w.n {
		k, f := w.at(i)
		w.lstDeg[i] = lst[k] + f*(lst[k+1]-lst[k])
		w.sinLST[i], w.cosLST[i] = math.Sincos(w.lstDeg[i] * (math.Pi / 180))
	}
}

// at is the knot before a sample and the part of the way to the next.
func (w *Window) at(i int) (knot int, part float64) {
	x := float64(i) / w.perKnot
	k := min(int(x), len(w.knots)-2)
	return k, x - float64(k)
}

// Len is the number of samples.
func (w *Window) Len() int { return w.n }

// LSTDeg is the local apparent sidereal time at a sample, [0, 360).
func (w *Window) LSTDeg(i int) float64 { return astro.FromDeg(w.lstDeg[i]).Wrap().Deg() }

// Track is one star over a window, a value a sample in each column.
type Track struct {
	AzDeg  []float64 // from north through east, [0, 360)
	ElDeg  []float64
	HADeg  []float64 // west-positive, (-180, 180]
	DecDeg []float64 // apparent
	SunDeg []float64 // separation from the apparent Sun
}

func (t *Track) resize(n int) {
	for _, col := range []*[]float64{&t.AzDeg, &t.ElDeg, &t.HADeg, &t.DecDeg, &t.SunDeg} {
		if cap(*col) < n {
			*col = make([]float64, n)
		}
		*col = (*col)[:n]
	}
}

// segment is a star between two knots: everything is linear in the part of the
// way there.
type segment struct {
	from, to       int // samples [from, to)
	part, dPart    float64
	d, slope       astro.Vec3
	raDeg, raSlope float64
	decDeg, dSlope float64
	sunDeg, sSlope float64
}

// segments calls f for the star between each pair of neighbouring knots.
func (w *Window) segments(star astro.Star, f func(*segment)) {
	var s segment
	s.dPart = 1 / w.perKnot
	next := w.knots[0].apparent(star)
	nextSun := next.AngleTo(w.knots[0].sun).Deg()
	for k := 0; k+1 < len(w.knots); k++ {
		s.d, s.sunDeg = next, nextSun
		next = w.knots[k+1].apparent(star)
		nextSun = next.AngleTo(w.knots[k+1].sun).Deg()
		s.slope = next.Add(s.d.Scale(-1))
		s.raDeg, s.decDeg = s.d.Lon().Deg(), s.d.Lat().Deg()
		s.raSlope = (next.Lon() - s.d.Lon()).WrapSigned().Deg()
		s.dSlope, s.sSlope = next.Lat().Deg()-s.decDeg, nextSun-s.sunDeg
		s.from, s.to = s.to, min(w.n, int(math.Ceil(float64(k+1)*w.perKnot)))
		if k+2 == len(w.knots) {
			s.to = w.n
		}
		s.part = float64(s.from)/w.perKnot - float64(k)
		f(&s)
	}
}

// Track samples a star at every instant of the window. It reuses the columns
// of dst where they are long enough, and allocates nothing then.
func (w *Window) Track(star astro.Star, dst *Track) {
	dst.resize(w.n)
	w.segments(star, func(s *segment) {
		part := s.part
		for i := s.from; i < s.to; i++ {
			dx, dy, dz := s.d[0]+part*s.slope[0], s.d[1]+part*s.slope[1], s.d[2]+part*s.slope[2]
			sinL, cosL := w.sinLST[i], w.cosLST[i]
			x := dx*cosL + dy*sinL
			west := dx*sinL - dy*cosL
			north := dz*w.cosPhi - x*w.sinPhi
			up := dz*w.sinPhi + x*w.cosPhi
			az := math.Atan2(-west, north) * (180 / math.Pi)
			if az < 0 {
				az += 360
			}
			dst.AzDeg[i] = az
			dst.ElDeg[i] = elevationDeg(up, west, north)
			dst.HADeg[i] = wrap180(w.lstDeg[i] - s.raDeg - part*s.raSlope)
			dst.DecDeg[i] = s.decDeg + part*s.dSlope
			dst.SunDeg[i] = s.sunDeg + part*s.sSlope
			part += s.dPart
		}
	})
}

// elevationDeg is the elevation of a direction. The arc sine is the faster
// function, but loses its digits near the zenith.
func elevationDeg(up, west, north float64) float64 {
	if up > 0.7 || up < -0.7 {
		return math.Atan2(up, math.Sqrt(west*west+north*north)) * (180 / math.Pi)
	}
	return math.Asin(up) * (180 / math.Pi)
}

// wrap180 brings degrees into (-180, 180].
func wrap180(deg float64) float64 {
	deg -= 360 * math.Round(deg/360)
	if deg <= -180 {
		deg += 360
	}
	return deg
}

// SinElevation is the sine of a star's elevation at every instant, without an
// inverse function: limits can be tested on it many times faster than on
// angles. It reuses dst where that is long enough.
func (w *Window) SinElevation(star astro.Star, dst []float64) []float64 {
	if cap(dst) < w.n {
		dst = make([]float64, w.n)
	}
	dst = dst[:w.n]
	w.segments(star, func(s *segment) {
		part := s.part
		for i := s.from; i < s.to; i++ {
			x := (s.d[0]+part*s.slope[0])*w.cosLST[i] + (s.d[1]+part*s.slope[1])*w.sinLST[i]
			dst[i] = (s.d[2]+part*s.slope[2])*w.sinPhi + x*w.cosPhi
			part += s.dPart
		}
	})
	return dst
}
