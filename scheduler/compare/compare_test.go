package compare_test

import (
	"testing"
	"time"

	"cadencewright/scheduler"
	"cadencewright/scheduler/compare"

	"pgregory.net/rapid"
)

var monday = time.Date(2027, 1, 18, 0, 0, 0, 0, time.UTC)

func scan(block, source string, hour, minutes int, earns ...scheduler.Earning) scheduler.Scan {
	return scheduler.Scan{Block: block, Telescope: "T", Source: source, Receiver: "L", Start: monday.Add(time.Duration(hour) * time.Hour),
		Minutes: minutes, Earns: earns}
}

func earn(unit string, value float64) scheduler.Earning {
	return scheduler.Earning{Goal: unit[:1], Unit: unit, Value: value}
}

func TestPlans(t *testing.T) {
	before := &scheduler.Plan{Score: 10, Scans: []scheduler.Scan{
		scan("a", "begun", 1, 30, earn("a#1", 2)),
		scan("a", "kept", 5, 30, earn("k#1", 1)),
		scan("b", "moved", 7, 30, earn("m#1", 3)),
		scan("b", "gone", 8, 30, earn("g#1", 2), earn("p#1", 1)),
		scan("c", "shared", 9, 30, earn("p#1", 1)),
	}}
	after := &scheduler.Plan{Score: 8.5, Scans: []scheduler.Scan{
		scan("a", "begun", 1, 30, earn("a#1", 2)),
		scan("a", "kept", 5, 30, earn("k#1", 1)),
		scan("b", "moved", 10, 60, earn("m#1", 2.5)),
		scan("c", "shared", 9, 30),
		scan("c", "new", 12, 30, earn("n#1", 3)),
	}}
	r := compare.Plans(before, after, monday.Add(2*time.Hour))
	if r.Begun != 1 || len(r.Kept) != 2 || len(r.Moved) != 1 || len(r.Dropped) != 1 || len(r.Added) != 1 || r.Later() != 4 || r.Score != -1.5 {
		t.Fatalf("report %+v", r)
	}
	if m := r.Moved[0]; m.Before.Minutes != 30 || m.After.Minutes != 60 || m.After.Start.Hour() != 10 {
		t.Errorf("moved %+v", m)
	}
	if r.Dropped[0].Source != "gone" || r.Added[0].Source != "new" {
		t.Errorf("dropped %v, added %v", r.Dropped, r.Added)
	}
	want := []compare.UnitChange{{"g", "g#1", 2, 0}, {"m", "m#1", 3, 2.5}, {"n", "n#1", 0, 3}, {"p", "p#1", 2, 0}}
	if len(r.Units) != len(want) {
		t.Fatalf("units %+v", r.Units)
	}
	for i, u := range r.Units {
		if u != want[i] {
			t.Errorf("unit %+v, want %+v", u, want[i])
		}
		if u.Lost() != (u.After == 0) || u.Gained() != (u.Before == 0) {
			t.Errorf("unit %+v: lost %v, gained %v", u, u.Lost(), u.Gained())
		}
	}
}

// Whatever two plans hold: every scan of both is told of exactly once, and a
// plan compared with itself has not changed.
func TestEveryScanOnce(t *testing.T) {
	draw := rapid.Custom(func(t *rapid.T) *scheduler.Plan {
		p := &scheduler.Plan{}
		for range rapid.IntRange(0, 12).Draw(t, "scans") {
			p.Scans = append(p.Scans, scan(rapid.SampledFrom([]string{"a", "b"}).Draw(t, "block"), rapid.SampledFrom([]string{"x", "y", "z"}).Draw(t, "source"),
				rapid.IntRange(0, 9).Draw(t, "hour"), 30, earn(rapid.SampledFrom([]string{"u#1", "v#1"}).Draw(t, "unit"), 1)))
		}
		return p
	})
	rapid.Check(t, func(t *rapid.T) {
		before, after := draw.Draw(t, "before"), draw.Draw(t, "after")
		r := compare.Plans(before, after, monday.Add(time.Duration(rapid.IntRange(0, 9).Draw(t, "at"))*time.Hour))
		if n := r.Begun + r.Later(); n != len(before.Scans) {
			t.Errorf("%d scans told of, %d were planned", n, len(before.Scans))
		}
		if n := r.Begun + len(r.Kept) + len(r.Moved) + len(r.Added); n != len(after.Scans) {
			t.Errorf("%d scans told of, %d are planned", n, len(after.Scans))
		}
		if r := compare.Plans(before, before, monday); len(r.Moved)+len(r.Dropped)+len(r.Added)+len(r.Units) != 0 {
			t.Errorf("a plan differs from itself: %+v", r)
		}
	})
}
