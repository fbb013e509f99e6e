package edit

import (
	"os"
	"sync"
	"testing"

	"cadencewright/scheduler"
	"cadencewright/scheduler/feasible"
	"cadencewright/scheduler/solve"
	"cadencewright/testdata"
)

// campaignNames are the repository's campaigns.
var campaignNames = []string{"small-1", "small-2", "medium-1", "medium-2", "hard-1", "large-1", "demo"}

// problemOf is one of the repository's campaigns over its week, built once for
// all tests, which only read it.
func problemOf(t testing.TB, name string) *feasible.Problem {
	t.Helper()
	return cached(t, &problems, name, func() (*feasible.Problem, error) {
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
}

// planOf is a plan that the planner makes of a campaign after little search.
func planOf(t testing.TB, name string) *scheduler.Plan {
	t.Helper()
	p := problemOf(t, name)
	return cached(t, &solved, name, func() (*scheduler.Plan, error) {
		r, err := solve.Solve(p, solve.Options{Seed: 5, Effort: 20})
		if err != nil {
			return nil, err
		}
		return r.Plan, nil
	})
}

// sessionOf is a new session on a campaign's plan.
func sessionOf(t testing.TB, name string) *Session {
	t.Helper()
	s, err := New(problemOf(t, name), planOf(t, name))
	if err != nil {
		t.Fatal(err)
	}
	return s
}

// What tests share: name → func() (T, error).
var problems, solved sync.Map

func cached[T any](t testing.TB, m *sync.Map, name string, make func() (T, error)) T {
	t.Helper()
	f, _ := m.LoadOrStore(name, sync.OnceValues(make))
	v, err := f.(func() (T, error))()
	if err != nil {
		t.Fatal(err)
	}
	return v
}
