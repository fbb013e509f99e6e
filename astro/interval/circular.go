package interval

import (
	"fmt"
	"math"
)

// Circular is a set of arcs of a circle whose whole turn is 1. Positions are
// numbers modulo 1: 1.25 and -0.75 are both the point 0.25. An arc runs
// upwards from where it begins and may pass 0. The zero value is empty; Full
// is the whole turn.
type Circular struct {
	// set holds the arcs cut open at 0: all inside [0, 1).
	set Set[float64]
}

// wrap brings a finite x into [0, 1).
func wrap(x float64) float64 {
	x -= math.Floor(x)
	if x >= 1 { // a tiny negative number rounds up to the whole turn
		return 0
	}
	return x
}

// Full is the whole circle.
func Full() Circular { return Circular{set: Between(0.0, 1.0)} }

// Arc is [from, to) going upwards, with from anywhere on the number line and
// from <= to <= from + 1: [0.9, 1.2) passes 0, [x, x) is empty and [x, x+1) is
// the full circle. That is how a phase window states itself, and it keeps
// empty and full apart. Other values, NaN and infinities are errors.
func Arc(from, to float64) (Circular, error) {
	if math.IsInf(from, 0) || !(from <= to && to <= from+1) {
		return Circular{}, fmt.Errorf("arc from %v to %v: need from <= to <= from + 1 turn", from, to)
	}
	switch to - from {
	case 0:
		return Circular{}, nil
	case 1:
		return Full(), nil
	}
	lo, hi := wrap(from), wrap(to)
	switch {
	case lo < hi:
		return Circular{set: Between(lo, hi)}, nil
	case lo == hi:
		// The ends differ by less than a rounding of their fractions: an arc
		// of less than 1e-16 turns, or all but that.
		if to-from > 0.5 {
			return Full(), nil
		}
		return Circular{}, nil
	}
	return Circular{set: New(Interval[float64]{Lo: lo, Hi: 1}, Interval[float64]{Lo: 0, Hi: hi})}, nil
}

// Empty reports whether the set holds no point.
func (c Circular) Empty() bool { return c.set.Empty() }

// IsFull reports whether the set is the whole circle.
func (c Circular) IsFull() bool { return c.set.Covers(Interval[float64]{Lo: 0, Hi: 1}) }

// Contains reports whether the point x, taken modulo 1, lies in the set. NaN
// and infinities lie in none.
func (c Circular) Contains(x float64) bool {
	x = wrap(x)
	return c.set.Contains(x) // false for NaN, which infinities have become
}

// Total is the summed length in turns, [0, 1].
func (c Circular) Total() float64 { return c.set.Total() }

// Equal reports whether both sets hold the same points.
func (c Circular) Equal(o Circular) bool { return c.set.Equal(o.set) }

// Union holds what is in c, in o or in both.
func (c Circular) Union(o Circular) Circular { return Circular{c.set.Union(o.set)} }

// Intersect holds what is in both c and o.
func (c Circular) Intersect(o Circular) Circular { return Circular{c.set.Intersect(o.set)} }

// Subtract holds what is in c but not in o.
func (c Circular) Subtract(o Circular) Circular { return Circular{c.set.Subtract(o.set)} }

// Complement is the rest of the circle.
func (c Circular) Complement() Circular { return Full().Subtract(c) }

// Rotate moves every arc upwards by turns. Where turns is not finite there is
// no such place, and the result is empty.
func (c Circular) Rotate(turns float64) Circular {
	if c.IsFull() && turns-turns == 0 {
		return c
	}
	var out Circular
	for _, a := range c.Arcs() {
		lo, hi := a.Lo+turns, a.Hi+turns
		// The sum may round an arc of nearly a turn to more than one.
		if arc, err := Arc(lo, min(hi, lo+1)); err == nil {
			out = out.Union(arc)
		}
	}
	return out
}

// Arcs are the separate arcs as intervals of the number line, by where they
// begin, with Lo in [0, 1) and Lo < Hi <= Lo + 1. An arc that passes 0 is one
// arc, and comes last, with Hi above 1.
func (c Circular) Arcs() []Interval[float64] {
	arcs := c.set.Intervals()
	if n := len(arcs); n > 1 && arcs[0].Lo == 0 && arcs[n-1].Hi == 1 {
		arcs[n-1].Hi += arcs[0].Hi
		arcs = arcs[1:]
	}
	return arcs
}

// Unroll lays the circle out along the number line and gives the part of
// [lo, hi) whose fractions lie in the set: the turns of an orbit that fall in
// a phase window, or the sidereal days in a stretch of local sidereal time.
// Both ends must be finite. The result has about (hi - lo) times the number
// of arcs, so callers bound the range.
func (c Circular) Unroll(lo, hi float64) Set[float64] {
	if c.IsFull() {
		return Between(lo, hi)
	}
	var parts []Interval[float64]
	if !c.Empty() && lo < hi {
		first := math.Floor(lo)
		for k := range int(math.Ceil(hi - first)) {
			turn := first + float64(k)
			for i := range c.set.All() {
				parts = append(parts, Interval[float64]{Lo: turn + i.Lo, Hi: turn + i.Hi})
			}
		}
	}
	return New(parts...).Clip(lo, hi)
}
