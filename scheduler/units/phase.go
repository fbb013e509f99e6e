package units

import (
	"fmt"
	"math"

	"cadencewright/astro/orbit"
	"cadencewright/scheduler"
)

// clock is a binary's orbit with barycentric time in its direction.
type clock struct {
	elements orbit.Elements
	clock    orbit.Clock
}

// phase adds a goal of orbital phase: one unit a window that still wants
// orbits, with the passages of the horizon that no counted scan has covered.
func (b *builder) phase(p *scheduler.PhaseGoal) error {
	g := Goal{Kind: scheduler.KindPhase, DwellMin: p.DwellMin}
	if err := b.goal(&g, &p.Goal); err != nil {
		return err
	}
	b.s.Goals = append(b.s.Goals, g)
	ck, err := b.clock(g.Source)
	if err != nil {
		return fmt.Errorf("goal %s: %w", g.ID, err)
	}
	mine := b.phaseHistory(&g)
	first := b.s.From
	for _, h := range mine {
		first = math.Min(first, h.start)
	}
	for i, w := range p.Windows {
		list, err := ck.clock.Passages(ck.elements, p.Reference.Point(), w.From, w.To, Instant(first-1), Instant(b.lastEnd()+1))
		if err != nil {
			return fmt.Errorf("goal %s: window %d: %w", g.ID, i, err)
		}
		b.window(&g, p, i, w, list, mine)
	}
	return nil
}

// window adds the unit of one phase window, if it still wants orbits.
func (b *builder) window(g *Goal, p *scheduler.PhaseGoal, i int, w scheduler.PhaseWindow, list []orbit.Passage, mine []scan) {
	done := map[int]bool{}
	var open []Passage
	for _, o := range list {
		q := Passage{Orbit: o.Orbit, Enter: exact(o.Enter), Leave: exact(o.Leave)}
		for _, h := range mine {
			if q.Covers(h.start, h.end, g.DwellMin) {
				done[q.Orbit] = true
			}
		}
		if !done[q.Orbit] && q.Leave > b.s.From {
			open = append(open, q)
		}
	}
	left := max(0, w.Need-len(done))
	n := min(left, p.PerHorizon)
	if n > 0 {
		value := p.Priority * float64(left) / float64(w.Need)
		b.add(Unit{Name: fmt.Sprintf("%s@%d", g.ID, i), Group: b.s.Groups, K: i, N: n, Cap: n,
			Weight: float64(n) * value, Value: value, Passages: open})
	}
	b.s.Groups++
}

// phaseHistory are the counted scans since the campaign's start that can serve
// the goal.
func (b *builder) phaseHistory(g *Goal) []scan {
	var mine []scan
	start := Minutes(b.c.Start)
	for _, h := range b.past[g.Source] {
		if h.start >= start && b.s.Bands(g, h.telescope, h.receiver) != 0 {
			mine = append(mine, h)
		}
	}
	return mine
}

// lastEnd is the end of the last block that starts in the horizon, or the
// horizon's end if that is later.
func (b *builder) lastEnd() float64 {
	last := b.s.To
	for i := range b.c.Blocks {
		bl := &b.c.Blocks[i]
		if s := Minutes(bl.Start); s >= b.s.From && s < b.s.To {
			last = math.Max(last, Minutes(bl.End))
		}
	}
	return last
}

// clock is the source's orbit and barycentric clock, made once.
func (b *builder) clock(source int) (*clock, error) {
	if c, ok := b.clocks[source]; ok {
		return c, nil
	}
	s := &b.c.Sources[source]
	if s.Binary == nil {
		return nil, fmt.Errorf("source %s has no binary", s.Name)
	}
	el, err := s.Binary.Elements()
	if err != nil {
		return nil, fmt.Errorf("source %s: %w", s.Name, err)
	}
	if b.earth == nil {
		from := b.s.From
		for _, p := range b.past {
			for _, h := range p {
				from = math.Min(from, h.start)
			}
		}
		b.earth, err = orbit.NewEarth(Instant(math.Max(from, Minutes(b.c.Start))-2880), Instant(b.lastEnd()+2880))
		if err != nil {
			return nil, err
		}
	}
	c := &clock{elements: el, clock: b.earth.Clock(s.Star())}
	b.clocks[source] = c
	return c, nil
}
