// Package solve fills the blocks of a horizon. Prices on the units guide a
// greedy start and prove a bound; repair by destroying and refilling parts of
// the plan brings it near to that bound.
//
// A block is always filled by a dynamic programme over its scans with true
// travel, receiver changes and turns of the azimuth drive. The plan under way
// is valid at every moment, so a search may be stopped at any time. The same
// problem, seed and effort give the same plan, whatever the number of workers.
package solve

import (
	"cadencewright/scheduler"
	"cadencewright/scheduler/feasible"
)

// Options say how long and how to search.
type Options struct {
	Seed uint64
	// Effort is how much to search, in thousands of weighed transitions from a
	// scan to the next; 0: DefaultEffort.
	Effort int64
	// Workers is how many goroutines may share the work; it does not change
	// the plan. 0: 1.
	Workers int
	// Stop, if set, is asked often; the search ends soon after it says true.
	// A plan stopped in time depends on the clock of who stops it.
	Stop func() bool
	// Progress, if set, is told of every better plan or bound.
	Progress func(Progress)
}

// DefaultEffort is enough for a week of a few telescopes: some seconds.
const DefaultEffort = 8000

// Progress is how far a search has come.
type Progress struct {
	Effort int64 // thousands of transitions spent
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
	Effort int64 // thousands of transitions spent
}

// provenGap is the relative gap below which a plan counts as the best there is.
const provenGap = 1e-6

// Solve finds a plan. It fails only on a problem that no plan can be made for.
func Solve(p *feasible.Problem, o Options) (*Result, error) {
	if o.Effort <= 0 {
		o.Effort = DefaultEffort
	}
	r := &run{o: o, t: newTable(p), status: EffortSpent}
	r.prices = newPricing(newDual(r.t, max(1, o.Workers)))
	r.search = newSearch(r.t, o.Seed)
	r.search.price = r.prices.best
	if p.GridMin < 5 {
		r.search.bs.stride = 3 // minutes matter little until the end
	}
	r.lower(firstSteps)
	r.search.build(3)
	r.report()
	r.lower(maxSteps)
	r.search.build(3)
	r.report()
	r.repair()
	r.finish()
	return &Result{Plan: r.search.s.plan(r.prices.best, r.prices.bound), Status: r.status, Effort: r.spent()}, nil
}

// run is one solve under way.
type run struct {
	o      Options
	t      *table
	prices *pricing
	search *search
	steps  int64 // of pricing
	status Status
	told   Progress
}

const (
	firstSteps = 60  // of pricing, before the first plan
	maxSteps   = 600 // of pricing in all
)

// spent is the effort so far. A step of pricing is weighed by the size of the
// problem.
func (r *run) spent() int64 {
	return r.search.bs.effort/1000 + r.steps*r.weight()/1000
}

// weight is a pricing step's share of effort: it costs about a tenth of the time
// of as many transitions as there are steps in the blocks.
func (r *run) weight() int64 {
	n := int64(0)
	for i := range r.t.p.Blocks {
		n += int64(r.t.p.Blocks[i].Steps)
	}
	return n / 10
}

func (r *run) stopped() bool {
	if r.o.Stop != nil && r.o.Stop() {
		r.status = Stopped
		return true
	}
	return false
}

// lower takes pricing steps until the bound moves no more.
func (r *run) lower(steps int64) {
	for r.steps < steps && !r.prices.done() && !r.stopped() {
		target := r.search.top
		if target <= 0 {
			target = 0.9 * r.prices.bound
		}
		if r.prices.step(target) && r.steps%20 == 0 {
			r.report()
		}
		r.steps++
	}
	if r.steps == 0 { // stopped at once: some bound must be there
		r.prices.step(0)
		r.steps++
	}
}

// report tells of a better plan or bound.
func (r *run) report() {
	if r.o.Progress == nil {
		return
	}
	p := Progress{Effort: r.spent(), Of: r.o.Effort, Score: r.search.top, Bound: r.prices.bound}
	if p.Score != r.told.Score || p.Bound != r.told.Bound {
		r.told = p
		r.o.Progress(p)
	}
}

// proven tells whether the plan has reached the bound.
func (r *run) proven() bool {
	return r.search.top >= r.prices.bound*(1-provenGap)
}

// repair destroys and refills until the effort is spent. It starts warm, so
// that a worse plan may be gone through, and cools down.
func (r *run) repair() {
	if len(r.t.p.Blocks) == 0 || len(r.t.p.Units.Units) == 0 {
		return
	}
	start := r.spent()
	for n := 0; r.spent() < r.o.Effort; n++ {
		if r.stopped() || r.proven() {
			break
		}
		part := float64(r.spent()-start) / float64(max(1, r.o.Effort-start))
		r.search.temp = coolFrom * r.search.top * (1 - part)
		if part > 0.7 {
			r.search.bs.stride = 1
		}
		r.search.move()
		r.search.bs.effort += moveEffort
		if n%10 == 9 {
			r.report()
		}
	}
	r.report()
}

// moveEffort is what every move costs besides its transitions, so that a search
// ends even where there is nothing to weigh.
const moveEffort = 100

// coolFrom is the first temperature, as a part of the score.
const coolFrom = 4e-4

// finish goes back to the best plan and lets every block improve on the full
// grid a last time.
func (r *run) finish() {
	s := r.search
	s.s.resume(s.kept)
	s.temp = 0
	s.bs.stride = 1
	if r.status != Stopped {
		for bi := range s.s.blocks {
			s.improve(bi)
		}
	}
	s.record()
	s.s.resume(s.kept)
	if r.proven() && r.status != Stopped {
		r.status = Proven
	}
	r.report()
}
