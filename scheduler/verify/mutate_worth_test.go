package verify

import (
	"slices"
	"testing"

	"cadencewright/scheduler"
)

// lists adds an earning to a scan.
func lists(s *scheduler.Scan, goal, unit string, value float64) {
	s.Earns = append(s.Earns, scheduler.Earning{Goal: goal, Unit: unit, Value: value})
}

// worthCorruptions: what the scans earn.
var worthCorruptions = []corruption{
	{name: "unit that is not there", change: func(t testing.TB, _ *scheduler.Campaign, p *scheduler.Plan) {
		lists(earner(t, p, "cad-J1104#2"), "cad-J1104", "cad-J1104#7", 0)
	}, want: []Kind{KindEarning}},
	{name: "unit of another goal", change: func(t testing.TB, _ *scheduler.Campaign, p *scheduler.Plan) {
		lists(earner(t, p, "cad-J1104#2"), "pair", "cad-J1104#1", 0)
	}, want: []Kind{KindEarning}},
	{name: "unit of another source", change: func(t testing.TB, _ *scheduler.Campaign, p *scheduler.Plan) {
		lists(earner(t, p, "cad-J1104#2"), "cad-J1025", "cad-J1025#2", 0)
	}, want: []Kind{KindEarning}},
	{name: "band that the goal does not want", change: func(t testing.TB, _ *scheduler.Campaign, p *scheduler.Plan) {
		s := pinned(t, p) // with S
		lists(s, "cad-J1025", "cad-J1025#2", 0)
	}, want: []Kind{KindEarning}},
	{name: "telescope that the goal does not allow", change: func(t testing.TB, c *scheduler.Campaign, p *scheduler.Plan) {
		earner(t, p, "cad-J1104#2")
		c.CadenceTargets[6].Telescopes = []string{"ALT", "EQU"}
	}, want: []Kind{KindEarning}},
	{name: "pulse as wide as the period", change: func(t testing.TB, c *scheduler.Campaign, p *scheduler.Plan) {
		onlyBlock(c, p, "t2")
		lists(&p.Scans[0], "cad-J1104", "cad-J1104#2", 0)
		c.Sources[6].WidthS = 0.95 * c.Sources[6].PeriodS
	}, want: []Kind{KindEarning}},
	{name: "two windows of one goal", change: func(t testing.TB, _ *scheduler.Campaign, p *scheduler.Plan) {
		lists(earner(t, p, "cad-J1025#1"), "cad-J1025", "cad-J1025#2", 0)
	}, want: []Kind{KindOneWindow, KindSpacing}},
	{name: "value too high", as: true, change: func(t testing.TB, _ *scheduler.Campaign, p *scheduler.Plan) {
		earner(t, p, "cad-J1104#2").Earns[0].Value *= 1.01
	}, want: []Kind{KindUnitValue}},
	{name: "quality left out", as: true, change: func(t testing.TB, c *scheduler.Campaign, p *scheduler.Plan) {
		s := earner(t, p, "cad-J0930#2")
		s.Earns[0].Value /= 1 / s.TOAUs / s.TOAUs // wanted is 1 us
	}, want: []Kind{KindUnitValue}},
	{name: "shares in another proportion", as: true, change: func(t testing.TB, _ *scheduler.Campaign, p *scheduler.Plan) {
		both := earners(t, p, "pair#2")
		both[0].Earns[0].Value += 0.1
		both[1].Earns[0].Value -= 0.1
	}},
	{name: "one window by two scans", change: func(t testing.TB, _ *scheduler.Campaign, p *scheduler.Plan) {
		lists(earners(t, p, "con@0")[0], "cad-J0748", "cad-J0748#1", 0)
	}, want: []Kind{KindUnitRule}},
	{name: "orbit twice", change: func(t testing.TB, c *scheduler.Campaign, p *scheduler.Plan) {
		s := earners(t, p, "con@0")[0] // the scan before it is in the same passage
		for i := range p.Scans {
			if x := &p.Scans[i]; x.Source == s.Source && x.Block == s.Block && x.Start.Before(s.Start) {
				lists(x, "con", "con@0", 0)
			}
		}
	}, want: []Kind{KindUnitRule}},
	{name: "more orbits than are wanted", change: func(t testing.TB, c *scheduler.Campaign, p *scheduler.Plan) {
		earners(t, p, "con@1")
		c.PhaseGoals[0].PerHorizon = 1
		for _, s := range earners(t, p, "con@0")[1:] {
			s.Earns = nil
		}
	}, want: []Kind{KindUnitRule}},
	{name: "too short in the phase window", change: func(t testing.TB, c *scheduler.Campaign, p *scheduler.Plan) {
		earner(t, p, "node@0")
		c.PhaseGoals[1].DwellMin = 20.1
	}, want: []Kind{KindUnitRule}},
	{name: "overlap without its partner", change: func(t testing.TB, _ *scheduler.Campaign, p *scheduler.Plan) {
		earners(t, p, "both#2")[0].Earns = nil
	}, want: []Kind{KindUnitRule}},
	{name: "overlap too short", change: func(t testing.TB, c *scheduler.Campaign, p *scheduler.Plan) {
		earners(t, p, "both#2")
		c.OverlapGoals[0].OverlapMin = 20.1
	}, want: []Kind{KindUnitRule}},
	{name: "overlap in no common band", change: func(t testing.TB, c *scheduler.Campaign, p *scheduler.Plan) {
		for _, s := range earners(t, p, "both#2") {
			if s.Telescope == "EQU" {
				s.Receiver = "S"
			}
		}
	}, want: []Kind{KindUnitRule}},
	{name: "pair in one band", change: func(t testing.TB, _ *scheduler.Campaign, p *scheduler.Plan) {
		for _, s := range earners(t, p, "pair#2") {
			s.Receiver = "L"
		}
	}, want: []Kind{KindUnitRule}},
	{name: "pair too far apart", change: func(t testing.TB, c *scheduler.Campaign, p *scheduler.Plan) {
		earners(t, p, "pair#2")
		c.BandPairGoals[0].WithinH = 0.3
		for _, s := range earners(t, p, "pair#1") {
			s.Earns = nil
		}
	}, want: []Kind{KindUnitRule}},
	{name: "pair of three", change: func(t testing.TB, c *scheduler.Campaign, p *scheduler.Plan) {
		lists(earner(t, p, "cad-J1104#1"), "pair", "pair#1", 0)
	}, want: []Kind{KindUnitRule}},
	{name: "windows too near each other", change: func(t testing.TB, c *scheduler.Campaign, p *scheduler.Plan) {
		first, second := earner(t, p, "cad-J0748#1"), earner(t, p, "cad-J0748#2")
		first.Earns[0].Unit, second.Earns[0].Unit = "cad-J0748#2", "cad-J0748#1"
		p.Unmet = nil
	}, want: []Kind{KindSpacing}},
	{name: "unit earned too late to count", change: func(t testing.TB, c *scheduler.Campaign, p *scheduler.Plan) {
		s := earner(t, p, "cad-J1104#2")
		s.Earns = slices.Delete(s.Earns, 0, 1)
		earner(t, p, "cad-J1104#1").Earns = nil
		lists(s, "cad-J1104", "cad-J1104#1", 0) // 6 days after it was due, of 5
	}},
}
