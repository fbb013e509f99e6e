package verify

import (
	"testing"

	"pgregory.net/rapid"
)

// drawRuns draws a set of instants between 0 and 100 or so.
func drawRuns(t *rapid.T) runs {
	var list []run
	for range rapid.IntRange(0, 6).Draw(t, "runs") {
		lo := rapid.Int64Range(0, 100).Draw(t, "lo")
		list = append(list, run{lo, lo + rapid.Int64Range(-2, 12).Draw(t, "length")})
	}
	return unite(list)
}

// members are the instants of a set one by one.
func members(s []run) map[int64]bool {
	in := map[int64]bool{}
	for _, r := range s {
		for x := r.lo; x <= r.hi; x++ {
			in[x] = true
		}
	}
	return in
}

func TestUnite(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		var list []run
		for range rapid.IntRange(0, 8).Draw(t, "runs") {
			lo := rapid.Int64Range(-50, 50).Draw(t, "lo")
			list = append(list, run{lo, lo + rapid.Int64Range(-3, 20).Draw(t, "length")})
		}
		want := members(list)
		got := unite(append([]run(nil), list...))
		for i, r := range got {
			if r.lo > r.hi || i > 0 && r.lo <= got[i-1].hi+1 {
				t.Fatalf("%v is not in order and apart", got)
			}
		}
		if in := members(got); len(in) != len(want) {
			t.Fatalf("%v of %v", got, list)
		} else {
			for x := range want {
				if !in[x] {
					t.Fatalf("%d is missing from %v", x, got)
				}
			}
		}
	})
}

func TestSearchInRuns(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		s := drawRuns(t)
		in := members(s)
		x := rapid.Int64Range(-5, 120).Draw(t, "x")
		hi := x + rapid.Int64Range(-3, 30).Draw(t, "span")

		want, found := x, false
		for ; want <= 130 && !found; want++ {
			found = in[want]
		}
		if got, ok := s.atOrAfter(x); ok != found || ok && got != want-1 {
			t.Fatalf("after %d in %v: %d %v", x, s, got, ok)
		}
		want, found = x, false
		for ; want >= -10 && !found; want-- {
			found = in[want]
		}
		if got, ok := s.atOrBefore(x); ok != found || ok && got != want+1 {
			t.Fatalf("before %d in %v: %d %v", x, s, got, ok)
		}
		inside := members(s.within(x, hi))
		for y := int64(-10); y < 150; y++ {
			if inside[y] != (in[y] && y >= x && y <= hi) {
				t.Fatalf("%d within [%d, %d] of %v: %v", y, x, hi, s, inside[y])
			}
		}
		if got := s.meets(x, hi); got != (len(inside) > 0) {
			t.Fatalf("meets [%d, %d] of %v: %v", x, hi, s, got)
		}
	})
}

func TestAtLeast(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		var sets []runs
		for range rapid.IntRange(0, 5).Draw(t, "sets") {
			sets = append(sets, drawRuns(t))
		}
		n := rapid.IntRange(1, 4).Draw(t, "n")
		got := members(atLeast(sets, n))
		for x := int64(-5); x < 150; x++ {
			count := 0
			for _, s := range sets {
				if members(s)[x] {
					count++
				}
			}
			if got[x] != (count >= n) {
				t.Fatalf("%d lies in %d of %v: %v", x, count, sets, got[x])
			}
		}
	})
}

func TestDivision(t *testing.T) {
	for _, x := range []struct {
		a, b       msec
		down, upto int64
	}{{10, 5, 2, 2}, {11, 5, 2, 3}, {-10, 5, -2, -2}, {-11, 5, -3, -2}, {0, 5, 0, 0}, {4, 5, 0, 1}, {-4, 5, -1, 0}} {
		if floorDiv(x.a, x.b) != x.down || ceilDiv(x.a, x.b) != x.upto {
			t.Errorf("%d/%d: %d and %d, want %d and %d", x.a, x.b, floorDiv(x.a, x.b), ceilDiv(x.a, x.b), x.down, x.upto)
		}
	}
}

func TestInstantsInWords(t *testing.T) {
	start := instantOf(monday)
	for _, x := range []struct {
		at   msec
		want string
	}{
		{start, "2027-01-18 00:00 UTC"},
		{start + 30*second, "2027-01-18 00:00:30 UTC"},
		{start + 7*hour + 5*minute + 1, "2027-01-18 07:05:00.001 UTC"},
	} {
		if got := at(x.at); got != x.want {
			t.Errorf("%q, want %q", got, x.want)
		}
	}
	if got := lengthOf(1.5, minute); got != 90*second {
		t.Errorf("a minute and a half is %d ms", got)
	}
	if lengthOf(1e300, day) <= 0 || lengthOf(-1e300, day) >= 0 {
		t.Error("lengths out of all proportion overflow")
	}
}
