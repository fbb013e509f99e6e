package sky_test

import (
	"math"
	"testing"

	"pgregory.net/rapid"

	"cadencewright/astro/sky"
)

func TestMask(t *testing.T) {
	m := sky.Mask{{AzDeg: 10, ElDeg: 4}, {AzDeg: 30, ElDeg: 8}, {AzDeg: 350, ElDeg: 2}}
	for _, c := range []struct{ az, el float64 }{
		{10, 4}, {20, 6}, {30, 8}, {190, 5}, {350, 2}, {0, 3}, {355, 2.5}, {5, 3.5}, {-5, 2.5}, {370, 4}, {360, 3},
	} {
		if got := m.ElevationDeg(c.az); math.Abs(got-c.el) > 1e-9 {
			t.Errorf("mask at azimuth %g: %g deg, want %g", c.az, got, c.el)
		}
	}
	if got := (sky.Mask{}).ElevationDeg(5); got != -90 {
		t.Errorf("an empty mask stands at %g deg, want -90", got)
	}
	if got := (sky.Mask{{AzDeg: 100, ElDeg: 7}}).ElevationDeg(300); got != 7 {
		t.Errorf("a mask of one point stands at %g deg, want 7", got)
	}
}

// planning-model.md, section 3: d/v without acceleration, else 2 sqrt(d/a)
// below v²/a and d/v + v/a above.
func TestAxisSeconds(t *testing.T) {
	for _, c := range []struct{ rate, accel, travel, want float64 }{
		{0.5, 0, 10, 20}, {0.5, 0, -10, 20}, {0.5, 0, 0, 0},
		{0.5, 0.05, 10, 30}, {0.5, 0.05, 5, 20}, {0.5, 0.05, 1.25, 10}, {0.5, 0.05, 0, 0},
	} {
		if got := (sky.Axis{RateDegS: c.rate, AccelDegS2: c.accel}).Seconds(c.travel); math.Abs(got-c.want) > 1e-9 {
			t.Errorf("%+v: %g s", c, got)
		}
	}
}

func TestMotorTurns(t *testing.T) {
	for _, c := range []struct {
		lo, hi float64
		limits [2]float64
		want   [2]int
	}{
		{10, 20, [2]float64{0, 360}, [2]int{0, 0}},
		{10, 20, [2]float64{-270, 270}, [2]int{0, 0}},
		{100, 200, [2]float64{-270, 270}, [2]int{-1, 0}},
		{350, 370, [2]float64{0, 360}, [2]int{0, -1}}, // through north, no overlap
		{350, 370, [2]float64{-90, 450}, [2]int{-1, 0}},
		{0, 360, [2]float64{0, 360}, [2]int{0, 0}},
		{620, 629.7, [2]float64{-270, 269.7}, [2]int{-2, -1}}, // a turn back it touches the end; (269.7-629.7)/360 rounds to below -1
		{-541.7, -500, [2]float64{-181.7, 0}, [2]int{1, 1}},   // and the other end
	} {
		lo, hi := sky.MotorTurns(c.lo, c.hi, c.limits)
		if lo != c.want[0] || hi != c.want[1] {
			t.Errorf("path %g..%g in %v: turns %d..%d, want %v", c.lo, c.hi, c.limits, lo, hi, c.want)
		}
	}
}

func TestUnwrap(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		steps := rapid.SliceOfN(rapid.Float64Range(-179, 179), 1, 50).Draw(t, "steps")
		path, az := make([]float64, len(steps)), make([]float64, len(steps))
		at := rapid.Float64Range(0, 359).Draw(t, "first")
		for i, s := range steps {
			if i > 0 {
				at += s
			}
			path[i], az[i] = at, at-360*math.Floor(at/360)
		}
		for i, got := range sky.UnwrapDeg(az, nil) {
			if math.Abs(got-path[i]) > 1e-9 {
				t.Fatalf("sample %d: %g, want %g", i, got, path[i])
			}
		}
	})
}
