package timescale_test

import (
	"errors"
	"math"
	"testing"
	"time"

	"cadencewright/astro"
	"cadencewright/astro/timescale"
)

func at(s string) time.Time {
	t, err := time.Parse(time.RFC3339Nano, s)
	if err != nil {
		panic(err)
	}
	return t
}

// IERS Bulletin C: the last instant before some of the steps, and the first
// after. 2003-06-01, 2008-01-17 and 2017-09-01 are in ERFA's own test of dat.
func TestLeapSeconds(t *testing.T) {
	for _, c := range []struct {
		at   string
		want float64
	}{
		{"1972-01-01T00:00:00Z", 10}, {"1972-06-30T23:59:59Z", 10}, {"1972-07-01T00:00:00Z", 11},
		{"1979-12-31T23:59:59.999999999Z", 18}, {"1980-01-01T00:00:00Z", 19},
		{"1998-12-31T23:59:59Z", 31}, {"1999-01-01T00:00:00Z", 32}, {"2003-06-01T00:00:00Z", 32},
		{"2005-12-31T23:59:59Z", 32}, {"2006-01-01T00:00:00Z", 33}, {"2008-01-17T00:00:00Z", 33},
		{"2012-06-30T23:59:59Z", 34}, {"2012-07-01T00:00:00Z", 35}, {"2015-07-01T00:00:00Z", 36},
		{"2016-12-31T23:59:59Z", 36}, {"2017-01-01T00:00:00Z", 37}, {"2017-09-01T00:00:00Z", 37},
		{"2026-12-01T00:00:00Z", 37}, {"2099-12-31T23:59:59Z", 37},
		{"2017-01-01T01:00:00+01:00", 37}, {"2017-01-01T00:59:59+01:00", 36}, // the same instants in another zone
	} {
		got, err := timescale.TAIMinusUTCS(at(c.at))
		if err != nil || got != c.want {
			t.Errorf("TAI-UTC at %s: %g s, %v; want %g", c.at, got, err, c.want)
		}
	}
}

// 27 leap seconds were announced from 1972 to 2017, none undone.
func TestLeapSecondsOnlyGrow(t *testing.T) {
	steps, before := 0, 10.0
	for m := 0; m < 128*12; m++ {
		got, err := timescale.TAIMinusUTCS(timescale.First.AddDate(0, m, 0))
		if err != nil {
			t.Fatal(err)
		}
		if got != before {
			if got != before+1 {
				t.Errorf("TAI-UTC steps from %g to %g", before, got)
			}
			steps++
		}
		before = got
	}
	if steps != 27 {
		t.Errorf("%d leap seconds, want 27", steps)
	}
}

func TestInstantsOutsideTheRangeAreErrors(t *testing.T) {
	for _, s := range []string{"1971-12-31T23:59:59.999Z", "1950-01-01T00:00:00Z", "2100-01-01T00:00:00Z", "2500-01-01T00:00:00Z"} {
		u := at(s)
		_, e1 := timescale.TAIMinusUTCS(u)
		_, e2 := timescale.TT(u)
		_, e3 := timescale.TDB(u)
		_, e4 := timescale.UT1(u, 0)
		_, e5 := timescale.GAST(u, 0)
		_, e6 := timescale.LST(u, 0, 1)
		for i, err := range []error{e1, e2, e3, e4, e5, e6} {
			var r *astro.RangeError
			if !errors.As(err, &r) {
				t.Errorf("%s, function %d: %v, wanted an error of range", s, i+1, err)
			} else if r.Quantity != "instant" || r.Value == "" || r.Allowed != "1972-01-01 to 2099-12-31" {
				t.Errorf("%s, function %d: %v", s, i+1, err)
			}
		}
	}
}

func TestUT1OutsideItsRangeIsAnError(t *testing.T) {
	for _, dut1 := range []float64{1.01, -1.01, 69.184, math.NaN(), math.Inf(1), math.Inf(-1)} {
		if m, err := timescale.UT1(at("2027-01-01T00:00:00Z"), dut1); err == nil {
			t.Errorf("UT1-UTC of %g s: %v and no error", dut1, m)
		}
		if g, err := timescale.GAST(at("2027-01-01T00:00:00Z"), dut1); err == nil {
			t.Errorf("UT1-UTC of %g s: sidereal time %v and no error", dut1, g)
		}
	}
	for _, dut1 := range []float64{-1, -0.9, 0, 0.9, 1} {
		if _, err := timescale.UT1(at("2027-01-01T00:00:00Z"), dut1); err != nil {
			t.Error(err)
		}
	}
}

