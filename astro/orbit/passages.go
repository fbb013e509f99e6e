package orbit

import (
	"fmt"
	"math"
	"time"

	"cadencewright/astro"
	"cadencewright/astro/timescale"
)

// Passage is one passage of a phase window, [Enter, Leave), in UTC at the
// Earth's centre.
type Passage struct {
	Orbit        int // floor of Turns at the reference point before the window's start
	Enter, Leave time.Time
}

// Event is one passage of a point of the orbit.
type Event struct {
	Orbit int // the orbit that begins here
	At    time.Time
}

// MaxPassages is the most passages that one call gives.
const MaxPassages = 1_000_000

// Passages lists, in time order, every passage of the phase window [from, to)
// that touches [t0, t1): 0 <= from < 1 and from < to <= from + 1, in cycles from
// the reference point. A passage is whole: it may begin before t0 and end after t1, and
// only the limits of the time scales (1972-2099) cut it off. Passage k is the
// stretch in which Turns runs from k + from to k + to.
//
// It is an error if t0 or t1 lies outside those years, if there are more than
// MaxPassages, or if the elements are so extreme that the orbit does not run
// forwards (a period that changes by half, or a reference point that moves
// most of an orbit in an orbit).
func (e Elements) Passages(ref Reference, star astro.Star, from, to float64, t0, t1 time.Time) ([]Passage, error) {
	earth, err := NewEarth(t0, t1)
	if err != nil {
		return nil, err
	}
	clock := earth.Clock(star)
	return clock.Passages(e, ref, from, to, t0, t1)
}

// Passages is Elements.Passages by this clock, whose Earth can be shared by
// all stars.
func (c *Clock) Passages(e Elements, ref Reference, from, to float64, t0, t1 time.Time) ([]Passage, error) {
	if !(from >= 0 && from < 1 && to > from && to <= from+1) {
		return nil, &astro.RangeError{Quantity: "phase window (cycles)", Value: fmt.Sprintf("[%v, %v)", from, to),
			Allowed: "0 <= from < 1 and from < to <= from + 1"}
	}
	s, first, last, err := c.between(e, ref, t0, t1)
	if err != nil || !t0.Before(t1) {
		return nil, err
	}
	var list []Passage
	guess := t0
	for k := math.Floor(first - to); k <= math.Ceil(last-from); k++ {
		enter, err := s.when(k+from, guess)
		if err != nil {
			return nil, err
		}
		leave, err := s.when(k+to, later(enter, (to-from)*e.PbD))
		if err != nil {
			return nil, err
		}
		if leave.After(t0) && enter.Before(t1) {
			list = append(list, Passage{Orbit: int(k), Enter: enter, Leave: leave})
		}
		guess = later(enter, e.PbD)
	}
	return list, nil
}

// Events lists the passages of the reference point itself in [t0, t1). Errors
// are those of Passages.
func (c *Clock) Events(e Elements, ref Reference, t0, t1 time.Time) ([]Event, error) {
	s, first, last, err := c.between(e, ref, t0, t1)
	if err != nil {
		return nil, err
	}
	var list []Event
	guess := t0
	for k := math.Floor(first); k <= math.Ceil(last); k++ {
		at, err := s.when(k, guess)
		if err != nil {
			return nil, err
		}
		if !at.Before(t0) && at.Before(t1) {
			list = append(list, Event{Orbit: int(k), At: at})
		}
		guess = later(at, e.PbD)
	}
	return list, nil
}

// sameInstant is within what two instants of one event may differ by rounding
// and by interpolation of the Earth's path.
const sameInstant = 10 * time.Microsecond

// Next is the first passage of the reference point after t; one within 10 us
// of t is taken to be at t and not after it, so that going from one to the next
// never stays in place. It is an error if the passage lies outside 1972-2099.
func (e Elements) Next(ref Reference, star astro.Star, after time.Time) (Event, error) {
	earth, err := NewEarth(after, after)
	if err != nil {
		return Event{}, err
	}
	clock := earth.Clock(star)
	s := &seeker{clock: &clock, counter: newCounter(e, ref)}
	now, err := s.turns(after)
	if err != nil {
		return Event{}, err
	}
	for k := math.Floor(now); ; k++ {
		at, err := s.when(k, later(after, (k-now)*e.PbD))
		if err != nil {
			return Event{}, err
		}
		if at.After(after.Add(sameInstant)) {
			if !at.Before(lastInstant) {
				return Event{}, &astro.RangeError{Quantity: "next " + ref.String(), Value: "later",
					Allowed: "before " + timescale.Last.Format(time.DateOnly)}
			}
			return Event{Orbit: int(k), At: at}, nil
		}
	}
}

// NextConjunction is the first superior conjunction after t.
func (e Elements) NextConjunction(star astro.Star, after time.Time) (time.Time, error) {
	ev, err := e.Next(Conjunction, star, after)
	return ev.At, err
}

// NextPeriastron is the first periastron passage after t.
func (e Elements) NextPeriastron(star astro.Star, after time.Time) (time.Time, error) {
	ev, err := e.Next(Periastron, star, after)
	return ev.At, err
}

// between prepares a search over [t0, t1) and counts the turns at its ends.
func (c *Clock) between(e Elements, ref Reference, t0, t1 time.Time) (s *seeker, first, last float64, err error) {
	s = &seeker{clock: c, counter: newCounter(e, ref)}
	if first, err = s.turns(t0); err != nil {
		return nil, 0, 0, err
	}
	if last, err = s.turns(t1); err != nil {
		return nil, 0, 0, err
	}
	if !(last-first <= MaxPassages) || math.Abs(first) > 1e12 { // then counting by ones would stop
		return nil, 0, 0, &astro.RangeError{Quantity: "number of orbits", Value: fmt.Sprintf("%.0f", last-first),
			Allowed: fmt.Sprintf("at most %d", MaxPassages)}
	}
	return s, first, last, nil
}
