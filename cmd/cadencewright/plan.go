package main

import (
	"context"
	"errors"
	"flag"
	"fmt"
	"math"
	"runtime"
	"time"

	"cadencewright/scheduler"
	"cadencewright/scheduler/compare"
	"cadencewright/scheduler/explain"
	"cadencewright/scheduler/feasible"
	"cadencewright/scheduler/solve"
	"cadencewright/scheduler/verify"
)

// planCommand plans from a file, without a database or a service, by the same
// steps as the service's planning jobs: read the sky, search, say why what is
// unmet is unmet, re-check, and only then write.
var planCommand = command{
	name:  "plan",
	args:  "CAMPAIGN.json",
	short: "plan a week: fill the blocks and prove how good the plan is",
	long: `Makes a plan for the blocks that start in a week, or in another stretch of time:
which source is observed when, where and for how long, what that earns, what
stays unmet, and a certificate of how good any plan could be. The file appears
whole or not at all. The same campaign, seed and effort give the same plan, to
the byte; with --seconds the clock decides how far the search goes. Ctrl-C ends
the search and keeps the best plan found so far; a second one ends the program.
Where the time is over or Ctrl-C comes before a search could begin, there is no
plan to keep: that is said, nothing is written, and the exit code is 1.

With --at, a plan that is under way is planned again: --from names its file.
Scans that began before stay as they are, unless their block has lost that time
by now; later ones change only where that earns more than --stability each.`,
	examples: []string{
		"cadencewright plan campaign.json --week 2027-W03 --out plan.json",
		"cadencewright plan campaign.json --from 2027-01-18 --to 2027-02-01 --seconds 60 --out plan.json",
		"cadencewright plan campaign.json --effort 50000 --seed 7 > plan.json",
		"cadencewright plan campaign.json --from plan.json --at 2027-01-20T06:00Z --out plan2.json",
	},
	setup: func(flags *flag.FlagSet) action {
		q := &planQuestion{}
		q.horizon.declare(flags)
		flags.StringVar(&q.at, "at", "", "plan again: `INSTANT` before which the scans of the plan that --from names stay as they are")
		flags.Float64Var(&q.stability, "stability", solve.DefaultStability, "with --at, `WORTH` of each later scan that stays unchanged")
		flags.StringVar(&q.out, "out", "-", "`FILE` to write the plan to; - is standard output")
		flags.Int64Var(&q.effort, "effort", 0, "how much to search, in thousands of changes `TRIED`; if left out, what suits the number of units")
		// Time is a limit and never a reason for another plan by itself: who
		// wants the same bytes again gives an effort.
		flags.Float64Var(&q.seconds, "seconds", 0, "stop the search after so many `SECONDS`, and search until then if --effort is left out")
		flags.Uint64Var(&q.seed, "seed", 0, "`NUMBER` that the search's random choices start from")
		flags.IntVar(&q.workers, "workers", runtime.GOMAXPROCS(0), "how many `CORES` may share the work; it does not change the plan")
		flags.BoolVar(&q.quiet, "quiet", false, "no progress and no summary")
		return q.run
	},
}

// planQuestion is what was asked, as it stood on the command line.
type planQuestion struct {
	horizon   horizonFlags
	at        string // with it, horizon.from names a plan's file
	stability float64
	out       string  // a file, or - for standard output
	effort    int64   // thousands of steps; 0: the solver's own, or none where seconds are given
	seconds   float64 // 0: no limit of time
	seed      uint64
	workers   int
	quiet     bool
}

// endlessEffort is more than any search spends before its time is up.
const endlessEffort = 1 << 40

// check reports flags that are out of range.
func (q *planQuestion) check() error {
	switch {
	case q.effort < 0 || q.effort > endlessEffort:
		return usagef("--effort is %d; allowed is 1 to %d, in thousands of changes tried", q.effort, int64(endlessEffort))
	case !(q.seconds >= 0 && q.seconds <= 7*86400):
		return usagef("--seconds is %g; allowed is up to a week, 604800", q.seconds)
	case !(q.stability >= 0 && q.stability <= 1000):
		return usagef("--stability is %g; allowed is 0 to 1000", q.stability)
	case q.workers < 1 || q.workers > 1024:
		return usagef("--workers is %d; allowed is 1 to 1024", q.workers)
	}
	return nil
}

