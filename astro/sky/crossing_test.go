package sky_test

import (
	"math"
	"testing"
	"time"

	"pgregory.net/rapid"

	"cadencewright/astro"
	"cadencewright/astro/sky"
	"cadencewright/astro/timescale"
)

// Between crossings a star stays on one side: brute force over a grid.
func TestCrossingsSeparateAboveFromBelow(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		site, star, start := drawSite(t), drawStar(t), drawTime(t)
		limit := rapid.Float64Range(-20, 80).Draw(t, "limit")
		span := time.Duration(rapid.IntRange(1, 72).Draw(t, "hours")) * time.Hour
		got, vis, err := sky.Crossings(site, star, limit, start, span, 0)
		if err != nil {
			t.Fatal(err)
		}
		w, err := sky.NewWindow(site, start, 4*time.Minute, int(span/(4*time.Minute))+1, 0)
		if err != nil {
			t.Fatal(err)
		}
		sin := w.SinElevation(star, nil)
		above := vis == sky.AlwaysAbove || len(got) > 0 && !got[0].Up
		next := 0
		for i, s := range sin {
			at := start.Add(time.Duration(i) * 4 * time.Minute)
			for next < len(got) && !got[next].At.After(at) {
				above = got[next].Up
				next++
			}
			if d := math.Asin(s)*180/math.Pi - limit; math.Abs(d) > 1e-3 && (d > 0) != above && at.Before(start.Add(span)) {
				t.Fatalf("at %s the star is %.4f deg from the limit, but above is %v; crossings %v", at, d, above, got)
			}
		}
	})
}

// At a crossing the elevation is the limit, moving the way it says; ups and
// downs take turns; two of a kind are a sidereal day apart.
func TestCrossingsAreCrossings(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		site, star, start := drawSite(t), drawStar(t), drawTime(t)
		limit := rapid.Float64Range(-20, 80).Draw(t, "limit")
		got, vis, err := sky.Crossings(site, star, limit, start, 50*time.Hour, 0.2)
		if err != nil {
			t.Fatal(err)
		}
		if (vis == sky.Crosses) != (len(got) > 0) {
			t.Fatalf("%s with %d crossings", vis, len(got))
		}
		for i, c := range got {
			el := observe(t, site, star, c.At).ElDeg
			if math.Abs(el-limit)*3600 > 0.05 {
				t.Errorf("at %s the elevation is %.4f arcsec from the limit", c.At, (el-limit)*3600)
			}
			if later := observe(t, site, star, c.At.Add(time.Second)).ElDeg; math.Abs(later-el) > 1e-5 && (later > el) != c.Up {
				t.Errorf("up is %v at %s, but a second later the elevation has moved by %g deg", c.Up, c.At, later-el)
			}
			if i > 0 && c.Up == got[i-1].Up {
				t.Errorf("two crossings of one kind in a row: %v", got)
			}
			if i > 1 {
				// A second or two is what precession and aberration may move a shallow one by.
				if gap := c.At.Sub(got[i-2].At) - 86164090*time.Millisecond; gap.Abs() > time.Minute {
					t.Errorf("crossings of one kind are a sidereal day and %s apart", gap)
				}
			}
		}
	})
}

// Twice the same in one day: a star that rises a minute after midnight rises
// again three minutes before the next.
func TestTwoOfAKindInADay(t *testing.T) {
	site := astro.Geodetic{Lon: astro.FromDeg(20), Lat: astro.FromDeg(-31)}
	star := astro.Star{RA: 1, Dec: -0.3, PosEpochMJD: 51544.5}
	for _, up := range []bool{true, false} {
		found, _, err := sky.Crossings(site, star, 20, benchStart, 24*time.Hour, 0)
		if err != nil {
			t.Fatal(err)
		}
		var first time.Time
		for _, c := range found {
			if c.Up == up {
				first = c.At
			}
		}
		start := first.Add(-time.Minute)
		again, vis, err := sky.Crossings(site, star, 20, start, 24*time.Hour, 0)
		if err != nil || vis != sky.Crosses || len(again) != 3 {
			t.Fatalf("up %v: %d crossings, %s, %v; want 3", up, len(again), vis, err)
		}
		if again[0].Up != up || again[1].Up == up || again[2].Up != up {
			t.Errorf("up %v: %v", up, again)
		}
		if gap := again[2].At.Sub(again[0].At); (gap - 86164090*time.Millisecond).Abs() > 20*time.Millisecond {
			t.Errorf("up %v: a sidereal day is %s", up, gap)
		}
	}
}

