package explain

import (
	"math"
	"testing"

	"cadencewright/astro/sky"
	"cadencewright/scheduler"
	"cadencewright/scheduler/feasible"
)

// emptyPlan is a plan of a problem without a scan.
func emptyPlan(p *feasible.Problem) *scheduler.Plan {
	return &scheduler.Plan{Campaign: p.Campaign.Name, From: p.Horizon.From, To: p.Horizon.To}
}

// Time that is free while a source is up must be long enough for a scan just
// where the planner finds one, wherever the cable wrap cannot matter.
func TestFreeTimeAgreesWithThePlanner(t *testing.T) {
	compared := map[bool]int{}
	for _, name := range []string{"small-1", "medium-1", "medium-2", "hard-1"} {
		p := problemOf(t, name)
		e := newExplainer(p, emptyPlan(p))
		asked := map[int]bool{}
		for ui := range p.Units.Units {
			q := e.question(ui)
			if asked[q.goal.Source] {
				continue
			}
			asked[q.goal.Source] = true
			for bi := range p.Blocks {
				b := &p.Blocks[bi]
				if r := b.Mount.AzRange; b.Mount.Kind == scheduler.MountAltAz && r[1]-r[0] < 360+200 {
					continue
				}
				pl := b.PlaceOf(q.goal.Source)
				found := pl != nil && len(pl.Lengths) > 0
				if long := q.longestFree(b); long >= q.shortest() != found {
					t.Errorf("%s, %s in block %d: %d min are free, a scan takes %d, and the planner finds one: %v",
						name, q.source.Name, bi, long, q.shortest(), found)
				}
				compared[found]++
			}
		}
	}
	if compared[true] < 50 || compared[false] < 50 {
		t.Errorf("compared %v", compared)
	}
}

// Offers are options like any, and hold the first and the last of every run of
// starts.
func TestOffersHoldTheEnds(t *testing.T) {
	p := problemOf(t, "hard-1")
	e := newExplainer(p, emptyPlan(p))
	runs := 0
	for ui := range p.Units.Units {
		q := e.question(ui)
		if q.goal.Kind != scheduler.KindBandPair {
			continue
		}
		list := q.reaches(1, math.Inf(-1), math.Inf(1))
		got := map[[3]int]bool{} // reach, length, start
		for i := range list {
			for _, o := range q.offers(list[i:i+1], 1) {
				got[[3]int{i, o.steps, o.start}] = true
				if l := lengthOf(o.place, o.steps); l == nil || !l.Allowed(o.start) {
					t.Fatalf("%s is not allowed", q.titled(&o.option))
				}
			}
			for _, l := range list[i].place.Lengths {
				for _, run := range l.Runs {
					runs++
					for _, start := range []int{run.From, run.To - 1} {
						if !got[[3]int{i, l.Steps, start}] {
							t.Errorf("%s: the start %d of %v is not offered", q.unit.Name, start, run)
						}
					}
				}
			}
		}
	}
	if runs < 50 {
		t.Errorf("only %d runs", runs)
	}
}

func lengthOf(pl *feasible.Place, steps int) *feasible.Length {
	for i := range pl.Lengths {
		if pl.Lengths[i].Steps == steps {
			return &pl.Lengths[i]
		}
	}
	return nil
}

// Instants from which enough telescopes could observe together, against trying
// every option of every telescope at every instant.
func TestCommonStartsAgainstTrying(t *testing.T) {
	p := problemOf(t, "small-2")
	e := newExplainer(p, emptyPlan(p))
	goals := 0
	for ui := range p.Units.Units {
		q := e.question(ui)
		if q.goal.Kind != scheduler.KindOverlap {
			continue
		}
		goals++
		lo, hi := q.unit.Window()
		list := q.reaches(q.allBands(), lo-1e4, hi)
		at, most, _ := q.commonStarts(list, lo, hi)
		got := map[float64]bool{}
		for _, x := range at {
			got[x] = true
		}
		wantMost := 0
		for x := p.Units.From; x < p.Units.To; x += float64(p.GridMin) {
			n := q.telescopesFrom(list, x)
			if q.unit.Timeliness(x) == 0 {
				n = 0
			}
			wantMost = max(wantMost, n)
			if got[x] != (n >= q.goal.Count) {
				t.Errorf("%s at %s: %d telescopes, among the common starts: %v", q.unit.Name, clock(x), n, got[x])
			}
		}
		if most != wantMost {
			t.Errorf("%s: at most %d telescopes, want %d", q.unit.Name, most, wantMost)
		}
	}
	if goals == 0 {
		t.Error("no overlap goal")
	}
}

// telescopesFrom is on how many telescopes, in the best band, an option is
// under way from an instant for the wanted time.
func (q *question) telescopesFrom(list []reach, at float64) int {
	top := 0
	for bit := uint32(1); bit <= q.allBands(); bit <<= 1 {
		seen := map[int]bool{}
		for i := range list {
			q.each(&list[i], func(o *option) {
				if o.bands&bit != 0 && o.startMin <= at && o.endMin >= at+q.goal.OverlapMin {
					seen[q.Blocks[o.block].Telescope] = true
				}
			})
		}
		top = max(top, len(seen))
	}
	return top
}

// A scan of the plan stands where the sky has its source, on every mount.
func TestPosesOfPlannedScans(t *testing.T) {
	for _, x := range []struct {
		name  string
		mount func(*scheduler.Telescope)
		of    func(sky.Place) (float64, float64)
	}{
		{"alt-azimuth", func(*scheduler.Telescope) {}, func(p sky.Place) (float64, float64) { return p.AzDeg + 360, p.ElDeg }},
		{"equatorial", func(t *scheduler.Telescope) { equatorial(t, -8, 8) }, func(p sky.Place) (float64, float64) { return p.HADeg, p.DecDeg }},
		{"transit", func(t *scheduler.Telescope) { transit(t, 300) }, func(p sky.Place) (float64, float64) { return 0, p.DecDeg }},
	} {
		t.Run(x.name, func(t *testing.T) {
			c := lone()
			wantScan(c)
			x.mount(&c.Telescopes[0])
			p, err := feasible.Build(c, scheduler.Horizon{From: c.Start, To: c.End})
			if err != nil {
				t.Fatal(err)
			}
			s := observed(asked, "b1", 1, 40)
			from, to := placeAt(t, c, s, 0), placeAt(t, c, s, 40)
			motor := from.AzDeg + 360
			s.MotorAzDeg = &motor
			got := newExplainer(p, &scheduler.Plan{Scans: []scheduler.Scan{s}}).planned[0][0]
			a1, a2 := x.of(from)
			b1, b2 := x.of(to)
			for _, d := range []float64{got.from.axis1 - a1, got.from.axis2 - a2, got.to.axis1 - b1, got.to.axis2 - b2} {
				if math.Abs(d) > 1e-3 {
					t.Errorf("%+v to %+v, want (%g, %g) to (%g, %g)", got.from, got.to, a1, a2, b1, b2)
				}
			}
		})
	}
}

// placeAt is where a scan's source stands some minutes after its start.
func placeAt(t *testing.T, c *scheduler.Campaign, s scheduler.Scan, minutes float64) sky.Place {
	t.Helper()
	p, err := sky.Observe(c.TelescopeByCode(s.Telescope).Site(), c.SourceByName(s.Source).Star(), after(s.Start.Sub(monday).Hours()+minutes/60), c.DUT1S)
	if err != nil {
		t.Fatal(err)
	}
	return p
}
