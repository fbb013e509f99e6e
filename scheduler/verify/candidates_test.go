package verify

import (
	"math"
	"testing"
	"time"

	"cadencewright/scheduler"

	"pgregory.net/rapid"
)

// Where candidates may start, and what each is worth, against listing them one
// by one: on the tiny campaign, and on it with its limits moved about.
func TestCandidatesAgainstListing(t *testing.T) {
	for _, x := range []struct {
		name   string
		change func(*scheduler.Campaign)
	}{
		{"as it is", func(*scheduler.Campaign) {}},
		{"narrow motor range", func(c *scheduler.Campaign) { c.Telescopes[0].AzimuthRangeDeg = [2]float64{-150, 200} }},
		{"motor range with a hole", func(c *scheduler.Campaign) { c.Telescopes[0].AzimuthRangeDeg = [2]float64{130, 250} }},
		{"hour angle through 12 h", func(c *scheduler.Campaign) {
			c.Telescopes[1].HourAngleRangeH, c.Telescopes[1].LatitudeDeg, c.Telescopes[1].ElevationMinDeg = [2]float64{-12, 12}, 72, 2
			for _, i := range []int{1, 4} { // when the sources are below the pole
				c.Blocks[i].Start, c.Blocks[i].End, c.Blocks[i].Lost = c.Blocks[i].Start.Add(9*time.Hour), c.Blocks[i].End.Add(9*time.Hour), nil
			}
		}},
		{"lost parts", func(c *scheduler.Campaign) {
			for i := range c.Blocks {
				c.Blocks[i].Lost = []scheduler.Span{{Start: c.Blocks[i].Start.Add(90 * time.Minute), End: c.Blocks[i].Start.Add(100*time.Minute + 7*time.Second)}}
			}
		}},
		{"blocks off the grid", func(c *scheduler.Campaign) {
			for i := range c.Blocks {
				c.Blocks[i].Start, c.Blocks[i].End = c.Blocks[i].Start.Add(83*time.Second), c.Blocks[i].End.Add(-99*time.Second)
			}
			c.Blocks[1].Lost = nil
		}},
		{"slow to settle", func(c *scheduler.Campaign) {
			for i := range c.Telescopes {
				c.Telescopes[i].SettleS = 400
			}
		}},
		{"more pins", func(c *scheduler.Campaign) {
			c.Pins = append(c.Pins, scheduler.Pin{Block: "e1", Source: c.Sources[4].Name, Receiver: "L", Start: after(6), Minutes: 20},
				scheduler.Pin{Block: "t1", Source: c.Sources[6].Name, Receiver: "L", Start: after(0.5), Minutes: 10}) // not up yet
		}},
		{"not detectable in one band", func(c *scheduler.Campaign) { c.Sources[4].Scatter1GHzS = 0.03 }},
		{"short windows", func(c *scheduler.Campaign) {
			for i := range c.CadenceTargets {
				c.CadenceTargets[i].EveryD, c.CadenceTargets[i].EarlyD = 0.5, 0.2
			}
			c.OverlapGoals[0].EveryD, c.BandPairGoals[0].EveryD, c.BandPairGoals[0].WithinH = 0.6, 0.3, 2
		}},
	} {
		t.Run(x.name, func(t *testing.T) {
			t.Parallel()
			c := tiny(t)
			c.GridMin, c.Pins[0].Minutes = 10, 30 // listing takes the square of the number of candidates
			x.change(c)
			compareWithListing(t, c)
		})
	}
}

func compareWithListing(t *testing.T, c *scheduler.Campaign) {
	n := newNaive(t, c)
	prices := pricesOf(n.m, somePrices(n.m))
	partners, err := n.m.findPartners(Options{})
	if err != nil {
		t.Fatal(err)
	}
	compared := 0
	for _, b := range n.m.blocks {
		f, err := n.m.newField(b)
		if err != nil {
			t.Fatal(err)
		}
		for _, s := range n.m.wanted(b, func(*goal) bool { return true }) {
			var v view
			seen := v.look(f, s)
			a := &appraiser{model: n.m, partners: partners, prices: prices, field: f}
			if seen {
				a.add(&v)
			}
			want := bestListed(t, n, f, s, prices)
			compared += len(want)
			for key, worth := range want {
				got := 0.0
				if seen {
					got = a.row(key[0])[key[1]]
				}
				if math.Abs(got-worth) > 1e-6 {
					t.Errorf("%s in %s, %d steps at %d: worth %g, want %g", s.Name, b.ID, key[0], key[1], got, worth)
				}
			}
			for _, r := range a.rows {
				for i, got := range r.best {
					if _, listed := want[[2]int64{r.length, int64(i)}]; got > 0 && !listed {
						t.Errorf("%s in %s, %d steps at %d: worth %g, and it is no candidate", s.Name, b.ID, r.length, i, got)
					}
				}
			}
		}
	}
	if compared < 250 {
		t.Errorf("only %d candidates compared", compared)
	}
}

