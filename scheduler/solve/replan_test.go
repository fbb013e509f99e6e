package solve_test

import (
	"slices"
	"testing"
	"time"

	"cadencewright/scheduler"
	"cadencewright/scheduler/solve"

	"pgregory.net/rapid"
)

// same tells whether two scans are the same for whoever observes them.
func same(a, b scheduler.Scan) bool {
	return a.Block == b.Block && a.Source == b.Source && a.Receiver == b.Receiver && a.Start.Equal(b.Start) && a.Minutes == b.Minutes
}

func holds(p *scheduler.Plan, s scheduler.Scan) bool {
	return slices.ContainsFunc(p.Scans, func(o scheduler.Scan) bool { return same(o, s) })
}

// Whenever a plan is taken up again, and whatever part of a block is lost by
// then: the new plan breaks no rule, what had begun stays unless its time was
// lost, and nothing new begins in the past.
func TestReplanOfDrawnCampaigns(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		c := drawCampaign(t)
		c.Pins = nil
		old := planOf(t, c, solve.Options{Seed: 1, Effort: 30})
		at := monday.Add(time.Duration(rapid.IntRange(0, 96*60).Draw(t, "at")) * time.Minute)
		b := &c.Blocks[rapid.IntRange(0, len(c.Blocks)-1).Draw(t, "block")]
		if len(b.Lost) == 0 && rapid.Bool().Draw(t, "lose") {
			b.Lost = []scheduler.Span{{Start: b.Start.Add(15 * time.Minute), End: b.End}}
		}
		r, err := solve.Solve(problemOf(t, c), solve.Options{Seed: 2, Replan: &solve.Replan{From: old, At: at}})
		if err != nil {
			t.Fatal(err)
		}
		good(t, c, r.Plan)
		for _, s := range old.Scans {
			if s.Start.Before(at) && !inLost(c, s) && !holds(r.Plan, s) {
				t.Errorf("%s at %s had begun before %s and is gone", s.Source, s.Start, at)
			}
		}
		for _, s := range r.Plan.Scans {
			if s.Start.Before(at) && !holds(old, s) {
				t.Errorf("%s at %s is new and begins before %s", s.Source, s.Start, at)
			}
		}
	})
}

func inLost(c *scheduler.Campaign, s scheduler.Scan) bool {
	for _, b := range c.Blocks {
		for _, l := range b.Lost {
			if b.ID == s.Block && s.Start.Before(l.End) && l.Start.Before(s.End()) {
				return true
			}
		}
	}
	return false
}

// A block of a plan is lost on the second day: of what comes later at least
// nine in ten scans stay as they were, or eight in ten where the block held a
// tenth of all that the plan earns, and the plan is better than one that simply
// drops the block's scans.
func TestReplanKeepsTheRest(t *testing.T) {
	for name, least := range map[string]int{"medium-1": 90, "hard-1": 80, "large-1": 90} {
		t.Run(name, func(t *testing.T) {
			p := problem(t, name)
			first, err := solve.Solve(p, solve.Options{Seed: 1, Effort: 1000, Workers: 2})
			if err != nil {
				t.Fatal(err)
			}
			old, c := first.Plan, p.Campaign
			at := p.Horizon.From.Add(30 * time.Hour)
			bi := slices.IndexFunc(c.Blocks, func(b scheduler.Block) bool {
				return b.Start.After(at) && len(b.Lost) == 0 && slices.ContainsFunc(old.Scans, func(s scheduler.Scan) bool { return s.Block == b.ID }) &&
					!slices.ContainsFunc(c.Pins, func(p scheduler.Pin) bool { return p.Block == b.ID })
			})
			b := &c.Blocks[bi]
			b.Lost = []scheduler.Span{{Start: b.Start, End: b.End}}
			q := problemOf(t, c)
			r, err := solve.Solve(q, solve.Options{Seed: 1, Replan: &solve.Replan{From: old, At: at}})
			if err != nil {
				t.Fatal(err)
			}
			good(t, c, r.Plan)
			later, kept, gone := 0, 0, 0.0
			for _, s := range old.Scans {
				switch {
				case s.Block == b.ID:
					for _, e := range s.Earns {
						gone += e.Value
					}
				case !s.Start.Before(at):
					later++
					if holds(r.Plan, s) {
						kept++
					}
				}
			}
			t.Logf("%s lost: score %.3f -> %.3f (its scans earned %.3f), %d of %d later scans kept", b.ID, old.Score, r.Plan.Score, gone, kept, later)
			if 100*kept < least*later {
				t.Errorf("only %d of %d later scans are kept", kept, later)
			}
			if r.Plan.Score <= old.Score-gone {
				t.Errorf("score %.3f after %.3f, and only %.3f stood in the lost block", r.Plan.Score, old.Score, gone)
			}
		})
	}
}

// A scan that has begun must stay; where the campaign no longer allows it, that
// is said and nothing is planned.
func TestReplanOfAnotherCampaign(t *testing.T) {
	c := bare()
	old := planOf(t, c, solve.Options{Effort: 20})
	if len(old.Scans) == 0 {
		t.Fatal("nothing planned")
	}
	c.Blocks[0].ID = "another"
	for at, wantErr := range map[time.Time]bool{after(-1): false, after(4): true} {
		_, err := solve.Solve(problemOf(t, c), solve.Options{Effort: 20, Replan: &solve.Replan{From: old, At: at}})
		if (err != nil) != wantErr {
			t.Errorf("planned again at %s: error %v", at, err)
		}
	}
}

func BenchmarkReplan(b *testing.B) {
	p := problem(b, "large-1")
	first, err := solve.Solve(p, solve.Options{Seed: 1, Effort: 1000})
	if err != nil {
		b.Fatal(err)
	}
	at := p.Horizon.From.Add(30 * time.Hour)
	for b.Loop() {
		r, err := solve.Solve(p, solve.Options{Seed: 1, Replan: &solve.Replan{From: first.Plan, At: at}})
		if err != nil {
			b.Fatal(err)
		}
		if r.Plan.Score < first.Plan.Score-1e-9-0.05*float64(len(first.Plan.Scans)) {
			b.Fatalf("score %.3f after %.3f", r.Plan.Score, first.Plan.Score)
		}
	}
}
