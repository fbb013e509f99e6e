package demo

import (
	"math"
	"time"

	"cadencewright/scheduler"
)

// orbitKind is one sort of binary that millisecond pulsars are found in.
type orbitKind struct {
	pbD     float64 // about this period
	ecc     float64 // about this eccentricity
	kepler  bool    // given by Kepler's elements, else by eps1 and eps2
	m2Msun  float64 // companion
	sini    float64
	publish bool // whether its masses are known to the campaign
}

// orbits are the 14 binaries: 0.1 to 150 days, circular to e = 0.6.
var orbits = []orbitKind{
	{pbD: 0.104, ecc: 0.088, kepler: true, m2Msun: 1.25, sini: 0.999, publish: true}, // two neutron stars
	{pbD: 0.162, ecc: 0, m2Msun: 0.028, sini: 0.87},                                  // a companion being eaten
	{pbD: 0.331, ecc: 0.6, kepler: true, m2Msun: 1.33, sini: 0.74, publish: true},    // two neutron stars
	{pbD: 0.386, ecc: 2e-6, m2Msun: 0.21, sini: 0.93},
	{pbD: 1.53, ecc: 4e-6, m2Msun: 0.2, sini: 0.9981, publish: true},
	{pbD: 2.46, ecc: 1e-5, m2Msun: 0.19, sini: 0.61},
	{pbD: 5.74, ecc: 1.9e-5, m2Msun: 0.24, sini: 0.68},
	{pbD: 8.69, ecc: 4e-6, m2Msun: 0.51, sini: 0.99988, publish: true}, // a heavy white dwarf, edge on
	{pbD: 14.3, ecc: 2.5e-4, m2Msun: 0.27, sini: 0.88},
	{pbD: 22.1, ecc: 0.43, kepler: true, m2Msun: 0.31, sini: 0.95, publish: true}, // a triple that lost a star
	{pbD: 43.8, ecc: 0.028, kepler: true, m2Msun: 0.29, sini: 0.8},
	{pbD: 67.9, ecc: 7.5e-6, m2Msun: 0.3, sini: 0.95},
	{pbD: 95.2, ecc: 1.1e-4, m2Msun: 0.31, sini: 0.66},
	{pbD: 147, ecc: 8.7e-5, m2Msun: 0.36, sini: 0.91},
}

const (
	sunLightS = 4.925490947e-6 // G M_sun / c³, seconds
	dayS      = 86400.0
	yearD     = 365.25
)

// make draws one orbit of its kind. Size, advance and decay follow from the
// masses (general relativity at first order: Damour & Deruelle 1986, from
// memory), so that the orbit is one that could be.
func (k orbitKind) make(r *random, monday time.Time) *scheduler.Binary {
	m1 := r.between(1.3, 1.7) // the pulsar
	m2 := k.m2Msun * r.between(0.97, 1.03)
	pb := k.pbD * r.between(0.985, 1.015)
	n := 2 * math.Pi / (pb * dayS)
	total := sunLightS * (m1 + m2)
	b := &scheduler.Binary{
		PbD:  significant(pb, 10),
		A1Ls: round(math.Cbrt(total/(n*n))*m2/(m1+m2)*k.sini, 6),
	}
	if k.publish {
		b.M2Msun, b.Sini = round(m2, 3), k.sini
	}
	// An ephemeris some years old, as most are.
	epoch := mjd(monday) - r.between(400, 3000)
	if !k.kepler {
		om := r.between(0, 2*math.Pi)
		b.Model = scheduler.BinaryELL1
		b.TascMJD = round(epoch, 7)
		b.Eps1, b.Eps2 = round(k.ecc*math.Sin(om), 9), round(k.ecc*math.Cos(om), 9)
		return b
	}
	b.Model = scheduler.BinaryKepler
	b.Ecc = round(k.ecc*r.between(0.97, 1), 6)
	b.OmDeg = round(r.between(0, 360), 4)
	b.T0MJD = round(epoch, 7)
	e2 := b.Ecc * b.Ecc
	advance := 3 * math.Pow(n, 5.0/3) * math.Pow(total, 2.0/3) / (1 - e2) // radians a second
	if degYr := advance * 180 / math.Pi * dayS * yearD; degYr > 1e-3 {
		b.OmdotDegYr = significant(degYr, 5)
	}
	if pb < 1 { // decay by gravitational waves (Peters 1964, from memory)
		shape := (1 + 73.0/24*e2 + 37.0/96*e2*e2) / math.Pow(1-e2, 3.5)
		decay := -192 * math.Pi / 5 * math.Pow(n*sunLightS, 5.0/3) * shape * m1 * m2 / math.Cbrt(m1+m2)
		b.Pbdot = significant(decay, 4)
	}
	return b
}

// mjd is an instant as a modified Julian date, to a fraction of a second.
func mjd(t time.Time) float64 { return 40587 + float64(t.Unix())/dayS }
