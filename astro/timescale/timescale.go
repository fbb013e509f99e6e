// Package timescale turns UTC instants into the scales that astronomy counts
// in: TT, TDB and UT1 as Modified Julian Dates in two parts, and sidereal time.
//
// It covers 1972-01-01 (the start of UTC with leap seconds) to the end of 2099;
// an instant outside is an error, never a number that is quietly wrong. From
// 2017 on TAI-UTC is taken as 37 s: should a leap second be announced, the
// table here must be extended.
package timescale

import (
	"math"
	"time"

	"cadencewright/astro"
)

// TTMinusTAIS is TT-TAI in seconds, by definition (IAU 1991).
const TTMinusTAIS = 32.184

// mjdUnixEpoch is 1970-01-01T00:00 as MJD.
const mjdUnixEpoch = 40587

// First and Last bound the instants that can be used: First is included, Last
// is not.
var (
	First = time.Date(1972, 1, 1, 0, 0, 0, 0, time.UTC)
	Last  = time.Date(2100, 1, 1, 0, 0, 0, 0, time.UTC)
)

// leaps are the days from which TAI-UTC has a value, in seconds (IERS Bulletin
// C). Before a leap second's end Go's clock repeats nothing: the second itself
// cannot be named, and needs no name here.
var leaps = []struct {
	y    int
	m    time.Month
	taiS float64
}{
	{2017, 1, 37}, {2015, 7, 36}, {2012, 7, 35}, {2009, 1, 34}, {2006, 1, 33}, {1999, 1, 32}, {1997, 7, 31},
	{1996, 1, 30}, {1994, 7, 29}, {1993, 7, 28}, {1992, 7, 27}, {1991, 1, 26}, {1990, 1, 25}, {1988, 1, 24},
	{1985, 7, 23}, {1983, 7, 22}, {1982, 7, 21}, {1981, 7, 20}, {1980, 1, 19}, {1979, 1, 18}, {1978, 1, 17},
	{1977, 1, 16}, {1976, 1, 15}, {1975, 1, 14}, {1974, 1, 13}, {1973, 1, 12}, {1972, 7, 11}, {1972, 1, 10},
}

// TAIMinusUTCS is TAI-UTC in seconds.
func TAIMinusUTCS(t time.Time) (float64, error) {
	t = t.UTC()
	if t.Before(First) || !t.Before(Last) {
		return 0, &astro.RangeError{Quantity: "instant", Value: t.Format(time.RFC3339),
			Allowed: First.Format(time.DateOnly) + " to " + Last.AddDate(0, 0, -1).Format(time.DateOnly)}
	}
	y, m, _ := t.Date()
	for _, l := range leaps {
		if y > l.y || y == l.y && m >= l.m {
			return l.taiS, nil
		}
	}
	return 0, &astro.RangeError{Quantity: "instant", Value: t.Format(time.RFC3339), Allowed: "1972 or later"}
}

// UTC is the instant as a (quasi-)MJD of UTC, days of 86400 s. Differences
// across a leap second lack that second; turn both into TT first.
func UTC(t time.Time) MJD {
	sec, ns := t.Unix(), t.Nanosecond()
	day := sec / 86400
	if sec%86400 < 0 {
		day--
	}
	return NewMJD(mjdUnixEpoch+int(day), (float64(sec-day*86400)+float64(ns)*1e-9)/86400)
}

// TT is Terrestrial Time: UTC + (TAI-UTC) + 32.184 s, 69.184 s ahead since 2017.
// It is what planetary and stellar positions are counted in. It does not come
// from an estimate of UT1: those run 2 to 35 s off for the 2020s.
func TT(t time.Time) (MJD, error) {
	tai, err := TAIMinusUTCS(t)
	if err != nil {
		return MJD{}, err
	}
	return UTC(t).AddS(tai + TTMinusTAIS), nil
}

// TDBMinusTTS is TDB-TT at the Earth's centre in seconds, within 0.03 ms of
// the full series (ERFA dtdb) in 2026-2030 and 0.05 ms over all dates; tt is an
// MJD. Two terms of Fairhead and Bretagnon 1990 (A&A 229, 240), as in the
// Astronomical Almanac. At a site it differs by up to 2 microseconds.
func TDBMinusTTS(tt float64) float64 {
	g := (357.53 + 0.98560028*(tt-51544.5)) * math.Pi / 180
	return 0.001657*math.Sin(g) + 0.000014*math.Sin(2*g)
}

// TDB is Barycentric Dynamical Time at the Earth's centre, within 0.05 ms: the
// scale that ephemerides of binaries count in.
func TDB(t time.Time) (MJD, error) {
	tt, err := TT(t)
	if err != nil {
		return MJD{}, err
	}
	return tt.AddS(TDBMinusTTS(tt.Float())), nil
}

// FromTDB is the UTC instant of a TDB at the Earth's centre, to a microsecond.
// A TDB within a leap second, which UTC here cannot name, gives the second
// after it.
func FromTDB(tdb MJD) (time.Time, error) {
	tt := tdb.AddS(-TDBMinusTTS(tdb.Float()))
	// The latest difference that reaches back no further than where it began.
	for _, l := range leaps {
		t := fromUTC(tt.AddS(-l.taiS - TTMinusTAIS))
		if tai, err := TAIMinusUTCS(t); err == nil && tai >= l.taiS {
			return t, nil
		}
	}
	_, err := TAIMinusUTCS(fromUTC(tt.AddS(-leaps[0].taiS - TTMinusTAIS)))
	return time.Time{}, err
}

// fromUTC is the instant of a (quasi-)MJD of UTC, rounded to a microsecond.
func fromUTC(m MJD) time.Time {
	return time.Unix(int64(m.Day-mjdUnixEpoch)*86400, 0).UTC().Add(time.Duration(math.Round(m.Frac*86400e6)) * time.Microsecond)
}