// run makes the plan and writes it. Nothing appears under the file's name
// before the plan has been made and re-checked.
func (q *planQuestion) run(ctx context.Context, std stdio, args []string) error {
	if err := exactly(args, "CAMPAIGN.json"); err != nil {
		return err
	}
	if err := q.check(); err != nil {
		return err
	}
	c, err := readCampaign(std, args[0])
	if err != nil {
		return err
	}
	again, h, err := q.start(std, c)
	if err != nil {
		return err
	}
	// Time runs from here: reading the sky is part of it.
	started := time.Now()
	if q.seconds > 0 {
		var cancel context.CancelFunc
		ctx, cancel = context.WithTimeout(ctx, time.Duration(q.seconds*float64(time.Second)))
		defer cancel()
	}
	problem, err := q.prepare(ctx, c, h)
	if err != nil {
		return err
	}
	// Before the search, so that a folder that cannot be written to costs none.
	out, err := openOutput(std, q.out)
	if err != nil {
		return err
	}
	defer out.discard()
	result, err := q.search(ctx, std, problem, again, started)
	if err != nil {
		return err
	}
	result.Plan.Unmet = explain.Unmet(problem, result.Plan)
	if err := soundPlan(c, result.Plan); err != nil {
		return err
	}
	// Written whole or not at all, and only now that the re-check has passed.
	data, err := scheduler.WritePlan(result.Plan)
	if err != nil {
		return err
	}
	if err := out.commit(data); err != nil {
		return err
	}
	if !q.quiet {
		fmt.Fprint(std.err, planSummary(problem, result, time.Since(started)))
		if again != nil {
			fmt.Fprint(std.err, changesText(compare.Plans(again.From, result.Plan, again.At)))
		}
	}
	return nil
}

// prepare reads the sky for the blocks of a horizon. A context that ends
// before that is done is a failure: without the sky there is not even an empty
// plan whose bound could be told.
func (q *planQuestion) prepare(ctx context.Context, c *scheduler.Campaign, h scheduler.Horizon) (*feasible.Problem, error) {
	problem, err := feasible.BuildUntil(c, h, func() bool { return ctx.Err() != nil })
	switch {
	case !errors.Is(err, feasible.ErrStopped):
		return problem, err
	case errors.Is(ctx.Err(), context.DeadlineExceeded):
		return nil, fmt.Errorf("the %g s of --seconds were over before a search could begin; there is no plan and nothing was written: allow more time", q.seconds)
	}
	return nil, errors.New("interrupted before a search could begin; there is no plan and nothing was written")
}

// search looks for a plan until the effort or the time is spent or the context
// ends; started is when the time began to count.
func (q *planQuestion) search(ctx context.Context, std stdio, problem *feasible.Problem, again *solve.Replan, started time.Time) (*solve.Result, error) {
	line := &progressLine{now: time.Now}
	if !q.quiet {
		line = newProgressLine(std.err)
	}
	defer line.clear()
	// A limit of time alone means: search until then.
	effort := q.effort
	if effort == 0 && q.seconds > 0 {
		effort = endlessEffort
	}
	return solve.Solve(problem, solve.Options{
		Seed: q.seed, Effort: effort, Workers: q.workers, Replan: again,
		Stop:     func() bool { return ctx.Err() != nil },
		Pace:     pace(started, q.seconds),
		Progress: func(p solve.Progress) { line.show(p.Effort, p.Score, known(p.Bound)) },
	})
}

// pace is which part of some seconds is over; nil where they have no limit.
func pace(started time.Time, seconds float64) func() float64 {
	if seconds <= 0 {
		return nil
	}
	return func() float64 { return time.Since(started).Seconds() / seconds }
}

// known is the bound, or 0 where there is none yet.
func known(bound float64) float64 {
	if math.IsInf(bound, 0) {
		return 0
	}
	return bound
}

// soundPlan re-checks the plan's scans and score by the code that shares
// nothing with the planner, so that a fault of the planner never reaches a
// telescope.
func soundPlan(c *scheduler.Campaign, p *scheduler.Plan) error {
	report, err := verify.Check(c, p, verify.Options{SkipBound: true})
	if err != nil {
		return err
	}
	if report.OK() {
		return nil
	}
	return fmt.Errorf("the plan that was made breaks %d rules, which is a fault of the program; nothing was written. The first: %w",
		len(report.Violations), errors.New(report.Violations[0].String()))
}

// planSummary says in a few lines what came out.
func planSummary(problem *feasible.Problem, r *solve.Result, took time.Duration) string {
	p := r.Plan
	// A plan lists no blocks: those that are used are counted by their scans.
	blocks := map[string]bool{}
	for _, s := range p.Scans {
		blocks[s.Block] = true
	}
	all := len(problem.Units.Units)
	status := string(r.Status)
	if r.Status == solve.Stopped {
		status = "stopped, this is the best plan so far"
	}
	return fmt.Sprintf("%s: score %.3f of %.3f possible, bound %.3f, gap %.2f %%\n%d scans in %d of %d blocks, %d of %d units met; %s after %.1f s\n",
		describeHorizon(scheduler.Horizon{From: p.From, To: p.To}), p.Score, p.Possible, p.Bound, 100*gap(p.Score, p.Bound),
		len(p.Scans), len(blocks), len(problem.Blocks), all-len(p.Unmet), all, status, took.Seconds())
}
