package explain

import (
	"testing"

	"cadencewright/scheduler"
	"cadencewright/scheduler/edit"
	"cadencewright/scheduler/feasible"
	"cadencewright/scheduler/verify"
)

// Every suggestion for every unmet unit of several campaigns, made in the whole
// campaign: the independent check accepts the plan, and the unit is earned once
// more, for the gain that was said.
func TestSuggestionsMeetTheirUnits(t *testing.T) {
	for _, name := range []string{"small-1", "small-2", "medium-1", "medium-2", "hard-1", "demo"} {
		t.Run(name, func(t *testing.T) {
			t.Parallel()
			p := problemOf(t, name)
			seen := map[Kind]int{}
			for kind, listed := range plans(t, name) {
				if kind == "thinned" && (name == "hard-1" || name == "medium-2") {
					continue // enough of them already
				}
				plan := atBest(t, p, listed)
				before := checked(t, p.Campaign, plan)
				for _, u := range unmet(p, plan, 0) {
					list, err := Suggest(p, plan, u.Unit)
					if err != nil {
						t.Fatal(err)
					}
					for i := range list {
						s := &list[i]
						seen[s.Kind]++
						t.Logf("%s %s: %s", kind, u.Unit, s.Text)
						c, after, err := s.Apply(p.Campaign, plan)
						if err != nil {
							t.Fatalf("%s: %v", s.Text, err)
						}
						if err := c.Validate(); err != nil {
							t.Errorf("%s: %v", s.Text, err)
						}
						report := checked(t, c, after)
						if report.Units[u.Unit] != before.Units[u.Unit]+1 {
							t.Errorf("%s is earned %d times, %d before: %s", u.Unit, report.Units[u.Unit], before.Units[u.Unit], s.Text)
						}
						if d := report.Score - before.Score - s.Gain; d > 1e-6 || d < -1e-6 {
							t.Errorf("the score rises by %.6f, said was %.6f: %s", report.Score-before.Score, s.Gain, s.Text)
						}
					}
				}
			}
			t.Log(seen)
		})
	}
}

// atBest is a plan with its scans given to the units so that they earn most,
// which is what a gain is counted from.
func atBest(t *testing.T, p *feasible.Problem, plan *scheduler.Plan) *scheduler.Plan {
	t.Helper()
	session, err := edit.New(p, plan)
	if err != nil {
		t.Fatal(err)
	}
	best, _, err := session.Apply()
	if err != nil {
		t.Fatal(err)
	}
	return best
}

// checked is what the independent check says of a plan, which breaks no rule.
func checked(t *testing.T, c *scheduler.Campaign, plan *scheduler.Plan) *verify.Report {
	t.Helper()
	report, err := verify.Check(c, plan, verify.Options{SkipBound: true, Relative: 1e-6})
	if err != nil {
		t.Fatal(err)
	}
	for _, v := range report.Violations {
		t.Error(v)
	}
	return report
}
