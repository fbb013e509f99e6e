package solve_test

import (
	"bytes"
	"math"
	"testing"

	"cadencewright/scheduler"
	"cadencewright/scheduler/feasible"
	"cadencewright/scheduler/solve"
	"cadencewright/scheduler/verify"

	"pgregory.net/rapid"
)

// fataler is what helpers need of an ordinary test or of a property.
type fataler interface {
	Helper()
	Fatal(args ...any)
	Fatalf(format string, args ...any)
	Errorf(format string, args ...any)
}

func planOf(t fataler, c *scheduler.Campaign, o solve.Options) *scheduler.Plan {
	t.Helper()
	p, err := feasible.Build(c, scheduler.Horizon{From: c.Start, To: c.End})
	if err != nil {
		t.Fatal(err)
	}
	r, err := solve.Solve(p, o)
	if err != nil {
		t.Fatal(err)
	}
	return r.Plan
}

// good checks a plan with the verifier, which shares no code with the planner.
func good(t fataler, c *scheduler.Campaign, p *scheduler.Plan) {
	t.Helper()
	r, err := verify.Check(c, p, verify.Options{})
	if err != nil {
		t.Fatal(err)
	}
	for _, v := range r.Violations {
		t.Errorf("violation: %s: %s", v.Kind, v.Text)
	}
	if math.Abs(r.Score-p.Score) > 1e-6*(1+p.Score) {
		t.Errorf("the plan claims a score of %.9f and is worth %.9f", p.Score, r.Score)
	}
	if math.Abs(r.Bound-p.Bound) > 1e-6*(1+p.Bound) {
		t.Errorf("the plan claims a bound of %.9f and its prices prove %.9f", p.Bound, r.Bound)
	}
	if p.Score > p.Bound*(1+1e-9)+1e-9 {
		t.Errorf("score %.9f is above the bound %.9f", p.Score, p.Bound)
	}
	for i := range c.Pins {
		if n := times(p, &c.Pins[i]); n != 1 {
			t.Errorf("pin %d stands %d times in the plan", i, n)
		}
	}
}

func times(p *scheduler.Plan, pin *scheduler.Pin) int {
	n := 0
	for i := range p.Scans {
		s := &p.Scans[i]
		if s.Pinned && s.Block == pin.Block && s.Source == pin.Source && s.Receiver == pin.Receiver && s.Start.Equal(pin.Start) && s.Minutes == pin.Minutes {
			n++
		}
	}
	return n
}

// Whatever the campaign: the plan breaks no rule, is worth what it says, is
// bounded, holds every pin, and is the same on one worker and on two.
func TestPlansOfDrawnCampaigns(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		c := drawCampaign(t)
		o := solve.Options{Seed: rapid.Uint64().Draw(t, "seed"), Effort: 40, Workers: 1}
		one := planOf(t, c, o)
		good(t, c, one)
		o.Workers = 2
		a, err := scheduler.WritePlan(one)
		if err != nil {
			t.Fatal(err)
		}
		b, err := scheduler.WritePlan(planOf(t, c, o))
		if err != nil {
			t.Fatal(err)
		}
		if !bytes.Equal(a, b) {
			t.Fatal("two workers give another plan than one")
		}
	})
}

// A search may be stopped the n-th time that it asks; what it has is valid.
func TestStopAnyTime(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		c := drawCampaign(t)
		left := rapid.IntRange(0, 1200).Draw(t, "asks")
		p := planOf(t, c, solve.Options{Effort: 60, Stop: func() bool { left--; return left < 0 }})
		good(t, c, p)
	})
}

// bare is a campaign with one telescope, two sources and one block.
func bare() *scheduler.Campaign {
	c := &scheduler.Campaign{Name: "bare", Start: monday, End: after(24), GridMin: 10,
		Telescopes: []scheduler.Telescope{site("T0", scheduler.MountEquatorial, 0)},
		Sources:    []scheduler.Source{pulsar(0, 40), pulsar(1, 30)}}
	for i, id := range []string{"a", "b"} {
		c.CadenceTargets = append(c.CadenceTargets, scheduler.CadenceTarget{
			Goal: scheduler.Goal{ID: id, Source: c.Sources[i].Name, Bands: []string{"L"}, Priority: float64(i + 1)}, EveryD: 2, EarlyD: 0.5})
	}
	c.Blocks = []scheduler.Block{{ID: "b", Telescope: "T0", Start: monday, End: after(3), Receivers: []string{"L"}}}
	return c
}

// What leaves nothing to plan, or cannot all be done, gives a plan all the same.
func TestOddCampaigns(t *testing.T) {
	for name, change := range map[string]func(*scheduler.Campaign){
		"no blocks":     func(c *scheduler.Campaign) { c.Blocks = nil },
		"no goals":      func(c *scheduler.Campaign) { c.CadenceTargets = nil },
		"no sources":    func(c *scheduler.Campaign) { c.Sources, c.CadenceTargets = nil, nil },
		"never up":      func(c *scheduler.Campaign) { c.Sources[0].DecDeg, c.Sources[1].DecDeg = -80, -85 },
		"shorter block": func(c *scheduler.Campaign) { c.Blocks[0].End = monday.Add(3 * 1e9) },
		"all lost":      func(c *scheduler.Campaign) { c.Blocks[0].Lost = []scheduler.Span{{Start: monday, End: after(3)}} },
		"all later":     func(c *scheduler.Campaign) { c.Blocks[0].Start, c.Blocks[0].End = after(30), after(33) },
		"one pin":       func(c *scheduler.Campaign) { c.Pins = pinsAt(c, 60) },
		"a pin of a source without goals": func(c *scheduler.Campaign) {
			c.CadenceTargets = c.CadenceTargets[1:]
			c.Pins = pinsAt(c, 60)
		},
	} {
		t.Run(name, func(t *testing.T) {
			c := bare()
			change(c)
			good(t, c, planOf(t, c, solve.Options{Effort: 20}))
		})
	}
}

func pinsAt(c *scheduler.Campaign, minutes ...float64) []scheduler.Pin {
	var list []scheduler.Pin
	for _, m := range minutes {
		list = append(list, scheduler.Pin{Block: "b", Source: c.Sources[0].Name, Receiver: "L", Start: after(m / 60), Minutes: 30})
	}
	return list
}

// Pins that no plan can keep lead to no panic; the verifier names the rule.
func TestPinsThatCannotBe(t *testing.T) {
	for name, change := range map[string]func(*scheduler.Campaign){
		"in the setup": func(c *scheduler.Campaign) { c.Pins = pinsAt(c, 0) },
		"too close":    func(c *scheduler.Campaign) { c.Pins = pinsAt(c, 60, 90) },
		"not up":       func(c *scheduler.Campaign) { c.Sources[0].DecDeg = -80; c.Pins = pinsAt(c, 60) },
	} {
		t.Run(name, func(t *testing.T) {
			c := bare()
			change(c)
			p := planOf(t, c, solve.Options{Effort: 20})
			r, err := verify.Check(c, p, verify.Options{})
			if err != nil {
				t.Fatal(err)
			}
			if r.OK() {
				t.Error("the verifier finds nothing wrong with a pin that cannot be")
			}
		})
	}
}
