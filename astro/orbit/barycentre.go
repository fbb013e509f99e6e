package orbit

import (
	"math"
	"time"

	"cadencewright/astro"
	"cadencewright/astro/internal/meeus"
	"cadencewright/astro/timescale"
)

// auLightS is the light time of one astronomical unit in seconds (IAU 2012,
// with the defined speed of light).
const auLightS = 149597870700.0 / 299792458.0

// RoemerToBarycentreS is the light time from the Earth's centre to the
// solar-system barycentre in the direction of a star, in seconds: positive
// while the Earth is on the star's side of the barycentre, where pulses come
// early. tt is Terrestrial Time. Within 0.03 s: the Sun's place about the
// barycentre is that of the four giant planets' mean orbits.
func RoemerToBarycentreS(star astro.Star, tt timescale.MJD) float64 {
	return earthLightS(tt.Float()).Dot(star.Direction(tt.Float()))
}

// earthLightS is the Earth's centre from the solar-system barycentre in
// light-seconds, J2000 equatorial.
func earthLightS(mjdTT float64) astro.Vec3 {
	return meeus.EarthBarycentric(mjdTT + 2400000.5).Scale(auLightS)
}

// BarycentricTDB is the TDB at which light from the star that reaches the
// Earth's centre at t passes the solar-system barycentre (its wave front
// does), in two parts. Within 0.03 s; an instant outside 1972-2099 is an
// error. For many instants a Clock is a hundred times faster.
func BarycentricTDB(star astro.Star, t time.Time) (timescale.MJD, error) {
	tt, err := timescale.TT(t)
	if err != nil {
		return timescale.MJD{}, err
	}
	return tt.AddS(timescale.TDBMinusTTS(tt.Float()) + RoemerToBarycentreS(star, tt)), nil
}

// Earth is the Earth's path about the solar-system barycentre over a stretch
// of time, tabulated once and then interpolated. It never changes and may be
// used from several goroutines.
type Earth struct {
	firstDay int          // MJD (TT) of nodes[0]
	nodes    []astro.Vec3 // light-seconds, one a day
}

// NewEarth tabulates the Earth's path from from to to, both included. The
// range must lie in 1972-2099; the cost is about 15 us a day of it.
func NewEarth(from, to time.Time) (*Earth, error) {
	a, err := timescale.TT(from)
	if err != nil {
		return nil, err
	}
	b, err := timescale.TT(to)
	if err != nil {
		return nil, err
	}
	// The cubic through four days needs one before and two after.
	e := &Earth{firstDay: a.Day - 1}
	for day := e.firstDay; day <= b.Day+2; day++ {
		e.nodes = append(e.nodes, earthLightS(float64(day)))
	}
	return e, nil
}

// covers reports whether the table reaches an instant.
func (e *Earth) covers(tt timescale.MJD) bool {
	i := tt.Day - e.firstDay - 1
	return i >= 0 && i+3 < len(e.nodes)
}

// weights of the four days around an instant: Lagrange's cubic, x days after
// the second. Its error, by the fourth derivative of the motion of the Earth
// about the barycentre of Earth and Moon, is below 2 us of light time.
func weights(x float64) (w [4]float64) {
	p, m, l := x+1, x-1, x-2
	return [4]float64{-x * m * l / 6, p * m * l / 2, -p * x * l / 2, p * x * m / 6}
}

// Clock tells barycentric time in the direction of one star.
type Clock struct {
	star  astro.Star
	earth *Earth
	// The star's direction is at + years·motion: the motion as a vector, to
	// first order, which loses 5 us of light time for 30 arcsec of it.
	at, motion astro.Vec3
}

// Clock makes a clock for a star. It tells the time at any instant of
// 1972-2099, quickly within the table's range.
func (e *Earth) Clock(star astro.Star) Clock {
	const masPerYear = math.Pi / 648e6
	sinRA, cosRA := math.Sincos(star.RA.Rad())
	sinDec, cosDec := math.Sincos(star.Dec.Rad())
	east := astro.Vec3{-sinRA, cosRA, 0}
	north := astro.Vec3{-sinDec * cosRA, -sinDec * sinRA, cosDec}
	return Clock{star: star, earth: e, at: astro.Spherical(star.RA, star.Dec),
		motion: east.Scale(star.PMRAMasYr * masPerYear).Add(north.Scale(star.PMDecMasYr * masPerYear))}
}

// TDB is BarycentricTDB by the table: the same to some 5 us.
func (c *Clock) TDB(t time.Time) (timescale.MJD, error) {
	tt, err := timescale.TT(t)
	if err != nil {
		return timescale.MJD{}, err
	}
	mjd := tt.Float()
	if !c.earth.covers(tt) {
		return BarycentricTDB(c.star, t)
	}
	years := (mjd - c.star.PosEpochMJD) / daysPerYear
	n := c.at.Add(c.motion.Scale(years))
	nodes := c.earth.nodes[tt.Day-c.earth.firstDay-1:]
	roemerS := 0.0
	for i, w := range weights(tt.Frac) {
		roemerS += w * nodes[i].Dot(n)
	}
	return tt.AddS(timescale.TDBMinusTTS(mjd) + roemerS), nil
}
