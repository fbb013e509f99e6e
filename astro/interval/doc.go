// Package interval is the algebra of intervals that a planner needs: when is a
// source up, in a block, away from the Sun and in an orbital phase window, all
// at once, and for how long.
//
// Every interval is half-open, [Lo, Hi): two that touch share no point, the
// end of one scan may be the start of the next, and lengths add up. There are
// three kinds:
//
//   - Set, finitely many intervals on a line, over any number type;
//   - Times, a Set on the time line, to the nanosecond;
//   - Circular, finitely many arcs of a circle whose whole turn is 1: orbital
//     phase in cycles, sidereal time in days, azimuth in turns.
//
// The empty set and, on the circle, the full turn are ordinary values of all
// operations. Values are immutable: an operation never changes its operands,
// and the zero value is the empty set.
package interval
