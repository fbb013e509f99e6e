package feasible_test

import (
	"math"
	"math/rand/v2"
	"testing"
	"time"

	"pgregory.net/rapid"

	"cadencewright/scheduler"
	"cadencewright/scheduler/feasible"
	"cadencewright/scheduler/units"
)

// build is the one block of a drawn campaign.
func build(t *rapid.T, c *scheduler.Campaign) *feasible.Block {
	p, err := feasible.Build(c, scheduler.Horizon{From: c.Start, To: c.End})
	if err != nil {
		t.Fatal(err)
	}
	if len(p.Blocks) != 1 || p.GridMin != c.GridMin || p.Campaign != c || len(p.Units.Units) == 0 {
		t.Fatalf("%d blocks", len(p.Blocks))
	}
	return &p.Blocks[0]
}

// Every grid instant of a block is counted once: up, or down for one reason.
func TestRejectionsAddUp(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		c := drawn(t)
		b := build(t, c)
		if len(b.Rejects) != len(c.Sources) {
			t.Fatalf("%d sources are counted, want %d", len(b.Rejects), len(c.Sources))
		}
		for i, r := range b.Rejects {
			if r.Source != i || r.Samples != b.Steps+1 || r.Up+r.TooLow+r.Masked+r.TooHigh+r.NearSun+r.OffMount != r.Samples {
				t.Errorf("source %d: %+v of %d instants", i, r, b.Steps+1)
			}
			if r.Longest > max(0, r.Up-1) || r.Up > 0 && r.MaxElDeg < c.Telescopes[0].ElevationMinDeg || r.Masked > 0 && len(c.Telescopes[0].Horizon) == 0 ||
				r.OffMount > 0 && c.Telescopes[0].Mount == scheduler.MountAltAz {
				t.Errorf("source %d: %+v", i, r)
			}
			pl := b.PlaceOf(i)
			if pl == nil {
				continue
			}
			for _, l := range pl.Lengths {
				if l.Steps > r.Longest {
					t.Errorf("source %d: a scan of %d steps, but it is up for %d at most", i, l.Steps, r.Longest)
				}
			}
		}
	})
}

// Starts come as ascending stretches that do not touch; both ways of asking for
// one agree with them; every scan ends within what is known of the place.
func TestRunsOfStarts(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		c := drawn(t)
		b := build(t, c)
		for i := range b.Places {
			pl := &b.Places[i]
			if b.PlaceOf(pl.Source) != pl || b.PlaceIndex(pl.Source) != i || len(pl.Axis1) != len(pl.Axis2) {
				t.Fatalf("place %d of source %d is not found again", i, pl.Source)
			}
			for _, l := range pl.Lengths {
				n, last := 0, -2
				for _, r := range l.Runs {
					if r.From <= last || r.To <= r.From || r.From < pl.Lo || r.To-1+l.Steps >= pl.Lo+len(pl.Axis1) {
						t.Fatalf("runs %v of %d steps in a place of %d from %d", l.Runs, l.Steps, len(pl.Axis1), pl.Lo)
					}
					last = r.To
					n += r.To - r.From
				}
				for k := -2; k <= b.Steps+2; k++ {
					if l.Allowed(k) != pl.Allows(l.Steps, k) {
						t.Fatalf("two answers about step %d", k)
					}
					if l.Allowed(k) {
						n--
					}
				}
				if n != 0 || l.Minutes != l.Steps*c.GridMin {
					t.Fatalf("%d starts are missing of %+v", n, l)
				}
			}
			if pl.Allows(7777, pl.Lo) {
				t.Fatal("a length that nobody asked for is allowed")
			}
		}
	})
}

