package solve_test

import (
	"runtime"
	"testing"
	"time"

	"cadencewright/scheduler/feasible"
	"cadencewright/scheduler/solve"
)

// incumbents are the best plans that HiGHS found in 300 s on one core for a
// time-indexed integer programme of the same week: testdata/campaigns/README.md.
// Those of the medium campaigns leave slews out.
var incumbents = map[string]struct{ score, seconds float64 }{
	"small-1": {50.430, 4.4}, "small-2": {31.305, 1.1}, "medium-1": {201.908, 300}, "medium-2": {170.716, 300},
}

// BenchmarkPlan plans a week on one core, the reading of the sky included, and
// reports the score, the gap to the bound in percent, the seconds to 95 % of the
// final score and to the last better plan, and, where an integer programme was
// solved, how many times sooner 99.5 % of its incumbent was reached.
func BenchmarkPlan(b *testing.B) {
	for _, c := range campaigns {
		b.Run(c.name, func(b *testing.B) {
			campaign := problem(b, c.name).Campaign
			var last curve
			for b.Loop() {
				last = curve{began: time.Now()}
				p := problemOf(b, campaign)
				last.plan(b, p)
			}
			if last.score < c.baseline {
				b.Fatalf("score %.3f is below the baseline %.3f", last.score, c.baseline)
			}
			b.ReportMetric(last.score, "score")
			b.ReportMetric(100*(last.bound-last.score)/last.bound, "gap-%")
			b.ReportMetric(last.until(0.95*last.score), "s-to-95%")
			b.ReportMetric(last.until(last.score-1e-9), "s-to-final")
			if i, ok := incumbents[c.name]; ok {
				if s := last.until(0.995 * i.score); s > 0 {
					b.ReportMetric(i.seconds/s, "x-MIP")
				}
			}
		})
	}
}

// curve is how the score of a search rose.
type curve struct {
	began        time.Time
	points       []point
	score, bound float64
}

type point struct{ seconds, score float64 }

func (c *curve) plan(b *testing.B, p *feasible.Problem) {
	r, err := solve.Solve(p, solve.Options{Seed: 1, Workers: 1, Progress: func(q solve.Progress) {
		c.points = append(c.points, point{time.Since(c.began).Seconds(), q.Score})
	}})
	if err != nil {
		b.Fatal(err)
	}
	c.score, c.bound = r.Plan.Score, r.Plan.Bound
}

// until is when a score was reached first; 0 where it never was.
func (c *curve) until(score float64) float64 {
	for _, p := range c.points {
		if p.score >= score {
			return p.seconds
		}
	}
	return 0
}

// BenchmarkWorkers is the ratio of one core's time to that of all cores for the
// same plan.
func BenchmarkWorkers(b *testing.B) {
	p := problem(b, "medium-1")
	spend := func(workers int) float64 {
		began := time.Now()
		if _, err := solve.Solve(p, solve.Options{Seed: 1, Effort: 1000, Workers: workers}); err != nil {
			b.Fatal(err)
		}
		return time.Since(began).Seconds()
	}
	var one, all float64
	for b.Loop() {
		one += spend(1)
		all += spend(runtime.GOMAXPROCS(0))
	}
	b.ReportMetric(one/all, "x-one-core")
}
