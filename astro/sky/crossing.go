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

// What a star can do about a limit.
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
// and loses nothing.
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
	sinEl float64
	dut1S float64
}

// hourAngleOf is the hour angle at which a declination reaches the limit, in
// [0, π]; false where it never does.
func (c *crossing) hourAngleOf(dec astro.Angle) (astro.Angle, bool) {
	cosH := (c.sinEl - c.site.Lat.Sin()*dec.Sin()) / (c.site.Lat.Cos() * dec.Cos())
	if !(cosH >= -1 && cosH <= 1) {
		return 0, false
	}
	return astro.Angle(math.Acos(cosH)), true
}

// between finds the crossings in [start, end). One sidereal day before the
// start is searched too: a crossing just after it may seem to lie before it by
// the place a day earlier.
func (c *crossing) between(start, end time.Time) ([]Crossing, error) {
	var found []Crossing
	for t := start.Add(-siderealDay); t.Before(end); t = t.Add(siderealDay) {
		if t.Before(timescale.First) {
			continue
		}
		for _, up := range []bool{true, false} {
			at, ok, err := c.near(t, up)
			if err != nil {
				return nil, err
			}
			if ok && !at.Before(start) && at.Before(end) {
				found = append(found, Crossing{At: at, Up: up})
			}
		}
	}
	// Two days may both have found a crossing at their common end.
	slices.SortFunc(found, func(a, b Crossing) int { return a.At.Compare(b.At) })
	return slices.CompactFunc(found, func(a, b Crossing) bool { return a.Up == b.Up && b.At.Sub(a.At) < time.Minute }), nil
}

// near is the crossing in the sidereal day that begins at t, or a little
// outside it; none where that day runs out of the dates that can be used.
func (c *crossing) near(t time.Time, up bool) (time.Time, bool, error) {
	first := true
	for range 8 {
		wait, ok, err := c.wait(t, up, first)
		if err != nil || !ok {
			return t, false, err
		}
		t, first = t.Add(wait), false
		if t.Before(timescale.First) || !t.Before(timescale.Last) {
			return t, false, nil
		}
		if wait.Abs() < time.Millisecond {
			break
		}
	}
	return t, true, nil
}

// wait is how long after t the crossing is by the place at t: within a
// sidereal day ahead the first time, the shortest way afterwards.
func (c *crossing) wait(t time.Time, up, ahead bool) (time.Duration, bool, error) {
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
	if !ok {
		return 0, false, nil
	}
	if up {
		h = -h
	}
	turn := (d.Lon() + h - lst).WrapSigned()
	if ahead {
		turn = turn.Wrap()
	}
	return time.Duration(turn.Rad() / (2 * math.Pi) * float64(siderealDay)), true, nil
}

// UpperTransit is the first instant from t on at which the star passes the
// meridian above the pole, and its elevation then.
func UpperTransit(site astro.Geodetic, star astro.Star, t time.Time, dut1S float64) (time.Time, float64, error) {
	c := crossing{site: site, star: star, dut1S: dut1S}
	at := t
	for i := range 4 {
		p, err := Observe(c.site, c.star, at, dut1S)
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