// Definitions and almanac dates, each to a microsecond.
func TestDates(t *testing.T) {
	for _, c := range []struct {
		name string
		got  func() (timescale.MJD, error)
		day  int
		frac float64
	}{
		// IAU 1994: J2000.0 is 2000 January 1.5 TT; TAI-UTC was 32 s.
		{"J2000.0 in TT", func() (timescale.MJD, error) { return timescale.TT(at("2000-01-01T11:58:55.816Z")) }, 51544, 0.5},
		// TT-UTC has been 69.184 s since 2017.
		{"TT in 2027", func() (timescale.MJD, error) { return timescale.TT(at("2027-01-18T00:00:00Z")) }, 61423, 69.184 / 86400},
		{"TT over midnight", func() (timescale.MJD, error) { return timescale.TT(at("2027-01-17T23:59:00Z")) }, 61423, 9.184 / 86400},
		{"UT1 before midnight", func() (timescale.MJD, error) { return timescale.UT1(at("2027-01-18T00:00:00Z"), -0.25) }, 61422, 1 - 0.25/86400},
		// Meeus, Astronomical Algorithms, chapter 7: 1987 January 27.0 is JD 2446822.5, 1999 January 1.0 is 2451179.5.
		{"Meeus, 1987", func() (timescale.MJD, error) { return timescale.UTC(at("1987-01-27T00:00:00Z")), nil }, 46822, 0},
		{"Meeus, 1999", func() (timescale.MJD, error) { return timescale.UTC(at("1999-01-01T00:00:00Z")), nil }, 51179, 0},
		{"the Unix epoch", func() (timescale.MJD, error) { return timescale.UTC(at("1970-01-01T00:00:00Z")), nil }, 40587, 0},
		{"before it", func() (timescale.MJD, error) { return timescale.UTC(at("1969-12-31T18:00:00Z")), nil }, 40586, 0.75},
		// ERFA's own test of dtf2d, on another day: 21:24:37.5.
		{"an evening", func() (timescale.MJD, error) { return timescale.UTC(at("2006-01-15T21:24:37.5Z")), nil }, 53750, 0.8921006944444444},
	} {
		got, err := c.got()
		if err != nil {
			t.Errorf("%s: %v", c.name, err)
			continue
		}
		off := (float64(got.Day-c.day) + got.Frac - c.frac) * 86400
		if math.Abs(off) > 1e-6 || got.Frac < 0 || got.Frac >= 1 {
			t.Errorf("%s: %d + %.12f, want %d + %.12f", c.name, got.Day, got.Frac, c.day, c.frac)
		}
	}
}

// ERFA's own test of gst06a, at 2006 January 1.0 with UT1 and TT the same
// number; the difference of UT1 and TT there enters nutation only.
func TestSiderealTimeExample(t *testing.T) {
	got, err := timescale.GAST(at("2006-01-01T00:00:00Z"), 0)
	if err != nil {
		t.Fatal(err)
	}
	if d := (got - 1.754166137675019159).Arcsec() / 15; math.Abs(d) > 0.006 {
		t.Errorf("sidereal time is off by %.4f s", d)
	}
}

func TestLocalSiderealTimeGrowsEastward(t *testing.T) {
	u := at("2027-01-18T03:00:00Z")
	g, _ := timescale.GAST(u, 0)
	for _, deg := range []float64{-180, -77, 0, 24.6, 180} {
		l, err := timescale.LST(u, 0, astro.FromDeg(deg))
		if err != nil {
			t.Fatal(err)
		}
		if d := (l - g).WrapSigned() - astro.FromDeg(deg).WrapSigned(); math.Abs(d.WrapSigned().Rad()) > 1e-12 {
			t.Errorf("at %g deg east local sidereal time is %g deg from Greenwich", deg, (l - g).Deg())
		}
		if l < 0 || l >= 2*math.Pi {
			t.Errorf("local sidereal time %g is outside [0, 2π)", l)
		}
	}
}

// The Earth turns once more a year against the stars: a day later sidereal
// time is 3 min 56.555 s further on (Meeus, chapter 12: 1.00273790935).
func TestSiderealDay(t *testing.T) {
	a, _ := timescale.GAST(at("2027-03-01T00:00:00Z"), 0)
	b, _ := timescale.GAST(at("2027-03-02T00:00:00Z"), 0)
	if gain := (b - a).Wrap().Hours() * 3600; math.Abs(gain-236.555) > 0.02 { // nutation moves it a little
		t.Errorf("sidereal time gains %.3f s a day, want 236.555", gain)
	}
}