// A span that begins or ends on a crossing has it once: at the start, not at
// the end.
func TestCrossingsAtTheEndsOfASpan(t *testing.T) {
	found, _, err := sky.Crossings(benchSite, benchStar, 20, benchStart, 48*time.Hour, 0)
	if err != nil || len(found) < 3 {
		t.Fatal(found, err)
	}
	const slack = 2 * time.Millisecond
	for _, c := range found {
		for name, s := range map[string]struct {
			start time.Time
			span  time.Duration
			want  int
		}{
			"from a moment before": {c.At.Add(-slack), time.Hour, 1},
			"from a moment after":  {c.At.Add(slack), time.Hour, 0},
			"to a moment after":    {c.At.Add(-time.Hour), time.Hour + slack, 1},
			"to a moment before":   {c.At.Add(-time.Hour), time.Hour - slack, 0},
		} {
			got, _, err := sky.Crossings(benchSite, benchStar, 20, s.start, s.span, 0)
			if err != nil || len(got) != s.want {
				t.Errorf("%s %s: %d crossings, %v; want %d", name, c.At, len(got), err, s.want)
			}
		}
	}
}

// Wherever the days of a search begin, it finds each crossing once: the days'
// common ends are put on and about a crossing that shifts from day to day.
func TestCrossingsAreFoundOnce(t *testing.T) {
	at, top, err := sky.UpperTransit(benchSite, benchStar, benchStart, 0)
	if err != nil {
		t.Fatal(err)
	}
	const days = 60
	all, _, err := sky.Crossings(benchSite, benchStar, top-0.02, at.Add(-12*time.Hour), (days+20)*24*time.Hour, 0)
	if err != nil || len(all) < 2*days {
		t.Fatalf("%d crossings, %v", len(all), err)
	}
	for i := 2; i < 12; i++ {
		for _, offset := range []time.Duration{-30 * time.Second, -time.Second, -30 * time.Millisecond, 30 * time.Millisecond, time.Second, 30 * time.Second} {
			start := all[i].At.Add(offset)
			got, _, err := sky.Crossings(benchSite, benchStar, top-0.02, start, days*24*time.Hour, 0)
			if err != nil {
				t.Fatal(err)
			}
			want := 0
			for _, c := range all {
				if !c.At.Before(start) && c.At.Before(start.Add(days*24*time.Hour)) {
					want++
				}
			}
			if len(got) != want {
				t.Errorf("crossing %d and %s: %d found, want %d", i, offset, len(got), want)
			}
		}
	}
}

// A star that only grazes the limit: the two crossings are close together and
// the top lies between them; a little higher there is none.
func TestGrazing(t *testing.T) {
	at, top, err := sky.UpperTransit(benchSite, benchStar, benchStart, 0)
	if err != nil {
		t.Fatal(err)
	}
	for _, below := range []float64{1, 0.1, 0.01, 0.001} {
		got, vis, err := sky.Crossings(benchSite, benchStar, top-below, benchStart, 23*time.Hour, 0)
		if err != nil || vis != sky.Crosses || len(got) != 2 {
			t.Fatalf("%g deg below the top: %d crossings, %s, %v", below, len(got), vis, err)
		}
		if !got[0].Up || got[1].Up || got[0].At.After(at) || got[1].At.Before(at) {
			t.Errorf("%g deg below the top, which is at %s: %v", below, at, got)
		}
	}
	for _, above := range []float64{0.001, 0.1} {
		got, vis, err := sky.Crossings(benchSite, benchStar, top+above, benchStart, 23*time.Hour, 0)
		if err != nil || vis != sky.AlwaysBelow || len(got) != 0 {
			t.Errorf("%g deg above the top: %v, %s, %v", above, got, vis, err)
		}
	}
}

