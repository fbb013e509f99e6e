package solve_test

import (
	"bytes"
	"os"
	"testing"

	"cadencewright/scheduler"
	"cadencewright/scheduler/feasible"
	"cadencewright/scheduler/solve"
	"cadencewright/testdata"
)

func problem(t testing.TB, name string) *feasible.Problem {
	t.Helper()
	data, err := os.ReadFile(testdata.Path("campaigns", name+".json"))
	if err != nil {
		t.Fatal(err)
	}
	c, err := scheduler.ReadCampaign(data)
	if err != nil {
		t.Fatal(err)
	}
	return problemOf(t, c)
}

func problemOf(t fataler, c *scheduler.Campaign) *feasible.Problem {
	t.Helper()
	p, err := feasible.Build(c, scheduler.Horizon{From: c.Start, To: c.End})
	if err != nil {
		t.Fatal(err)
	}
	return p
}

// Baseline and least bound of testdata/campaigns/README.md, made by other
// programs: a greedy planner, and the best prices found for bound(p).
var campaigns = []struct {
	name            string
	baseline, bound float64
}{
	{"small-1", 43.845, 51.929}, {"small-2", 30.474, 32.058}, {"medium-1", 192.953, 208.698},
	{"medium-2", 162.769, 173.473}, {"hard-1", 336.150, 403.057}, {"large-1", 460.230, 503.089},
}

// A short search already beats the baseline, and its bound is near the least.
func TestCampaigns(t *testing.T) {
	for _, c := range campaigns {
		t.Run(c.name, func(t *testing.T) {
			r, err := solve.Solve(problem(t, c.name), solve.Options{Seed: 1, Effort: 600, Workers: 2})
			if err != nil {
				t.Fatal(err)
			}
			t.Logf("score %.3f (baseline %.3f), bound %.3f (least known %.3f), %s", r.Plan.Score, c.baseline, r.Plan.Bound, c.bound, r.Status)
			if r.Plan.Score < c.baseline {
				t.Errorf("score %.3f is below the baseline %.3f", r.Plan.Score, c.baseline)
			}
			if r.Plan.Score > r.Plan.Bound*(1+1e-9) {
				t.Errorf("score %.6f is above the bound %.6f", r.Plan.Score, r.Plan.Bound)
			}
			if r.Plan.Bound > c.bound*1.005 || r.Plan.Bound < c.bound*0.995 {
				t.Errorf("bound %.3f is not within 0.5 %% of the least known %.3f", r.Plan.Bound, c.bound)
			}
		})
	}
}

// The same problem, seed and effort give the same bytes, run twenty times on
// one worker and on two.
func TestSamePlanAgain(t *testing.T) {
	for name, runs := range map[string]int{"small-1": 20, "medium-2": 4} {
		t.Run(name, func(t *testing.T) {
			p := problem(t, name)
			var first []byte
			for i := range runs {
				r, err := solve.Solve(p, solve.Options{Seed: 7, Effort: 60, Workers: 1 + i%2})
				if err != nil {
					t.Fatal(err)
				}
				out, err := scheduler.WritePlan(r.Plan)
				if err != nil {
					t.Fatal(err)
				}
				if i == 0 {
					first = out
				} else if !bytes.Equal(first, out) {
					t.Fatalf("run %d on %d workers gives another plan", i, 1+i%2)
				}
			}
		})
	}
}

// A search that is stopped at once still gives a plan with its bound.
func TestStopAtOnce(t *testing.T) {
	r, err := solve.Solve(problem(t, "small-1"), solve.Options{Stop: func() bool { return true }})
	if err != nil {
		t.Fatal(err)
	}
	if r.Status != solve.Stopped {
		t.Errorf("status %q, want %q", r.Status, solve.Stopped)
	}
	if r.Plan.Score <= 0 || r.Plan.Score > r.Plan.Bound {
		t.Errorf("score %g, bound %g", r.Plan.Score, r.Plan.Bound)
	}
}
