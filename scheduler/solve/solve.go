// Package solve fills the blocks of a horizon. Simulated annealing over whole
// plans finds the scans; prices on the units prove how good the best plan could
// be.
//
// Every change of a plan is weighed exactly, with true travel times, receiver
// changes and turns of the azimuth drive, so the plan under way is valid at
// every moment and a search may be stopped at any time. The same problem, seed
// and effort give the same plan, whatever the number of workers.
package solve

import (
	"math"

	"cadencewright/scheduler"
	"cadencewright/scheduler/feasible"
)

// Options say how long and how to search.
type Options struct {
	Seed uint64
	// Effort is how much to search, in thousands of changes tried; 0: what
	// DefaultEffort says.
	Effort int64
	// Workers is how many goroutines may share the work; it does not change
	// the plan. 0: 1.
	Workers int
	// Stop, if set, is asked often, from several goroutines; the search ends
	// soon after it says true. A plan stopped in time depends on the clock of
	// who stops it.
	Stop func() bool
	// Pace, if set, says which part of the time allowed is over; the search
	// cools down by it where the effort is not spent sooner, and ends at 1. It
	// is asked as Stop is, and the plan then depends on the clock likewise.
	Pace func() float64
	// LeaveIdle leaves time free that earns nothing, instead of lengthening
	// scans and adding extra ones.
	LeaveIdle bool
	// Replan, if set, starts from a plan that is under way.
	Replan *Replan
	// Progress, if set, is told of better plans and bounds, by one goroutine at
	// a time.
	Progress func(Progress)
}

// Progress is how far a search has come.
type Progress struct {
	Effort int64 // thousands of changes tried
	Of     int64
	Score  float64
	Bound  float64 // infinite before the first is known
}

// Status says why a search ended.
type Status string

// Why a search ended.
const (
	Proven      Status = "proven"       // the score has reached the bound
	EffortSpent Status = "effort spent" // all effort is used up
	Stopped     Status = "stopped"      // Stop said so
)

// Result is the best plan found.
type Result struct {
	Plan   *scheduler.Plan
	Status Status
	Effort int64 // thousands of changes tried
}

// DefaultEffort is how much search suits a horizon: more for more units, and
// more where more of them compete for each block; some seconds for a week of a
// few telescopes.
func DefaultEffort(p *feasible.Problem) int64 {
	n := float64(len(p.Units.Units))
	return int64(min(max(4.5*n*n/float64(max(1, len(p.Blocks))), 1500), 100_000))
}

// provenGap is the relative gap below which a plan counts as the best there is.
const provenGap = 1e-6

// Solve finds a plan. It fails only on a problem that no plan can be made for.
func Solve(p *feasible.Problem, o Options) (*Result, error) {
	if o.Effort <= 0 {
		o.Effort = DefaultEffort(p)
		if o.Replan != nil && len(o.Replan.From.Scans) > 0 {
			o.Effort = max(o.Effort/75, 60)
		}
	}
	o.Workers = max(1, o.Workers)
	r, err := newRun(p, o)
	if err != nil {
		return nil, err
	}
	best := r.search()
	status := EffortSpent
	switch {
	case r.stop():
		status = Stopped
	case r.proven():
		status = Proven
	}
	s := newState(r.t)
	s.resume(best)
	if !o.LeaveIdle {
		s.fillIdle()
	}
	return &Result{Plan: s.plan(r.prices.best, r.prices.bound), Status: status, Effort: r.tries() / 1000}, nil
}

// scale is what a unit is worth on average: the measure of temperatures.
func (t *table) scale() float64 {
	n := 0
	for i := range t.p.Units.Units {
		n += t.p.Units.Units[i].N
	}
	return math.Max(t.p.Units.Possible/math.Max(1, float64(n)), 1e-9)
}
