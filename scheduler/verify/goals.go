package verify

import (
	"fmt"
	"slices"

	"cadencewright/scheduler"
)

// goal is something wanted of a source again and again. Only the fields of its
// kind are filled.
type goal struct {
	scheduler.Goal
	kind   scheduler.GoalKind
	source *source

	every, early msec    // due windows
	toaUs        float64 // cadence; 0: none stated
	count        int     // overlap: telescopes at once
	overlap      msec
	within       msec // pair
	phase        *scheduler.PhaseGoal
	dwell        msec
}

// group is units that are options of each other: a scan earns from one of them
// at most. All due windows of a goal are one group; each phase window is one.
type group struct {
	goal  *goal
	units []*unit
}

// unit is what can be satisfied once (a phase window: up to times) in the
// horizon.
type unit struct {
	name   string
	index  int // in model.units
	group  *group
	goal   *goal
	weight float64 // what it can earn in all
	value  float64 // what it earns each time
	times  int     // how often it can
	load   float64 // how many scans that takes: its part in the bound

	due      msec      // due windows
	passages []passage // phase windows: in orbits that are not yet counted
}

// Bands are bits, so that what scans have in common or make up together is a
// single operation. A goal has at most 20.

// bands is the goal's bands that a receiver can give it, bit i for the i-th;
// none where its telescope is not allowed or it does not detect the source.
func (g *goal) bands(r *receiver) uint32 {
	if !g.AllowsTelescope(r.telescope.Code) || !g.source.sees(r) {
		return 0
	}
	return g.labels(r)
}

// labels is the bands that the goal and a receiver of an allowed telescope
// have in common, whether or not the source is seen in them.
func (g *goal) labels(r *receiver) uint32 {
	if !g.AllowsTelescope(r.telescope.Code) {
		return 0
	}
	var bits uint32
	for i, b := range g.Bands {
		if r.HasBand(b) {
			bits |= 1 << i
		}
	}
	return bits
}

// allBands is the mask of all of the goal's bands.
func (g *goal) allBands() uint32 { return 1<<len(g.Bands) - 1 }

// bandNames is a mask in words.
func (g *goal) bandNames(bits uint32) []string {
	names := []string{}
	for i, b := range g.Bands {
		if bits&(1<<i) != 0 {
			names = append(names, b)
		}
	}
	return names
}

// addGoals derives the units of all goals.
func (m *model) addGoals() error {
	for _, g := range m.dueGoals(scheduler.KindCadence) {
		if err := m.addDue(g); err != nil {
			return err
		}
	}
	orbits, err := m.newOrbits()
	if err != nil {
		return err
	}
	for i := range m.campaign.PhaseGoals {
		p := &m.campaign.PhaseGoals[i]
		g := &goal{Goal: p.Goal, kind: scheduler.KindPhase, phase: p, dwell: lengthOf(p.DwellMin, minute)}
		if err := m.addPhase(g, orbits); err != nil {
			return err
		}
	}
	for _, g := range append(m.dueGoals(scheduler.KindOverlap), m.dueGoals(scheduler.KindBandPair)...) {
		if err := m.addDue(g); err != nil {
			return err
		}
	}
	return nil
}

// dueGoals are the goals of one kind that has due windows.
func (m *model) dueGoals(kind scheduler.GoalKind) []*goal {
	var list []*goal
	c := m.campaign
	c.EachGoal(func(k scheduler.GoalKind, i int, base *scheduler.Goal) {
		if k != kind {
			return
		}
		g := &goal{Goal: *base, kind: kind}
		switch kind {
		case scheduler.KindCadence:
			t := &c.CadenceTargets[i]
			g.every, g.early, g.toaUs = lengthOf(t.EveryD, day), lengthOf(t.EarlyD, day), t.TOAUs
		case scheduler.KindOverlap:
			o := &c.OverlapGoals[i]
			g.every, g.early = lengthOf(o.EveryD, day), lengthOf(o.EveryD/4, day)
			g.count, g.overlap = o.Count, lengthOf(o.OverlapMin, minute)
		case scheduler.KindBandPair:
			p := &c.BandPairGoals[i]
			g.every, g.early, g.within = lengthOf(p.EveryD, day), lengthOf(p.EveryD/4, day), lengthOf(p.WithinH, hour)
		}
		list = append(list, g)
	})
	return list
}

// addGroup puts a group with its goal, its source and the model.
func (m *model) addGroup(g *group) {
	if len(g.units) == 0 {
		return
	}
	for _, u := range g.units {
		u.group, u.goal, u.index = g, g.goal, len(m.units)
		m.units = append(m.units, u)
		m.byName[u.name] = u
	}
	m.groups = append(m.groups, g)
	g.goal.source.groups = append(g.goal.source.groups, g)
}

// addDue derives the due windows of a goal (section 5): the first when it is due
// next, or at the horizon's start if that is past, and one an interval from
// there on. Urgency is for the first alone; the others presume it is served.
func (m *model) addDue(g *goal) error {
	g.source = m.sources[g.Source]
	due, urgency := m.from, 3.0
	if last, ok := g.lastSatisfied(); ok {
		next := last + g.every
		due, urgency = max(m.from, next), 1
		if next < m.from {
			urgency += min(2, float64(m.from-next)/float64(g.every))
		}
	}
	if windows := (m.to - due) / g.every; windows > msec(scheduler.MaxPlanUnits-len(m.units)) {
		return scheduler.Errorf(scheduler.ErrTooLarge, "the horizon from %s to %s holds more than %d units",
			at(m.from), at(m.to), scheduler.MaxPlanUnits)
	}
	gr := &group{goal: g}
	for k := 1; due < m.to; k++ {
		gr.units = append(gr.units, &unit{name: fmt.Sprintf("%s#%d", g.ID, k), weight: g.Priority * urgency,
			value: g.Priority * urgency, times: 1, load: g.loadOfUnit(), due: due})
		due, urgency = due+g.every, 1
	}
	m.addGroup(gr)
	return nil
}

// loadOfUnit is how many scans share one due window of the goal.
func (g *goal) loadOfUnit() float64 {
	switch g.kind {
	case scheduler.KindOverlap:
		return float64(g.count)
	case scheduler.KindBandPair:
		return 2
	}
	return 1
}

// timeliness is v at an instant: 1 when due, falling to a half at the earliest
// that counts and toward 0.4 one interval late, and 0 beyond. The early end
// belongs to the window, the late end to what comes after it.
func (u *unit) timeliness(t msec) float64 {
	late := t - u.due
	switch {
	case late < -u.goal.early || late >= u.goal.every:
		return 0
	case late < 0:
		return 1 + 0.5*float64(late)/float64(u.goal.early)
	}
	return 1 - 0.6*float64(late)/float64(u.goal.every)
}

// sortByStart sorts by an instant and keeps the order of equal ones.
func sortByStart[T any](list []T, start func(T) msec) {
	slices.SortStableFunc(list, func(a, b T) int { return cmp64(int64(start(a)), int64(start(b))) })
}
