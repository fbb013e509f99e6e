package units

import (
	"fmt"

	"cadencewright/astro/orbit"
	"cadencewright/astro/sensitivity"
	"cadencewright/scheduler"
)

// Build lists the units of a horizon. The campaign must be valid.
func Build(c *scheduler.Campaign, h scheduler.Horizon) (*Set, error) {
	if !h.From.Before(h.To) {
		return nil, fmt.Errorf("horizon: its end %s is not after its start %s", h.To, h.From)
	}
	b := &builder{c: c, s: &Set{From: Minutes(h.From), To: Minutes(h.To), BySource: make([][]int, len(c.Sources)),
		seen: map[seenKey]bool{}, index: map[string]int{}}, bands: bandNames{}, clocks: map[int]*clock{}}
	if err := b.names(); err != nil {
		return nil, err
	}
	if err := b.history(); err != nil {
		return nil, err
	}
	for i := range c.CadenceTargets {
		t := &c.CadenceTargets[i]
		err := b.due(Goal{Kind: scheduler.KindCadence, TOAUs: t.TOAUs, EveryMin: t.EveryD * 1440, EarlyMin: t.EarlyD * 1440}, &t.Goal, 1)
		if err != nil {
			return nil, err
		}
	}
	for i := range c.PhaseGoals {
		if err := b.phase(&c.PhaseGoals[i]); err != nil {
			return nil, err
		}
	}
	for i := range c.OverlapGoals {
		t := &c.OverlapGoals[i]
		err := b.due(Goal{Kind: scheduler.KindOverlap, Count: t.Count, OverlapMin: t.OverlapMin, EveryMin: t.EveryD * 1440,
			EarlyMin: t.EveryD * 360}, &t.Goal, t.Count)
		if err != nil {
			return nil, err
		}
	}
	for i := range c.BandPairGoals {
		t := &c.BandPairGoals[i]
		err := b.due(Goal{Kind: scheduler.KindBandPair, WithinMin: t.WithinH * 60, EveryMin: t.EveryD * 1440,
			EarlyMin: t.EveryD * 360}, &t.Goal, 2)
		if err != nil {
			return nil, err
		}
	}
	return b.s, nil
}

type builder struct {
	c      *scheduler.Campaign
	s      *Set
	bands  bandNames
	tel    map[string]int
	src    map[string]int
	rx     []map[string]int
	past   [][]scan // by source, in order of start
	clocks map[int]*clock
	earth  *orbit.Earth
}

// scan is a counted scan of the history.
type scan struct {
	start, end          float64
	telescope, receiver int
}

// names resolves the names of telescopes, receivers and sources.
func (b *builder) names() error {
	b.tel, b.src = map[string]int{}, map[string]int{}
	for i := range b.c.Sources {
		b.src[b.c.Sources[i].Name] = i
	}
	for i := range b.c.Telescopes {
		t := &b.c.Telescopes[i]
		b.tel[t.Code] = i
		codes, rxs := map[string]int{}, make([]receiver, len(t.Receivers))
		for j := range t.Receivers {
			set, err := b.bands.set(t.Receivers[j].Bands)
			if err != nil {
				return err
			}
			codes[t.Receivers[j].Code], rxs[j] = j, receiver{set}
			for k := range b.c.Sources {
				b.s.seen[seenKey{k, i, j}] = detectable(&b.c.Sources[k], &t.Receivers[j])
			}
		}
		b.rx = append(b.rx, codes)
		b.s.receivers = append(b.s.receivers, rxs)
	}
	return nil
}

// detectable is the model's rule: broadened to nine tenths of the period, a
// pulse cannot be seen.
func detectable(s *scheduler.Source, r *scheduler.Receiver) bool {
	w := sensitivity.BroadenedWidthS(s.WidthS, sensitivity.ScatterS(s.Scatter1GHzS, r.FreqMHz))
	return sensitivity.Detectable(w, s.PeriodS)
}

// goal fills what all kinds have in common.
func (b *builder) goal(g *Goal, from *scheduler.Goal) error {
	src, ok := b.src[from.Source]
	if !ok {
		return fmt.Errorf("goal %s: no such source: %s", from.ID, from.Source)
	}
	set, err := b.bands.set(from.Bands)
	if err != nil {
		return err
	}
	g.ID, g.Source, g.Priority, g.bands, g.all = from.ID, src, from.Priority, set, len(from.Telescopes) == 0
	g.tels = make([]bool, len(b.c.Telescopes))
	for _, code := range from.Telescopes {
		i, ok := b.tel[code]
		if !ok {
			return fmt.Errorf("goal %s: no such telescope: %s", from.ID, code)
		}
		g.tels[i] = true
	}
	return nil
}

// add appends a unit of the goal that was appended last.
func (b *builder) add(u Unit) {
	u.Goal = len(b.s.Goals) - 1
	g := &b.s.Goals[u.Goal]
	i := len(b.s.Units)
	g.Units = append(g.Units, i)
	b.s.BySource[g.Source] = append(b.s.BySource[g.Source], i)
	b.s.index[u.Name] = i
	b.s.Possible += u.Weight
	b.s.Units = append(b.s.Units, u)
}
