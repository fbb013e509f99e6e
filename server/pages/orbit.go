package pages

import (
	"slices"
	"time"

	"cadencewright/scheduler"
	"cadencewright/scheduler/almanac"
	"cadencewright/scheduler/units"
	"cadencewright/server/store"
	"cadencewright/web/view"
)

// roundEcc is the eccentricity below which an orbit is drawn from its node.
const roundEcc = 0.01

// orbitView is what the orbit ring shows: windows wanted, scans had and
// planned, and the coming conjunctions and periastra.
func orbitView(c *scheduler.Campaign, src *scheduler.Source, live []store.StoredScan, now time.Time) (*view.Orbit, error) {
	orb, err := almanac.NewOrbit(src, c.Start, now.AddDate(0, 0, 28))
	if err != nil {
		return nil, err
	}
	el, err := src.Binary.Elements()
	if err != nil {
		return nil, err
	}
	ref, words := scheduler.RefPeriastron, "periastron"
	if el.Ecc < roundEcc {
		ref, words = scheduler.RefNode, "ascending node"
	}
	v := &view.Orbit{Reference: words, PbD: el.PbD, Ecc: el.Ecc, A1Ls: el.A1Ls, M2Msun: el.M2Msun, Sini: el.Sini, ConjunctionPhase: -1, PeriastronPhase: -1}
	if err := ringPoints(v, orb, ref, now); err != nil {
		return nil, err
	}
	if err := ringMarks(v, orb, ref, c, src, live); err != nil {
		return nil, err
	}
	if err := ringWindows(v, c, src, ref, live, now); err != nil {
		return nil, err
	}
	events, err := orb.Next(now, 3)
	if err != nil {
		return nil, err
	}
	slices.SortFunc(events, func(a, b almanac.OrbitEvent) int { return a.At.Compare(b.At) })
	for _, e := range events {
		if e.Point == scheduler.RefNode {
			continue
		}
		what := "periastron"
		if e.Point == scheduler.RefConjunction {
			what = "superior conjunction"
		}
		v.Next = append(v.Next, view.PhaseEvent{What: what, Span: view.Span{Start: e.At}})
	}
	return v, nil
}

// phase is a state's phase from the ring's reference.
func phase(s almanac.OrbitState, ref scheduler.PhaseReference) float64 {
	if ref == scheduler.RefNode {
		return s.FromNode
	}
	return s.FromPeriastron
}

// ringPoints marks the conjunction and the periastron on the ring.
func ringPoints(v *view.Orbit, orb *almanac.Orbit, ref scheduler.PhaseReference, now time.Time) error {
	s, err := orb.At(now)
	if err != nil {
		return err
	}
	turn := func(x float64) float64 {
		for x < 0 {
			x++
		}
		for x >= 1 {
			x--
		}
		return x
	}
	v.ConjunctionPhase = turn(phase(s, ref) - s.FromConjunction)
	if ref == scheduler.RefPeriastron {
		v.PeriastronPhase = 0
	}
	return nil
}

// ringMarks puts the source's scans on the ring.
func ringMarks(v *view.Orbit, orb *almanac.Orbit, ref scheduler.PhaseReference, c *scheduler.Campaign, src *scheduler.Source, live []store.StoredScan) error {
	mark := func(start, end time.Time, planned bool) error {
		a, err := orb.At(start)
		if err != nil {
			return err
		}
		b, err := orb.At(end)
		if err != nil {
			return err
		}
		m := view.PhaseMark{From: phase(a, ref), To: phase(b, ref), At: start, Planned: planned}
		if m.To < m.From {
			m.To++
		}
		v.Marks = append(v.Marks, m)
		return nil
	}
	for i := range c.History {
		if h := &c.History[i]; h.Source == src.Name && h.Counted && !h.Start.Before(c.Start) {
			if err := mark(h.Start, h.End(), false); err != nil {
				return err
			}
		}
	}
	for i := range live {
		if x := &live[i]; x.Source == src.Name && (x.State == store.ScanPlanned || x.State == store.ScanObserving) {
			if err := mark(x.Start, x.End(), true); err != nil {
				return err
			}
		}
	}
	return nil
}

// ringWindows lists the wanted windows with what has been had. A window is
// given from its goal's own reference and turned to the ring's.
func ringWindows(v *view.Orbit, c *scheduler.Campaign, src *scheduler.Source, ref scheduler.PhaseReference, live []store.StoredScan, now time.Time) error {
	orb, err := almanac.NewOrbit(src, now, now)
	if err != nil {
		return err
	}
	s, err := orb.At(now)
	if err != nil {
		return err
	}
	from := map[scheduler.PhaseReference]float64{scheduler.RefPeriastron: s.FromPeriastron, scheduler.RefNode: s.FromNode, scheduler.RefConjunction: s.FromConjunction}
	set, err := units.Build(c, scheduler.Horizon{From: now, To: now.AddDate(0, 0, 7)})
	if err != nil {
		return err
	}
	for i := range c.PhaseGoals {
		g := &c.PhaseGoals[i]
		if g.Source != src.Name {
			continue
		}
		shift := from[ref] - from[g.Reference]
		for j, w := range g.Windows {
			left := 0
			if ui := set.ByName(g.ID + "@" + itoa(j)); ui >= 0 {
				u := &set.Units[ui]
				left = orbitsLeft(&set.Goals[u.Goal], u, w.Need)
			}
			pw := view.PhaseWindow{Goal: g.ID, From: w.From + shift, To: w.To + shift, Need: w.Need, Had: w.Need - left}
			for pw.From < 0 {
				pw.From, pw.To = pw.From+1, pw.To+1
			}
			for pw.From >= 1 {
				pw.From, pw.To = pw.From-1, pw.To-1
			}
			for k := range live {
				for _, e := range live[k].Earns {
					if e.Unit == g.ID+"@"+itoa(j) && live[k].State == store.ScanPlanned {
						pw.Planned++
					}
				}
			}
			v.Windows = append(v.Windows, pw)
		}
	}
	return nil
}
