package feasible

import (
	"testing"

	"cadencewright/astro/sky"
	"cadencewright/scheduler"
)

// Each limit by itself, with the count of why a sample fails.
func TestLimits(t *testing.T) {
	tel := scheduler.Telescope{Mount: scheduler.MountEquatorial, ElevationMinDeg: 15, ElevationMaxDeg: 80, SunMinDeg: 10,
		HourAngleRangeH: [2]float64{-4, 4}, TrackHalfMin: 20,
		Horizon: []scheduler.HorizonPoint{{AzimuthDeg: 0, ElevationDeg: 30}, {AzimuthDeg: 90, ElevationDeg: 0}, {AzimuthDeg: 270, ElevationDeg: 0}}}
	transit := tel
	transit.Mount = scheduler.MountTransit
	for _, c := range []struct {
		name                 string
		tel                  *scheduler.Telescope
		az, el, ha, dec, sun float64
		want                 Reject
	}{
		{"up", &tel, 180, 40, 0, 10, 90, Reject{Up: 1}},
		{"at the limit", &tel, 180, 15, 0, 10, 90, Reject{Up: 1}},
		{"low", &tel, 180, 14.99, 0, 10, 90, Reject{TooLow: 1}},
		{"masked", &tel, 0, 29, 0, 10, 90, Reject{Masked: 1}},
		{"above the mask between its points", &tel, 45, 15.5, 0, 10, 90, Reject{Up: 1}},
		{"high", &tel, 180, 80.01, 0, 10, 90, Reject{TooHigh: 1}},
		{"Sun of the telescope", &tel, 180, 40, 0, 10, 9.9, Reject{NearSun: 1}},
		{"hour angle", &tel, 180, 40, 60.1, 10, 90, Reject{OffMount: 1}},
		{"hour angle at its end", &tel, 180, 40, -60, 10, 90, Reject{Up: 1}},
		{"meridian", &transit, 180, 40, 5, 0, 90, Reject{Up: 1}},
		{"off the meridian", &transit, 180, 40, 5.01, 0, 90, Reject{OffMount: 1}},
		{"twice as long at declination 60", &transit, 180, 40, -9.99, 60, 90, Reject{Up: 1}},
	} {
		tr := sky.Track{AzDeg: []float64{c.az}, ElDeg: []float64{c.el}, HADeg: []float64{c.ha}, DecDeg: []float64{c.dec}, SunDeg: []float64{c.sun}}
		got := Reject{MaxElDeg: -90, SunDeg: 180}
		up := newLimits(c.tel).check(&tr, 0, 0, &got)
		if up != (c.want.Up == 1) {
			t.Errorf("%s: up is %t", c.name, up)
		}
		if got.MaxElDeg != c.el || got.SunDeg != c.sun || got.Samples != 1 {
			t.Errorf("%s: %+v", c.name, got)
		}
		got.Samples, got.MaxElDeg, got.NeedElDeg, got.SunDeg = 0, 0, 0, 0
		if got != c.want {
			t.Errorf("%s: %+v, want %+v", c.name, got, c.want)
		}
	}
	tr := sky.Track{AzDeg: []float64{180}, ElDeg: []float64{40}, HADeg: []float64{0}, DecDeg: []float64{0}, SunDeg: []float64{25}}
	if newLimits(&tel).check(&tr, 0, 30, &Reject{}) {
		t.Error("the source's own limit from the Sun is not kept")
	}
}

func TestUsableSpan(t *testing.T) {
	u := usable{readyMin: 11, endMin: 200, lost: []lostPart{{60, 90, 101}}}
	for _, c := range []struct {
		start, end float64
		ok         bool
	}{
		{11, 31, true}, {10.9, 31, false}, {40, 60, true}, {40, 60.1, false}, {59, 95, false}, {70, 80, false},
		{90, 110, false}, {100, 120, false}, {101, 121, true}, {180, 200, true}, {180, 200.1, false}, {40, 120, false},
	} {
		if u.span(c.start, c.end) != c.ok {
			t.Errorf("[%g, %g): usable is %t", c.start, c.end, !c.ok)
		}
	}
}

func TestCeilGrid(t *testing.T) {
	for _, c := range [][3]int{{0, 5, 0}, {300, 5, 1}, {301, 5, 2}, {90, 1, 2}, {60, 1, 1}} {
		if n := ceilGrid(float64(c[0]), c[1]); n != c[2] {
			t.Errorf("%d s are %d steps of %d min, want %d", c[0], n, c[1], c[2])
		}
	}
}
