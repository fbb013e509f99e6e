package units_test

import (
	"fmt"
	"math"
	"slices"
	"strings"
	"testing"

	"cadencewright/scheduler"
	"cadencewright/scheduler/units"
)

// all is a campaign with a goal of each kind, for two sources.
func all() *scheduler.Campaign {
	c := binary(2)
	second := c.Sources[0]
	second.Name, second.Binary = "SIM J0700+3011", nil
	c.Sources = append(c.Sources, second)
	g := func(id string, source int, bands ...string) scheduler.Goal {
		return scheduler.Goal{ID: id, Source: c.Sources[source].Name, Bands: bands, Priority: 1}
	}
	c.BandPairGoals = []scheduler.BandPairGoal{{Goal: g("pair", 0, "L", "S"), WithinH: 2, EveryD: 4}}
	c.OverlapGoals = []scheduler.OverlapGoal{{Goal: g("both", 1, "L"), Count: 2, OverlapMin: 10, EveryD: 3.5}}
	c.CadenceTargets = []scheduler.CadenceTarget{{Goal: g("often", 1, "S"), EveryD: 2, EarlyD: 0.5}, {Goal: g("c", 0, "L"), EveryD: 9, EarlyD: 1, TOAUs: 2}}
	return c
}

// Units come in the order of the goals' kinds, every goal's windows in one
// group and every phase window in one of its own, and are found by source and
// by name.
func TestOrderGroupsAndNames(t *testing.T) {
	s := build(t, all(), 7)
	var names []string
	for i, u := range s.Units {
		names = append(names, fmt.Sprintf("%s/%d", u.Name, u.Group))
		if s.ByName(u.Name) != i || !slices.Contains(s.BySource[s.Goals[u.Goal].Source], i) || !slices.Contains(s.Goals[u.Goal].Units, i) {
			t.Errorf("unit %s is not found again", u.Name)
		}
	}
	want := []string{"often#1/0", "often#2/0", "often#3/0", "often#4/0", "c#1/1", "g@0/2", "both#1/3", "both#2/3", "pair#1/4", "pair#2/4"}
	if !slices.Equal(names, want) || s.Groups != 5 {
		t.Errorf("units %v in %d groups, want %v", names, s.Groups, want)
	}
	if s.ByName("often#5") != -1 || s.ByName("") != -1 {
		t.Error("a unit that does not exist is found")
	}
	if n := len(s.BySource[0]) + len(s.BySource[1]); n != len(s.Units) {
		t.Errorf("%d units by source, want %d", n, len(s.Units))
	}
	kinds := []units.Kind{scheduler.KindCadence, scheduler.KindCadence, scheduler.KindPhase, scheduler.KindOverlap, scheduler.KindBandPair}
	for i, g := range s.Goals {
		if g.Kind != kinds[i] {
			t.Errorf("goal %s is of kind %v", g.ID, g.Kind)
		}
	}
	if g := s.Goals[1]; g.TOAUs != 2 || g.EveryMin != 9*1440 || g.EarlyMin != 1440 || g.Priority != 1 {
		t.Errorf("goal %+v", g)
	}
	if g := s.Goals[4]; g.WithinMin != 120 || g.EarlyMin != 1440 || g.EveryMin != 4*1440 {
		t.Errorf("goal %+v", g)
	}
}

