// Package orbit says where a binary pulsar stands in its orbit at a given
// UTC, and when it passes given points of it.
//
// Time at the binary is barycentric: TDB at the Earth's centre plus the light
// time from there to the solar-system barycentre in the pulsar's direction
// (the Roemer delay, up to 500 s). The delay inside the binary's own orbit is
// not taken off: phases are those of the orbit as its light arrives. Left out,
// each far below what planning notices: the telescope's place on the Earth
// (21 ms), the Sun's Shapiro delay (0.12 ms), parallax, dispersion.
//
// Orbits are Keplerian with a steady advance of periastron and a steady
// change of the period, given by an epoch of periastron (Kepler) or by
// Laplace-Lagrange parameters and an epoch of the ascending node (ELL1).
// Anomalies and longitudes are radians, omega counts from the ascending node
// in the direction of motion, phases are cycles.
//
// Accuracy, against ERFA and an independent solver: Roemer delay 0.03 s,
// phases that much over the orbital period, instants 0.05 s. The elements'
// own uncertainty comes on top.
//
// Turns numbers the orbits: it counts cycles from T0 as one continuous number
// even while periastron advances, so its floor names an orbit and its fraction
// is the phase.
package orbit
