package interval

import (
	"slices"
	"testing"
	"time"

	"pgregory.net/rapid"
)

var noon = time.Date(2027, 1, 18, 12, 0, 0, 0, time.UTC)

func minutes(from, to int) Span {
	return Span{Start: noon.Add(time.Duration(from) * time.Minute), End: noon.Add(time.Duration(to) * time.Minute)}
}

func TestTimesBlockWithALostPart(t *testing.T) {
	block := NewTimes(minutes(0, 240))
	lost := NewTimes(minutes(60, 90), minutes(200, 300))
	usable := block.Subtract(lost)
	if want := []Span{minutes(0, 60), minutes(90, 200)}; !slices.Equal(usable.Spans(), want) {
		t.Fatalf("usable: got %v, want %v", usable.Spans(), want)
	}
	if got, want := usable.Total(), 170*time.Minute; got != want {
		t.Errorf("Total: got %v, want %v", got, want)
	}
	if got := usable.Longest(); got != minutes(90, 200) {
		t.Errorf("Longest: got %v", got)
	}
	if !usable.Covers(minutes(100, 200)) || usable.Covers(minutes(50, 70)) {
		t.Error("Covers disagrees with the spans")
	}
	if usable.Contains(noon.Add(time.Hour)) || !usable.Contains(noon.Add(90*time.Minute)) {
		t.Error("an end belongs to the set, or a start does not")
	}
	if got := usable.AtLeast(61 * time.Minute).Len(); got != 1 {
		t.Errorf("AtLeast(61 min): got %d spans, want 1", got)
	}
	if got, want := usable.Gaps(noon, noon.Add(4*time.Hour)), lost.Clip(noon, noon.Add(4*time.Hour)); !got.Equal(want) {
		t.Errorf("Gaps: got %v, want %v", got.Spans(), want.Spans())
	}
}

func TestTimesReadAnyZoneAndGiveUTC(t *testing.T) {
	zone := time.FixedZone("ahead", 9*3600)
	local := Span{Start: noon.In(zone), End: noon.Add(time.Hour).In(zone)}
	got := NewTimes(local).Spans()
	if want := []Span{minutes(0, 60)}; !slices.Equal(got, want) {
		t.Errorf("got %v, want %v", got, want)
	}
}

func TestTimesFarOutAreClamped(t *testing.T) {
	all := Until(time.Date(1, 1, 1, 0, 0, 0, 0, time.UTC), time.Date(9999, 1, 1, 0, 0, 0, 0, time.UTC))
	if all.Len() != 1 || !all.Contains(noon) {
		t.Errorf("a span of ten thousand years should hold the present, got %v", all.Spans())
	}
	if all.Total() < 290*365*24*time.Hour {
		t.Errorf("Total: got %v, want it to saturate", all.Total())
	}
	if got := Until(noon, time.Date(9999, 1, 1, 0, 0, 0, 0, time.UTC)); !got.Contains(noon) || got.Contains(noon.Add(-1)) {
		t.Errorf("got %v", got.Spans())
	}
}

func TestTimesFollowTheSetAlgebra(t *testing.T) {
	drawTimes := func(t *rapid.T, label string) (Times, Set[int]) {
		s, _ := draw(t, label)
		var spans []Span
		for i := range s.All() {
			spans = append(spans, minutes(i.Lo, i.Hi))
		}
		return NewTimes(spans...), s
	}
	back := func(ts Times) Set[int] {
		var in []Interval[int]
		for _, s := range ts.Spans() {
			in = append(in, iv(int(s.Start.Sub(noon).Minutes()), int(s.End.Sub(noon).Minutes())))
		}
		return New(in...)
	}
	rapid.Check(t, func(t *rapid.T) {
		a, sa := drawTimes(t, "a")
		b, sb := drawTimes(t, "b")
		for name, pair := range map[string][2]Set[int]{
			"union":     {back(a.Union(b)), sa.Union(sb)},
			"intersect": {back(a.Intersect(b)), sa.Intersect(sb)},
			"subtract":  {back(a.Subtract(b)), sa.Subtract(sb)},
			"trim":      {back(a.Trim(time.Minute, 2*time.Minute)), sa.Trim(1, 2)},
		} {
			if !pair[0].Equal(pair[1]) {
				t.Fatalf("%s: got %v, want %v", name, pair[0].Intervals(), pair[1].Intervals())
			}
		}
		if got, want := a.Total(), time.Duration(sa.Total())*time.Minute; got != want {
			t.Fatalf("total: got %v, want %v", got, want)
		}
	})
}
