// Package astro holds the value types that all astronomy here is written in,
// and their conventions: angles are radians inside, longitudes count positive
// to the east, azimuth runs from north through east, hour angle is positive
// west of the meridian. Right ascension and declination are ICRS where a name
// does not say otherwise.
//
// The package and those below it are pure: no clock, no file, no state that
// changes.
package astro

import (
	"fmt"
	"math"
)

// Angle is an angle in radians.
type Angle float64

// FromDeg makes an angle of degrees.
func FromDeg(deg float64) Angle { return Angle(deg * (math.Pi / 180)) }

// FromHours makes an angle of hours (24 to the turn).
func FromHours(h float64) Angle { return Angle(h * (math.Pi / 12)) }

// FromArcsec makes an angle of seconds of arc.
func FromArcsec(s float64) Angle { return Angle(s * (math.Pi / 648000)) }

// Rad is the angle in radians.
func (a Angle) Rad() float64 { return float64(a) }

// Deg is the angle in degrees.
func (a Angle) Deg() float64 { return float64(a) * (180 / math.Pi) }

// Hours is the angle in hours (24 to the turn).
func (a Angle) Hours() float64 { return float64(a) * (12 / math.Pi) }

// Arcsec is the angle in seconds of arc.
func (a Angle) Arcsec() float64 { return float64(a) * (648000 / math.Pi) }

// Sin is the sine of the angle.
func (a Angle) Sin() float64 { return math.Sin(float64(a)) }

// Cos is the cosine of the angle.
func (a Angle) Cos() float64 { return math.Cos(float64(a)) }

// Wrap brings the angle into [0, 2π).
func (a Angle) Wrap() Angle {
	w := math.Mod(float64(a), 2*math.Pi)
	if w < 0 {
		w += 2 * math.Pi
	}
	if w >= 2*math.Pi { // a tiny negative angle rounds up to a whole turn
		w = 0
	}
	return Angle(w)
}

// WrapSigned brings the angle into (-π, π].
func (a Angle) WrapSigned() Angle {
	w := a.Wrap()
	if w > math.Pi {
		w -= 2 * math.Pi
	}
	return w
}

// Geodetic is a place on the Earth (WGS84).
type Geodetic struct {
	Lon, Lat Angle   // east-positive; geodetic latitude
	HeightM  float64 // above the ellipsoid
}

// Star is a place in the sky with its proper motion, applied linearly in right
// ascension and declination. Parallax and radial velocity are left out: for a
// pulsar they are below a millisecond of arc, or nearly so.
type Star struct {
	RA, Dec     Angle   // ICRS at PosEpochMJD
	PosEpochMJD float64 // TDB; 51544.5 is J2000.0
	PMRAMasYr   float64 // milliarcseconds a Julian year, times cos(dec)
	PMDecMasYr  float64
}

// At is the star's place moved by proper motion to an epoch (MJD). At the very
// pole, where right ascension has no meaning, its motion in it is left out.
func (s Star) At(mjd float64) (ra, dec Angle) {
	years := (mjd - s.PosEpochMJD) / 365.25
	const mas = math.Pi / 648e6
	ra, dec = s.RA, s.Dec+Angle(s.PMDecMasYr*mas*years)
	if c := s.Dec.Cos(); math.Abs(c) > 1e-9 {
		ra += Angle(s.PMRAMasYr * mas * years / c)
	}
	return ra, dec
}

// Direction is the unit vector toward the star at an epoch (MJD), ICRS.
func (s Star) Direction(mjd float64) Vec3 {
	ra, dec := s.At(mjd)
	return Spherical(ra, dec)
}

// RangeError says that a quantity lies outside what a function can do.
type RangeError struct {
	Quantity string // what it is, with its unit
	Value    string
	Allowed  string
}

func (e *RangeError) Error() string {
	return fmt.Sprintf("%s is %s; allowed is %s", e.Quantity, e.Value, e.Allowed)
}
