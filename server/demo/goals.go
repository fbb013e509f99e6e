package demo

import (
	"fmt"
	"math"

	"cadencewright/astro/sensitivity"
	"cadencewright/scheduler"
)

// How many goals of each kind there are beside one cadence target in band L
// for every source.
const (
	secondTargets = 22 // cadence in another band
	phaseExtras   = 2  // second phase goals of one binary
	overlapCount  = 12
	pairCount     = 14
)

// goalMaker adds goals to a campaign.
type goalMaker struct {
	c     *scheduler.Campaign
	r     *random
	kinds map[string]part
	n     map[string]int // goals so far by prefix
}

// makeGoals invents the goals.
func makeGoals(c *scheduler.Campaign, seed uint64, kinds map[string]part) {
	m := &goalMaker{c: c, r: stream(seed, "goals"), kinds: kinds, n: map[string]int{}}
	for i := range c.Sources {
		m.first(&c.Sources[i])
	}
	m.second()
	m.phases()
	m.overlaps()
	m.pairs()
}

// goal starts a goal of a source with the next id.
func (m *goalMaker) goal(prefix string, s *scheduler.Source, bands ...string) scheduler.Goal {
	m.n[prefix]++
	return scheduler.Goal{ID: fmt.Sprintf("%s-%02d", prefix, m.n[prefix]), Source: s.Name, Bands: bands,
		Priority: pick(m.r, 1, 1, 1, 1, 1.5, 2, 0.5)}
}

// cadence adds a target; wanted is the TOA uncertainty, 0 for none.
func (m *goalMaker) cadence(g scheduler.Goal, everyD, wantedUs float64) {
	t := scheduler.CadenceTarget{Goal: g, EveryD: everyD, EarlyD: everyD / 4, TOAUs: wantedUs}
	if m.r.chance(0.2) {
		t.EarlyD = round(everyD/3, 1)
	}
	m.c.CadenceTargets = append(m.c.CadenceTargets, t)
}

// first adds the target in band L that every source has, and what its part
// asks for.
func (m *goalMaker) first(s *scheduler.Source) {
	every := pick(m.r, 7.0, 7, 7, 7, 10, 14, 14)
	g := m.goal("cad", s, "L")
	wanted := 0.0
	if m.r.chance(0.6) {
		wanted = significant(bestTOAUs(m.c, s, "L")*m.r.between(1, 2), 2)
	}
	switch m.kinds[s.Name] {
	case sunward, fresh:
		every, g.Priority, wanted = 7, 1.5, 0
	case faint:
		wanted = 1 // some ten times better than can be had
	case farSouth:
		m.cadence(scheduler.Goal{ID: g.ID + "w", Source: s.Name, Bands: []string{"L"}, Telescopes: []string{wolkenried}, Priority: 1}, 14,
			0)
	case scattered:
		m.cadence(scheduler.Goal{ID: g.ID + "u", Source: s.Name, Bands: []string{"U"}, Telescopes: []string{wolkenried, quandong},
			Priority: 1}, 14, 0)
	}
	m.cadence(g, every, wanted)
}

// second adds targets in other bands, for the dispersion measure, where a
// telescope can give them.
func (m *goalMaker) second() {
	left := secondTargets
	for _, i := range m.r.shuffled(len(m.c.Sources)) {
		s := &m.c.Sources[i]
		if left == 0 {
			return
		}
		if m.kinds[s.Name] != ordinary {
			continue
		}
		band := pick(m.r, "S", "U", "U", "P")
		best := bestTOAUs(m.c, s, band)
		if best > 20 { // out of reach, or too faint to be worth it
			continue
		}
		wanted := 0.0
		if m.r.chance(0.4) {
			wanted = significant(best*m.r.between(1.1, 2.2), 2)
		}
		m.cadence(m.goal("cad", s, band), pick(m.r, 14.0, 14, 14, 21, 28), wanted)
		left--
	}
}

// phases adds goals for every binary: conjunctions where the masses are known
// (the companion's gravity delays the pulses there), periastron where the orbit
// is eccentric, else all round the orbit.
func (m *goalMaker) phases() {
	extras := phaseExtras
	for i := range m.c.Sources {
		s := &m.c.Sources[i]
		b := s.Binary
		switch {
		case b == nil:
		case b.Sini > 0.94:
			m.phase(s, scheduler.RefConjunction, [2]float64{0.95, 1.05}, [2]float64{0.2, 0.3})
			if b.Ecc > 0.05 && extras > 0 {
				m.phase(s, scheduler.RefPeriastron, [2]float64{0.93, 1.07})
				extras--
			}
		case b.Ecc > 0.01:
			m.phase(s, scheduler.RefPeriastron, [2]float64{0.94, 1.06}, [2]float64{0.44, 0.56})
		default:
			m.phase(s, scheduler.RefNode, [2]float64{0, 0.25}, [2]float64{0.25, 0.5}, [2]float64{0.5, 0.75}, [2]float64{0.75, 1})
		}
	}
}

