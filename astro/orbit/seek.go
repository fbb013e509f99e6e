package orbit

import (
	"fmt"
	"time"

	"cadencewright/astro/timescale"
)

// lastInstant is the last one that the time scales have.
var lastInstant = timescale.Last.Add(-1)

// seeker finds the instants at which a count of turns is reached.
type seeker struct {
	clock   *Clock
	counter *counter
}

// turns is the count at an instant.
func (s *seeker) turns(t time.Time) (float64, error) {
	n, _, err := s.at(t)
	return n, err
}

// at is the count at an instant and how many turns pass in a day. It is an
// error if the orbit does not run forwards there, at between a quarter and
// four times its mean pace.
func (s *seeker) at(t time.Time) (turns, perDay float64, err error) {
	bary, err := s.clock.TDB(t)
	if err != nil {
		return 0, 0, err
	}
	turns, perDay = s.counter.at(bary)
	if pace := perDay * s.counter.e.PbD; !(pace > 0.25 && pace < 4) {
		return 0, 0, fmt.Errorf("orbital elements (period %v d, change %v s/s, advance of periastron %v deg/yr, eccentricity %v): "+
			"at %s the %s passes at %.3g times the usual pace; allowed is 0.25 to 4",
			s.counter.e.PbD, s.counter.e.Pbdot, s.counter.e.OmdotDegYr, s.counter.e.Ecc,
			t.UTC().Format(time.RFC3339), s.counter.ref, pace)
	}
	return turns, perDay, nil
}

// settledS is the last step of a search in seconds. What Newton's method
// leaves out is the Earth's velocity over that of light, so an error of 1e-4
// of this remains, far below a microsecond.
const settledS = 1e-3

// when is the instant at which the count reaches a target, sought from a
// guess by Newton's method; one outside 1972-2099 is moved to their end.
func (s *seeker) when(target float64, guess time.Time) (time.Time, error) {
	t := within(guess)
	for range 50 {
		turns, perDay, err := s.at(t)
		if err != nil {
			return time.Time{}, err
		}
		days := (target - turns) / perDay
		next := within(later(t, days))
		if next.Equal(t) || (days*secondsADay < settledS && days*secondsADay > -settledS) {
			return next, nil
		}
		t = next
	}
	return time.Time{}, fmt.Errorf("orbital elements (period %v d, advance of periastron %v deg/yr, eccentricity %v): "+
		"no instant found for the %s of orbit %.3f", s.counter.e.PbD, s.counter.e.OmdotDegYr, s.counter.e.Ecc,
		s.counter.ref, target)
}

// later is t moved by days, at most a hundred years either way.
func later(t time.Time, days float64) time.Time {
	const most = 100 * daysPerYear
	days = max(-most, min(most, days))
	return t.Add(time.Duration(days * secondsADay * 1e9))
}

// within moves an instant into the years that the time scales have.
func within(t time.Time) time.Time {
	switch {
	case t.Before(timescale.First):
		return timescale.First
	case t.After(lastInstant):
		return lastInstant
	}
	return t
}
