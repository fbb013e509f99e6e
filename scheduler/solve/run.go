package solve

import (
	"cmp"
	"math"
	"math/bits"
	"slices"
	"sync"
	"sync/atomic"

	"cadencewright/scheduler/feasible"
)

// run is one solve under way.
type run struct {
	o      Options
	t      *table
	start  *state
	stages []stage
	menus  []menu
	prices *pricing
	priced chan struct{} // closed when the bound is as low as it will be

	done    atomic.Int64 // changes tried
	stopped atomic.Bool

	mu    sync.Mutex // guards what follows
	top   float64    // the best total so far
	score float64    // its score
	bound float64
	told  Progress
}

func newRun(p *feasible.Problem, o Options) (*run, error) {
	r := &run{o: o, t: newTable(p), top: math.Inf(-1), bound: math.Inf(1), priced: make(chan struct{})}
	r.stages = stages
	if o.Replan != nil {
		r.t.closeBefore(o.Replan.At)
	}
	r.start = newState(r.t)
	if o.Replan != nil {
		if err := r.start.takeUp(o.Replan); err != nil {
			return nil, err
		}
		if len(r.start.stays) > 0 {
			r.stages = restages // else all is to be planned anew
		}
	}
	r.menus = newMenus(r.t)
	r.prices = newPricing(newDual(r.t, o.Workers))
	if o.Replan != nil {
		r.prices.seed(o.Replan.From.Certificate.Prices)
	}
	return r, nil
}

// stage is one round of annealing: from each of the best plans of the round
// before, some chains go on independently.
type stage struct {
	from   int     // how many plans go on
	chains int     // from each
	part   float64 // of the effort, all chains together
	hot    float64 // first temperature, in units of scale
	cold   float64 // last one
}

// stages are the rounds of a search. Chains differ much in what they find, so
// several are begun and the better ones followed; the last stage only settles
// the best.
var stages = []stage{
	{1, 1, 0.03, 0.15, 0.02},
	{0, 4, 0.40, 0.40, 0.05},
	{2, 2, 0.32, 0.20, 0.02},
	{1, 2, 0.18, 0.12, 0.02},
	{1, 1, 0.07, 0.02, 0.001},
}

// restages are those of a plan under way, which is to change little.
var restages = []stage{
	{1, 1, 0.20, 0.02, 0.002},
	{1, 2, 0.60, 0.06, 0.002},
	{1, 1, 0.20, 0.004, 0.0005},
}

// search runs all stages, and the pricing beside them, and returns the scans of
// the best plan. Of several equally good ones the stages' ranking picks one, not
// which worker came first.
func (r *run) search() []scan {
	first := newAnnealer(r.start, r.menus, r.o.Seed)
	r.offer(first)
	if r.o.Workers > 1 {
		go r.lower()
		defer func() { <-r.priced }()
	}
	pool := []found{{first.top, first.kept}}
	empty := pool[:1:1]
	for si, st := range r.stages {
		if len(first.units) == 0 || r.stop() && si > 0 {
			break
		}
		if r.o.Workers == 1 && si == 1 {
			r.lower()
		}
		if si > 0 {
			<-r.priced
			if r.proven() {
				break
			}
		}
		from := pool[:min(max(st.from, 1), len(pool))]
		if st.from == 0 {
			from = empty
		}
		pool = r.stage(si, st, from, pool)
	}
	if r.o.Workers == 1 && math.IsInf(r.prices.bound, 1) {
		r.lower()
	}
	r.report()
	return pool[0].scans
}

// stage anneals from each of some plans and returns the plans found and those
// had before, best first.
func (r *run) stage(si int, st stage, from, had []found) []found {
	n := len(from) * st.chains
	chains := make([]*annealer, n)
	waves := r.waves(si, n)
	next := make(chan int)
	var wg sync.WaitGroup
	for range min(r.o.Workers, n) {
		wg.Go(func() {
			for i := range next {
				s := newState(r.t)
				s.bonus, s.stays = r.start.bonus, r.start.stays
				s.resume(from[i/st.chains].scans)
				chains[i] = newAnnealer(s, r.menus, mix(r.o.Seed, uint64(si*64+i)))
				r.anneal(chains[i], st, n, waves[i/min(r.o.Workers, n)])
			}
		})
	}
	for i := range n {
		next <- i
	}
	close(next)
	wg.Wait()
	return ranked(had, chains)
}

