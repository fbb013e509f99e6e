package view

import (
	"math"
	"strings"
	"testing"
	"time"

	"pgregory.net/rapid"
)

var at = time.Date(2027, time.January, 18, 20, 5, 0, 0, time.UTC)

func TestTimes(t *testing.T) {
	zone := time.FixedZone("ACDT", 10*3600+1800)
	for _, c := range []struct{ name, got, want string }{
		{"clock", Clock(at), "20:05"},
		{"clock of another zone", Clock(at.In(zone)), "20:05"},
		{"local clock", LocalClock(at, zone), "06:35"},
		{"local clock without zone", LocalClock(at, nil), "20:05"},
		{"local moment", LocalMoment(at, zone), "Tue 19 Jan 06:35 (UTC+10:30)"},
		{"moment", Moment(at), "Mon 18 Jan 20:05"},
		{"no moment", Moment(time.Time{}), None},
		{"date", Date(at), "18 January 2027"},
		{"for machines", ISO(at.In(zone)), "2027-01-18T20:05:00Z"},
		{"over midnight", Range(Span{at, at.Add(6 * time.Hour)}), "Mon 18 Jan 20:05–02:05"},
		{"over days", Range(Span{at, at.Add(30 * time.Hour)}), "Mon 18 Jan 20:05 – Wed 20 Jan 02:05"},
		{"ago", Days(at, at.Add(221*time.Hour)), "9.2 days ago"},
		{"ahead", Days(at, at.Add(-36*time.Hour)), "in 1.5 days"},
		{"now", Days(at, at.Add(-time.Hour)), "now"},
		{"never", Days(time.Time{}, at), None},
	} {
		if c.got != c.want {
			t.Errorf("%s: %q, want %q", c.name, c.got, c.want)
		}
	}
}

func TestDateRange(t *testing.T) {
	day := func(y int, m time.Month, d int) time.Time { return time.Date(y, m, d, 0, 0, 0, 0, time.UTC) }
	for _, c := range []struct {
		from, to time.Time
		want     string
	}{
		{day(2027, 1, 18), day(2027, 1, 25), "18–24 January 2027"},
		{day(2027, 1, 25), day(2027, 2, 1), "25–31 January 2027"},
		{day(2027, 3, 29), day(2027, 4, 5), "29 March – 4 April 2027"},
		{day(2026, 12, 28), day(2027, 1, 4), "28 December 2026 – 3 January 2027"},
		{day(2027, 1, 18), day(2027, 1, 19), "18 January 2027"},
	} {
		if got := DateRange(c.from, c.to); got != c.want {
			t.Errorf("%q, want %q", got, c.want)
		}
	}
}

func TestFigures(t *testing.T) {
	for _, c := range []struct{ name, got, want string }{
		{"minus", Fixed(-3.14159, 2), "−3.14"},
		{"no minus nought", Fixed(-0.04, 1), "0.0"},
		{"not a number", Fixed(math.NaN(), 2), None},
		{"infinite", Fixed(math.Inf(1), 2), None},
		{"hundreds", Figure(1420.4), "1420"},
		{"tens", Figure(71.84), "71.8"},
		{"units", Figure(7.5), "7.5"},
		{"whole", Figure(2), "2"},
		{"small", Figure(0.31649), "0.316"},
		{"tiny", Figure(1.25e-5), "1.25e−05"},
		{"nought", Figure(0), "0"},
		{"percent", Percent(0.017), "1.7 %"},
		{"all", Percent(1), "100 %"},
		{"uncertainty", Micros(1.234), "1.23 µs"},
		{"none", Micros(0), "not detectable"},
		{"minutes", Duration(59), "59 min"},
		{"hour", Duration(60), "1 h"},
		{"both", Duration(200), "3 h 20 min"},
		{"nothing", Duration(0), "0 min"},
		{"angle", Degrees(67.24), "67.2°"},
		{"one", Plural(1, "scan"), "1 scan"},
		{"none of it", Plural(0, "scan"), "0 scans"},
		{"list", List([]string{"L", "S", "C"}), "L, S and C"},
		{"list of one", List([]string{"L"}), "L"},
		{"empty list", List(nil), ""},
		{"short name", ShortName("SIM J0412+1833"), "0412+1833"},
		{"name without figures", ShortName("Crab"), "Crab"},
		{"mount", MountName("altaz"), "alt-azimuth"},
		{"no mount", MountName(""), None},
		{"no text", Or(""), None},
	} {
		if c.got != c.want {
			t.Errorf("%s: %q, want %q", c.name, c.got, c.want)
		}
	}
}

func TestPosition(t *testing.T) {
	for _, c := range []struct {
		lat, lon float64
		want     string
	}{
		{53.18, -2.31, "53.18° N, 2.31° W"},
		{-30.7, 21.4, "30.70° S, 21.40° E"},
		{0, 357.69, "0.00° N, 2.31° W"},
		{0, -190, "0.00° N, 170.00° E"},
	} {
		if got := Position(c.lat, c.lon); got != c.want {
			t.Errorf("%v, %v: %q, want %q", c.lat, c.lon, got, c.want)
		}
	}
}

func TestGap(t *testing.T) {
	for _, c := range []struct{ score, bound, want float64 }{{90, 100, 0.1}, {100, 100, 0}, {101, 100, 0}, {5, 0, 0}} {
		if got := (&Plan{Score: c.score, Bound: c.bound}).Gap(); math.Abs(got-c.want) > 1e-12 {
			t.Errorf("score %v, bound %v: gap %v, want %v", c.score, c.bound, got, c.want)
		}
	}
}

// TestLSTIsATimeOfDay draws any hours and expects a time between 00:00 and
// 23:59 that is the same a whole day on.
func TestLSTIsATimeOfDay(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		h := float64(rapid.IntRange(-100_000, 100_000).Draw(t, "minutes")) / 60
		got := LST(h)
		if _, err := time.Parse("15:04", got); err != nil {
			t.Fatalf("LST(%v) = %q: %v", h, got, err)
		}
		if next := LST(h + 24); next != got {
			t.Fatalf("LST(%v) = %q, a day on %q", h, got, next)
		}
	})
}

// TestFigureIsShort draws any amount and expects what fits a table.
func TestFigureIsShort(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		x := rapid.Float64Range(-99_999, 99_999).Draw(t, "x")
		got := Figure(x)
		if n := len([]rune(got)); n > 10 {
			t.Fatalf("Figure(%v) = %q has %d signs", x, got, n)
		}
		if strings.Contains(got, "-") {
			t.Fatalf("Figure(%v) = %q has a hyphen for a minus", x, got)
		}
	})
}
