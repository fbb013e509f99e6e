package interval

import (
	"math"
	"testing"

	"pgregory.net/rapid"
)

// arc fails the test on an error.
func arc(t interface {
	Helper()
	Fatalf(string, ...any)
}, from, to float64) Circular {
	t.Helper()
	c, err := Arc(from, to)
	if err != nil {
		t.Fatalf("Arc(%v, %v): %v", from, to, err)
	}
	return c
}

func TestArc(t *testing.T) {
	tests := []struct {
		name     string
		from, to float64
		in, out  []float64 // points
		total    float64
	}{
		{"plain", 0.25, 0.75, []float64{0.25, 0.5, 7.5, -0.5}, []float64{0.75, 0, 0.999, 1.2}, 0.5},
		{"past 0", 0.75, 1.25, []float64{0.75, 0.9, 0, 0.125, 1}, []float64{0.25, 0.5, -0.5}, 0.5},
		{"up to 0", 0.5, 1, []float64{0.5, 0.99}, []float64{0, 1, 0.49}, 0.5},
		{"from 0", 0, 0.5, []float64{0, 1, 0.49}, []float64{0.5, 0.99}, 0.5},
		{"empty", 0.3, 0.3, nil, []float64{0.3, 0, 0.8}, 0},
		{"full", 0.3, 1.3, []float64{0.3, 0, 0.8, 0.29}, nil, 1},
		{"below 0", -0.25, 0.25, []float64{0.8, 0, 0.2}, []float64{0.25, 0.5}, 0.5},
		{"far away", 1000.25, 1000.5, []float64{0.25, 0.4}, []float64{0.5, 0}, 0.25},
		{"hair below 0", -1e-20, 0.25, []float64{0, 0.1}, []float64{0.25, 0.9}, 0.25},
		{"hair below 0 up to 0", -1e-20, 0, nil, []float64{0, 0.5, 0.999}, 0},
	}
	for _, tt := range tests {
		t.Run(tt.name, func(t *testing.T) {
			c := arc(t, tt.from, tt.to)
			for _, x := range tt.in {
				if !c.Contains(x) {
					t.Errorf("should hold %v", x)
				}
			}
			for _, x := range tt.out {
				if c.Contains(x) {
					t.Errorf("should not hold %v", x)
				}
			}
			if math.Abs(c.Total()-tt.total) > 1e-12 {
				t.Errorf("total: got %v, want %v", c.Total(), tt.total)
			}
			if c.Empty() != (tt.total == 0) || c.IsFull() != (tt.total == 1) {
				t.Errorf("Empty %v, IsFull %v at total %v", c.Empty(), c.IsFull(), tt.total)
			}
		})
	}
}

func TestArcErrors(t *testing.T) {
	nan, inf := math.NaN(), math.Inf(1)
	for _, p := range [][2]float64{{0.5, 0.4}, {0, 1.5}, {nan, 1}, {0, nan}, {-inf, 0}, {0, inf}, {inf, inf}, {-inf, -inf}} {
		if _, err := Arc(p[0], p[1]); err == nil {
			t.Errorf("Arc(%v, %v): want an error", p[0], p[1])
		}
	}
}

func TestPointsThatAreNone(t *testing.T) {
	for _, x := range []float64{math.NaN(), math.Inf(1), math.Inf(-1)} {
		if Full().Contains(x) {
			t.Errorf("the full circle should not hold %v", x)
		}
		if !Full().Rotate(x).Empty() {
			t.Errorf("the full circle rotated by %v should be empty", x)
		}
	}
}

func TestArcsJoinAcrossZero(t *testing.T) {
	c := arc(t, 0.875, 1.125).Union(arc(t, 0.25, 0.5))
	got := c.Arcs()
	want := []Interval[float64]{{Lo: 0.25, Hi: 0.5}, {Lo: 0.875, Hi: 1.125}}
	if len(got) != 2 || got[0] != want[0] || got[1] != want[1] {
		t.Errorf("got %v, want %v", got, want)
	}
	if full := Full().Arcs(); len(full) != 1 || full[0] != (Interval[float64]{Lo: 0, Hi: 1}) {
		t.Errorf("full: got %v", full)
	}
}