// bestListed is the best worth by length and start over a block's receivers.
func bestListed(t *testing.T, n *naive, f *field, s *source, prices []float64) map[[2]int64]float64 {
	want := map[[2]int64]float64{}
	for _, r := range f.receivers {
		for _, c := range n.inBlock(t, f.block, s, r) {
			key := [2]int64{int64(c.end.Sub(c.start) / n.grid), c.start.Unix()/int64(n.grid/time.Second) - f.first}
			want[key] = max(want[key], n.worth(t, c, prices))
		}
	}
	return want
}

// The chain of scans must be the best of all, tried out one after the other.
func TestChain(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		steps := rapid.Int64Range(1, 12).Draw(t, "steps")
		gap := rapid.Int64Range(0, 3).Draw(t, "gap")
		a := &appraiser{field: &field{steps: steps, gap: gap}}
		for _, length := range []int64{1, 2, 5, 20} {
			row := a.row(length)
			for i := int64(0); i+length <= steps; i++ {
				row[i] = rapid.Float64Range(0, 3).Draw(t, "worth")
			}
		}
		var try func(from int64) float64
		try = func(from int64) float64 {
			best := 0.0
			for _, r := range a.rows {
				for i := from; i+r.length <= steps; i++ {
					best = max(best, r.best[i]+try(i+r.length+gap))
				}
			}
			return best
		}
		if got, want := a.chain(), try(0); math.Abs(got-want) > 1e-12 {
			t.Fatalf("%g, want %g", got, want)
		}
	})
}

// Interference depends on the local hour, also across a change of the clocks.
func TestLocalHour(t *testing.T) {
	c := tiny(t)
	m := unitsOf(t, c)
	for _, x := range []struct {
		code, utc string
		want      int
	}{
		{"ALT", "2027-01-18T00:00:00Z", 1}, {"ALT", "2027-03-28T00:59:59Z", 1}, {"ALT", "2027-03-28T01:00:00Z", 3},
		{"EQU", "2027-01-18T00:00:00Z", 19}, {"TRN", "2027-01-18T18:29:59Z", 23}, {"TRN", "2027-01-18T18:30:00Z", 0},
	} {
		when, err := time.Parse(time.RFC3339, x.utc)
		if err != nil {
			t.Fatal(err)
		}
		if got := m.telescopes[x.code].localHour(instantOf(when)); got != x.want {
			t.Errorf("%s at %s: hour %d, want %d", x.code, x.utc, got, x.want)
		}
	}
}

// At the very edge of what still counts, a plan may take either side.
func TestQualityAtItsFloor(t *testing.T) {
	c := tiny(t)
	p := greedyPlan(t, c, week(c))
	s := earner(t, p, "cad-J1104#2")
	value := s.Earns[0].Value
	for _, x := range []struct {
		q  float64 // what the scan reaches of the quality wanted
		ok bool
	}{{0.5001, true}, {0.4995, true}, {0.498, false}} {
		c.CadenceTargets[6].TOAUs = s.TOAUs * math.Sqrt(x.q)
		s.Earns[0].Value = value * x.q
		restate := *p
		r, err := Check(c, &restate, Options{SkipBound: true})
		if err != nil {
			t.Fatal(err)
		}
		wrong := false
		for _, v := range r.Violations {
			wrong = wrong || v.Kind == KindUnitValue && v.Unit == "cad-J1104#2"
		}
		if wrong == x.ok {
			t.Errorf("quality %g: %v", x.q, r.Violations)
		}
	}
}
