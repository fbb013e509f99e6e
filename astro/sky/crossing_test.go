package sky_test

import (
	"math"
	"strings"
	"testing"
	"time"

	"pgregory.net/rapid"

	"cadencewright/astro"
	"cadencewright/astro/sky"
	"cadencewright/testdata"
)

// Roots of ERFA's elevation; max(1 s, 60 s x 0.0014 deg / slope), 5 arcsec.
func TestCrossingsAgainstERFA(t *testing.T) {
	count := testdata.Watch(t, "riseset: crossings missing or too many", "")
	at := testdata.Watch(t, "riseset: instants", "s")
	el := testdata.Watch(t, "riseset: elevation at them", "arcsec")
	for _, r := range testdata.Table(t, "riseset") {
		start := r.Time("start_utc")
		got, vis, err := sky.Crossings(site(r), star(r), r.Num("el_limit_deg"), start, 24*time.Hour, r.Num("dut1_s"))
		if err != nil {
			t.Fatal(err)
		}
		want := map[bool][]time.Time{true: list(t, r, "up_utc"), false: list(t, r, "down_utc")}
		switch {
		case len(want[true])+len(want[false]) > 0:
			if vis != sky.Crosses {
				t.Errorf("%s: %s, wanted crossings", r, vis)
			}
		case r.Str("above_at_start") == "yes" && vis != sky.AlwaysAbove, r.Str("above_at_start") == "no" && vis != sky.AlwaysBelow:
			t.Errorf("%s: %s", r, vis)
		}
		allowed := math.Max(1, 60*0.0014/math.Max(r.Num("min_slope_deg_per_min"), 1e-9))
		for _, up := range []bool{true, false} {
			var mine []time.Time
			for _, c := range got {
				if c.Up == up {
					mine = append(mine, c.At)
				}
			}
			count.Check(r, float64(len(mine)), float64(len(want[up])), 0.5)
			for i := range min(len(mine), len(want[up])) {
				at.Check(r, mine[i].Sub(want[up][i]).Seconds(), 0, allowed)
				p, err := sky.Observe(site(r), star(r), mine[i], r.Num("dut1_s"))
				if err != nil {
					t.Fatal(err)
				}
				el.Check(r, p.ElDeg*3600, r.Num("el_limit_deg")*3600, 1)
			}
		}
	}
}

func list(t *testing.T, r testdata.Row, col string) []time.Time {
	var out []time.Time
	for cell := range strings.SplitSeq(r.Str(col), ";") {
		if cell = strings.TrimSpace(cell); cell == "" {
			continue
		}
		at, err := time.Parse(time.RFC3339Nano, cell)
		if err != nil {
			t.Fatalf("%s: %v", r, err)
		}
		out = append(out, at)
	}
	return out
}

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

func drawSite(t *rapid.T) astro.Geodetic {
	return astro.Geodetic{
		Lon:     astro.FromDeg(rapid.Float64Range(-180, 180).Draw(t, "lon")),
		Lat:     astro.FromDeg(rapid.Float64Range(-89.9, 89.9).Draw(t, "lat")),
		HeightM: rapid.Float64Range(0, 5000).Draw(t, "height"),
	}
}

func drawStar(t *rapid.T) astro.Star {
	return astro.Star{
		RA:          astro.FromDeg(rapid.Float64Range(0, 360).Draw(t, "ra")),
		Dec:         astro.FromDeg(rapid.Float64Range(-89.9, 89.9).Draw(t, "dec")),
		PosEpochMJD: 55000,
		PMRAMasYr:   rapid.Float64Range(-200, 200).Draw(t, "pmra"),
		PMDecMasYr:  rapid.Float64Range(-200, 200).Draw(t, "pmdec"),
	}
}

func drawTime(t *rapid.T) time.Time {
	base := time.Date(2026, 1, 1, 0, 0, 0, 0, time.UTC)
	return base.Add(time.Duration(rapid.Int64Range(0, 5*365*86400).Draw(t, "second")) * time.Second)
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
