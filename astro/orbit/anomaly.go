package orbit

import "math"

// EccentricAnomaly solves Kepler's equation E - e sin E = M for the eccentric
// anomaly, all in radians, for any M and 0 <= e < 1. The result lies in the
// same turn as M: it grows by 2π where M does. What is left of the equation
// is of the order of one rounding of M.
//
// Newton's method from Danby's starting value (Danby 1988, Fundamentals of
// Celestial Mechanics, section 6.6), kept inside a bracket that shrinks with
// every step: where Newton's step would leave the bracket, near e = 1 and
// M = 0, the bracket is halved instead. So it ends for every input, in three
// to five steps for the eccentricities of pulsar binaries. NaN and infinite
// arguments give NaN.
func EccentricAnomaly(meanAnomaly, ecc float64) float64 {
	if !(ecc >= 0 && ecc < 1) || math.IsInf(meanAnomaly, 0) {
		return math.NaN()
	}
	turn := 2 * math.Pi * math.Round(meanAnomaly/(2*math.Pi))
	m := meanAnomaly - turn
	switch {
	case m == 0:
		return turn
	case m < 0: // the equation is odd
		return turn - solveKepler(-m, ecc)
	}
	return turn + solveKepler(m, ecc)
}

// keplerSteps bounds the steps of solveKepler; halving alone needs 60.
const keplerSteps = 100

// solveKepler solves Kepler's equation for 0 < m <= π, or a rounding more.
func solveKepler(m, ecc float64) float64 {
	const rounding = 0x1p-52
	lo, hi := m, m+ecc // since 0 <= sin E <= 1 there
	e := min(m+0.85*ecc, hi)
	for range keplerSteps {
		sin, cos := math.Sincos(e)
		f := e - ecc*sin - m
		if math.Abs(f) <= rounding*e {
			return e
		}
		if f < 0 {
			lo = e
		} else {
			hi = e
		}
		e -= f / (1 - ecc*cos)
		if !(e > lo && e < hi) {
			e = lo + (hi-lo)/2
		}
	}
	return e
}

// beta is e/(1 + sqrt(1-e²)), in which the two anomalies' difference has a
// form without singular points.
func beta(ecc float64) float64 { return ecc / (1 + math.Sqrt(1-ecc*ecc)) }

// TrueAnomaly is the true anomaly of an eccentric anomaly, in radians. It is
// continuous: both are equal at every multiple of π, so the true anomaly
// counts turns as the eccentric one does.
func TrueAnomaly(eccentricAnomaly, ecc float64) float64 {
	b := beta(ecc)
	sin, cos := math.Sincos(eccentricAnomaly)
	return eccentricAnomaly + 2*math.Atan2(b*sin, 1-b*cos)
}

// MeanAnomalyOf is the mean anomaly of a true anomaly, in radians, continuous
// in the same sense: a reference point that moves along the orbit for years
// never jumps by a turn.
func MeanAnomalyOf(trueAnomaly, ecc float64) float64 {
	b := beta(ecc)
	sin, cos := math.Sincos(trueAnomaly)
	e := trueAnomaly - 2*math.Atan2(b*sin, 1+b*cos)
	return e - ecc*math.Sin(e)
}
