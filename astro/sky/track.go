package sky

import (
	"math"

	"cadencewright/astro"
)

// Track is one star over a window, a value a sample in each column.
type Track struct {
	AzDeg  []float64 // from north through east, [0, 360)
	ElDeg  []float64
	HADeg  []float64 // west-positive, (-180, 180]
	DecDeg []float64 // apparent
	SunDeg []float64 // separation from the apparent Sun
}

// resize gives every column n values.
func (t *Track) resize(n int) {
	for _, col := range []*[]float64{&t.AzDeg, &t.ElDeg, &t.HADeg, &t.DecDeg, &t.SunDeg} {
		*col = resized(*col, n)
	}
}

// resized is a slice of n values, col itself where it is long enough; what it
// holds is to be overwritten.
func resized(col []float64, n int) []float64 {
	if cap(col) < n {
		return make([]float64, n)
	}
	return col[:n]
}

// leg is a star between two neighbouring knots of a window, where its
// direction is linear in the part of the way from one to the next.
type leg struct {
	w     *Window
	star  astro.Star
	knot  int        // the one before
	d     astro.Vec3 // the star's apparent direction there, true of date
	slope astro.Vec3 // over the whole leg
	next  astro.Vec3

	from, to     int     // samples [from, to)
	first, dPart float64 // part of the way at the first sample, and from sample to sample
}

// legs starts a walk along a star's path, before its first leg.
func (w *Window) legs(star astro.Star) leg {
	return leg{w: w, star: star, knot: -1, next: w.knots[0].apparent(star), dPart: 1 / w.perKnot}
}

// advance moves to the next leg, if there is one. No sample belongs to two.
func (l *leg) advance() bool {
	l.knot++
	if l.knot+1 >= len(l.w.knots) {
		return false
	}
	l.d, l.next = l.next, l.w.knots[l.knot+1].apparent(l.star)
	l.slope = l.next.Add(l.d.Scale(-1))
	l.from, l.to = l.to, min(l.w.n, int(math.Ceil(float64(l.knot+1)*l.w.perKnot)))
	if l.knot+2 == len(l.w.knots) {
		l.to = l.w.n // the last knot's own sample too
	}
	l.first = float64(l.from)/l.w.perKnot - float64(l.knot)
	return true
}

// Track samples a star at every instant of the window, within 0.02 arcsec of
// what Observe says there (the Sun's separation within 1 arcsec, 5 at a degree
// from the Sun or from the point opposite). It reuses the columns of dst where they are long enough, and
// allocates nothing then. A sample costs about thirty nanoseconds, nearly all of
// them in two inverse tangents.
func (w *Window) Track(star astro.Star, dst *Track) {
	dst.resize(w.n)
	for l := w.legs(star); l.advance(); {
		l.fillPlaces(dst)
		l.fillSun(dst.SunDeg)
	}
}

// fillPlaces fills the columns of the leg's samples but the Sun's. Azimuth and
// elevation come from the vector; hour angle and declination, which hardly
// change over a leg, are taken linear in it.
func (l *leg) fillPlaces(dst *Track) {
	w, part := l.w, l.first
	lon := l.d.Lon()
	ra, dec := lon.Deg(), l.d.Lat().Deg()
	raSlope := (l.next.Lon() - lon).WrapSigned().Deg()
	decSlope := l.next.Lat().Deg() - dec
	for i := l.from; i < l.to; i++ {
		dx, dy, dz := l.d[0]+part*l.slope[0], l.d[1]+part*l.slope[1], l.d[2]+part*l.slope[2]
		sinL, cosL := w.sinLST[i], w.cosLST[i]
		x := dx*cosL + dy*sinL    // toward the meridian point of the equator
		west := dx*sinL - dy*cosL // of it
		north := dz*w.cosPhi - x*w.sinPhi
		up := dz*w.sinPhi + x*w.cosPhi
		dst.AzDeg[i] = azimuthDeg(north, west)
		dst.ElDeg[i] = elevationDeg(up, west, north)
		dst.HADeg[i] = wrap180(w.lstDeg[i] - ra - part*raSlope)
		dst.DecDeg[i] = dec + part*decSlope
		part += l.dPart
	}
}

// fillSun fills the separation from the Sun of the leg's samples, piece by
// piece between the instants at which the Sun is known.
func (l *leg) fillSun(dst []float64) {
	w := l.w
	pieces := w.sunsPerKnot
	suns := w.suns[l.knot*pieces:]
	i, part := l.from, l.first*float64(pieces) // counted in pieces
	before := l.d.AngleTo(suns[0]).Deg()
	for p := 1; p <= pieces; p++ {
		star := l.d.Add(l.slope.Scale(float64(p) / float64(pieces)))
		after := star.AngleTo(suns[p]).Deg()
		for ; i < l.to && (part < float64(p) || p == pieces); i++ {
			dst[i] = before + (part-float64(p-1))*(after-before)
			part += l.dPart * float64(pieces)
		}
		before = after
	}
}

// SinElevation is the sine of a star's elevation at every instant, without an
// inverse function: limits can be tested on it many times faster than on
// angles, since the sine grows with the elevation from -90 to 90 degrees. It is
// good to 1e-8: 0.002 arcsec, but half an arcminute at the very zenith, where
// the sine is flat. It reuses dst where that is long enough.
func (w *Window) SinElevation(star astro.Star, dst []float64) []float64 {
	dst = resized(dst, w.n)
	for l := w.legs(star); l.advance(); {
		part := l.first
		for i := l.from; i < l.to; i++ {
			x := (l.d[0]+part*l.slope[0])*w.cosLST[i] + (l.d[1]+part*l.slope[1])*w.sinLST[i]
			dst[i] = (l.d[2]+part*l.slope[2])*w.sinPhi + x*w.cosPhi
			part += l.dPart
		}
	}
	return dst
}

// azimuthDeg is the azimuth of a direction, [0, 360); 0 at the very zenith.
func azimuthDeg(north, west float64) float64 {
	return wrap360(math.Atan2(-west, north) * (180 / math.Pi))
}

// wrap360 brings degrees from (-360, 360] into [0, 360).
func wrap360(deg float64) float64 {
	if deg < 0 {
		deg += 360
	}
	if deg >= 360 { // a tiny negative angle rounds up to a whole turn
		deg -= 360
	}
	return deg
}

// elevationDeg is the elevation of a direction. Unlike the arc sine this keeps
// its digits near the zenith, and stays finite where rounding takes the sine
// past 1; it is hardly slower.
func elevationDeg(up, west, north float64) float64 {
	return math.Atan2(up, math.Sqrt(west*west+north*north)) * (180 / math.Pi)
}

// wrap180 brings degrees into (-180, 180].
func wrap180(deg float64) float64 {
	deg -= 360 * math.Round(deg/360)
	if deg <= -180 {
		deg += 360
	}
	return deg
}