// A narrower limit never allows more, and a telescope without lost parts never
// less.
func TestNarrowerLimitsAllowNoMore(t *testing.T) {
	allowed := func(b *feasible.Block, source, steps, start int) bool {
		pl := b.PlaceOf(source)
		return pl != nil && pl.Allows(steps, start)
	}
	rapid.Check(t, func(t *rapid.T) {
		c := drawn(t)
		b := build(t, c)
		narrow, whole := *c, *c
		narrow.Telescopes = []scheduler.Telescope{tighter(c.Telescopes[0])}
		narrow.Telescopes[0].SetupS += 300
		whole.Blocks = append([]scheduler.Block(nil), c.Blocks...)
		whole.Blocks[0].Lost = nil
		n, w := build(t, &narrow), build(t, &whole)
		for source := range c.Sources {
			for _, minutes := range c.Sources[source].ScanMinutes {
				for k := range b.Steps {
					steps := minutes / c.GridMin
					now := allowed(b, source, steps, k)
					if allowed(n, source, steps, k) && !now {
						t.Fatalf("source %d: step %d is allowed only with narrower limits", source, k)
					}
					if now && !allowed(w, source, steps, k) {
						t.Fatalf("source %d: step %d is allowed only with lost parts", source, k)
					}
				}
			}
		}
	})
}

// No scan stands nearer to a pin than settling and calibration take on the
// grid; farther away the pin changes nothing.
func TestStartsKeepClearOfPins(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		c := drawn(t)
		free := build(t, c)
		at := rand.New(rand.NewPCG(rapid.Uint64().Draw(t, "pin"), 3)).IntN(max(1, free.Steps-12))
		pinned := *c
		pinned.Pins = []scheduler.Pin{{Block: "b", Source: c.Sources[1].Name, Receiver: "P", Start: units.Instant(free.Minute(at, c.GridMin)), Minutes: 5 * c.GridMin}}
		b := build(t, &pinned)
		gap := int(math.Ceil((c.Telescopes[0].SettleS+c.Telescopes[0].CalS)/60/float64(c.GridMin) - 1e-9)) // a nanosecond is nothing
		if b.MinGap != gap || len(b.Pins) != 1 || b.Pins[0].Start != at || b.Pins[0].Steps != 5 || b.Pins[0].Receiver != 1 {
			t.Fatalf("gap %d, want %d; pins %+v", b.MinGap, gap, b.Pins)
		}
		if b.PlaceOf(1) == nil && at > 0 {
			t.Fatal("the pinned source has no place")
		}
		for source := range c.Sources {
			for _, minutes := range c.Sources[source].ScanMinutes {
				steps := minutes / c.GridMin
				for k := range b.Steps {
					was, is := free.PlaceOf(source), b.PlaceOf(source)
					clear := k >= at+5+gap || k+steps+gap <= at
					want := clear && was != nil && was.Allows(steps, k)
					if got := is != nil && is.Allows(steps, k); got != want {
						t.Fatalf("source %d, step %d of %d steps, pin at %d: allowed %t", source, k, steps, at, got)
					}
				}
			}
		}
	})
}

// The same input gives the same problem, whoever was built before it.
func TestBuildingTwiceIsTheSame(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		c := drawn(t)
		other := *c
		other.Blocks = []scheduler.Block{c.Blocks[0], c.Blocks[0]}
		other.Blocks[0].ID, other.Blocks[0].Start, other.Blocks[0].End = "before", c.Blocks[0].Start.Add(-7*time.Hour), c.Blocks[0].Start
		if other.Blocks[0].Start.Before(c.Start) {
			other.Start = other.Blocks[0].Start
		}
		other.Blocks[0].Lost = nil
		p, err := feasible.Build(&other, scheduler.Horizon{From: other.Start, To: c.End})
		if err != nil {
			t.Fatal(err)
		}
		alone, second := build(t, c), &p.Blocks[1]
		if alone.FirstMin != second.FirstMin || alone.Steps != second.Steps || len(alone.Places) != len(second.Places) {
			t.Fatalf("%d places alone, %d after another block", len(alone.Places), len(second.Places))
		}
		for i := range alone.Places {
			a, b := &alone.Places[i], &second.Places[i]
			if a.Source != b.Source || a.Lo != b.Lo || len(a.Lengths) != len(b.Lengths) {
				t.Fatalf("place %d differs", i)
			}
			for k := range a.Axis1 {
				if a.Axis1[k] != b.Axis1[k] || a.Axis2[k] != b.Axis2[k] || a.Info[0] != nil && a.Info[0][k] != b.Info[0][k] {
					t.Fatalf("place %d differs at step %d", i, k)
				}
			}
		}
	})
}
