package edit

import (
	"math"
	"testing"

	"pgregory.net/rapid"

	"cadencewright/scheduler"
	"cadencewright/scheduler/units"
)

// wanted is the invented night with goals of all four kinds on one source, some
// with several windows, and blocks at three telescopes.
func wanted() *scheduler.Campaign {
	c := invented()
	c.Telescopes[0].Receivers = append(c.Telescopes[0].Receivers, front("W", 1800, "L", "S"))
	for i, code := range []string{"TWO", "THREE"} {
		t := c.Telescopes[0]
		t.Code, t.LongitudeDeg = code, 20+10*float64(i)
		c.Telescopes = append(c.Telescopes, t)
	}
	c.Sources = c.Sources[:1]
	c.Sources[0].Binary = &scheduler.Binary{Model: scheduler.BinaryKepler, PbD: 0.3, A1Ls: 1, Ecc: 0.1, OmDeg: 30, T0MJD: 61000}
	goal := func(id string, bands ...string) scheduler.Goal {
		return scheduler.Goal{ID: id, Source: high, Bands: bands, Priority: 1.3}
	}
	c.CadenceTargets = []scheduler.CadenceTarget{{Goal: goal("cad", "L"), EveryD: 0.1, EarlyD: 0.05, TOAUs: 0.9}}
	c.OverlapGoals = []scheduler.OverlapGoal{{Goal: goal("two", "L"), Count: 2, OverlapMin: 15, EveryD: 0.15}}
	c.BandPairGoals = []scheduler.BandPairGoal{{Goal: goal("pair", "L", "S"), WithinH: 1, EveryD: 0.12}}
	c.PhaseGoals = []scheduler.PhaseGoal{{Goal: goal("ph", "L", "S"), Reference: scheduler.RefPeriastron, DwellMin: 10, PerHorizon: 2,
		Windows: []scheduler.PhaseWindow{{From: 0.1, To: 0.6, Need: 3}}}}
	c.Blocks = nil
	for i, t := range c.Telescopes {
		c.Blocks = append(c.Blocks, scheduler.Block{ID: "b" + string(rune('1'+i)), Telescope: t.Code, Start: monday, End: after(1000),
			Receivers: []string{"L", "S", "W"}})
	}
	c.End = after(2000)
	return c
}

// A handful of scans, allowed or not, are given to the units so that no other
// way of giving them earns more: all ways are tried.
func TestNoOtherWayEarnsMore(t *testing.T) {
	c := wanted()
	base := started(t, c)
	earning := map[scheduler.GoalKind]int{}
	rapid.Check(t, func(t *rapid.T) {
		var changes []Change
		for range rapid.IntRange(1, 5).Draw(t, "scans") {
			changes = append(changes, Add(rapid.SampledFrom([]string{"b1", "b2", "b3"}).Draw(t, "block"), high,
				rapid.SampledFrom([]string{"L", "S", "W"}).Draw(t, "receiver"), after(float64(5*rapid.IntRange(3, 100).Draw(t, "start"))),
				rapid.SampledFrom([]int{20, 40}).Draw(t, "minutes")))
		}
		d, err := base.draft(changes)
		if err != nil {
			t.Fatal(err)
		}
		scans := d.sources[0]
		for gi := range base.p.Units.Goals {
			g := &base.p.Units.Goals[gi]
			got := 0.0
			for _, a := range d.awards[0] {
				if base.p.Units.Units[a.unit].Goal == gi {
					got += a.value
				}
			}
			if got > 0 {
				earning[g.Kind]++
			}
			if want := exhaust(base, g, scans); math.Abs(got-want) > 1e-9 {
				t.Errorf("goal %s earns %.6f from %v, and could earn %.6f", g.ID, got, changes, want)
			}
		}
	})
	for _, kind := range []scheduler.GoalKind{scheduler.KindCadence, scheduler.KindPhase, scheduler.KindOverlap, scheduler.KindBandPair} {
		if earning[kind] == 0 {
			t.Errorf("nothing earned from a goal of kind %s", kind)
		}
	}
}

// exhaust is the most that scans can earn from a goal, by trying every way to
// give sets of them to its units in order.
func exhaust(s *Session, g *units.Goal, scans []*scan) float64 {
	if g.Kind == scheduler.KindPhase {
		return exhaustPhase(s, g, scans)
	}
	var from func(k int, used int, last float64) float64
	from = func(k, used int, last float64) float64 {
		if k == len(g.Units) {
			return 0
		}
		u := &s.p.Units.Units[g.Units[k]]
		best := from(k+1, used, last)
		for set := 1; set < 1<<len(scans); set++ {
			if set&used != 0 {
				continue
			}
			at, quality, ok := serves(s, g, scans, set)
			if ok && u.Timeliness(at) > 0 && at-last >= g.EveryMin/2-units.MS/2 {
				best = math.Max(best, u.Weight*u.Timeliness(at)*quality+from(k+1, used|set, at))
			}
		}
		return best
	}
	return from(0, 0, math.Inf(-1))
}

// serves reports whether a set of scans, all of it, can earn from one due
// window, and when that counts.
func serves(s *Session, g *units.Goal, scans []*scan, set int) (at, quality float64, ok bool) {
	at, end, quality := math.Inf(-1), math.Inf(1), 1.0
	first := math.Inf(1)
	common, all := g.Wants(), units.BandSet(0)
	n, telescopes := 0, map[int]bool{}
	for i, x := range scans {
		if set>>i&1 == 0 {
			continue
		}
		bands := s.p.Units.Bands(g, x.tel, x.rx)
		if bands == 0 || x.info <= 0 {
			return 0, 0, false
		}
		n++
		telescopes[x.tel] = true
		common, all = common&bands, all|bands
		at, end, first = math.Max(at, x.startMin), math.Min(end, x.endMin), math.Min(first, x.startMin)
		quality = units.Quality(x.info, g.TOAUs)
	}
	switch g.Kind {
	case scheduler.KindCadence:
		return at, quality, n == 1 && quality > 0
	case scheduler.KindOverlap:
		return at, 1, n == g.Count && len(telescopes) == n && common != 0 && end-at >= g.OverlapMin-units.MS
	}
	return at, 1, all == g.Wants() && at-first <= g.WithinMin+units.MS && (n == 1 || n == 2)
}

// exhaustPhase tries every way to give passages to scans.
func exhaustPhase(s *Session, g *units.Goal, scans []*scan) float64 {
	total := 0.0
	for _, ui := range g.Units {
		u := &s.p.Units.Units[ui]
		var most func(i int, had map[int]bool) int
		most = func(i int, had map[int]bool) int {
			if i == len(scans) {
				return 0
			}
			best := most(i+1, had)
			x := scans[i]
			if x.info <= 0 || s.p.Units.Bands(g, x.tel, x.rx) == 0 {
				return best
			}
			for pi, p := range u.Passages {
				if !had[pi] && p.Covers(x.startMin, x.endMin, g.DwellMin) {
					had[pi] = true
					best = max(best, 1+most(i+1, had))
					delete(had, pi)
				}
			}
			return best
		}
		total += u.Value * float64(min(u.N, most(0, map[int]bool{})))
	}
	return total
}