// Which bands a receiver can give to which goal.
func TestBandsOfReceivers(t *testing.T) {
	c := all()
	c.CadenceTargets[0].Telescopes = []string{"B"}
	s := build(t, c, 7)
	ask := func(goal, tel, rx int) units.BandSet { return s.Bands(&s.Goals[goal], tel, rx) }
	l, sBand := ask(1, 0, 0), ask(0, 1, 1)
	if l == 0 || sBand == 0 || l&sBand != 0 {
		t.Fatalf("bands L %b and S %b", l, sBand)
	}
	for _, x := range []struct {
		what          string
		goal, tel, rx int
		want          units.BandSet
	}{
		{"S for a goal in S, where it may", 0, 1, 1, sBand},
		{"S for a goal in S, on another telescope", 0, 0, 1, 0},
		{"L for a goal in S", 0, 1, 0, 0},
		{"both for a goal in S", 0, 1, 2, sBand},
		{"both for a goal in both", 4, 0, 2, l | sBand},
		{"S for a goal in both", 4, 1, 1, sBand},
	} {
		if got := ask(x.goal, x.tel, x.rx); got != x.want {
			t.Errorf("%s: %b, want %b", x.what, got, x.want)
		}
	}
	if s.Goals[4].Wants() != l|sBand || s.Goals[1].Wants() != l {
		t.Error("what a goal wants is not its bands")
	}
	for i := range 70 {
		c.Telescopes[0].Receivers[0].Bands = append(c.Telescopes[0].Receivers[0].Bands, fmt.Sprintf("X%d", i))
	}
	if _, err := units.Build(c, horizon(7)); err == nil || !strings.Contains(err.Error(), "at most 64 different band labels") {
		t.Errorf("72 bands: %v", err)
	}
}

// A pulse scattered to nine tenths of the period is not seen; a little less is.
// Section 4 by hand: tau = 1 ms·(nu/1000)^-4.4, W = sqrt(0.5² + tau²) ms,
// period 5 ms: the limit is W = 4.5 ms, tau = 4.4721 ms, nu = 711.39 MHz.
func TestDetectable(t *testing.T) {
	for freq, want := range map[float64]bool{1400: true, 712: true, 711: false, 350: false} {
		c := campaign()
		c.Sources[0].Scatter1GHzS = 0.001
		c.Telescopes[0].Receivers[0].FreqMHz = freq
		c.CadenceTargets = []scheduler.CadenceTarget{{Goal: goal("L"), EveryD: 4, EarlyD: 1}}
		s := build(t, c, 7)
		if got := s.Detectable(0, 0, 0); got != want {
			t.Errorf("at %g MHz: detectable %t", freq, got)
		}
		if !s.Detectable(0, 1, 0) {
			t.Error("the other telescope's receiver sees it at 1400 MHz")
		}
	}
}

// Mean anomaly at the reference points of a circular orbit: periastron 0, the
// node minus omega, superior conjunction 90 deg minus omega.
func TestPassagesFromReferencePoints(t *testing.T) {
	enter := func(r scheduler.PhaseReference, omDeg float64) float64 {
		c := binary(3)
		c.Sources[0].Binary.OmDeg, c.PhaseGoals[0].Reference = omDeg, r
		u := build(t, c, 7).Units[0]
		return math.Mod((u.Passages[1].Enter-units.Minutes(monday))/1440, 2) // days into the orbit of two days
	}
	zero := enter(scheduler.RefPeriastron, 0)
	for _, x := range []struct {
		r     scheduler.PhaseReference
		omDeg float64
		want  float64 // cycles after periastron
	}{
		{scheduler.RefPeriastron, 77, 0}, {scheduler.RefNode, 0, 0}, {scheduler.RefConjunction, 0, 0.25},
		{scheduler.RefNode, 90, 0.75}, {scheduler.RefConjunction, 90, 0}, {scheduler.RefNode, 36, 0.9}, {scheduler.RefConjunction, 270, 0.5},
	} {
		d := math.Mod((enter(x.r, x.omDeg)-zero)/2-x.want+3, 1)
		if math.Min(d, 1-d) > 1e-4 { // light-time to the barycentre changes by 0.0003 d a day at most
			t.Errorf("%s at omega %g deg comes %.5f cycles too late", x.r, x.omDeg, d)
		}
	}
}

// The same orbit in the other parameters has the same passages: with
// e = 0, tasc is T0 and phases count from the node.
func TestPassagesOfBothModels(t *testing.T) {
	kepler, ell1 := binary(3), binary(3)
	kepler.PhaseGoals[0].Reference, ell1.PhaseGoals[0].Reference = scheduler.RefNode, scheduler.RefNode
	ell1.Sources[0].Binary = &scheduler.Binary{Model: scheduler.BinaryELL1, PbD: 2, A1Ls: 1, TascMJD: 61423}
	a, b := build(t, kepler, 7).Units[0].Passages, build(t, ell1, 7).Units[0].Passages
	if len(a) != len(b) {
		t.Fatalf("%d passages and %d", len(a), len(b))
	}
	for i := range a {
		if math.Abs(a[i].Enter-b[i].Enter) > 1e-3 || math.Abs(a[i].Leave-b[i].Leave) > 1e-3 {
			t.Errorf("passage %d: %+v and %+v", i, a[i], b[i])
		}
	}
}

