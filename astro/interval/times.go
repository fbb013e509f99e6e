package interval

import "time"

// Span is a stretch of time [Start, End), empty unless Start is before End.
type Span struct {
	Start, End time.Time
}

// Duration is End - Start, 0 for an empty span.
func (s Span) Duration() time.Duration { return max(0, s.End.Sub(s.Start)) }

// Times is a set of stretches of time, exact to the nanosecond, between the
// years 1678 and 2262 (the range of time.Time.UnixNano; instants outside are
// moved to its ends). Its results are UTC. The zero value is the empty set.
type Times struct {
	set Set[int64]
}

// The range of UnixNano.
var (
	firstInstant = time.Unix(0, -1<<63).UTC()
	lastInstant  = time.Unix(0, 1<<63-1).UTC()
)

// nanos is t in nanoseconds since 1970, clamped to what int64 can hold.
func nanos(t time.Time) int64 {
	switch {
	case t.Before(firstInstant):
		return -1 << 63
	case t.After(lastInstant):
		return 1<<63 - 1
	}
	return t.UnixNano()
}

func instant(nanos int64) time.Time { return time.Unix(0, nanos).UTC() }

// NewTimes is the union of the given spans, in any order; they may be empty,
// touch or overlap.
func NewTimes(spans ...Span) Times {
	in := make([]Interval[int64], len(spans))
	for i, s := range spans {
		in[i] = Interval[int64]{Lo: nanos(s.Start), Hi: nanos(s.End)}
	}
	return Times{set: New(in...)}
}

// Until is the set of the single span [start, end).
func Until(start, end time.Time) Times { return NewTimes(Span{Start: start, End: end}) }

// Empty reports whether the set holds no instant.
func (t Times) Empty() bool { return t.set.Empty() }

// Len is the number of separate spans.
func (t Times) Len() int { return t.set.Len() }

// Spans are the separate spans, in time order.
func (t Times) Spans() []Span {
	out := make([]Span, 0, t.set.Len())
	for i := range t.set.All() {
		out = append(out, Span{Start: instant(i.Lo), End: instant(i.Hi)})
	}
	return out
}

// Total is the summed duration; it saturates at 292 years.
func (t Times) Total() time.Duration {
	var sum time.Duration
	for _, s := range t.Spans() {
		if sum += s.Duration(); sum < 0 {
			return 1<<63 - 1
		}
	}
	return sum
}

// Longest is the longest span, the earliest of equals; an empty set gives the
// zero Span.
func (t Times) Longest() Span {
	var best Span
	for _, s := range t.Spans() {
		if s.Duration() > best.Duration() {
			best = s
		}
	}
	return best
}

// Contains reports whether the instant lies in the set.
func (t Times) Contains(at time.Time) bool { return t.set.Contains(nanos(at)) }

// Covers reports whether the whole of the span lies in the set.
func (t Times) Covers(s Span) bool {
	return t.set.Covers(Interval[int64]{Lo: nanos(s.Start), Hi: nanos(s.End)})
}

// Equal reports whether both sets hold the same instants.
func (t Times) Equal(o Times) bool { return t.set.Equal(o.set) }

// Union holds what is in t, in o or in both.
func (t Times) Union(o Times) Times { return Times{t.set.Union(o.set)} }

// Intersect holds what is in both t and o.
func (t Times) Intersect(o Times) Times { return Times{t.set.Intersect(o.set)} }

// Subtract holds what is in t but not in o.
func (t Times) Subtract(o Times) Times { return Times{t.set.Subtract(o.set)} }

// Clip is the part of t inside [start, end).
func (t Times) Clip(start, end time.Time) Times { return t.Intersect(Until(start, end)) }

// Gaps is the part of [start, end) that is not in t.
func (t Times) Gaps(start, end time.Time) Times { return Until(start, end).Subtract(t) }

// Trim moves the start of every span later by fromStart and its end earlier
// by fromEnd, both counted positive inwards (see Set.Trim).
func (t Times) Trim(fromStart, fromEnd time.Duration) Times {
	return Times{t.set.Trim(int64(fromStart), int64(fromEnd))}
}

// AtLeast drops the spans that are shorter than d.
func (t Times) AtLeast(d time.Duration) Times { return Times{t.set.AtLeast(int64(d))} }
