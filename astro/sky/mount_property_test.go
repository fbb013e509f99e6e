package sky_test

import (
	"math"
	"slices"
	"testing"

	"pgregory.net/rapid"

	"cadencewright/astro/sky"
)

// drawMask is a horizon of some points in ascending azimuth.
func drawMask(t *rapid.T) sky.Mask {
	az := rapid.SliceOfNDistinct(rapid.Float64Range(0, 359.999), 1, 12, rapid.ID).Draw(t, "azimuths")
	slices.Sort(az)
	m := make(sky.Mask, len(az))
	for i := range az {
		m[i] = sky.MaskPoint{AzDeg: az[i], ElDeg: rapid.Float64Range(-2, 40).Draw(t, "elevation")}
	}
	return m
}

// A mask is the same a turn further on, never outside its points' elevations,
// and passes through each of them.
func TestMaskWraps(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		m := drawMask(t)
		lo, hi := math.Inf(1), math.Inf(-1)
		for _, p := range m {
			if got := m.ElevationDeg(p.AzDeg); math.Abs(got-p.ElDeg) > 1e-9 {
				t.Errorf("at its point %+v the mask stands at %g", p, got)
			}
			lo, hi = min(lo, p.ElDeg), max(hi, p.ElDeg)
		}
		az := rapid.Float64Range(0, 360).Draw(t, "az")
		here := m.ElevationDeg(az)
		if here < lo-1e-9 || here > hi+1e-9 {
			t.Errorf("at azimuth %g the mask stands at %g, outside %g to %g", az, here, lo, hi)
		}
		for _, turns := range []float64{-2, -1, 1, 3} {
			// Close points make steep slopes: the rounding of the azimuth counts.
			if there := m.ElevationDeg(az + 360*turns); math.Abs(there-here) > 1e-6 && steepest(m) < 1e5 {
				t.Errorf("azimuth %g: %g deg, %g turns on %g", az, here, turns, there)
			}
		}
	})
}

// steepest is the mask's steepest slope between neighbours.
func steepest(m sky.Mask) float64 {
	slope := 0.0
	for i, p := range m {
		next := m[(i+1)%len(m)]
		width := next.AzDeg - p.AzDeg
		if width <= 0 {
			width += 360
		}
		slope = max(slope, math.Abs(next.ElDeg-p.ElDeg)/width)
	}
	return slope
}

// Halfway between neighbours the mask is halfway, across north too.
func TestMaskIsLinear(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		m := drawMask(t)
		for i, p := range m {
			next := m[(i+1)%len(m)]
			width := next.AzDeg - p.AzDeg
			if width <= 0 {
				width += 360
			}
			if width < 1e-3 {
				continue
			}
			if got, want := m.ElevationDeg(p.AzDeg+width/2), (p.ElDeg+next.ElDeg)/2; math.Abs(got-want) > 1e-6 {
				t.Errorf("halfway from %+v to %+v the mask stands at %g", p, next, got)
			}
		}
	})
}

// A point beside 0 and one beside 360: the seam is an azimuth like any other.
func TestMaskAtTheSeam(t *testing.T) {
	m := sky.Mask{{AzDeg: 0, ElDeg: 10}, {AzDeg: 180, ElDeg: 0}, {AzDeg: 359, ElDeg: 4}}
	for az, want := range map[float64]float64{0: 10, 359.5: 7, 360: 10, 359: 4, -0.5: 7, -1e-20: 10, 720: 10, 1e-9: 10} {
		if got := m.ElevationDeg(az); math.Abs(got-want) > 1e-6 {
			t.Errorf("azimuth %g: %g deg, want %g", az, got, want)
		}
	}
}