// Each window is a goal of its own: remaining/need by its own count, at most
// per_horizon times, and none once its orbits are covered. A window may pass
// phase 1. Orbits begin every two days at the horizon's start; a scan on day
// -1.9 is at phase 0.05 of the orbit before.
func TestWindowsCountByThemselves(t *testing.T) {
	c := binary(2, had{"A", "L", -1.9, 60}, had{"A", "L", -3.9, 60}, had{"B", "L", -2.2, 60})
	c.PhaseGoals[0].Windows = []scheduler.PhaseWindow{
		{From: 0, To: 0.25, Need: 2},      // both orbits: done
		{From: 0, To: 0.25, Need: 5},      // three of five are left, two a week
		{From: 0.85, To: 1.1, Need: 4},    // days -1.9 and -2.2 are of one orbit, day -3.9 of another
		{From: 0.4, To: 0.6, Need: 1},     // nothing yet
		{From: 0.999, To: 1.999, Need: 9}, // all phases: two orbits
	}
	s := build(t, c, 7)
	want := map[string][2]float64{"g@1": {2, 2 * 3.0 / 5}, "g@2": {2, 2 * 2.0 / 4}, "g@3": {1, 2}, "g@4": {2, 2 * 7.0 / 9}}
	if len(s.Units) != len(want) {
		t.Errorf("%d units, want %d", len(s.Units), len(want))
	}
	groups := map[int]bool{}
	for _, u := range s.Units {
		w := want[u.Name]
		if u.N != int(w[0]) || u.Cap != u.N || math.Abs(u.Value-w[1]) > 1e-12 || math.Abs(u.Weight-w[0]*w[1]) > 1e-12 {
			t.Errorf("%s: %d times %g, weight %g; want %g times %g", u.Name, u.N, u.Value, u.Weight, w[0], w[1])
		}
		if groups[u.Group] {
			t.Errorf("%s is an option of another window", u.Name)
		}
		groups[u.Group] = true
	}
}

// A passage under way when the horizon begins can still be covered, unless its
// orbit has been; one that is over cannot. Those of a block that reaches past
// the horizon's end count.
func TestPassagesAtTheEdges(t *testing.T) {
	c := binary(3)
	c.Sources[0].Binary.T0MJD = 61423 - 0.25 // six hours into the window
	c.Blocks = []scheduler.Block{{ID: "late", Telescope: "A", Start: day(6.9), End: day(8), Receivers: []string{"L"}}}
	orbits := func(c *scheduler.Campaign) []int {
		var list []int
		for _, p := range build(t, c, 7).Units[0].Passages {
			list = append(list, p.Orbit)
		}
		return list
	}
	// Entered on days -0.25, 1.75, 3.75, 5.75 and 7.75.
	if got := orbits(c); !slices.Equal(got, []int{0, 1, 2, 3, 4}) {
		t.Errorf("orbits %v", got)
	}
	c.Blocks = nil
	if got := orbits(c); !slices.Equal(got, []int{0, 1, 2, 3}) {
		t.Errorf("without the late block: orbits %v", got)
	}
	c.History = []scheduler.HistoryScan{{Source: c.Sources[0].Name, Telescope: "A", Receiver: "L", Start: day(-0.1), Minutes: 60, Counted: true}}
	if got := orbits(c); !slices.Equal(got, []int{1, 2, 3}) {
		t.Errorf("the first covered already: orbits %v", got)
	}
	c.History = nil
	c.Sources[0].Binary.T0MJD = 61423 - 0.55 // it ended an hour before
	if got := orbits(c); !slices.Equal(got, []int{1, 2, 3}) {
		t.Errorf("the first over: orbits %v", got)
	}
}