// Stars that never cross, the poles of the Earth and of the sky among them.
func TestNoCrossings(t *testing.T) {
	for _, c := range []struct {
		name            string
		lat, dec, limit float64
		want            sky.Visibility
	}{
		{"circumpolar", 60, 70, 20, sky.AlwaysAbove},
		{"never rises", 60, -70, 20, sky.AlwaysBelow},
		{"at the Earth's pole, above", 90, 30, 20, sky.AlwaysAbove},
		{"at the Earth's pole, below", 90, 10, 20, sky.AlwaysBelow},
		{"at the Earth's south pole", -90, -30, 20, sky.AlwaysAbove},
		{"the pole of the sky", 40, 90, 39, sky.AlwaysAbove},
		{"the pole of the sky, below", 40, 90, 41, sky.AlwaysBelow},
		{"a limit at the nadir", 40, 20, -90, sky.AlwaysAbove},
		{"a limit at the zenith", 40, 20, 90, sky.AlwaysBelow},
	} {
		site := astro.Geodetic{Lat: astro.FromDeg(c.lat)}
		star := astro.Star{RA: 2, Dec: astro.FromDeg(c.dec), PosEpochMJD: 51544.5}
		got, vis, err := sky.Crossings(site, star, c.limit, benchStart, 24*time.Hour, 0)
		if err != nil || vis != c.want || len(got) != 0 {
			t.Errorf("%s: %v, %s, %v; want %s", c.name, got, vis, err, c.want)
		}
	}
}

// The first and the last day that can be used have their crossings too.
func TestCrossingsAtTheEndsOfTheDates(t *testing.T) {
	for _, start := range []time.Time{timescale.First, timescale.Last.Add(-24 * time.Hour)} {
		got, vis, err := sky.Crossings(benchSite, benchStar, 20, start, 24*time.Hour, 0)
		if err != nil || vis != sky.Crosses || len(got) < 2 {
			t.Errorf("from %s: %v, %s, %v", start, got, vis, err)
		}
	}
}

func TestUpperTransit(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		site, star, start := drawSite(t), drawStar(t), drawTime(t)
		at, el, err := sky.UpperTransit(site, star, start, 0.2)
		if err != nil {
			t.Fatal(err)
		}
		if at.Before(start) || at.Sub(start) > 24*time.Hour {
			t.Fatalf("transit at %s, not within a day of %s", at, start)
		}
		p, err := sky.Observe(site, star, at, 0.2)
		if err != nil {
			t.Fatal(err)
		}
		if math.Abs(p.HADeg) > 1e-4 {
			t.Errorf("hour angle %g deg at the transit", p.HADeg)
		}
		// The elevation there is 90 deg less the distance in declination.
		want := 90 - math.Abs(site.Lat.Deg()-p.DecDeg)
		if math.Abs(el-want) > 1e-4 {
			t.Errorf("elevation %.6f deg at the transit, %.6f expected", el, want)
		}
	})
}

func TestCrossingsRefuse(t *testing.T) {
	at := time.Date(2027, 1, 1, 0, 0, 0, 0, time.UTC)
	for _, c := range []struct {
		name  string
		limit float64
		start time.Time
		span  time.Duration
	}{
		{"no span", 10, at, 0},
		{"span of years", 10, at, 1000 * 24 * time.Hour},
		{"limit above the zenith", 91, at, time.Hour},
		{"NaN", math.NaN(), at, time.Hour},
		{"before leap seconds", 10, time.Date(1950, 1, 1, 0, 0, 0, 0, time.UTC), time.Hour},
	} {
		if _, _, err := sky.Crossings(astro.Geodetic{}, astro.Star{}, c.limit, c.start, c.span, 0); err == nil {
			t.Errorf("%s: no error", c.name)
		}
	}
}