// mix makes seeds of one seed.
func mix(seed, i uint64) uint64 {
	hi, lo := bits.Mul64(seed^0x9e3779b97f4a7c15, (2*i+1)*0xd1342543de82ef95)
	return hi ^ lo
}

// ranked are plans by total, the best first; of equals the first found.
func ranked(had []found, chains []*annealer) []found {
	for _, c := range chains {
		had = append(had, found{c.top, c.kept})
	}
	slices.SortStableFunc(had, func(a, b found) int { return cmp.Compare(b.total, a.total) })
	return had
}

// found is a plan with its total.
type found struct {
	total float64
	scans []scan
}

// waves are, for a stage of n chains of which each worker takes one at a time,
// the parts of the time allowed by which each round of workers is to be done.
func (r *run) waves(si, n int) []float64 {
	before := 0.0
	for _, st := range r.stages[:si] {
		before += st.part
	}
	list := make([]float64, (n-1)/min(r.o.Workers, n)+1)
	for i := range list {
		list[i] = before + r.stages[si].part*float64(i+1)/float64(len(list))
	}
	return list
}

// anneal cools one of a stage's n chains down over its part of the effort, or
// until a part of the time allowed is over.
func (r *run) anneal(a *annealer, st stage, chains int, until float64) {
	n := int64(st.part * float64(r.o.Effort) * 1000 / float64(chains))
	scale := r.t.scale()
	since := r.pace()
	for i := int64(0); i < n; i += batch {
		if r.stop() && r.tries() >= least {
			break
		}
		done := float64(i) / float64(n)
		if p := r.pace(); p > 0 {
			if p >= until && r.tries() >= least {
				break
			}
			done = min(1, max(done, (p-since)/(until-since)))
		}
		a.temp = scale * st.hot * math.Pow(st.cold/st.hot, done)
		for range min(batch, n-i) {
			a.try()
		}
		r.done.Add(min(batch, n-i))
		r.offer(a)
	}
}

// least is how many changes even a search that is stopped at once tries.
const least = 8 * batch

// batch is how many changes are tried between looks at the world outside.
const batch = 512

func (r *run) tries() int64 { return r.done.Load() }

// pace is which part of the time allowed is over; 0 without a limit.
func (r *run) pace() float64 {
	if r.o.Pace == nil {
		return 0
	}
	return r.o.Pace()
}

func (r *run) stop() bool {
	if !r.stopped.Load() && (r.o.Stop != nil && r.o.Stop() || r.pace() >= 1) {
		r.stopped.Store(true)
	}
	return r.stopped.Load()
}

// lower takes pricing steps until the bound moves no more; one at least, so
// that there is a bound.
func (r *run) lower() {
	defer close(r.priced)
	for {
		r.prices.step()
		r.mu.Lock()
		r.bound = r.prices.bound
		r.mu.Unlock()
		r.report()
		if r.o.Replan != nil && r.prices.seeded || r.prices.done() || r.stop() {
			return
		}
	}
}

// offer takes note of a chain's best total.
func (r *run) offer(a *annealer) {
	r.mu.Lock()
	better := a.top > r.top
	if better {
		r.top, r.score = a.top, a.earned
	}
	r.mu.Unlock()
	if better {
		r.report()
	}
}

// report tells of a better plan or bound.
func (r *run) report() {
	if r.o.Progress == nil {
		return
	}
	r.mu.Lock()
	defer r.mu.Unlock()
	p := Progress{Effort: r.tries() / 1000, Of: r.o.Effort, Score: r.score, Bound: r.bound}
	if p.Score != r.told.Score || p.Bound != r.told.Bound {
		r.told = p
		r.o.Progress(p)
	}
}

// proven tells whether the plan has reached the bound.
func (r *run) proven() bool {
	r.mu.Lock()
	defer r.mu.Unlock()
	return r.score >= r.bound*(1-provenGap)
}
