package units_test

import (
	"math"
	"testing"

	"cadencewright/scheduler"
	"cadencewright/scheduler/units"
)

// binary gives the source a circular orbit of two days that begins at the
// horizon's start (to the Roemer delay of 500 s), and a goal for its first
// quarter in four orbits.
func binary(perHorizon int, past ...had) *scheduler.Campaign {
	c := campaign(past...)
	c.Sources[0].Binary = &scheduler.Binary{Model: scheduler.BinaryKepler, PbD: 2, A1Ls: 1, T0MJD: 61423} // 2027-01-18
	c.PhaseGoals = []scheduler.PhaseGoal{{Goal: goal("L"), Reference: scheduler.RefPeriastron, DwellMin: 30, PerHorizon: perHorizon,
		Windows: []scheduler.PhaseWindow{{From: 0, To: 0.25, Need: 4}}}}
	return c
}

func TestPassages(t *testing.T) {
	s := build(t, binary(2), 7)
	u := s.Units[0]
	if u.N != 2 || u.Cap != 2 || u.Value != 2 || u.Weight != 4 || u.Name != "g@0" {
		t.Fatalf("unit %+v: want g@0 twice at 2", u)
	}
	if len(u.Passages) != 4 {
		t.Fatalf("%d passages in seven days of a two-day orbit, want 4", len(u.Passages))
	}
	for i, p := range u.Passages {
		// Light-time to the barycentre is at most 0.006 day.
		if enter := (p.Enter - s.From) / 1440; math.Abs(enter-2*float64(i)) > 0.007 {
			t.Errorf("passage %d is entered on day %.4f, want %d", i, enter, 2*i)
		}
		if long := p.Leave - p.Enter; math.Abs(long-720) > 2 {
			t.Errorf("passage %d takes %.2f min, want 720", i, long)
		}
	}
}

// Counted scans of one orbit count once, scans too short or outside not at all.
func TestPhaseCountsOrbits(t *testing.T) {
	for _, c := range []struct {
		name  string
		past  []had
		n     int
		value float64
	}{
		{"none", nil, 3, 2},
		{"one orbit", []had{{"A", "L", -1.9, 60}}, 3, 1.5},
		{"one orbit twice", []had{{"A", "L", -1.9, 60}, {"B", "L", -1.7, 60}}, 3, 1.5},
		{"two orbits", []had{{"A", "L", -1.9, 60}, {"B", "W", -3.9, 60}}, 2, 1},
		{"too short", []had{{"A", "L", -1.9, 29}}, 3, 2},
		{"out of the window", []had{{"A", "L", -1, 60}}, 3, 2},
		{"another band", []had{{"A", "S", -1.9, 60}}, 3, 2},
		{"before the campaign", []had{{"A", "L", -101.9, 60}}, 3, 2},
	} {
		u := build(t, binary(3, c.past...), 7).Units[0]
		if u.N != c.n || math.Abs(u.Value-c.value) > 1e-12 {
			t.Errorf("%s: %d units at %g, want %d at %g", c.name, u.N, u.Value, c.n, c.value)
		}
	}
	done := binary(3, had{"A", "L", -1.9, 60}, had{"A", "L", -3.9, 60}, had{"A", "L", -5.9, 60}, had{"A", "L", -7.9, 60})
	if s := build(t, done, 7); len(s.Units) != 0 || s.Possible != 0 {
		t.Errorf("%d units are left of a goal that is met", len(s.Units))
	}
}

func TestCovers(t *testing.T) {
	p := units.Passage{Enter: 100, Leave: 200}
	short := units.Passage{Enter: 100, Leave: 110}
	for _, c := range []struct {
		p          units.Passage
		start, end float64
		want       bool
	}{
		{p, 90, 130, true}, {p, 90, 129, false}, {p, 170, 300, true}, {p, 171, 300, false}, {p, 0, 300, true},
		{short, 90, 120, true}, {short, 101, 140, false},
	} {
		if got := c.p.Covers(c.start, c.end, 30); got != c.want {
			t.Errorf("[%g, %g) of %+v: %t", c.start, c.end, c.p, got)
		}
	}
}
