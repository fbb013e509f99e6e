package verify

import (
	"math"
	"testing"

	"cadencewright/scheduler"
)

// restate makes a corrupted plan consistent with itself again: whatever a
// planner that had made this one mistake would have written follows from it
// (uncertainties, turns of the motor, values, score, unmet units, bound). What
// is left for a check to find is the mistake.
func restate(t testing.TB, c *scheduler.Campaign, p *scheduler.Plan) {
	t.Helper()
	m, err := newModel(c, scheduler.Horizon{From: p.From, To: p.To})
	if err != nil {
		t.Fatal(err)
	}
	k := &checker{model: m, plan: p, options: Options{}.filled(), report: &Report{}}
	k.readScans()
	if err := k.checkBlocks(); err != nil {
		t.Fatal(err)
	}
	for _, s := range k.scans {
		s.listed.TOAUs = 0
		if s.info > 0 {
			s.listed.TOAUs = 1e6 / math.Sqrt(s.info)
		}
	}
	takers := make([][]taker, len(m.units))
	for _, s := range k.scans {
		k.readEarnings(s, takers)
	}
	p.Score, p.Possible, p.Unmet = 0, m.possible(), nil
	for i, u := range m.units {
		restateUnit(k, u, takers[i])
	}
	k.countUnits(takers)
	for _, u := range m.units {
		if k.report.Units[u.name] < u.times {
			p.Unmet = append(p.Unmet, scheduler.Unmet{Goal: u.goal.ID, Unit: u.name, Weight: u.weight})
		}
	}
	restateBound(t, m, p)
}

// restateUnit shares what a unit is worth among the scans that list it.
func restateUnit(k *checker, u *unit, list []taker) {
	if len(list) == 0 {
		return
	}
	var when msec
	value := k.checkUnit(u, list, &when)
	k.plan.Score += value
	for _, t := range list {
		for i := range t.scan.listed.Earns {
			if e := &t.scan.listed.Earns[i]; e.Unit == u.name {
				e.Value = value / float64(len(list))
			}
		}
	}
}

// restateBound keeps the prices of units that still exist.
func restateBound(t testing.TB, m *model, p *scheduler.Plan) {
	t.Helper()
	prices := make([]float64, len(m.units))
	for name := range p.Certificate.Prices {
		if u := m.byName[name]; u != nil {
			prices[u.index] = p.Certificate.Prices[name]
		} else {
			delete(p.Certificate.Prices, name)
		}
	}
	bound, err := m.bound(prices, Options{})
	if err != nil {
		t.Fatal(err)
	}
	p.Bound, p.Certificate.Bound = bound, bound
}

// earners are the scans that earn from a unit, in the plan's order.
func earners(t testing.TB, p *scheduler.Plan, unit string) []*scheduler.Scan {
	t.Helper()
	var list []*scheduler.Scan
	for i := range p.Scans {
		for _, e := range p.Scans[i].Earns {
			if e.Unit == unit {
				list = append(list, &p.Scans[i])
			}
		}
	}
	if len(list) == 0 {
		t.Fatalf("no scan of the plan earns from %s", unit)
	}
	return list
}

// earner is the only scan that earns from a unit.
func earner(t testing.TB, p *scheduler.Plan, unit string) *scheduler.Scan {
	t.Helper()
	list := earners(t, p, unit)
	if len(list) != 1 {
		t.Fatalf("%d scans of the plan earn from %s", len(list), unit)
	}
	return list[0]
}

// pinned is the plan's only pinned scan.
func pinned(t testing.TB, p *scheduler.Plan) *scheduler.Scan {
	t.Helper()
	for i := range p.Scans {
		if p.Scans[i].Pinned {
			return &p.Scans[i]
		}
	}
	t.Fatal("no scan of the plan is pinned")
	return nil
}