// Travel times: even in the direction, growing, never below distance over
// rate, and continuous where the drive just reaches its rate.
func TestAxisSecondsGrow(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		a := sky.Axis{RateDegS: rapid.Float64Range(0.01, 10).Draw(t, "rate"), AccelDegS2: rapid.Float64Range(0.001, 5).Draw(t, "accel")}
		d := rapid.Float64Range(0, 540).Draw(t, "travel")
		s := a.Seconds(d)
		if s != a.Seconds(-d) {
			t.Error("the way back takes another time")
		}
		if s < d/a.RateDegS-1e-9 {
			t.Errorf("%g deg in %g s is faster than the rate", d, s)
		}
		if further := a.Seconds(d + 0.01); further < s {
			t.Errorf("%g deg takes %g s, further %g s", d, s, further)
		}
		if s > d/a.RateDegS+a.RateDegS/a.AccelDegS2+1e-9 {
			t.Errorf("%g deg takes %g s, more than getting up to the rate and down costs", d, s)
		}
		reach := a.RateDegS * a.RateDegS / a.AccelDegS2
		if jump := a.Seconds(reach*(1+1e-9)) - a.Seconds(reach*(1-1e-9)); math.Abs(jump) > 1e-5*(1+a.Seconds(reach)) {
			t.Errorf("the time jumps by %g s where the rate is just reached", jump)
		}
	})
}

// Every turn offered keeps the path inside the range; one more on either side
// does not.
func TestMotorTurnsAreAllThatFit(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		lo := rapid.Float64Range(-720, 720).Draw(t, "lo")
		hi := lo + rapid.Float64Range(0, 300).Draw(t, "width")
		from := rapid.Float64Range(-400, 100).Draw(t, "from")
		limits := [2]float64{from, from + rapid.Float64Range(10, 900).Draw(t, "range")}
		first, last := sky.MotorTurns(lo, hi, limits)
		inside := func(turn int) bool {
			shift := 360 * float64(turn)
			return lo+shift >= limits[0]-1e-6 && hi+shift <= limits[1]+1e-6
		}
		for k := first; k <= last; k++ {
			if !inside(k) {
				t.Errorf("turn %d takes %g..%g outside %v", k, lo, hi, limits)
			}
		}
		for k := -6; k <= 6; k++ {
			if (k < first || k > last) && inside(k) && lo+360*float64(k) > limits[0]+1e-6 && hi+360*float64(k) < limits[1]-1e-6 {
				t.Errorf("turn %d keeps %g..%g inside %v, but only %d..%d are offered", k, lo, hi, limits, first, last)
			}
		}
	})
}

// Unwrapping in place, and into a slice that is long enough, say the same.
func TestUnwrapInPlace(t *testing.T) {
	az := []float64{350, 355, 0, 5, 355, 180, 10}
	want := []float64{350, 355, 360, 365, 355, 180, 10}
	buffer := make([]float64, 20)
	for name, got := range map[string][]float64{
		"fresh": sky.UnwrapDeg(az, nil), "longer": sky.UnwrapDeg(az, buffer), "in place": sky.UnwrapDeg(az, az),
	} {
		if !slices.Equal(got, want) {
			t.Errorf("%s: %v, want %v", name, got, want)
		}
	}
	if len(sky.UnwrapDeg(nil, nil)) != 0 {
		t.Error("no samples became some")
	}
}

// No step of an unwrapped track is more than half a turn, and each sample is
// the azimuth it was, a whole number of turns on.
func TestUnwrapHasNoJumps(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		az := rapid.SliceOfN(rapid.Float64Range(0, 359.999), 1, 60).Draw(t, "az")
		got := sky.UnwrapDeg(az, nil)
		for i := range got {
			if math.Abs(math.Remainder(got[i]-az[i], 360)) > 1e-9 {
				t.Fatalf("sample %d: %g is not %g", i, got[i], az[i])
			}
			if i > 0 && math.Abs(got[i]-got[i-1]) > 180+1e-9 {
				t.Fatalf("sample %d: a jump from %g to %g", i, got[i-1], got[i])
			}
		}
	})
}
