package timescale_test

import (
	"math"
	"testing"

	"cadencewright/astro"
	"cadencewright/astro/timescale"
	"cadencewright/testdata"
)

// ERFA gst06a; 0.02 s of time.
func TestSiderealTimeAgainstERFA(t *testing.T) {
	gast := testdata.Watch(t, "lst: GAST", "s")
	last := testdata.Watch(t, "lst: LAST", "s")
	for _, r := range testdata.Table(t, "lst") {
		g, err := timescale.GAST(r.Time("utc"), r.Num("dut1_s"))
		if err != nil {
			t.Fatal(err)
		}
		l, err := timescale.LST(r.Time("utc"), r.Num("dut1_s"), astro.FromDeg(r.Num("lon_deg_e")))
		if err != nil {
			t.Fatal(err)
		}
		gast.Error(r, 3600*math.Abs(math.Remainder(g.Hours()-r.Num("gast_h"), 24)), 0.02)
		last.Error(r, 3600*math.Abs(math.Remainder(l.Hours()-r.Num("last_h"), 24)), 0.02)
	}
}

// ERFA dtdb; 0.1 ms.
func TestTDBAgainstERFA(t *testing.T) {
	tdb := testdata.Watch(t, "barycentric: TDB-UTC", "s")
	for _, r := range testdata.Table(t, "barycentric") {
		u := timescale.UTC(r.Time("utc"))
		d, err := timescale.TDB(r.Time("utc"))
		if err != nil {
			t.Fatal(err)
		}
		got := (float64(d.Day-u.Day) + (d.Frac - u.Frac)) * 86400
		tdb.Check(r, got, r.Num("tdb_minus_utc_geo_s"), 1e-4)
	}
}
