package verify

import (
	"errors"
	"math"
	"os"
	"reflect"
	"strings"
	"sync/atomic"
	"testing"
	"time"

	"cadencewright/scheduler"
	"cadencewright/testdata"

	"pgregory.net/rapid"
)

// campaign reads one of the repository's campaigns.
func campaign(t testing.TB, name string) *scheduler.Campaign {
	t.Helper()
	data, err := os.ReadFile(testdata.Path("campaigns", name+".json"))
	if err != nil {
		t.Fatal(err)
	}
	c, err := scheduler.ReadCampaign(data)
	if err != nil {
		t.Fatal(err)
	}
	return c
}

// pricesOf are prices by name as the bound wants them.
func pricesOf(m *model, byName map[string]float64) []float64 {
	prices := make([]float64, len(m.units))
	for name, p := range byName {
		prices[m.byName[name].index] = p
	}
	return prices
}

// What an independent program, in Python with the IAU routines (ERFA 2.0.0)
// for every position and instant, gives for the same campaigns and prices.
func TestAgainstERFA(t *testing.T) {
	for _, x := range []struct {
		name              string
		units             int
		possible          float64
		unpriced, atPrice float64 // bounds: without prices, and at somePrices
	}{
		{"small-1", 31, 73.683333333, 213.5881899, 192.8019711},
		{"small-2", 23, 47.084487434, 131.8493306, 108.1590264},
		{"medium-1", 95, 237.082800926, 1991.4814789, 1625.4328907},
		{"medium-2", 91, 223.154315476, 1060.6517530, 719.4963693},
		{"hard-1", 174, 460.165588624, 1511.2813211, 1099.2174998},
		{"large-1", 210, 560.578977348, 6388.8851573, 3897.9171081},
	} {
		t.Run(x.name, func(t *testing.T) {
			t.Parallel()
			c := campaign(t, x.name)
			m, err := newModel(c, week(c))
			if err != nil {
				t.Fatal(err)
			}
			if len(m.units) != x.units || math.Abs(m.possible()-x.possible) > 1e-8 {
				t.Errorf("%d units worth %.9f, want %d and %.9f", len(m.units), m.possible(), x.units, x.possible)
			}
			for _, b := range []struct {
				prices []float64
				want   float64
			}{{make([]float64, len(m.units)), x.unpriced}, {pricesOf(m, somePrices(m)), x.atPrice}} {
				got, err := m.bound(b.prices, Options{})
				if err != nil {
					t.Fatal(err)
				}
				if off := math.Abs(got-b.want) / b.want; off > 1e-6 {
					t.Errorf("bound %.7f, want %.7f: %.1e off", got, b.want, off)
				}
			}
		})
	}
}

// No plan may score above the bound, whatever the prices.
func TestBoundHoldsAtAnyPrices(t *testing.T) {
	c := tiny(t)
	p := greedyPlan(t, c, week(c))
	m, err := newModel(c, week(c))
	if err != nil {
		t.Fatal(err)
	}
	rapid.Check(t, func(t *rapid.T) {
		prices := make([]float64, len(m.units))
		for i, u := range m.units {
			prices[i] = rapid.Float64Range(0, 1.2*u.value/u.load).Draw(t, u.name)
		}
		bound, err := m.bound(prices, Options{})
		if err != nil {
			t.Fatal(err)
		}
		if bound < p.Score {
			t.Fatalf("bound %g, and the plan scores %g", bound, p.Score)
		}
	})
}

func TestWorkersDoNotMatter(t *testing.T) {
	c := campaign(t, "medium-2")
	p := greedyPlan(t, c, week(c))
	p.Score++ // something to report
	want, err := Check(c, p, Options{})
	if err != nil {
		t.Fatal(err)
	}
	for _, workers := range []int{-1, 1, 2, 3, 100} {
		got, err := Check(c, p, Options{Workers: workers})
		if err != nil {
			t.Fatal(err)
		}
		if !reflect.DeepEqual(got, want) {
			t.Errorf("%d workers: another report", workers)
		}
	}
}

func TestSkipBound(t *testing.T) {
	c := tiny(t)
	p := greedyPlan(t, c, week(c))
	p.Bound, p.Certificate.Bound = 1, 2
	p.Certificate.Prices["none"] = 1
	r, err := Check(c, p, Options{SkipBound: true})
	if err != nil {
		t.Fatal(err)
	}
	if len(r.Violations) != 1 || r.Violations[0].Kind != KindPrice || r.Bound != 0 || r.Gap() != 0 {
		t.Errorf("violations %v, bound %g, gap %g", r.Violations, r.Bound, r.Gap())
	}
}

func TestGap(t *testing.T) {
	for _, x := range []struct{ score, bound, want float64 }{{80, 100, 0.2}, {100, 100, 0}, {101, 100, 0}, {0, 0, 0}} {
		r := Report{Score: x.score, Bound: x.bound}
		if got := r.Gap(); math.Abs(got-x.want) > 1e-12 {
			t.Errorf("score %g, bound %g: gap %g, want %g", x.score, x.bound, got, x.want)
		}
	}
}

