package sky

import (
	"fmt"
	"math"
	"slices"
	"time"

	"cadencewright/astro"
	"cadencewright/astro/timescale"
)

// Crossing is an instant at which a star's elevation passes a limit.
type Crossing struct {
	At time.Time
	Up bool // rising through the limit
}

// Visibility says what a star does about a limit over a stretch of time.
type Visibility string

// What a star can do about a limit. The last two are told apart by where it
// stands at the start of the stretch, on the limit being above.
const (
	Crosses     Visibility = "crosses"
	AlwaysAbove Visibility = "always above"
	AlwaysBelow Visibility = "always below"
)

// maxCrossingSpan bounds a search: a season of two crossings a day.
const maxCrossingSpan = 400 * 24 * time.Hour

// Crossings finds every instant in [start, start+span) at which a star's true
// elevation passes elLimitDeg, in the order of time, and whether it stands
// above or below where it never does. Hour angle of the limit in closed form
// (Meeus, chapter 15), then the place is worked out anew at the instant found
// until that moves by less than a millisecond; a shallow pass needs no slope
// and loses nothing. Instants are those of the careful place to 0.1 ms, which is
// also how sharp the ends of the span are.
func Crossings(site astro.Geodetic, star astro.Star, elLimitDeg float64, start time.Time, span time.Duration, dut1S float64) ([]Crossing, Visibility, error) {
	if span <= 0 || span > maxCrossingSpan {
		return nil, "", &astro.RangeError{Quantity: "span", Value: span.String(), Allowed: "above 0 to " + maxCrossingSpan.String()}
	}
	if !(elLimitDeg >= -90 && elLimitDeg <= 90) {
		return nil, "", &astro.RangeError{Quantity: "elevation limit in degrees", Value: fmt.Sprint(elLimitDeg), Allowed: "-90 to 90"}
	}
	p, err := Observe(site, star, start, dut1S) // also refuses what cannot be worked out at the start
	if err != nil {
		return nil, "", err
	}
	c := crossing{site: site, star: star, sinEl: math.Sin(elLimitDeg * math.Pi / 180), dut1S: dut1S}
	found, err := c.between(start, start.Add(span))
	switch {
	case err != nil:
		return nil, "", err
	case len(found) > 0:
		return found, Crosses, nil
	case p.ElDeg >= elLimitDeg:
		return nil, AlwaysAbove, nil
	}
	return nil, AlwaysBelow, nil
}

// siderealDay is one turn of the Earth against the equinox.
const siderealDay time.Duration = 86164090530833 // nanoseconds: 86400 s / siderealRate

// crossing is a limit and whose place is held against it.
type crossing struct {
	site  astro.Geodetic
	star  astro.Star
	sinEl float64 // of the limit
	dut1S float64 // UT1-UTC, s
}

// hourAngleOf is the hour angle at which a declination reaches the limit, in
// [0, π]; where it never does, false and the end that comes nearest to it.
func (c *crossing) hourAngleOf(dec astro.Angle) (astro.Angle, bool) {
	cosH := (c.sinEl - c.site.Lat.Sin()*dec.Sin()) / (c.site.Lat.Cos() * dec.Cos())
	switch {
	case cosH > 1: // stays below: the top is nearest
		return 0, false
	case cosH < -1: // stays above
		return math.Pi, false
	case math.IsNaN(cosH): // at the Earth's pole, the limit being the star's declination
		return 0, false
	}
	return astro.Angle(math.Acos(cosH)), true
}

// between finds the crossings in [start, end), in the order of time.
func (c *crossing) between(start, end time.Time) ([]Crossing, error) {
	var found []Crossing
	for _, up := range []bool{true, false} {
		if err := c.chain(start, end, up, &found); err != nil {
			return nil, err
		}
	}
	slices.SortFunc(found, func(a, b Crossing) int { return a.At.Compare(b.At) })
	return found, nil
}

// maxShift bounds how much earlier than a sidereal day after the last a
// crossing can come. Only one that grazes the limit moves by more than a second.
const maxShift = time.Hour

// chain follows the crossings of one kind from each to the next, about a
// sidereal day later. Day by day from a fixed instant would not do: a crossing
// just after one such instant can come back just before the next.
func (c *crossing) chain(start, end time.Time, up bool, found *[]Crossing) error {
	wait, _, err := c.wait(start, up)
	if err != nil {
		return err
	}
	if wait > 0 {
		wait -= siderealDay
	}
	for t := start.Add(wait); t.Before(end.Add(maxShift)) && t.Before(timescale.Last); t = t.Add(siderealDay) {
		if t.Before(timescale.First) {
			continue
		}
		at, ok, err := c.near(t, up)
		if err != nil {
			return err
		}
		if !ok {
			continue // it may graze the limit tomorrow
		}
		t = at
		if !at.Before(start) && at.Before(end) {
			*found = append(*found, Crossing{At: at, Up: up})
		}
	}
	return nil
}

// near is the crossing nearest to t; none where that is not within the dates
// that can be used.
func (c *crossing) near(t time.Time, up bool) (time.Time, bool, error) {
	for range 8 {
		wait, ok, err := c.wait(t, up)
		if err != nil || !ok {
			return t, false, err
		}
		t = t.Add(wait)
		if t.Before(timescale.First) || !t.Before(timescale.Last) {
			return t, false, nil
		}
		if wait.Abs() < time.Millisecond {
			break
		}
	}
	return t, true, nil
}

// wait is how long after t the nearest crossing is by the place at t, before it
// where negative; false where the star does not reach the limit.
func (c *crossing) wait(t time.Time, up bool) (time.Duration, bool, error) {
	tt, err := timescale.TT(t)
	if err != nil {
		return 0, false, err
	}
	lst, err := timescale.LST(t, c.dut1S, c.site.Lon)
	if err != nil {
		return 0, false, err
	}
	f := newFrame(tt)
	d := f.apparent(c.star)
	h, ok := c.hourAngleOf(d.Lat())
	if up {
		h = -h
	}
	turn := (d.Lon() + h - lst).WrapSigned()
	return time.Duration(turn.Rad() / (2 * math.Pi) * float64(siderealDay)), ok, nil
}

// UpperTransit is the first instant from t on at which the star passes the
// meridian above the pole (hour angle 0), and its elevation then in degrees,
// which is negative for a star that never rises. The instant is within 1 ms of
// hour angle 0. A star that passed less than 0.1 ms before t counts as passing
// at t.
func UpperTransit(site astro.Geodetic, star astro.Star, t time.Time, dut1S float64) (time.Time, float64, error) {
	at := t
	// The second round already takes off what precession and aberration have
	// moved the star by on the way.
	for i := range 4 {
		p, err := Observe(site, star, at, dut1S)
		if err != nil {
			return time.Time{}, 0, err
		}
		turn := -p.HADeg
		if i == 0 && turn < 0 {
			turn += 360
		}
		at = at.Add(time.Duration(turn / 360 * float64(siderealDay)))
	}
	if at.Before(t) { // rounding at a transit exactly at t
		at = t
	}
	p, err := Observe(site, star, at, dut1S)
	return at, p.ElDeg, err
}
