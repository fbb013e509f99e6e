package sky

import (
	"math"
	"time"

	"cadencewright/astro"
	"cadencewright/astro/internal/meeus"
	"cadencewright/astro/timescale"
)

// Body is where the Sun or the Moon stands, apparent and geocentric: true
// equator and equinox of date.
type Body struct {
	RADeg, DecDeg float64
	DistanceKm    float64 // from the Earth's centre, geometric
}

// DistanceAU is the distance in astronomical units.
func (b Body) DistanceAU() float64 { return b.DistanceKm / meeus.AUKm }

// Sun is the apparent Sun: 10 arcsec and 1,500 km from ERFA's epv00 with
// aberration and pnm06a in 2026 to 2030, 15 arcsec over all dates. The distance is
// geometric, at the instant itself.
func Sun(t time.Time) (Body, error) {
	tt, err := timescale.TT(t)
	if err != nil {
		return Body{}, err
	}
	f := newFrame(tt)
	sun := f.apparentSun(tt)
	return Body{RADeg: wrap360(sun.Lon().Deg()), DecDeg: sun.Lat().Deg(),
		DistanceKm: meeus.SunEcliptic(tt.JD()).Norm() * meeus.AUKm}, nil
}

// Moon is the apparent Moon, 9 arcsec and 10 km from the JPL ephemeris DE405
// in 2026 to 2030. The series already holds light time; annual aberration does
// not move a body that moves along with the Earth. Over a site it stands up to a
// degree elsewhere: see MoonOver.
func Moon(t time.Time) (Body, error) {
	tt, err := timescale.TT(t)
	if err != nil {
		return Body{}, err
	}
	v := moonTrue(tt)
	return Body{RADeg: wrap360(v.Lon().Deg()), DecDeg: v.Lat().Deg(), DistanceKm: v.Norm()}, nil
}

// moonTrue is the vector to the Moon in km, true equator and equinox of date:
// the series is in the mean ecliptic of date, to which nutation is added by two
// rotations.
func moonTrue(tt timescale.MJD) astro.Vec3 {
	jde := tt.JD()
	dpsi, deps, eps := meeus.Nutation(jde)
	n := astro.RotX(-(eps + deps)).Mul(astro.RotZ(-dpsi))
	return n.Apply(meeus.MoonEcliptic(jde))
}

// BodyOver is a body over a site, the parallax of the site included (8.8
// arcsec at most for the Sun, about a degree for the Moon).
type BodyOver struct {
	AzDeg, ElDeg float64
	DistanceKm   float64 // from the site
}

// SunOver is the Sun over a site, its centre, without refraction; dut1S is
// UT1-UTC in seconds.
func SunOver(site astro.Geodetic, t time.Time, dut1S float64) (BodyOver, error) {
	b, err := Sun(t)
	if err != nil {
		return BodyOver{}, err
	}
	return b.over(site, t, dut1S)
}

// MoonOver is the Moon over a site, its centre, without refraction; dut1S is
// UT1-UTC in seconds.
func MoonOver(site astro.Geodetic, t time.Time, dut1S float64) (BodyOver, error) {
	b, err := Moon(t)
	if err != nil {
		return BodyOver{}, err
	}
	return b.over(site, t, dut1S)
}

// over moves the body's geocentric place to the site and turns it into azimuth
// and elevation.
func (b Body) over(site astro.Geodetic, t time.Time, dut1S float64) (BodyOver, error) {
	if err := checkSite(site); err != nil {
		return BodyOver{}, err
	}
	lst, err := timescale.LST(t, dut1S, site.Lon)
	if err != nil {
		return BodyOver{}, err
	}
	body := astro.Spherical(astro.FromDeg(b.RADeg), astro.FromDeg(b.DecDeg)).Scale(b.DistanceKm)
	from := body.Add(siteVector(site, lst).Scale(-1))
	p := over(from.Unit(), lst, site.Lat)
	return BodyOver{AzDeg: p.AzDeg, ElDeg: p.ElDeg, DistanceKm: from.Norm()}, nil
}

// siteVector is a site from the Earth's centre in km, in the frame of the true
// equator and equinox of date (WGS84; polar motion left out). The local sidereal
// time takes the place of the longitude.
func siteVector(site astro.Geodetic, lst astro.Angle) astro.Vec3 {
	const a, f = 6378.137, 1 / 298.257223563
	sinPhi, cosPhi := math.Sincos(float64(site.Lat))
	c := a / math.Sqrt(cosPhi*cosPhi+(1-f)*(1-f)*sinPhi*sinPhi)
	h := site.HeightM / 1000
	rho := (c + h) * cosPhi
	return astro.Vec3{rho * lst.Cos(), rho * lst.Sin(), ((1-f)*(1-f)*c + h) * sinPhi}
}