func TestUnroll(t *testing.T) {
	c := arc(t, 0.75, 1.25)
	got := c.Unroll(-0.5, 2)
	want := New(Interval[float64]{-0.25, 0.25}, Interval[float64]{0.75, 1.25}, Interval[float64]{1.75, 2})
	if !got.Equal(want) {
		t.Errorf("got %v, want %v", got.Intervals(), want.Intervals())
	}
	if got := Full().Unroll(0.1, 5.7); got.Len() != 1 || got.At(0) != (Interval[float64]{0.1, 5.7}) {
		t.Errorf("full: got %v", got.Intervals())
	}
	var none Circular
	if !none.Unroll(0, 10).Empty() || !c.Unroll(3, 3).Empty() {
		t.Error("nothing unrolled should be empty")
	}
}

// steps is how finely the brute force divides the circle; the ends of arcs
// are multiples of 1/steps, exact in binary.
const steps = 32

type ring [steps]bool

func drawRing(t *rapid.T, label string) (Circular, ring) {
	var c Circular
	var r ring
	for range rapid.IntRange(0, 4).Draw(t, label) {
		from := rapid.IntRange(-100, 100).Draw(t, "from")
		width := rapid.IntRange(0, steps).Draw(t, "width")
		c = c.Union(arc(t, float64(from)/steps, float64(from+width)/steps))
		for k := range width {
			r[((from+k)%steps+steps)%steps] = true
		}
	}
	return c, r
}

// sameRing compares at the start and just before the end of every step.
func sameRing(t *rapid.T, what string, c Circular, want func(k int) bool) {
	total := 0
	for k := range steps {
		for _, x := range []float64{float64(k) / steps, (float64(k) + 0.999) / steps, float64(k)/steps - 3} {
			if c.Contains(x) != want(k) {
				t.Fatalf("%s: %v contains %v: got %v", what, c.Arcs(), x, !want(k))
			}
		}
		if want(k) {
			total++
		}
	}
	if c.Total() != float64(total)/steps || c.IsFull() != (total == steps) || c.Empty() != (total == 0) {
		t.Fatalf("%s: %v: total %v, want %d steps", what, c.Arcs(), c.Total(), total)
	}
	sum := 0.0
	for _, a := range c.Arcs() {
		if sum += a.Length(); a.Lo < 0 || a.Lo >= 1 || a.Hi > a.Lo+1 {
			t.Fatalf("%s: arc %v out of range", what, a)
		}
	}
	if sum != c.Total() {
		t.Fatalf("%s: arcs %v do not add up to %v", what, c.Arcs(), c.Total())
	}
}

func TestCircularAgainstRings(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		a, ra := drawRing(t, "arcs of a")
		b, rb := drawRing(t, "arcs of b")
		sameRing(t, "itself", a, func(k int) bool { return ra[k] })
		sameRing(t, "union", a.Union(b), func(k int) bool { return ra[k] || rb[k] })
		sameRing(t, "intersect", a.Intersect(b), func(k int) bool { return ra[k] && rb[k] })
		sameRing(t, "subtract", a.Subtract(b), func(k int) bool { return ra[k] && !rb[k] })
		sameRing(t, "complement", a.Complement(), func(k int) bool { return !ra[k] })
		by := rapid.IntRange(-100, 100).Draw(t, "by")
		sameRing(t, "rotate", a.Rotate(float64(by)/steps), func(k int) bool { return ra[((k-by)%steps+steps)%steps] })
		if !a.Rotate(0.5).Rotate(-0.5).Equal(a) {
			t.Fatalf("half a turn and back changed %v", a.Arcs())
		}
	})
}

func TestUnrollAgainstRings(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		c, r := drawRing(t, "arcs")
		lo := rapid.IntRange(-3*steps, 3*steps).Draw(t, "lo")
		hi := lo + rapid.IntRange(0, 3*steps).Draw(t, "span")
		line := c.Unroll(float64(lo)/steps, float64(hi)/steps)
		for k := lo - steps; k < hi+steps; k++ {
			want := lo <= k && k < hi && r[(k%steps+steps)%steps]
			if line.Contains((float64(k)+0.5)/steps) != want {
				t.Fatalf("%v unrolled over [%d,%d)/%d is %v: wrong at %d", c.Arcs(), lo, hi, steps, line.Intervals(), k)
			}
		}
	})
}
