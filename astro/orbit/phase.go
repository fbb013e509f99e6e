package orbit

import (
	"math"
	"time"

	"cadencewright/astro"
	"cadencewright/astro/timescale"
)

const (
	daysPerYear = 365.25
	secondsADay = 86400.0
	turn        = 2 * math.Pi
)

// frac is the fraction of x, in [0, 1).
func frac(x float64) float64 {
	x -= math.Floor(x)
	if x >= 1 { // a tiny negative number rounds up to the whole
		return 0
	}
	return x
}

// State is where a binary stands at one barycentric instant.
type State struct {
	Turns     float64     // orbits since T0, counted from periastron
	Mean      astro.Angle // mean anomaly, [0, 2π)
	Eccentric astro.Angle // eccentric anomaly, [0, 2π)
	True      astro.Angle // true anomaly, [0, 2π)
	Om        astro.Angle // longitude of periastron, [0, 2π)
	Argument  astro.Angle // omega + true anomaly, [0, 2π): 0 at the ascending node, 90° at superior conjunction
	LongNode  float64     // ELL1 only: mean longitude from the ascending node in cycles, [0, 1)
}

// At is the state at a barycentric TDB.
func (e Elements) At(t timescale.MJD) State {
	n := e.meanTurns(t.DaysSince(e.T0MJD))
	mean := turn * frac(n)
	ecc := EccentricAnomaly(mean, e.Ecc)
	nu := TrueAnomaly(ecc, e.Ecc)
	om := e.omega(t.DaysSince(e.T0MJD))
	s := State{Turns: n, Mean: astro.Angle(mean), Eccentric: astro.Angle(ecc).Wrap(), True: astro.Angle(nu).Wrap(),
		Om: astro.Angle(om).Wrap(), Argument: astro.Angle(om + nu).Wrap()}
	if e.ELL1 {
		s.LongNode = frac(e.meanTurns(t.DaysSince(e.TascMJD)))
	}
	return s
}

// meanTurns is how many orbits fit in some days from an epoch at which the
// period is PbD.
func (e Elements) meanTurns(days float64) float64 {
	x := days / e.PbD
	return x - 0.5*e.Pbdot*x*x
}

// omega is the longitude of periastron some days after T0, not wrapped.
func (e Elements) omega(days float64) float64 {
	return e.Om.Rad() + astro.FromDeg(e.OmdotDegYr).Rad()*days/daysPerYear
}

// TurnsAt is the number of turns since T0 at a barycentric TDB, counted from
// the reference point: its fraction is the phase and its floor numbers the
// orbit. It is continuous: as periastron advances through a whole turn, the
// node and the conjunction move against it and the count takes that up.
func (e Elements) TurnsAt(ref Reference, t timescale.MJD) float64 {
	c := newCounter(e, ref)
	n, _ := c.at(t)
	return n
}

// PhaseAt is the phase from the reference point at a barycentric TDB, in
// cycles, [0, 1): the difference of mean anomalies, so it runs evenly in time.
func (e Elements) PhaseAt(ref Reference, t timescale.MJD) float64 { return frac(e.TurnsAt(ref, t)) }

// Turns is TurnsAt for the light of a star that reaches the Earth's centre at
// t. An instant outside 1972-2099 is an error.
func (e Elements) Turns(ref Reference, star astro.Star, t time.Time) (float64, error) {
	at, err := BarycentricTDB(star, t)
	if err != nil {
		return 0, err
	}
	return e.TurnsAt(ref, at), nil
}

// counter counts the turns of one orbit from one reference point.
type counter struct {
	e     Elements
	ref   Reference
	omdot float64 // radians a day
	// fixed is the reference's mean anomaly in turns, where it stays put.
	moves bool
	fixed float64
	// slope is (1-e²)^(3/2), of the derivative of the mean anomaly.
	slope float64
}

func newCounter(e Elements, ref Reference) *counter {
	c := &counter{e: e, ref: ref, omdot: astro.FromDeg(e.OmdotDegYr).Rad() / daysPerYear}
	c.moves = ref != Periastron && c.omdot != 0
	if ref != Periastron {
		c.fixed = MeanAnomalyOf(c.trueAnomaly(e.Om.Rad()), e.Ecc) / turn
	}
	k := 1 - e.Ecc*e.Ecc
	c.slope = k * math.Sqrt(k)
	return c
}

// trueAnomaly is that of the reference point (node or conjunction).
func (c *counter) trueAnomaly(omega float64) float64 {
	if c.ref == Conjunction {
		return math.Pi/2 - omega
	}
	return -omega
}

// at is the number of turns at a barycentric TDB, and how many pass in a day.
func (c *counter) at(t timescale.MJD) (turns, perDay float64) {
	days := t.DaysSince(c.e.T0MJD)
	x := days / c.e.PbD
	turns = x - 0.5*c.e.Pbdot*x*x
	perDay = (1 - c.e.Pbdot*x) / c.e.PbD
	if !c.moves {
		return turns - c.fixed, perDay
	}
	nu := c.trueAnomaly(c.e.omega(days))
	near := 1 + c.e.Ecc*math.Cos(nu)
	// dM/dnu = (1-e²)^(3/2)/(1 + e cos nu)², and nu falls as omega grows.
	return turns - MeanAnomalyOf(nu, c.e.Ecc)/turn, perDay + c.slope/(near*near)*c.omdot/turn
}
