package verify

import (
	"fmt"

	"cadencewright/astro/orbit"
	"cadencewright/scheduler"
)

// passage is one passage of a binary through a phase window.
type passage struct {
	orbit        int
	enter, leave msec
}

// needs is how long a scan must be in the passage, in one stretch.
func (p passage) needs(dwell msec) msec { return min(dwell, p.leave-p.enter) }

// coveredBy reports whether a scan spends long enough in the passage; slack
// is how much may be missing.
func (p passage) coveredBy(start, end, dwell, slack msec) bool {
	return min(end, p.leave)-max(start, p.enter) >= p.needs(dwell)-slack
}

// orbits tells when binaries pass points of their orbits, from the first
// instant that can count in the history to the end of the last block.
type orbits struct {
	earth    *orbit.Earth
	from, to msec
}

// newOrbits looks from the campaign's start, or the horizon's if that is
// earlier, to the end of the horizon and of every block in it.
func (m *model) newOrbits() (*orbits, error) {
	if len(m.campaign.PhaseGoals) == 0 {
		return nil, nil
	}
	o := &orbits{from: min(instantOf(m.campaign.Start), m.from), to: m.to}
	for _, b := range m.blocks {
		o.to = max(o.to, b.end)
	}
	for _, s := range m.sources { // a scan of the history may run on past the horizon's start
		for _, h := range s.history {
			o.to = max(o.to, h.end)
		}
	}
	var err error
	o.earth, err = orbit.NewEarth(o.from.time(), o.to.time())
	return o, err
}

// passages are those of a phase window that touch [from, to).
func (o *orbits) passages(s *source, p *scheduler.PhaseGoal, w scheduler.PhaseWindow, from, to msec) ([]passage, error) {
	e, err := elements(s.Binary)
	if err != nil {
		return nil, fmt.Errorf("source %s: %w", s.Name, err)
	}
	ref, err := orbit.ParseReference(string(p.Reference))
	if err != nil {
		return nil, fmt.Errorf("goal %s: %w", p.ID, err)
	}
	clock := o.earth.Clock(s.star)
	found, err := clock.Passages(e, ref, w.From, w.To, from.time(), to.time())
	if err != nil {
		return nil, fmt.Errorf("goal %s, source %s: %w", p.ID, s.Name, err)
	}
	list := make([]passage, len(found))
	for i, f := range found {
		list[i] = passage{orbit: f.Orbit, enter: instantOf(f.Enter), leave: instantOf(f.Leave)}
	}
	return list, nil
}

func elements(b *scheduler.Binary) (orbit.Elements, error) {
	if b.Model == scheduler.BinaryELL1 {
		return orbit.ELL1(orbit.ELL1Params{PbD: b.PbD, A1Ls: b.A1Ls, TascMJD: b.TascMJD, Eps1: b.Eps1, Eps2: b.Eps2,
			Pbdot: b.Pbdot, M2Msun: b.M2Msun, Sini: b.Sini})
	}
	return orbit.Kepler(orbit.KeplerParams{PbD: b.PbD, A1Ls: b.A1Ls, Ecc: b.Ecc, OmDeg: b.OmDeg, T0MJD: b.T0MJD,
		OmdotDegYr: b.OmdotDegYr, Pbdot: b.Pbdot, M2Msun: b.M2Msun, Sini: b.Sini})
}

// addPhase derives the units of a phase goal: a group of its own for every
// window that is still wanted.
func (m *model) addPhase(g *goal, o *orbits) error {
	g.source = m.sources[g.Source]
	var counts []*made
	from := m.from
	for _, h := range g.source.history {
		if h.start >= instantOf(m.campaign.Start) && g.bands(h.receiver) != 0 {
			counts = append(counts, h)
			from = min(from, h.start)
		}
	}
	for i, w := range g.phase.Windows {
		all, err := o.passages(g.source, g.phase, w, from, o.to)
		if err != nil {
			return err
		}
		done := g.orbitsHad(counts, all)
		remaining := max(0, w.Need-len(done))
		times := min(remaining, g.phase.PerHorizon)
		if times == 0 {
			continue
		}
		// The fewer orbits are missing, the less the next one is worth.
		value := g.Priority * float64(remaining) / float64(w.Need)
		u := &unit{name: fmt.Sprintf("%s@%d", g.ID, i), weight: float64(times) * value, value: value, times: times, load: float64(times)}
		for _, p := range all {
			if !done[p.orbit] && p.leave > m.from {
				u.passages = append(u.passages, p)
			}
		}
		m.addGroup(&group{goal: g, units: []*unit{u}})
	}
	return nil
}

// A goal wants different orbits, so a second scan in one that was had adds
// nothing; which scan had it does not matter.

// orbitsHad are the orbits whose passage some scan of the history covers.
func (g *goal) orbitsHad(history []*made, all []passage) map[int]bool {
	had := map[int]bool{}
	first := 0
	for _, h := range history { // both lists are in time order, and so is the search
		for first < len(all) && all[first].leave <= h.start {
			first++
		}
		for _, p := range all[first:] {
			if p.enter >= h.end {
				break
			}
			if p.coveredBy(h.start, h.end, g.dwell, 0) {
				had[p.orbit] = true
			}
		}
	}
	return had
}
