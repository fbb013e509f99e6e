package explain

import (
	"math"
	"strings"
	"testing"

	"cadencewright/scheduler"
	"cadencewright/scheduler/feasible"
	"cadencewright/scheduler/verify"
)

// impossible reports whether the reasons say that no scans could serve a unit,
// whatever else were left out of the plan.
func impossible(reasons []scheduler.Reason) bool {
	for _, r := range reasons {
		if r.Code == Displaced || r.Code == Fits || r.Code == TooClose {
			return false
		}
	}
	return true
}

// onlyGoal is a campaign in which nothing but one goal is wanted.
func onlyGoal(c *scheduler.Campaign, id string) *scheduler.Campaign {
	out := *c
	out.CadenceTargets, out.PhaseGoals, out.OverlapGoals, out.BandPairGoals = nil, nil, nil, nil
	for _, g := range c.CadenceTargets {
		if g.ID == id {
			out.CadenceTargets = append(out.CadenceTargets, g)
		}
	}
	for _, g := range c.PhaseGoals {
		if g.ID == id {
			out.PhaseGoals = append(out.PhaseGoals, g)
		}
	}
	for _, g := range c.OverlapGoals {
		if g.ID == id {
			out.OverlapGoals = append(out.OverlapGoals, g)
		}
	}
	for _, g := range c.BandPairGoals {
		if g.ID == id {
			out.BandPairGoals = append(out.BandPairGoals, g)
		}
	}
	return &out
}

// mostOf is the most that candidates of a campaign could earn from one unit
// alone, as the independent check of certificates has it: the bound at prices
// that make all other units of its goal worthless.
func mostOf(t *testing.T, c *scheduler.Campaign, h scheduler.Horizon, goal, unit string) float64 {
	t.Helper()
	const dear = 1000
	only := onlyGoal(c, goal)
	plan := &scheduler.Plan{Campaign: c.Name, From: h.From, To: h.To, Certificate: scheduler.Certificate{Prices: map[string]float64{}}}
	free, err := verify.Check(only, plan, verify.Options{SkipBound: true})
	if err != nil {
		t.Fatal(err)
	}
	p, err := feasible.Build(only, h)
	if err != nil {
		t.Fatal(err)
	}
	paid := 0.0
	for name := range free.Units {
		if name != unit {
			plan.Certificate.Prices[name] = dear
			paid += dear * float64(p.Units.Units[p.Units.ByName(name)].Cap)
		}
	}
	report, err := verify.Check(only, plan, verify.Options{})
	if err != nil {
		t.Fatal(err)
	}
	return report.Bound - paid
}

// Where the reasons say that nothing can be done, no candidate may be worth
// anything to the unit; where they say that something stands in its place,
// some must be.
func TestImpossibleUnitsHaveNoCandidates(t *testing.T) {
	for _, name := range []string{"small-1", "small-2", "medium-1", "medium-2", "hard-1", "demo"} {
		t.Run(name, func(t *testing.T) {
			t.Parallel()
			p := problemOf(t, name)
			plan := planOf(t, name)
			seen := map[bool]int{}
			for _, u := range unmet(p, plan, 0) {
				ui := p.Units.ByName(u.Unit)
				if p.Units.Goals[p.Units.Units[ui].Goal].Kind == scheduler.KindPhase && timesEarned(plan, u.Unit) > 0 {
					continue // earned, but less often than wanted
				}
				if strings.Contains(u.Reasons[0].Text, "no time for both") {
					continue // a certificate does not ask whether partners leave each other room
				}
				no := impossible(u.Reasons)
				seen[no]++
				if most := mostOf(t, p.Campaign, p.Horizon, u.Goal, u.Unit); no != (math.Abs(most) < 1e-6) {
					t.Errorf("%s: candidates are worth up to %g, and the reasons are %v", u.Unit, most, u.Reasons)
				}
			}
			if seen[true] == 0 {
				t.Error("no unit is impossible: nothing was tested")
			}
		})
	}
}

func timesEarned(p *scheduler.Plan, unit string) int {
	n := 0
	for _, s := range p.Scans {
		for _, e := range s.Earns {
			if e.Unit == unit {
				n++
			}
		}
	}
	return n
}

// Of a unit that one scan serves, every block of an allowed telescope has just
// one cause.
func TestEveryBlockIsCountedOnce(t *testing.T) {
	for _, name := range []string{"small-1", "medium-1", "medium-2", "hard-1"} {
		p := problemOf(t, name)
		empty := &scheduler.Plan{Campaign: p.Campaign.Name, From: p.Horizon.From, To: p.Horizon.To}
		for _, u := range unmet(p, empty, 0) {
			g := p.Units.Goals[p.Units.Units[p.Units.ByName(u.Unit)].Goal]
			if g.Kind != scheduler.KindCadence && g.Kind != scheduler.KindPhase {
				continue
			}
			want, got, whole := 0, 0, false
			for i := range p.Blocks {
				if p.Campaign.GoalByID(u.Goal).AllowsTelescope(p.Campaign.Blocks[p.Blocks[i].Index].Telescope) {
					want++
				}
			}
			for _, r := range u.Reasons {
				got += r.Count
				whole = whole || r.Count == 0
			}
			if !whole && got != want {
				t.Errorf("%s %s: %d blocks in the reasons, %d at allowed telescopes: %v", name, u.Unit, got, want, u.Reasons)
			}
		}
	}
}
