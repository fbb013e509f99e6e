package orbit

import (
	"math"

	"cadencewright/astro/timescale"
)

// SunMassS is the mass of the Sun as light time, G M / c³, in seconds.
const SunMassS = 4.925490947e-6

// RoemerDelayS is the light time of the pulsar's orbit at a barycentric TDB,
// in seconds: positive while the pulsar is behind the plane of the sky
// through the centre of mass. ELL1 orbits use the expansion of Lange et al.
// (2001, MNRAS 326, 274, eq. A6) to first order in the eccentricity, without
// its constant term.
func (e Elements) RoemerDelayS(t timescale.MJD) float64 {
	if e.ELL1 {
		p := turn * e.At(t).LongNode
		return e.A1Ls * (math.Sin(p) + e.Eps2/2*math.Sin(2*p) - e.Eps1/2*math.Cos(2*p))
	}
	along, _ := e.geometry(t)
	return e.A1Ls * along
}

// geometry is, for the pulsar at a barycentric TDB and in units of the
// orbit's semi-major axis, how far it is behind the plane of the sky, over
// the sine of the inclination, and its distance from the companion's focus.
func (e Elements) geometry(t timescale.MJD) (along, distance float64) {
	s := e.At(t)
	sinE, cosE := math.Sincos(s.Eccentric.Rad())
	sinOm, cosOm := math.Sincos(s.Om.Rad())
	return (cosE-e.Ecc)*sinOm + math.Sqrt(1-e.Ecc*e.Ecc)*sinE*cosOm, 1 - e.Ecc*cosE
}

// ShapiroDelayS is the delay of the pulses in the companion's gravity at a
// barycentric TDB, in seconds: -2 r ln(1 - e cos E - s·(...)) (Damour &
// Deruelle 1986, Ann. Inst. H. Poincaré 44, 263), for ELL1 orbits
// -2 r ln(1 - s sin(Phi)) (Lange et al. 2001, eq. A16), with the range
// r = G m2/c³ and the shape s = sin i. Constant terms are kept, so it may be
// negative. It is 0 where the companion's mass or the inclination is unknown.
func (e Elements) ShapiroDelayS(t timescale.MJD) float64 {
	if e.M2Msun == 0 || e.Sini == 0 {
		return 0
	}
	var inside float64
	if e.ELL1 {
		inside = 1 - e.Sini*math.Sin(turn*e.At(t).LongNode)
	} else {
		along, distance := e.geometry(t)
		inside = distance - e.Sini*along
	}
	// Exactly behind the companion of an edge-on orbit the formula has no end,
	// but a star has: below 1e-9 light would have to pass through it.
	return -2 * SunMassS * e.M2Msun * math.Log(max(inside, 1e-9))
}

// Stigma is the orthometric ratio of the Shapiro delay's harmonics,
// s/(1 + sqrt(1-s²)) for the sine of the inclination s (Freire & Wex 2010,
// MNRAS 409, 199).
func Stigma(sini float64) float64 { return sini / (1 + math.Sqrt(1-sini*sini)) }

// H3Us is the orthometric amplitude of the Shapiro delay in microseconds,
// r·stigma³ (Freire & Wex 2010).
func H3Us(m2Msun, sini float64) float64 {
	s := Stigma(sini)
	return 1e6 * SunMassS * m2Msun * s * s * s
}

// MassFunctionMsun is (m2 sin i)³/(m1 + m2)² in solar masses, from the period
// and the projected semi-major axis: 4π² x³/(T_sun PB²).
func MassFunctionMsun(pbD, a1Ls float64) float64 {
	pbS := pbD * secondsADay
	return 4 * math.Pi * math.Pi * a1Ls * a1Ls * a1Ls / (SunMassS * pbS * pbS)
}

// PeriastronAdvanceDegYr is the advance of periastron in general relativity,
// degrees a Julian year: 3 n^(5/3) (T_sun M)^(2/3)/(1-e²) with n = 2π/PB and the
// sum M of both masses, in solar masses (Robertson 1938; Damour & Deruelle
// 1985, Ann. Inst. H. Poincaré 43, 107).
func PeriastronAdvanceDegYr(pbD, ecc, m1Msun, m2Msun float64) float64 {
	n := turn / (pbD * secondsADay)
	radPerS := 3 * math.Pow(n, 5.0/3) * math.Pow(SunMassS*(m1Msun+m2Msun), 2.0/3) / (1 - ecc*ecc)
	return radPerS * secondsADay * daysPerYear * 180 / math.Pi
}
