// Package meeus is the only door to the almanac library (github.com/soniakeys/
// meeus, after J. Meeus, Astronomical Algorithms, 2nd ed. 1998). It turns the
// library's conventions (longitudes west-positive, azimuth from the south) and
// its traps away from the rest of the program: everything here is vectors and
// rotations in right-handed frames.
//
// Dates are Julian Dates as one number: TT where the argument is called jde,
// UT1 where it is called jdUT1. Callers keep them within 1972 to 2099, where
// everything here has been held against ERFA (IAU 2006/2000A): the true pole is
// within 0.15 arcsec, the direction of the Greenwich meridian too, 0.05 in 2026
// to 2030. Sidereal time wants UT1 and everything else TT: to mix them is an
// error of 17 minutes of arc.
package meeus

import (
	"math"

	"github.com/soniakeys/meeus/v3/apparent"
	"github.com/soniakeys/meeus/v3/base"
	"github.com/soniakeys/meeus/v3/coord"
	"github.com/soniakeys/meeus/v3/nutation"
	"github.com/soniakeys/meeus/v3/precess"
	"github.com/soniakeys/meeus/v3/sidereal"
	"github.com/soniakeys/unit"

	"cadencewright/astro"
)

// AUKm is the astronomical unit in kilometres (IAU 2012).
const AUKm = 149597870.7

// ApparentSidereal is Greenwich apparent sidereal time, [0, 2π) (chapter 12).
func ApparentSidereal(jdUT1 float64) astro.Angle {
	return astro.Angle(sidereal.Apparent(jdUT1).Sec() / 86400 * 2 * math.Pi).Wrap()
}

// MeanSidereal is Greenwich mean sidereal time, [0, 2π) (chapter 12).
func MeanSidereal(jdUT1 float64) astro.Angle {
	return astro.Angle(sidereal.Mean(jdUT1).Sec() / 86400 * 2 * math.Pi).Wrap()
}

// Precession turns mean equatorial J2000.0 coordinates into those of the mean
// equator and equinox of date (chapter 21, IAU 1976).
func Precession(jde float64) astro.Mat3 {
	p := precess.NewPrecessor(2000, base.JDEToJulianYear(jde))
	axis := func(ra, dec float64) astro.Vec3 {
		eq := &coord.Equatorial{RA: unit.RA(ra), Dec: unit.Angle(dec)}
		to := p.Precess(eq, &coord.Equatorial{})
		return astro.Spherical(astro.Angle(to.RA), astro.Angle(to.Dec))
	}
	// The images of two axes are two columns; the third is their product.
	x, y := axis(0, 0), axis(math.Pi/2, 0)
	z := x.Cross(y)
	return astro.Mat3{{x[0], y[0], z[0]}, {x[1], y[1], z[1]}, {x[2], y[2], z[2]}}
}

// Nutation is nutation in longitude and obliquity, and the mean obliquity
// (chapter 22, IAU 1980, 63 terms).
func Nutation(jde float64) (dpsi, deps, eps astro.Angle) {
	p, e := nutation.Nutation(jde)
	return astro.Angle(p), astro.Angle(e), astro.Angle(nutation.MeanObliquity(jde))
}

// TrueOfDate turns mean equatorial J2000.0 coordinates (here the same as ICRS,
// to 0.02 arcsec) into those of the true equator and equinox of date.
func TrueOfDate(jde float64) astro.Mat3 {
	dpsi, deps, eps := Nutation(jde)
	n := astro.RotX(-(eps + deps)).Mul(astro.RotZ(-dpsi)).Mul(astro.RotX(eps))
	return n.Mul(Precession(jde))
}

// EarthVelocity is the Earth's barycentric velocity in units of the speed of
// light, J2000.0 equatorial (chapter 23, Ron and Vondrak 1986): 0.0004 arcsec. The library
// gives the displacement of a star; two stars on the equator give all three
// components.
func EarthVelocity(jde float64) astro.Vec3 {
	y, z := apparent.AberrationRonVondrak(0, 0, jde)
	x, _ := apparent.AberrationRonVondrak(unit.RA(math.Pi/2), 0, jde)
	return astro.Vec3{-x.Rad(), y.Rad(), z.Rad()}
}
