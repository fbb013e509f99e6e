package verify

import (
	"math"
	"testing"

	"cadencewright/astro/orbit"
	"cadencewright/scheduler"

	"pgregory.net/rapid"
)

// Passages must begin and end at the window's phases, worked out instant by
// instant.
func TestPassagesBeginAndEndAtTheirPhases(t *testing.T) {
	c := tiny(t)
	m := unitsOf(t, c)
	for _, p := range c.PhaseGoals {
		s := m.sources[p.Source]
		e, err := elements(s.Binary)
		if err != nil {
			t.Fatal(err)
		}
		ref, err := orbit.ParseReference(string(p.Reference))
		if err != nil {
			t.Fatal(err)
		}
		for i, w := range p.Windows {
			u := m.byName[p.ID+"@"+string(rune('0'+i))]
			if want := 10 / s.Binary.PbD; math.Abs(float64(len(u.passages))-want) > 2 {
				t.Errorf("%s: %d passages, expected about %g", u.name, len(u.passages), want)
			}
			for _, q := range u.passages {
				for _, edge := range []struct {
					at    msec
					phase float64
				}{{q.enter, w.From}, {q.leave, w.To}} {
					n, err := e.Turns(ref, s.star, edge.at.time())
					if err != nil {
						t.Fatal(err)
					}
					if off := math.Abs(n - float64(q.orbit) - edge.phase); off*s.Binary.PbD*86400 > 0.01 {
						t.Errorf("%s orbit %d: %g turns off at %s", u.name, q.orbit, off, at(edge.at))
					}
				}
			}
		}
	}
}

func TestCoveredBy(t *testing.T) {
	p := passage{enter: 100 * minute, leave: 130 * minute}
	for _, x := range []struct {
		name              string
		start, end, dwell float64
		slack             msec
		want              bool
	}{
		{"long enough at the start", 80, 120, 20, 0, true},
		{"too short at the start", 80, 119, 20, 0, false},
		{"short within the slack", 80, 119, 20, minute, true},
		{"long enough at the end", 110, 170, 20, 0, true},
		{"inside", 105, 125, 20, 0, true},
		{"the passage is shorter than the dwell", 90, 140, 60, 0, true},
		{"not all of a passage shorter than the dwell", 101, 140, 60, 0, false},
		{"before", 50, 90, 1, 0, false},
		{"after", 140, 150, 1, 0, false},
	} {
		start, end := lengthOf(x.start, minute), lengthOf(x.end, minute)
		if got := p.coveredBy(start, end, lengthOf(x.dwell, minute), x.slack); got != x.want {
			t.Errorf("%s: %v", x.name, got)
		}
	}
}

