package explain

import (
	"math"
	"os"
	"slices"
	"sync"
	"testing"

	"cadencewright/scheduler"
	"cadencewright/scheduler/feasible"
	"cadencewright/scheduler/solve"
	"cadencewright/scheduler/units"
	"cadencewright/scheduler/verify"
	"cadencewright/testdata"
)

// problemOf is one of the repository's campaigns over its week. It is
// built once for all tests, which only read it.
func problemOf(t testing.TB, name string) *feasible.Problem {
	t.Helper()
	p, err := cached(&problems, name, func() (*feasible.Problem, error) {
		data, err := os.ReadFile(testdata.Path("campaigns", name+".json"))
		if err != nil {
			return nil, err
		}
		c, err := scheduler.ReadCampaign(data)
		if err != nil {
			return nil, err
		}
		h := scheduler.Horizon{From: c.Start, To: c.End}
		if name == "demo" { // months long
			h = scheduler.DefaultHorizon(c)
		}
		return feasible.Build(c, h)
	})
	if err != nil {
		t.Fatal(err)
	}
	return p
}

// planOf is a plan that the planner makes of a campaign after little search;
// tests only read it.
func planOf(t testing.TB, name string) *scheduler.Plan {
	t.Helper()
	p := problemOf(t, name)
	plan, err := cached(&solved, name, func() (*scheduler.Plan, error) {
		r, err := solve.Solve(p, solve.Options{Seed: 5, Effort: 20})
		if err != nil {
			return nil, err
		}
		return r.Plan, nil
	})
	if err != nil {
		t.Fatal(err)
	}
	return plan
}

// What tests share: name → func() (T, error).
var problems, solved sync.Map

func cached[T any](m *sync.Map, name string, make func() (T, error)) (T, error) {
	f, _ := m.LoadOrStore(name, sync.OnceValues(make))
	return f.(func() (T, error))()
}

// plans are plans to explain: the planner's own after little search, and the
// same with every third scan left out.
func plans(t testing.TB, name string) map[string]*scheduler.Plan {
	t.Helper()
	plan := planOf(t, name)
	return map[string]*scheduler.Plan{"planned": plan, "thinned": thinned(problemOf(t, name), plan)}
}

// thinned is a plan without every third scan, and without what the others
// earned together with those.
func thinned(p *feasible.Problem, plan *scheduler.Plan) *scheduler.Plan {
	thin := *plan
	thin.Scans, thin.Score = nil, 0
	lost := map[string]bool{}
	gone := func(i int) bool { return i%3 == 0 && !plan.Scans[i].Pinned }
	for i, s := range plan.Scans {
		for _, e := range s.Earns {
			kind := p.Units.Goals[p.Units.Units[p.Units.ByName(e.Unit)].Goal].Kind
			lost[e.Unit] = lost[e.Unit] || gone(i) && kind != scheduler.KindPhase
		}
	}
	for i, s := range plan.Scans {
		if gone(i) {
			continue
		}
		s.Earns = slices.DeleteFunc(slices.Clone(s.Earns), func(e scheduler.Earning) bool { return lost[e.Unit] })
		for _, e := range s.Earns {
			thin.Score += e.Value
		}
		thin.Scans = append(thin.Scans, s)
	}
	return &thin
}

// Every unmet unit has a reason with a text, and the list is the planner's.
func TestEveryUnmetUnitHasAReason(t *testing.T) {
	for _, name := range []string{"small-1", "small-2", "medium-1", "medium-2", "hard-1", "demo"} {
		t.Run(name, func(t *testing.T) {
			t.Parallel()
			p := problemOf(t, name)
			plan := planOf(t, name)
			list := Unmet(p, plan)
			if len(list) != len(plan.Unmet) || len(list) == 0 {
				t.Fatalf("%d units explained, %d unmet", len(list), len(plan.Unmet))
			}
			for i, u := range list {
				if u.Unit != plan.Unmet[i].Unit || u.Goal != plan.Unmet[i].Goal || u.Weight != plan.Unmet[i].Weight {
					t.Errorf("unit %d is %s of %s, the planner has %s", i, u.Unit, u.Goal, plan.Unmet[i].Unit)
				}
				if len(u.Reasons) == 0 {
					t.Errorf("%s: no reason", u.Unit)
				}
				for j, reason := range u.Reasons {
					if _, known := stages[reason.Code]; !known || reason.Text == "" || reason.Count < 0 {
						t.Errorf("%s: reason %+v", u.Unit, reason)
					}
					if j > 0 && stages[reason.Code] > stages[u.Reasons[j-1].Code] {
						t.Errorf("%s: %s comes after %s", u.Unit, reason.Code, u.Reasons[j-1].Code)
					}
				}
			}
		})
	}
}

