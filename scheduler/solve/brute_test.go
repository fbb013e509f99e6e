package solve

import (
	"math"
	"testing"
	"time"

	"cadencewright/scheduler"
	"cadencewright/scheduler/feasible"

	"pgregory.net/rapid"
)

// oneBlock is a campaign of one equatorial telescope, three sources and a block
// of an hour and a half on a grid of ten minutes.
func oneBlock(t *rapid.T, withPair bool) *scheduler.Campaign {
	start := time.Date(2027, 1, 18, 0, 0, 0, 0, time.UTC)
	at := func(minutes int) time.Time { return start.Add(time.Duration(minutes) * time.Minute) }
	rx := func(code string, freqMHz float64) scheduler.Receiver {
		return scheduler.Receiver{Code: code, Bands: []string{code}, FreqMHz: freqMHz, BandwidthMHz: 400, NPol: 2, TrecK: 20, TatmK: 2, GainKPerJy: 1, Digitisation: 1}
	}
	c := &scheduler.Campaign{Name: "one block", Start: start, End: at(1440), GridMin: 10,
		Telescopes: []scheduler.Telescope{{Code: "T", Name: "T", LatitudeDeg: 45, Timezone: "UTC", Mount: scheduler.MountEquatorial,
			ElevationMinDeg: 10, ElevationMaxDeg: 90, SetupS: 120, CalS: 60, SwitchS: 600, SettleS: 30, HourAngleRangeH: [2]float64{-6, 6},
			RateHADegS: 0.1, RateDecDegS: 0.1, Receivers: []scheduler.Receiver{rx("L", 1400), rx("S", 2400)}}}}
	for i, name := range []string{"SIM J0601+3001", "SIM J0701+4001", "SIM J0801+5001"} {
		c.Sources = append(c.Sources, scheduler.Source{Name: name, RADeg: 90 + 15*float64(i), DecDeg: 30 + 10*float64(i), PosEpochMJD: 58000,
			PeriodS: 0.005, FluxMJy: 2, FluxFreqMHz: 1400, WidthS: 0.0005, ScanMinutes: []int{10, 20}})
		c.CadenceTargets = append(c.CadenceTargets, scheduler.CadenceTarget{EveryD: rapid.Float64Range(0.3, 3).Draw(t, "every"),
			TOAUs: rapid.SampledFrom([]float64{0, 1, 2}).Draw(t, "toa"), Goal: scheduler.Goal{ID: name[4:9], Source: name,
				Bands: []string{rapid.SampledFrom([]string{"L", "S"}).Draw(t, "band")}, Priority: rapid.Float64Range(0.5, 3).Draw(t, "priority")}})
		c.CadenceTargets[i].EarlyD = c.CadenceTargets[i].EveryD / 4
	}
	if withPair {
		c.BandPairGoals = []scheduler.BandPairGoal{{Goal: scheduler.Goal{ID: "pair", Source: c.Sources[0].Name, Bands: []string{"L", "S"},
			Priority: rapid.Float64Range(0.5, 3).Draw(t, "pair")}, WithinH: 1, EveryD: 3}}
	}
	c.Blocks = []scheduler.Block{{ID: "b", Telescope: "T", Start: start, End: at(90), Receivers: []string{"L", "S"}}}
	return c
}

// brute is the best score of all plans of a problem's first block, found by
// trying every sequence of scans.
func brute(s *state, list []*scan, from int) float64 {
	b := &s.t.p.Blocks[0]
	s.open()
	s.set(0, list)
	s.weigh()
	s.accept()
	best := s.score()
	for pi := range b.Places {
		for _, l := range b.Places[pi].Lengths {
			for rx := range b.Receivers {
				for k := from; k <= b.Steps; k++ {
					if !l.Allowed(k) {
						continue
					}
					x := s.t.scan(0, pi, rx, k, l.Steps, 0, -1)
					if len(list) > 0 && !follows(b, list[len(list)-1], x, s.t.p.GridMin) {
						continue
					}
					best = math.Max(best, brute(s, append(list[:len(list):len(list)], x), k+l.Steps))
				}
			}
		}
	}
	return best
}

// follows is section 3 of the model for an equatorial mount, in seconds.
func follows(b *feasible.Block, a, x *scan, gridMin int) bool {
	pa, px := &b.Places[a.place], &b.Places[x.place]
	end := a.start + a.steps
	travel := math.Max(math.Abs(px.Axis1[x.start-px.Lo]-pa.Axis1[end-pa.Lo]), math.Abs(px.Axis2[x.start-px.Lo]-pa.Axis2[end-pa.Lo]))
	need := 30 + travel/0.1 + 60
	if a.rx != x.rx {
		need += 600
	}
	return float64(x.start-end)*float64(gridMin)*60 >= need-1e-6
}

// On one short block the search finds the best of all plans, and the bound is
// not below it.
func TestBestOfAllPlans(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		withPair := rapid.Bool().Draw(t, "with a pair")
		c := oneBlock(t, withPair)
		if err := c.Validate(); err != nil {
			t.Fatal(err)
		}
		p, err := feasible.Build(c, scheduler.Horizon{From: c.Start, To: c.End})
		if err != nil {
			t.Fatal(err)
		}
		best := brute(newState(newTable(p)), nil, 0)
		r, err := Solve(p, Options{Seed: 1, Effort: 100})
		if err != nil {
			t.Fatal(err)
		}
		if r.Plan.Score < best*(1-1e-9)-1e-9 || r.Plan.Score > best*(1+1e-9)+1e-9 {
			t.Fatalf("score %.9f, the best of all plans has %.9f", r.Plan.Score, best)
		}
		if best > r.Plan.Bound*(1+1e-9) {
			t.Fatalf("the best plan has %.9f, above the bound %.9f", best, r.Plan.Bound)
		}
	})
}
