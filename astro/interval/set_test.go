package interval

import (
	"math"
	"slices"
	"testing"

	"pgregory.net/rapid"
)

// iv is short for an interval of integers.
func iv(lo, hi int) Interval[int] { return Interval[int]{Lo: lo, Hi: hi} }

func TestIntervalIsHalfOpen(t *testing.T) {
	i := iv(3, 7)
	for x, want := range map[int]bool{2: false, 3: true, 6: true, 7: false} {
		if got := i.Contains(x); got != want {
			t.Errorf("[3,7) contains %d: got %v, want %v", x, got, want)
		}
	}
	for _, e := range []Interval[int]{{}, iv(5, 5), iv(6, 5)} {
		if !e.Empty() || e.Length() != 0 || e.Contains(5) {
			t.Errorf("%v should be empty, of length 0 and hold nothing", e)
		}
	}
	nan := Interval[float64]{Lo: math.NaN(), Hi: 1}
	if !nan.Empty() || nan.Length() != 0 {
		t.Error("an interval from NaN should be empty")
	}
}

func TestNewJoinsWhatTouches(t *testing.T) {
	tests := []struct {
		name string
		in   []Interval[int]
		want []Interval[int]
	}{
		{"nothing", nil, nil},
		{"only empty ones", []Interval[int]{iv(1, 1), iv(4, 2)}, nil},
		{"touching", []Interval[int]{iv(5, 8), iv(1, 5)}, []Interval[int]{iv(1, 8)}},
		{"overlapping", []Interval[int]{iv(1, 6), iv(4, 9)}, []Interval[int]{iv(1, 9)}},
		{"one inside another", []Interval[int]{iv(1, 9), iv(3, 4), iv(8, 9)}, []Interval[int]{iv(1, 9)}},
		{"apart and unsorted", []Interval[int]{iv(7, 9), iv(1, 2)}, []Interval[int]{iv(1, 2), iv(7, 9)}},
		{"twice the same", []Interval[int]{iv(1, 2), iv(1, 2)}, []Interval[int]{iv(1, 2)}},
	}
	for _, tt := range tests {
		t.Run(tt.name, func(t *testing.T) {
			before := slices.Clone(tt.in)
			if got := New(tt.in...).Intervals(); !slices.Equal(got, tt.want) {
				t.Errorf("got %v, want %v", got, tt.want)
			}
			if !slices.Equal(before, tt.in) {
				t.Errorf("the argument was changed to %v", tt.in)
			}
		})
	}
}

func TestMeasures(t *testing.T) {
	s := New(iv(0, 2), iv(10, 15), iv(20, 25))
	if got := s.Total(); got != 12 {
		t.Errorf("Total: got %d, want 12", got)
	}
	if got := s.Longest(); got != iv(10, 15) {
		t.Errorf("Longest: got %v, want the earlier of two equals", got)
	}
	if got := s.Hull(); got != iv(0, 25) {
		t.Errorf("Hull: got %v", got)
	}
	if s.Len() != 3 || s.At(1) != iv(10, 15) {
		t.Errorf("Len, At: got %d, %v", s.Len(), s.At(1))
	}
	var none Set[int]
	if !none.Empty() || none.Total() != 0 || !none.Longest().Empty() || !none.Hull().Empty() {
		t.Error("the zero set should be empty in every measure")
	}
}

func TestCovers(t *testing.T) {
	s := New(iv(0, 5), iv(8, 12))
	tests := []struct {
		i    Interval[int]
		want bool
	}{
		{iv(0, 5), true}, {iv(1, 4), true}, {iv(8, 12), true}, {iv(9, 9), true}, {iv(100, 90), true},
		{iv(4, 9), false}, {iv(5, 8), false}, {iv(-1, 2), false}, {iv(11, 13), false}, {iv(20, 21), false},
	}
	for _, tt := range tests {
		if got := s.Covers(tt.i); got != tt.want {
			t.Errorf("%v covers %v: got %v, want %v", s.Intervals(), tt.i, got, tt.want)
		}
	}
}

