package interval

// Union holds what is in s, in o or in both.
func (s Set[T]) Union(o Set[T]) Set[T] {
	merged := make([]Interval[T], 0, len(s.parts)+len(o.parts))
	a, b := s.parts, o.parts
	for len(a) > 0 || len(b) > 0 {
		if len(b) == 0 || (len(a) > 0 && a[0].Lo <= b[0].Lo) {
			merged, a = append(merged, a[0]), a[1:]
		} else {
			merged, b = append(merged, b[0]), b[1:]
		}
	}
	return joined(merged)
}

// Intersect holds what is in both s and o.
func (s Set[T]) Intersect(o Set[T]) Set[T] {
	var shared []Interval[T]
	a, b := s.parts, o.parts
	for len(a) > 0 && len(b) > 0 {
		if i := a[0].Intersect(b[0]); !i.Empty() {
			shared = append(shared, i)
		}
		// Whichever ends first cannot meet anything later.
		if a[0].Hi < b[0].Hi {
			a = a[1:]
		} else {
			b = b[1:]
		}
	}
	return Set[T]{parts: shared}
}

// Subtract holds what is in s but not in o.
func (s Set[T]) Subtract(o Set[T]) Set[T] {
	var left []Interval[T]
	b := o.parts
	for _, i := range s.parts {
		for len(b) > 0 && b[0].Hi <= i.Lo {
			b = b[1:]
		}
		// Cut i by every part of o that reaches into it. The last of them
		// may reach into the next interval too, so it is kept.
		for k := 0; k < len(b) && b[k].Lo < i.Hi; k++ {
			if i.Lo < b[k].Lo {
				left = append(left, Interval[T]{Lo: i.Lo, Hi: b[k].Lo})
			}
			i.Lo = b[k].Hi
		}
		if !i.Empty() {
			left = append(left, i)
		}
	}
	return Set[T]{parts: left}
}

// Clip is the part of s inside [lo, hi).
func (s Set[T]) Clip(lo, hi T) Set[T] { return s.Intersect(Between(lo, hi)) }

// Gaps is the part of [lo, hi) that is not in s.
func (s Set[T]) Gaps(lo, hi T) Set[T] { return Between(lo, hi).Subtract(s) }

// Shift moves every interval by d.
func (s Set[T]) Shift(d T) Set[T] {
	moved := make([]Interval[T], 0, len(s.parts))
	for _, i := range s.parts {
		// In floating point a short interval far from 0 may round away.
		if m := (Interval[T]{Lo: i.Lo + d, Hi: i.Hi + d}); !m.Empty() {
			moved = append(moved, m)
		}
	}
	return joined(moved)
}

// Trim moves the start of every interval later by fromLo and its end earlier
// by fromHi, both counted positive inwards; negative values lengthen the
// intervals, which may join. Intervals with nothing left go.
//
// Trimming the end by a scan's length gives the starts that keep the whole
// scan inside one interval, apart from the latest of them: a scan may end
// exactly at Hi, so a start at Hi - length is good as well.
func (s Set[T]) Trim(fromLo, fromHi T) Set[T] {
	kept := make([]Interval[T], 0, len(s.parts))
	for _, i := range s.parts {
		if m := (Interval[T]{Lo: i.Lo + fromLo, Hi: i.Hi - fromHi}); !m.Empty() {
			kept = append(kept, m)
		}
	}
	return joined(kept)
}

// AtLeast drops the intervals that are shorter than length.
func (s Set[T]) AtLeast(length T) Set[T] {
	var kept []Interval[T]
	for _, i := range s.parts {
		if i.Length() >= length {
			kept = append(kept, i)
		}
	}
	return Set[T]{parts: kept}
}
