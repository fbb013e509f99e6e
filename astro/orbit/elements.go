package orbit

import (
	"fmt"
	"math"

	"cadencewright/astro"
)

// Elements describe a binary's orbit about its centre of mass as the timing
// of its pulses sees it. Make them with Kepler or ELL1, which check them;
// both fill Ecc, Om and T0MJD, so that phases need no difference between the
// two. Epochs are barycentric dynamical time (TDB) at the solar-system
// barycentre.
type Elements struct {
	PbD        float64     // orbital period at T0, days
	A1Ls       float64     // semi-major axis of the pulsar's orbit, projected on the line of sight, light-seconds
	Ecc        float64     // eccentricity
	Om         astro.Angle // longitude of periastron at T0, from the ascending node
	T0MJD      float64     // a periastron passage
	OmdotDegYr float64     // advance of periastron, degrees a Julian year
	Pbdot      float64     // change of the period, s/s
	M2Msun     float64     // companion's mass, solar masses; 0: unknown
	Sini       float64     // sine of the inclination; 0: unknown

	// Of orbits given by their Laplace-Lagrange parameters.
	ELL1    bool
	TascMJD float64 // a passage of the ascending node
	Eps1    float64 // e sin(omega)
	Eps2    float64 // e cos(omega)
}

// KeplerParams are the parameters of an eccentric orbit; see Elements.
type KeplerParams struct {
	PbD, A1Ls, Ecc, OmDeg, T0MJD float64
	OmdotDegYr, Pbdot            float64
	M2Msun, Sini                 float64
}

// ELL1Params are the parameters of a nearly circular orbit (Lange et al. 2001,
// MNRAS 326, 274); see Elements. They are meant for orbits with A1Ls·e² below
// the wanted precision of the delay; phases are exact for any eccentricity.
type ELL1Params struct {
	PbD, A1Ls, TascMJD, Eps1, Eps2 float64
	Pbdot                          float64
	M2Msun, Sini                   float64
}

// The limits of what is taken as an orbit.
const (
	MinPbD = 1e-3  // shortest period, days
	MaxEcc = 0.999 // largest eccentricity
)

// Kepler makes the elements of an eccentric orbit. The period must be
// at least MinPbD, the eccentricity in [0, MaxEcc], the sine of the inclination in
// [0, 1], sizes and masses not negative and every number finite; an error
// names what is not.
func Kepler(p KeplerParams) (Elements, error) {
	e := Elements{PbD: p.PbD, A1Ls: p.A1Ls, Ecc: p.Ecc, Om: astro.FromDeg(p.OmDeg), T0MJD: p.T0MJD,
		OmdotDegYr: p.OmdotDegYr, Pbdot: p.Pbdot, M2Msun: p.M2Msun, Sini: p.Sini}
	return e, e.check()
}

// ELL1 makes the elements of a nearly circular orbit: e, omega and T0 follow
// from eps1 = e sin(omega), eps2 = e cos(omega) and the time of the ascending
// node, T0 = TASC + omega/2π periods. The ranges are those of Kepler.
func ELL1(p ELL1Params) (Elements, error) {
	om := math.Atan2(p.Eps1, p.Eps2)
	e := Elements{PbD: p.PbD, A1Ls: p.A1Ls, Ecc: math.Hypot(p.Eps1, p.Eps2), Om: astro.Angle(om),
		T0MJD: p.TascMJD + p.PbD*om/(2*math.Pi), Pbdot: p.Pbdot, M2Msun: p.M2Msun, Sini: p.Sini,
		ELL1: true, TascMJD: p.TascMJD, Eps1: p.Eps1, Eps2: p.Eps2}
	return e, e.check()
}

// check reports the first element outside its range.
func (e Elements) check() error {
	inf := math.Inf(1)
	for _, q := range []struct {
		name      string
		value     float64
		low, high float64
		allowed   string
	}{
		{"orbital period (days)", e.PbD, MinPbD, inf, fmt.Sprintf("%v or more", MinPbD)},
		{"projected semi-major axis (light-seconds)", e.A1Ls, 0, inf, "0 or more"},
		{"eccentricity", e.Ecc, 0, MaxEcc, fmt.Sprintf("0 to %v", MaxEcc)},
		{"longitude of periastron (degrees)", e.Om.Deg(), -inf, inf, "finite"},
		{"epoch of periastron (MJD)", e.T0MJD, -inf, inf, "finite"},
		{"advance of periastron (degrees a year)", e.OmdotDegYr, -inf, inf, "finite"},
		{"change of the orbital period (s/s)", e.Pbdot, -inf, inf, "finite"},
		{"companion mass (solar masses)", e.M2Msun, 0, inf, "0 or more"},
		{"sine of the inclination", e.Sini, 0, 1, "0 to 1"},
	} {
		if !(q.value >= q.low && q.value <= q.high) || math.IsInf(q.value, 0) {
			return &astro.RangeError{Quantity: q.name, Value: fmt.Sprint(q.value), Allowed: q.allowed}
		}
	}
	return nil
}

// Reference is the point of the orbit that a phase counts from.
type Reference int

// The three reference points.
const (
	Periastron  Reference = iota // true anomaly 0
	Node                         // ascending node: the pulsar crosses the sky plane receding
	Conjunction                  // superior: the pulsar behind its companion, true anomaly + omega = 90°
)

// String is the point's name.
func (r Reference) String() string {
	switch r {
	case Periastron:
		return "periastron"
	case Node:
		return "node"
	case Conjunction:
		return "conjunction"
	}
	return fmt.Sprintf("Reference(%d)", int(r))
}

// ParseReference is the reference point with the given name.
func ParseReference(name string) (Reference, error) {
	for _, r := range []Reference{Periastron, Node, Conjunction} {
		if r.String() == name {
			return r, nil
		}
	}
	return 0, fmt.Errorf("orbital reference point %q: it can be periastron, node or conjunction", name)
}