// The history takes orbits off what is wanted of a window.
func TestPhaseUnitsAndHistory(t *testing.T) {
	c := tiny(t)
	c.Start = after(-240)
	var inside []passage
	{
		m, err := newModel(c, scheduler.Horizon{From: after(-240), To: c.End})
		if err != nil {
			t.Fatal(err)
		}
		for _, p := range m.byName["con@1"].passages {
			if p.leave < instantOf(monday)-hour && p.enter > instantOf(c.Start)+hour {
				inside = append(inside, p)
			}
		}
	}
	if len(inside) < 5 {
		t.Fatalf("only %d passages before the horizon", len(inside))
	}
	in := func(p passage, offset, minutes float64) scheduler.HistoryScan {
		return scheduler.HistoryScan{Source: c.Sources[2].Name, Telescope: "ALT", Receiver: "L", Counted: true,
			Start: (p.enter + lengthOf(offset, minute)).time(), Minutes: minutes}
	}
	not := func(h scheduler.HistoryScan) scheduler.HistoryScan { h.Counted = false; return h }
	for _, x := range []struct {
		name    string
		history []scheduler.HistoryScan
		times   int // of 3 needed and at most 3 in a horizon
		value   float64
	}{
		{"nothing had", nil, 3, 1},
		{"one orbit", []scheduler.HistoryScan{in(inside[0], 10, 30)}, 2, 2. / 3},
		{"one orbit twice", []scheduler.HistoryScan{in(inside[0], 10, 30), in(inside[0], 60, 30)}, 2, 2. / 3},
		{"two orbits", []scheduler.HistoryScan{in(inside[0], 10, 30), in(inside[3], 10, 30)}, 1, 1. / 3},
		{"too short", []scheduler.HistoryScan{in(inside[0], 10, 19)}, 3, 1},
		{"hardly inside", []scheduler.HistoryScan{in(inside[0], -20, 30)}, 3, 1},
		{"not counted", []scheduler.HistoryScan{not(in(inside[0], 10, 30))}, 3, 1},
		{"all", []scheduler.HistoryScan{in(inside[0], 10, 30), in(inside[1], 10, 30), in(inside[2], 10, 30)}, 0, 0},
		{"more than all", []scheduler.HistoryScan{in(inside[0], 10, 30), in(inside[1], 10, 30), in(inside[2], 10, 30), in(inside[4], 10, 30)}, 0, 0},
	} {
		t.Run(x.name, func(t *testing.T) {
			c := *c
			c.History = x.history
			m, err := newModel(&c, scheduler.Horizon{From: monday, To: c.End})
			if err != nil {
				t.Fatal(err)
			}
			u := m.byName["con@1"]
			if u == nil {
				if x.times != 0 {
					t.Fatal("no unit")
				}
				return
			}
			if u.times != x.times || math.Abs(u.value-x.value) > 1e-12 || math.Abs(u.weight-float64(x.times)*x.value) > 1e-12 {
				t.Errorf("%d times %g, weight %g; want %d times %g", u.times, u.value, u.weight, x.times, x.value)
			}
			for _, p := range u.passages {
				if p.leave <= m.from {
					t.Errorf("a passage before the horizon: orbit %d", p.orbit)
				}
			}
		})
	}
}

// A scan that runs on from the history into the horizon has its orbit, too.
func TestOrbitHadAcrossTheStart(t *testing.T) {
	c := tiny(t)
	m := unitsOf(t, c)
	first := m.byName["con@0"].passages[0]
	from := first.enter + (first.leave-first.enter)/2 // a horizon that starts inside it
	c.Start = after(-240)
	c.History = []scheduler.HistoryScan{{Source: c.Sources[2].Name, Telescope: "ALT", Receiver: "L", Counted: true,
		Start: (from - 10*minute).time(), Minutes: 25}}
	m, err := newModel(c, scheduler.Horizon{From: from.time(), To: c.End})
	if err != nil {
		t.Fatal(err)
	}
	u := m.byName["con@0"]
	if u.times != 3 || math.Abs(u.value-0.75) > 1e-12 {
		t.Errorf("%d times %g: the orbit under way is not counted", u.times, u.value)
	}
	for _, p := range u.passages {
		if p.orbit == first.orbit {
			t.Error("the orbit under way is still open")
		}
	}
}

// matched must be the largest matching: tried out over all assignments.
func TestMatched(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		passages := rapid.IntRange(1, 5).Draw(t, "passages")
		reach := make([][]int, rapid.IntRange(0, 5).Draw(t, "scans"))
		for i := range reach {
			for j := range passages {
				if rapid.Bool().Draw(t, "reaches") {
					reach[i] = append(reach[i], j)
				}
			}
		}
		var try func(i, used int) int
		try = func(i, used int) int {
			if i == len(reach) {
				return 0
			}
			best := try(i+1, used)
			for _, j := range reach[i] {
				if used&(1<<j) == 0 {
					best = max(best, 1+try(i+1, used|1<<j))
				}
			}
			return best
		}
		if got, want := matched(reach, passages), try(0, 0); got != want {
			t.Fatalf("%v: %d, want %d", reach, got, want)
		}
	})
}
