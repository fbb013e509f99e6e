package units_test

import (
	"fmt"
	"math"
	"testing"

	"pgregory.net/rapid"

	"cadencewright/scheduler"
	"cadencewright/scheduler/units"
	"cadencewright/scheduler/verify"
)

// drawn is the campaign of three telescopes with all kinds of goal for a
// binary, and any history of the last weeks.
func drawn(t *rapid.T) *scheduler.Campaign {
	c := three()
	for i := range c.Telescopes {
		tel := &c.Telescopes[i]
		tel.Timezone, tel.ElevationMaxDeg, tel.HourAngleRangeH, tel.RateHADegS, tel.RateDecDegS = "UTC", 90, [2]float64{-6, 6}, 1, 1
	}
	c.Sources[0].DMPcCm3, c.Sources[0].Scatter1GHzS = 10, rapid.SampledFrom([]float64{0, 0.02}).Draw(t, "scatter") // 0.02 s·1.4^-4.4 is 4.55 ms: L and all at 1400 MHz go
	c.Telescopes[2].Receivers[0].FreqMHz = 3000
	c.Sources[0].Binary = &scheduler.Binary{Model: scheduler.BinaryKepler, PbD: rapid.Float64Range(0.3, 9).Draw(t, "period"), A1Ls: 3, Ecc: rapid.Float64Range(0, 0.7).Draw(t, "ecc"),
		OmDeg: rapid.Float64Range(0, 360).Draw(t, "omega"), T0MJD: 60000, OmdotDegYr: rapid.Float64Range(0, 5).Draw(t, "advance")}
	for range rapid.IntRange(0, 12).Draw(t, "history") {
		c.History = append(c.History, scheduler.HistoryScan{Source: c.Sources[0].Name, Telescope: rapid.SampledFrom([]string{"A", "B", "C"}).Draw(t, "tel"),
			Receiver: rapid.SampledFrom([]string{"L", "S", "W"}).Draw(t, "rx"), Start: day(-float64(rapid.IntRange(-200, 4000).Draw(t, "ago min")) / 1440),
			Minutes: float64(rapid.IntRange(1, 300).Draw(t, "min")), Counted: rapid.IntRange(0, 4).Draw(t, "counted") > 0})
	}
	g := func(id string, bands ...string) scheduler.Goal {
		x := goal(bands...)
		x.ID, x.Priority = id, rapid.Float64Range(0.1, 9).Draw(t, "priority")
		if rapid.IntRange(0, 3).Draw(t, "some") == 0 {
			x.Telescopes = []string{"A", "C"}
		}
		return x
	}
	every := func() float64 { return rapid.Float64Range(0.2, 9).Draw(t, "every") }
	c.CadenceTargets = []scheduler.CadenceTarget{{Goal: g("c1", "L"), EveryD: every(), EarlyD: 0.05}, {Goal: g("c2", "L", "S"), EveryD: every(), TOAUs: 3}}
	c.OverlapGoals = []scheduler.OverlapGoal{{Goal: g("o", "L", "S"), Count: 2, OverlapMin: float64(rapid.IntRange(1, 60).Draw(t, "overlap")), EveryD: every()}}
	pair := every()
	c.BandPairGoals = []scheduler.BandPairGoal{{Goal: g("p", "L", "S"), WithinH: 12 * pair * rapid.Float64Range(0.01, 1).Draw(t, "within"), EveryD: pair}}
	from := rapid.Float64Range(0, 0.99).Draw(t, "from")
	c.PhaseGoals = []scheduler.PhaseGoal{{Goal: g("f", "L", "S"), Reference: rapid.SampledFrom([]scheduler.PhaseReference{scheduler.RefPeriastron, scheduler.RefNode, scheduler.RefConjunction}).Draw(t, "ref"),
		DwellMin: float64(rapid.IntRange(1, 200).Draw(t, "dwell")), PerHorizon: rapid.IntRange(1, 3).Draw(t, "per"),
		Windows: []scheduler.PhaseWindow{{From: from, To: from + rapid.Float64Range(0.05, 0.95).Draw(t, "width"), Need: rapid.IntRange(1, 5).Draw(t, "need")}, {From: 0.2, To: 0.5, Need: 2}}}}
	if err := c.Validate(); err != nil {
		t.Fatal(err)
	}
	return c
}

// The check lists the same units, as often and with the same weights: it works
// all of that out by itself, from the same model.
func TestUnitsAgreeWithTheCheck(t *testing.T) {
	counted := 0
	rapid.Check(t, func(t *rapid.T) {
		c := drawn(t)
		h := horizon(rapid.SampledFrom([]float64{1, 7, 9.3}).Draw(t, "days"))
		s, err := units.Build(c, h)
		if err != nil {
			t.Fatal(err)
		}
		plan := &scheduler.Plan{Campaign: c.Name, From: h.From, To: h.To, Possible: s.Possible}
		for _, u := range s.Units {
			plan.Unmet = append(plan.Unmet, scheduler.Unmet{Goal: s.Goals[u.Goal].ID, Unit: u.Name, Weight: u.Weight})
			if u.K != 1 || u.Due != s.From {
				counted++
			}
		}
		report, err := verify.Check(c, plan, verify.Options{SkipBound: true, Relative: 1e-6}) // it has intervals in whole milliseconds
		if err != nil {
			t.Fatal(err)
		}
		for _, v := range append(report.Violations, report.Notes...) {
			t.Errorf("%s: %s", v.Kind, v)
		}
		if len(report.Units) != len(s.Units) || math.Abs(report.Possible-s.Possible) > 1e-6*s.Possible {
			t.Errorf("%d units worth %.6f, by the check %d worth %.6f", len(s.Units), s.Possible, len(report.Units), report.Possible)
		}
		for name := range report.Units {
			if s.ByName(name) < 0 {
				t.Errorf("the check has a unit %s", name)
			}
		}
		if t.Failed() {
			t.Log(fmt.Sprintf("%+v", s.Units))
		}
	})
	if counted == 0 {
		t.Error("no unit depended on the history")
	}
}
