package interval

import (
	"iter"
	"slices"
	"sort"
)

// Number is what intervals can be made of. Integer types must leave room:
// lengths are computed as Hi - Lo and must not overflow.
type Number interface {
	~int | ~int64 | ~float64
}

// Interval is [Lo, Hi): Lo belongs to it, Hi does not. It is empty unless
// Lo < Hi, so NaN at either end makes it empty.
type Interval[T Number] struct {
	Lo, Hi T
}

// Empty reports whether no number lies in the interval.
func (i Interval[T]) Empty() bool {
	holds := i.Lo < i.Hi // not Lo >= Hi, which is false for NaN
	return !holds
}

// Length is Hi - Lo, 0 for an empty interval.
func (i Interval[T]) Length() T {
	if i.Empty() {
		return 0
	}
	return i.Hi - i.Lo
}

// Contains reports whether Lo <= x < Hi.
func (i Interval[T]) Contains(x T) bool { return i.Lo <= x && x < i.Hi }

// Intersect is the part that i and j share; it may be empty.
func (i Interval[T]) Intersect(j Interval[T]) Interval[T] {
	return Interval[T]{Lo: max(i.Lo, j.Lo), Hi: min(i.Hi, j.Hi)}
}

// Set is a union of intervals on a line. Inside it they are ascending, not
// empty, and apart: neighbours that touch have been joined. The zero value is
// the empty set.
type Set[T Number] struct {
	parts []Interval[T]
}

// New is the union of the given intervals, in any order; they may be empty,
// touch or overlap.
func New[T Number](intervals ...Interval[T]) Set[T] {
	in := make([]Interval[T], 0, len(intervals))
	for _, i := range intervals {
		if !i.Empty() {
			in = append(in, i)
		}
	}
	slices.SortFunc(in, func(a, b Interval[T]) int {
		switch {
		case a.Lo < b.Lo:
			return -1
		case a.Lo > b.Lo:
			return 1
		}
		return 0
	})
	return joined(in)
}

// Between is the set of the single interval [lo, hi), empty unless lo < hi.
func Between[T Number](lo, hi T) Set[T] { return New(Interval[T]{Lo: lo, Hi: hi}) }

// joined makes a Set of ascending non-empty intervals, merging those that
// touch or overlap. It reuses the slice.
func joined[T Number](ascending []Interval[T]) Set[T] {
	out := ascending[:0]
	for _, i := range ascending {
		if n := len(out); n > 0 && i.Lo <= out[n-1].Hi {
			out[n-1].Hi = max(out[n-1].Hi, i.Hi)
			continue
		}
		out = append(out, i)
	}
	return Set[T]{parts: out}
}

// Empty reports whether the set holds no number.
func (s Set[T]) Empty() bool { return len(s.parts) == 0 }

// Len is the number of separate intervals.
func (s Set[T]) Len() int { return len(s.parts) }

// At is the i-th interval, 0 <= i < Len(), in ascending order.
func (s Set[T]) At(i int) Interval[T] { return s.parts[i] }

// All yields the separate intervals in ascending order.
func (s Set[T]) All() iter.Seq[Interval[T]] { return slices.Values(s.parts) }

// Intervals is a copy of the separate intervals in ascending order.
func (s Set[T]) Intervals() []Interval[T] { return slices.Clone(s.parts) }

// Total is the summed length of the intervals.
func (s Set[T]) Total() T {
	var sum T
	for _, i := range s.parts {
		sum += i.Hi - i.Lo
	}
	return sum
}

// Longest is the longest interval, the earliest of equals; an empty set gives
// an empty interval.
func (s Set[T]) Longest() Interval[T] {
	var best Interval[T]
	for _, i := range s.parts {
		if i.Length() > best.Length() {
			best = i
		}
	}
	return best
}

// Hull is the smallest interval that holds the whole set; empty for an empty
// set.
func (s Set[T]) Hull() Interval[T] {
	if s.Empty() {
		return Interval[T]{}
	}
	return Interval[T]{Lo: s.parts[0].Lo, Hi: s.parts[len(s.parts)-1].Hi}
}

// after is the index of the first interval that ends after x: the only one
// that can hold x, and the first that reaches beyond it.
func (s Set[T]) after(x T) int {
	return sort.Search(len(s.parts), func(i int) bool { return s.parts[i].Hi > x })
}

// Contains reports whether x lies in the set.
func (s Set[T]) Contains(x T) bool {
	i := s.after(x)
	return i < len(s.parts) && s.parts[i].Lo <= x
}

// Covers reports whether the whole of i lies in the set. An empty interval is
// covered by every set.
func (s Set[T]) Covers(i Interval[T]) bool {
	if i.Empty() {
		return true
	}
	k := s.after(i.Lo)
	return k < len(s.parts) && s.parts[k].Lo <= i.Lo && i.Hi <= s.parts[k].Hi
}

// Equal reports whether both sets hold the same numbers.
func (s Set[T]) Equal(o Set[T]) bool { return slices.Equal(s.parts, o.parts) }
