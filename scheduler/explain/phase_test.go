package explain

import (
	"math"
	"testing"
	"time"

	"cadencewright/scheduler"
	"cadencewright/scheduler/units"

	"pgregory.net/rapid"
)

// wantPhase makes the asked source a binary and asks for a window of a given
// width, in cycles, that is in its middle at an instant.
func wantPhase(t *testing.T, c *scheduler.Campaign, periodD float64, middle time.Time, width float64) *scheduler.PhaseGoal {
	t.Helper()
	c.Sources[0].Binary = &scheduler.Binary{Model: scheduler.BinaryELL1, PbD: periodD, A1Ls: 2, TascMJD: 61000, Eps1: 1e-5, Eps2: 2e-5}
	e, err := c.Sources[0].Binary.Elements()
	if err != nil {
		t.Fatal(err)
	}
	n, err := e.Turns(scheduler.RefNode.Point(), c.Sources[0].Star(), middle)
	if err != nil {
		t.Fatal(err)
	}
	from := n - width/2
	from -= math.Floor(from)
	c.PhaseGoals = []scheduler.PhaseGoal{{Goal: goalFor("orb", "L"), Reference: scheduler.RefNode, DwellMin: 20, PerHorizon: 1,
		Windows: []scheduler.PhaseWindow{{From: from, To: from + width, Need: 3}}}}
	return &c.PhaseGoals[0]
}

func TestWhyAPhaseUnitIsUnmet(t *testing.T) {
	const spare = 4 // hours into the campaign: within the block
	for _, x := range []struct {
		name   string
		change func(t *testing.T, c *scheduler.Campaign)
		scans  []scheduler.Scan
		code   scheduler.ReasonCode
		count  int
		says   []string
	}{
		{"room", func(t *testing.T, c *scheduler.Campaign) { wantPhase(t, c, 1, after(spare), 0.1) }, nil,
			Fits, 1, []string{"would earn 1.00"}},
		{"passage before the block", func(t *testing.T, c *scheduler.Campaign) {
			wantPhase(t, c, 7.1, after(10), 0.05)
			c.Blocks[0].Start, c.Blocks[0].End = after(24), after(31)
		}, nil, Phase, 1, []string{"No scan in 1 block is at phase", "from node for 20 min", "the nearest is the passage from 2027-01-18",
			"before the first scan that is possible in block b1 of ONE"}},
		{"passage after the block", func(t *testing.T, c *scheduler.Campaign) {
			wantPhase(t, c, 8.5, after(20), 0.05)
		}, nil, Phase, 1, []string{"after the last scan that is possible"}},
		{"too short in the window", func(t *testing.T, c *scheduler.Campaign) {
			g := wantPhase(t, c, 1, after(spare), 0.1)
			g.DwellMin = 50
		}, nil, Phase, 1, []string{"for 50 min: at best for 40 min of the passage", "for 40 min)"}},
		{"no passage this week", func(t *testing.T, c *scheduler.Campaign) {
			wantPhase(t, c, 60, after(300), 0.05)
		}, nil, NoPassage, 0, []string{"The orbit of 60 d does not pass phase", "the next passage is from 2027-01-2"}},
		{"the only passage used", func(t *testing.T, c *scheduler.Campaign) {
			wantPhase(t, c, 8.5, after(spare), 0.1).PerHorizon = 2
		}, []scheduler.Scan{observed(asked, "b1", spare, 20, earning("orb@0", 1))},
			NoPassage, 0, []string{"once in this horizon", "uses all of them"}},
		{"never up", func(t *testing.T, c *scheduler.Campaign) {
			wantPhase(t, c, 1, after(spare), 0.1)
			c.Sources[0].DecDeg = -50
		}, nil, TooLow, 1, nil},
	} {
		t.Run(x.name, func(t *testing.T) {
			c := lone()
			x.change(t, c)
			list := explained(t, c, "orb@0", x.scans...)
			if len(list) != 1 {
				t.Fatalf("%d reasons: %v", len(list), list)
			}
			says(t, list[0], x.code, x.count, x.says...)
		})
	}
}

// around must hold every passage that a scan touches and the nearest beside.
func TestAround(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		var list []units.Passage
		at := 0.0
		for i := range rapid.IntRange(1, 6).Draw(t, "passages") {
			at += rapid.Float64Range(1, 50).Draw(t, "gap")
			enter := at
			at += rapid.Float64Range(1, 50).Draw(t, "length")
			list = append(list, units.Passage{Orbit: i, Enter: enter, Leave: at})
		}
		start := rapid.Float64Range(-50, 400).Draw(t, "start")
		end := start + rapid.Float64Range(1, 60).Draw(t, "length of the scan")
		got := map[int]bool{}
		for _, p := range around(list, start, end) {
			got[p.Orbit] = true
		}
		nearest, which := math.Inf(1), 0
		for _, p := range list {
			gap := max(p.Enter-end, start-p.Leave)
			if gap < 0 && !got[p.Orbit] {
				t.Fatalf("passage %d is touched and missing", p.Orbit)
			}
			if gap < nearest {
				nearest, which = gap, p.Orbit
			}
		}
		if !got[which] {
			t.Fatalf("the nearest passage, %d, is missing from %v", which, got)
		}
	})
}