// phase adds one phase goal. The first window is the one wanted most often.
func (m *goalMaker) phase(s *scheduler.Source, ref scheduler.PhaseReference, windows ...[2]float64) {
	g := scheduler.PhaseGoal{Goal: m.goal("phs", s, "L", "S"), Reference: ref, PerHorizon: 1}
	shortest := math.Inf(1)
	for i, w := range windows {
		need := 2
		if i == 0 {
			need = 3 + m.r.below(4)
		}
		g.Windows = append(g.Windows, scheduler.PhaseWindow{From: w[0], To: w[1], Need: need})
		shortest = math.Min(shortest, (w[1]-w[0])*s.Binary.PbD*1440)
	}
	g.DwellMin = math.Max(5, math.Min(30, 5*math.Floor(shortest*0.8/5)))
	// Orbits that come round several times a week may be covered twice in one.
	if s.Binary.PbD < 1 {
		g.PerHorizon = 2
	}
	m.c.PhaseGoals = append(m.c.PhaseGoals, g)
}

// overlaps adds goals of several telescopes at once: they tie the telescopes'
// clocks and receivers together.
func (m *goalMaker) overlaps() {
	groups := [][]string{
		{wolkenried, kvitvarden}, {wolkenried, kvitvarden}, {wolkenried, kvitvarden}, {wolkenried, kvitvarden}, {wolkenried, kvitvarden},
		{quandong, saltbush}, {quandong, saltbush}, {quandong, saltbush}, {quandong, saltbush},
		{wolkenried, kestrel}, {wolkenried, kestrel}, {wolkenried, kvitvarden, kestrel},
	}
	// Each goal takes the next source that all its telescopes see, and no source
	// is taken twice.
	order := m.r.shuffled(len(m.c.Sources))
	for _, group := range groups[:overlapCount] {
		for n, i := range order {
			s := &m.c.Sources[i]
			if m.kinds[s.Name] != ordinary || !allReach(m.c, s, group) {
				continue
			}
			g := scheduler.OverlapGoal{Goal: m.goal("ovl", s, "L"), Count: len(group), OverlapMin: pick(m.r, 15.0, 20, 20, 30),
				EveryD: pick(m.r, 21.0, 28, 28, 42)}
			if m.r.chance(0.7) {
				g.Telescopes = group
			}
			g.OverlapMin = math.Min(g.OverlapMin, float64(s.ScanMinutes[len(s.ScanMinutes)-1]))
			m.c.OverlapGoals = append(m.c.OverlapGoals, g)
			order = append(order[:n:n], order[n+1:]...)
			break
		}
	}
}

// pairs adds goals of two bands near in time: the interstellar medium changes
// from week to week.
func (m *goalMaker) pairs() {
	// A pair is chosen for a telescope that can complete it, but any may.
	choices := []struct{ one, two, at string }{
		{"L", "S", wolkenried}, {"U", "L", saltbush}, {"P", "L", kestrel}, {"L", "S", kvitvarden}, {"U", "L", quandong},
		{"U", "S", saltbush}, {"U", "S", wolkenried},
	}
	order := m.r.shuffled(len(m.c.Sources))
	for k := range pairCount {
		choice := choices[k%len(choices)]
		for n, i := range order {
			s := &m.c.Sources[i]
			if m.kinds[s.Name] != ordinary || !allReach(m.c, s, []string{choice.at}) {
				continue
			}
			g := scheduler.BandPairGoal{Goal: m.goal("pair", s, choice.one, choice.two), WithinH: pick(m.r, 2.0, 3, 6, 24, 48),
				EveryD: pick(m.r, 14.0, 21, 28)}
			m.c.BandPairGoals = append(m.c.BandPairGoals, g)
			order = append(order[:n:n], order[n+1:]...)
			break
		}
	}
}

// allReach reports whether a source climbs well clear of the lowest elevation
// of all the telescopes.
func allReach(c *scheduler.Campaign, s *scheduler.Source, codes []string) bool {
	for _, code := range codes {
		if t := c.TelescopeByCode(code); highestDeg(t, s) < t.ElevationMinDeg+18 {
			return false
		}
	}
	return true
}

// highestDeg is the elevation of a source at upper transit.
func highestDeg(t *scheduler.Telescope, s *scheduler.Source) float64 {
	return math.Min(90-math.Abs(t.LatitudeDeg-s.DecDeg), t.ElevationMaxDeg)
}

// bestTOAUs is the least TOA uncertainty that a longest scan gives in a band,
// over all telescopes, at three quarters of the greatest elevation; +Inf where
// no telescope can have it.
func bestTOAUs(c *scheduler.Campaign, s *scheduler.Source, band string) float64 {
	best := math.Inf(1)
	for i := range c.Telescopes {
		t := &c.Telescopes[i]
		if !allReach(c, s, []string{t.Code}) {
			continue
		}
		sinEl := math.Sin(0.75 * highestDeg(t, s) * math.Pi / 180)
		for j := range t.Receivers {
			r := &t.Receivers[j]
			if !r.HasBand(band) {
				continue
			}
			m := radiometer(s, r)
			if rate := m.InfoRate(sinEl, 0.85); rate > 0 {
				seconds := 60 * float64(s.ScanMinutes[len(s.ScanMinutes)-1])
				best = math.Min(best, sensitivity.TOAOfInfoUs(rate*seconds))
			}
		}
	}
	return best
}

// radiometer is a source seen by a receiver.
func radiometer(s *scheduler.Source, r *scheduler.Receiver) sensitivity.Radiometer {
	return sensitivity.NewRadiometer(s.Pulsar(), r.FrontEnd())
}
