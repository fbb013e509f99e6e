package meeus

import (
	"math"

	"github.com/soniakeys/meeus/v3/base"
	"github.com/soniakeys/meeus/v3/kepler"
	"github.com/soniakeys/meeus/v3/moonposition"
	"github.com/soniakeys/meeus/v3/nutation"
	"github.com/soniakeys/meeus/v3/planetelements"
	"github.com/soniakeys/meeus/v3/solar"

	"cadencewright/astro"
)

// moonMass is the Moon's share of the mass of Earth and Moon (IAU 2009:
// 1/81.30057 of the Earth).
const moonMass = 1 / (81.30057 + 1)

// MoonEcliptic is the geocentric vector to the Moon in km, mean ecliptic and
// equinox of date, geometric but for light time (chapter 47; 10 arcsec, 10 km).
func MoonEcliptic(jde float64) astro.Vec3 {
	lon, lat, km := moonposition.Position(jde)
	return astro.Spherical(astro.Angle(lon), astro.Angle(lat)).Scale(km)
}

// SunEcliptic is the geocentric vector to the Sun in au, mean ecliptic and
// equinox of date, geometric. The low-precision Sun of chapter 25 with the
// planets' largest perturbations (Meeus, Astronomical Formulae for
// Calculators, chapter 18, from memory and confirmed against ERFA epv00) and
// the Earth's motion about the barycentre of Earth and Moon: 10 arcsec, where
// the chapter alone reaches 34.5.
func SunEcliptic(jde float64) astro.Vec3 {
	t := base.J2000Century(jde)
	lon, _ := solar.True(t)
	dLonDeg, dR := sunPerturbations((jde - 2415020) / 36525)
	r := solar.Radius(t) + dR
	sun := astro.Spherical(astro.Angle(lon)+astro.FromDeg(dLonDeg), 0).Scale(r)
	return sun.Add(MoonEcliptic(jde).Scale(moonMass / AUKm))
}

// sunPerturbations are corrections to the Sun's longitude (degrees) and
// distance (au) by Venus, Jupiter and a long-period term; t is in Julian
// centuries from J1900.
func sunPerturbations(t float64) (lonDeg, rAU float64) {
	rad := func(deg float64) float64 { return deg * math.Pi / 180 }
	a, b := rad(153.23+22518.7541*t), rad(216.57+45037.5082*t)
	c, e, h := rad(312.69+32964.3577*t), rad(231.19+20.20*t), rad(353.40+65928.7155*t)
	lonDeg = 0.00134*math.Cos(a) + 0.00154*math.Cos(b) + 0.00200*math.Cos(c) + 0.00178*math.Sin(e)
	rAU = 0.00000543*math.Sin(a) + 0.00001575*math.Sin(b) + 0.00001627*math.Sin(c) + 0.00000927*math.Sin(h)
	return lonDeg, rAU
}

// EclipticToMean turns ecliptic into equatorial coordinates, both mean of date.
func EclipticToMean(jde float64) astro.Mat3 {
	return astro.RotX(-astro.Angle(nutation.MeanObliquity(jde)))
}

// giants are the planets that move the Sun about the solar-system barycentre,
// with their masses in units of the Sun's (IAU 1976). Two of them are not
// enough: Uranus and Neptune stand for 0.6 s of light time.
var giants = []struct {
	planet int
	mass   float64
}{
	{planetelements.Jupiter, 1 / 1047.3486},
	{planetelements.Saturn, 1 / 3497.898},
	{planetelements.Uranus, 1 / 22902.98},
	{planetelements.Neptune, 1 / 19412.24},
}

// sunFromBarycentre is the Sun's place from the solar-system barycentre in au,
// mean ecliptic of date, by the four giant planets (chapter 31): 0.02 s of light
// time, where leaving the planets out errs by up to 4.9 s.
func sunFromBarycentre(jde float64) astro.Vec3 {
	var sum astro.Vec3
	total := 1.0
	for _, g := range giants {
		var e planetelements.Elements
		planetelements.Mean(g.planet, jde, &e)
		sum = sum.Add(heliocentric(&e).Scale(g.mass))
		total += g.mass
	}
	return sum.Scale(-1 / total)
}

// heliocentric is a planet's place from its elements, au.
func heliocentric(e *planetelements.Elements) astro.Vec3 {
	ecc := kepler.Kepler3(e.Ecc, e.Lon-e.Peri)
	nu := kepler.True(ecc, e.Ecc)
	r := kepler.Radius(ecc, e.Ecc, e.Axis)
	u := astro.Angle(nu + e.Peri - e.Node) // from the ascending node
	inPlane := astro.Spherical(u, 0).Scale(r)
	return astro.RotZ(-astro.Angle(e.Node)).Mul(astro.RotX(-astro.Angle(e.Inc))).Apply(inPlane)
}

// EarthBarycentric is the Earth's centre from the solar-system barycentre in
// au, J2000.0 equatorial: 0.035 s of light time at worst against ERFA epv00 in
// 1972 to 2099, 0.026 s in 2026 to 2030.
func EarthBarycentric(jde float64) astro.Vec3 {
	ecliptic := sunFromBarycentre(jde).Add(SunEcliptic(jde).Scale(-1))
	return toJ2000(jde, ecliptic)
}

// EarthHeliocentric is the Earth's centre from the Sun in au, J2000.0
// equatorial.
func EarthHeliocentric(jde float64) astro.Vec3 {
	return toJ2000(jde, SunEcliptic(jde).Scale(-1))
}

func toJ2000(jde float64, ecliptic astro.Vec3) astro.Vec3 {
	mean := EclipticToMean(jde).Apply(ecliptic)
	return Precession(jde).Transpose().Apply(mean)
}