// A tighter tolerance finds what the model's own lets pass.
func TestTolerances(t *testing.T) {
	c := tiny(t)
	p := greedyPlan(t, c, week(c))
	p.Score *= 1.0001
	for _, x := range []struct {
		relative float64
		found    int
	}{{0, 0}, {1e-3, 0}, {1e-5, 1}} {
		r, err := Check(c, p, Options{Relative: x.relative})
		if err != nil {
			t.Fatal(err)
		}
		if len(r.Violations) != x.found {
			t.Errorf("tolerance %g: %v", x.relative, r.Violations)
		}
	}
}

func TestPlansThatCannotBeJudged(t *testing.T) {
	good := tiny(t)
	for _, x := range []struct {
		name   string
		change func(*scheduler.Campaign, *scheduler.Plan)
		says   string
	}{
		{"another campaign", func(_ *scheduler.Campaign, p *scheduler.Plan) { p.Campaign = "huge" }, `"huge"`},
		{"empty horizon", func(_ *scheduler.Campaign, p *scheduler.Plan) { p.To = p.From }, "2027-01-18 00:00 UTC"},
		{"horizon backwards", func(_ *scheduler.Campaign, p *scheduler.Plan) { p.From, p.To = p.To, p.From }, "horizon"},
		{"no horizon", func(_ *scheduler.Campaign, p *scheduler.Plan) { p.From, p.To = time.Time{}, time.Time{} }, "horizon"},
		{"invalid campaign", func(c *scheduler.Campaign, _ *scheduler.Plan) { c.Blocks[0].Telescope = "NONE" }, "/blocks/0/telescope"},
		{"horizon without end", func(c *scheduler.Campaign, p *scheduler.Plan) {
			p.From, p.To = time.Date(1972, 1, 1, 0, 0, 0, 0, time.UTC), time.Date(9000, 1, 1, 0, 0, 0, 0, time.UTC)
		}, "1972"},
		{"a million windows", func(c *scheduler.Campaign, p *scheduler.Plan) {
			c.CadenceTargets[0].EveryD, c.CadenceTargets[0].EarlyD = 0.04, 0.01
			p.From, p.To = time.Date(1972, 1, 1, 0, 0, 0, 0, time.UTC), time.Date(2099, 1, 1, 0, 0, 0, 0, time.UTC)
		}, "units"},
	} {
		t.Run(x.name, func(t *testing.T) {
			c := tiny(t)
			p := &scheduler.Plan{Campaign: c.Name, From: c.Start, To: c.End}
			x.change(c, p)
			r, err := Check(c, p, Options{})
			if err == nil || r != nil || !strings.Contains(err.Error(), x.says) {
				t.Fatalf("report %v, error %v, want one that says %q", r, err, x.says)
			}
		})
	}
	if _, err := Check(nil, &scheduler.Plan{}, Options{}); err == nil {
		t.Error("no campaign is no error")
	}
	if _, err := Check(good, nil, Options{}); !errors.Is(err, scheduler.ErrInvalid) {
		t.Errorf("no plan: %v", err)
	}
}

// An empty plan is a plan: it earns nothing and its pins are missing.
func TestEmptyPlan(t *testing.T) {
	c := tiny(t)
	r, err := Check(c, &scheduler.Plan{Campaign: c.Name, From: c.Start, To: c.End}, Options{SkipBound: true})
	if err != nil {
		t.Fatal(err)
	}
	if len(r.Violations) != 2 || r.Violations[0].Kind != KindPin || r.Violations[1].Kind != KindPossible {
		t.Errorf("violations %v", r.Violations)
	}
	if len(r.Notes) != len(r.Units) || r.Score != 0 {
		t.Errorf("%d notes for %d units, score %g", len(r.Notes), len(r.Units), r.Score)
	}
}

func TestStop(t *testing.T) {
	c := tiny(t)
	p := greedyPlan(t, c, week(c))
	var calls atomic.Int64
	if _, err := Check(c, p, Options{Stop: func() bool { calls.Add(1); return false }}); err != nil {
		t.Fatal(err)
	}
	if n := calls.Load(); n < int64(len(p.Scans)+len(c.Blocks)) {
		t.Errorf("asked %d times whether to stop", n)
	}
	for _, after := range []int64{0, 5, calls.Load() - 1} {
		for _, workers := range []int{1, 3} {
			var n atomic.Int64
			stop := func() bool { return n.Add(1) > after }
			if r, err := Check(c, p, Options{Stop: stop, Workers: workers}); !errors.Is(err, ErrStopped) || r != nil {
				t.Errorf("stopped after %d: report %v, error %v", after, r, err)
			}
		}
	}
}