func TestTrimGrowsAndJoins(t *testing.T) {
	s := New(iv(0, 5), iv(8, 12))
	if got, want := s.Trim(1, 3), New(iv(1, 2)); !got.Equal(want) {
		t.Errorf("Trim(1, 3): got %v, want %v", got.Intervals(), want.Intervals())
	}
	if got, want := s.Trim(-2, -2), New(iv(-2, 14)); !got.Equal(want) {
		t.Errorf("Trim(-2, -2): got %v, want %v", got.Intervals(), want.Intervals())
	}
	if got, want := s.AtLeast(5), New(iv(0, 5)); !got.Equal(want) {
		t.Errorf("AtLeast(5): got %v, want %v", got.Intervals(), want.Intervals())
	}
}

// The brute force: a set is a table of which of the integers 0..size-1 it
// holds.
const size = 40

type table [size]bool

func draw(t *rapid.T, label string) (Set[int], table) {
	pairs := rapid.SliceOfN(rapid.SliceOfN(rapid.IntRange(0, size), 2, 2), 0, 6).Draw(t, label)
	var in []Interval[int]
	var tab table
	for _, p := range pairs {
		in = append(in, iv(p[0], p[1]))
		for x := p[0]; x < p[1]; x++ {
			tab[x] = true
		}
	}
	return New(in...), tab
}

// same fails unless s is in its canonical form and holds exactly what the
// table says.
func same(t *rapid.T, what string, s Set[int], want func(x int) bool) {
	for i := range s.Len() {
		if s.At(i).Empty() || (i > 0 && s.At(i).Lo <= s.At(i-1).Hi) {
			t.Fatalf("%s: %v is not canonical", what, s.Intervals())
		}
	}
	total := 0
	for x := range size {
		if s.Contains(x) != want(x) {
			t.Fatalf("%s: %v: contains %d is %v", what, s.Intervals(), x, s.Contains(x))
		}
		if want(x) {
			total++
		}
	}
	if s.Total() != total || s.Contains(-1) || s.Contains(size) {
		t.Fatalf("%s: %v: total %d, want %d, inside [0,%d)", what, s.Intervals(), s.Total(), total, size)
	}
}

func TestAlgebraAgainstTables(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		a, ta := draw(t, "a")
		b, tb := draw(t, "b")
		lo, hi := rapid.IntRange(0, size).Draw(t, "lo"), rapid.IntRange(0, size).Draw(t, "hi")
		before := a.Intervals()
		same(t, "itself", a, func(x int) bool { return ta[x] })
		same(t, "union", a.Union(b), func(x int) bool { return ta[x] || tb[x] })
		same(t, "intersect", a.Intersect(b), func(x int) bool { return ta[x] && tb[x] })
		same(t, "subtract", a.Subtract(b), func(x int) bool { return ta[x] && !tb[x] })
		same(t, "clip", a.Clip(lo, hi), func(x int) bool { return ta[x] && lo <= x && x < hi })
		same(t, "gaps", a.Gaps(lo, hi), func(x int) bool { return !ta[x] && lo <= x && x < hi })
		if !slices.Equal(before, a.Intervals()) {
			t.Fatalf("an operation changed its operand from %v to %v", before, a.Intervals())
		}
		covered := true
		for x := lo; x < hi; x++ {
			covered = covered && ta[x]
		}
		if a.Covers(iv(lo, hi)) != covered {
			t.Fatalf("%v covers [%d,%d): got %v", a.Intervals(), lo, hi, !covered)
		}
	})
}

func TestShiftAndTrimAgainstTables(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		a, ta := draw(t, "a")
		d := rapid.IntRange(-50, 50).Draw(t, "d")
		if back := a.Shift(d).Shift(-d); !back.Equal(a) {
			t.Fatalf("%v shifted by %d and back is %v", a.Intervals(), d, back.Intervals())
		}
		// A start is good when the whole scan lies in the set.
		length := rapid.IntRange(1, 10).Draw(t, "length")
		starts := a.Trim(0, length-1)
		same(t, "starts", starts, func(x int) bool {
			for k := x; k < x+length; k++ {
				if k >= size || !ta[k] {
					return false
				}
			}
			return true
		})
	})
}
