package sky_test

import (
	"math"
	"strings"
	"testing"
	"time"

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
