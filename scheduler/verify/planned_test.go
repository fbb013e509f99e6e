package verify_test

import (
	"os"
	"testing"

	"cadencewright/scheduler"
	"cadencewright/scheduler/feasible"
	"cadencewright/scheduler/solve"
	"cadencewright/scheduler/verify"
	"cadencewright/testdata"
)

// What the planner makes must pass, and planner and check, which share no code,
// must agree on every number a thousand times better than the model asks for.
func TestPlansOfThePlanner(t *testing.T) {
	for _, name := range []string{"small-1", "small-2", "medium-1", "medium-2", "hard-1", "demo"} {
		t.Run(name, func(t *testing.T) {
			data, err := os.ReadFile(testdata.Path("campaigns", name+".json"))
			if err != nil {
				t.Fatal(err)
			}
			c, err := scheduler.ReadCampaign(data)
			if err != nil {
				t.Fatal(err)
			}
			h := scheduler.Horizon{From: c.Start, To: c.End}
			if name == "demo" { // months long
				h = scheduler.DefaultHorizon(c)
			}
			p, err := feasible.Build(c, h)
			if err != nil {
				t.Fatal(err)
			}
			r, err := solve.Solve(p, solve.Options{Seed: 3, Effort: 200})
			if err != nil {
				t.Fatal(err)
			}
			report, err := verify.Check(c, r.Plan, verify.Options{Relative: 1e-6})
			if err != nil {
				t.Fatal(err)
			}
			for _, v := range append(report.Violations, report.Notes...) {
				t.Error(v)
			}
			if len(r.Plan.Scans) == 0 || report.Score <= 0 {
				t.Errorf("%d scans, score %g: nothing to check", len(r.Plan.Scans), report.Score)
			}
		})
	}
}
