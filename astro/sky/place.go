// Package sky finds where things stand over a telescope: apparent places,
// azimuth and elevation tracks, the Sun and the Moon, crossings of a limit,
// horizon masks, and how long an axis takes to move.
//
// Apparent topocentric directions hold proper motion, annual aberration,
// precession and nutation. Parallax, diurnal aberration (0.32 arcsec at most),
// light deflection (1.8 arcsec at the Sun's limb), polar motion and refraction
// are left out. The agreement with the IAU routines (ERFA) is better than 1
// arcsec, and 10 arcsec for the Sun. Angles leave this package in degrees.
package sky

import (
	"math"
	"time"

	"cadencewright/astro"
	"cadencewright/astro/internal/meeus"
	"cadencewright/astro/timescale"
)

// Place is where a star stands over a site at one instant.
type Place struct {
	AzDeg  float64 // from north through east, [0, 360)
	ElDeg  float64
	HADeg  float64 // west-positive, (-180, 180]
	RADeg  float64 // apparent: true equator and equinox of date, [0, 360)
	DecDeg float64 // apparent
	SunDeg float64 // separation from the apparent Sun, at the Earth's centre

	ParallacticDeg float64 // positive west of the meridian
}

// frame is what the sky needs at one instant, whatever the star: the way from
// ICRS to the true equator and equinox of date, and the Earth's velocity.
type frame struct {
	trueOfDate astro.Mat3
	velocity   astro.Vec3 // of the Earth, in units of c, ICRS
	invGamma   float64    // sqrt(1 - v²)
	sun        astro.Vec3 // apparent direction, true of date
	tdb        float64    // MJD, for proper motion
}

// newFrame works out the frame at a Terrestrial Time.
func newFrame(tt timescale.MJD) frame {
	jde := tt.JD()
	f := frame{trueOfDate: meeus.TrueOfDate(jde), velocity: meeus.EarthVelocity(jde), tdb: tt.Float()}
	f.invGamma = math.Sqrt(1 - f.velocity.Dot(f.velocity))
	f.sun = f.trueOfDate.Apply(f.aberrate(meeus.EarthHeliocentric(jde).Scale(-1).Unit()))
	return f
}

// aberrate moves a geometric direction by annual aberration (the relativistic
// formula to first order in the product of velocity and direction; Explanatory
// Supplement, 3rd ed., section 7.2.3.3).
func (f *frame) aberrate(p astro.Vec3) astro.Vec3 {
	dot := p.Dot(f.velocity)
	return p.Scale(f.invGamma).Add(f.velocity.Scale(1 + dot/2)).Unit()
}

// apparent is the star's apparent direction, true equator and equinox of date.
func (f *frame) apparent(s astro.Star) astro.Vec3 {
	return f.trueOfDate.Apply(f.aberrate(s.Direction(f.tdb)))
}

// Observe finds a star over a site at one instant, everything worked out for
// that instant; dut1S is UT1-UTC in seconds. Use a Window for many instants.
func Observe(site astro.Geodetic, star astro.Star, t time.Time, dut1S float64) (Place, error) {
	tt, err := timescale.TT(t)
	if err != nil {
		return Place{}, err
	}
	lst, err := timescale.LST(t, dut1S, site.Lon)
	if err != nil {
		return Place{}, err
	}
	f := newFrame(tt)
	d := f.apparent(star)
	p := over(d, lst, site.Lat)
	p.SunDeg = d.AngleTo(f.sun).Deg()
	return p, nil
}

// over turns an apparent direction into a place at a local sidereal time and
// latitude.
func over(d astro.Vec3, lst, lat astro.Angle) Place {
	ra := d.Lon()
	ha := (lst - ra).WrapSigned()
	sinL, cosL := math.Sincos(float64(lst))
	sinPhi, cosPhi := math.Sincos(float64(lat))
	x := d[0]*cosL + d[1]*sinL // toward the meridian point of the equator
	w := d[0]*sinL - d[1]*cosL // toward the west
	north := d[2]*cosPhi - x*sinPhi
	up := d[2]*sinPhi + x*cosPhi
	az := astro.Angle(math.Atan2(-w, north)).Wrap()
	el := math.Atan2(up, math.Hypot(w, north)) // stays finite at the zenith, unlike an arc sine
	return Place{
		AzDeg: az.Deg(), ElDeg: el * 180 / math.Pi, HADeg: ha.Deg(), RADeg: ra.Deg(), DecDeg: d.Lat().Deg(),
		ParallacticDeg: parallactic(ha, d.Lat(), lat).Deg(),
	}
}

// parallactic is the angle at the star between the pole and the zenith,
// positive west of the meridian (Meeus, chapter 14).
func parallactic(ha, dec, lat astro.Angle) astro.Angle {
	return astro.Angle(math.Atan2(ha.Sin()*lat.Cos(), lat.Sin()*dec.Cos()-lat.Cos()*dec.Sin()*ha.Cos()))
}