// Where a reason says what a place would earn and what would have to go, doing
// just that must give a valid plan with just that score.
func TestPlacesAreAsTheReasonsSay(t *testing.T) {
	for _, name := range []string{"small-1", "small-2", "medium-1", "medium-2", "hard-1", "demo"} {
		t.Run(name, func(t *testing.T) {
			t.Parallel()
			p := problemOf(t, name)
			tried := 0
			for effort, plan := range plans(t, name) {
				e := newExplainer(p, plan)
				for ui := range p.Units.Units {
					if e.times(ui) >= p.Units.Units[ui].N {
						continue
					}
					q := e.question(ui)
					q.look()
					if q.best == nil || len(q.best.options) == 0 {
						continue
					}
					tried++
					report, err := verify.Check(p.Campaign, applied(q, plan), verify.Options{SkipBound: true, Relative: 1e-6})
					if err != nil {
						t.Fatal(err)
					}
					for _, v := range report.Violations {
						t.Errorf("%s: %s: %s", effort, q.unit.Name, v)
					}
				}
			}
			if tried == 0 && name != "small-1" && name != "small-2" {
				t.Error("nothing to try")
			}
		})
	}
}

// applied is the plan with the best choice for the unit made.
func applied(q *question, plan *scheduler.Plan) *scheduler.Plan {
	out := *plan
	out.Scans = nil
	out.Score += q.best.gain - q.loss(q.best.displaced)
	gone, lost := map[*scheduler.Scan]bool{}, map[string]bool{}
	for _, x := range q.best.displaced {
		gone[x.scan] = true
		for _, e := range x.scan.Earns {
			if g := q.Units.Goals[q.Units.Units[q.Units.ByName(e.Unit)].Goal]; g.Kind != scheduler.KindPhase {
				lost[e.Unit] = true
			}
		}
	}
	earning := scheduler.Earning{Goal: q.goal.ID, Unit: q.unit.Name, Value: q.best.gain / float64(len(q.best.options))}
	for i := range plan.Scans {
		s := plan.Scans[i]
		if gone[&plan.Scans[i]] {
			continue
		}
		s.Earns = slices.DeleteFunc(slices.Clone(s.Earns), func(e scheduler.Earning) bool { return lost[e.Unit] })
		for _, o := range q.best.options {
			if o.had != nil && o.had.scan == &plan.Scans[i] {
				s.Earns = append(s.Earns, earning)
			}
		}
		out.Scans = append(out.Scans, s)
	}
	for i := range q.best.options {
		if o := &q.best.options[i]; o.had == nil {
			out.Scans = append(out.Scans, q.scanOf(o, earning))
		}
	}
	return &out
}

// scanOf is an option as a scan of a plan.
func (q *question) scanOf(o *option, earning scheduler.Earning) scheduler.Scan {
	b := &q.Blocks[o.block]
	t := q.telescope(b)
	s := scheduler.Scan{Block: q.Campaign.Blocks[b.Index].ID, Telescope: t.Code, Source: q.source.Name,
		Receiver: t.Receivers[b.Receivers[o.receiver]].Code, Start: units.Instant(o.startMin), Minutes: o.steps * q.GridMin,
		TOAUs: 1e6 / math.Sqrt(o.place.InfoOf(o.receiver, o.start, o.steps)), Earns: []scheduler.Earning{earning}}
	if t.Mount == scheduler.MountAltAz {
		from, _ := poses(o.place, o.start, o.steps, o.turnsDeg)
		s.MotorAzDeg = &from.axis1
	}
	return s
}
