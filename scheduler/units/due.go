package units

import (
	"fmt"
	"math"
	"slices"

	"cadencewright/scheduler"
)

// history sorts the counted scans that were begun before the horizon by source.
func (b *builder) history() error {
	b.past = make([][]scan, len(b.c.Sources))
	for i := range b.c.History {
		h := &b.c.History[i]
		start := Minutes(h.Start)
		if !h.Counted || !(start < b.s.From) {
			continue
		}
		src, ok := b.src[h.Source]
		if !ok {
			return fmt.Errorf("history: no such source: %s", h.Source)
		}
		tel, ok := b.tel[h.Telescope]
		if !ok {
			return fmt.Errorf("history: no such telescope: %s", h.Telescope)
		}
		rx, ok := b.rx[tel][h.Receiver]
		if !ok {
			return fmt.Errorf("history: telescope %s has no receiver %s", h.Telescope, h.Receiver)
		}
		if b.s.Detectable(src, tel, rx) {
			b.past[src] = append(b.past[src], scan{start, start + h.Minutes, tel, rx})
		}
	}
	for _, p := range b.past {
		slices.SortStableFunc(p, func(x, y scan) int {
			switch {
			case x.start < y.start:
				return -1
			case x.start > y.start:
				return 1
			}
			return 0
		})
	}
	return nil
}

// due adds a goal with due windows. L is the last time that history satisfied
// it; the first window is due an interval later, or at the horizon's start if
// that is past, and the others follow at intervals.
func (b *builder) due(g Goal, from *scheduler.Goal, n int) error {
	if err := b.goal(&g, from); err != nil {
		return err
	}
	g.Last, g.Had = b.last(&g)
	b.s.Goals = append(b.s.Goals, g)
	due, urgency := b.s.From, 3.0
	if g.Had {
		due = math.Max(b.s.From, g.Last+g.EveryMin)
		urgency = 1 + math.Min(2, math.Max(0, (b.s.From-g.Last-g.EveryMin)/g.EveryMin))
	}
	for k := 1; due < b.s.To-MS; k++ {
		if k > maxWindows {
			return fmt.Errorf("goal %s: more than %d due windows in the horizon: every_d is too short for it", g.ID, maxWindows)
		}
		w := g.Priority * urgency
		b.add(Unit{Name: fmt.Sprintf("%s#%d", g.ID, k), Group: b.s.Groups, K: k, N: 1, Cap: n, Weight: w, Value: w,
			Due: due, Every: g.EveryMin, Early: g.EarlyMin})
		due, urgency = due+g.EveryMin, 1
	}
	b.s.Groups++
	return nil
}

// maxWindows bounds the due windows of one goal in one horizon.
const maxWindows = 10_000

// last is the last instant at which history satisfied a goal.
func (b *builder) last(g *Goal) (float64, bool) {
	var able []past
	for _, h := range b.past[g.Source] {
		if bands := b.s.Bands(g, h.telescope, h.receiver); bands != 0 {
			able = append(able, past{h, bands})
		}
	}
	for i := len(able) - 1; i >= 0; i-- {
		a := able[i]
		switch g.Kind {
		case scheduler.KindCadence:
			return a.start, true
		case scheduler.KindOverlap:
			if overlapped(able, a, g) {
				return a.start, true
			}
		case scheduler.KindBandPair:
			if paired(able[:i+1], a, g) {
				return a.start, true
			}
		}
	}
	return 0, false
}

// past is a scan of the history with what it can give to a goal.
type past struct {
	scan
	bands BandSet
}

// overlapped tells whether a common time of enough telescopes in one band
// begins with scan a.
func overlapped(able []past, a past, g *Goal) bool {
	if a.end-a.start < g.OverlapMin-MS {
		return false
	}
	for band := a.bands; band != 0; band &= band - 1 {
		bit := band & -band
		var seen []int
		for _, h := range able {
			if h.start <= a.start && h.end >= a.start+g.OverlapMin-MS && h.bands&bit != 0 && !slices.Contains(seen, h.telescope) {
				seen = append(seen, h.telescope)
			}
		}
		if len(seen) >= g.Count {
			return true
		}
	}
	return false
}

// paired tells whether a, with one of the scans not after it, or alone, makes
// up both bands in time. Of two that start together the later one in order
// finds the other.
func paired(able []past, a past, g *Goal) bool {
	for _, h := range able {
		if h.start <= a.start && a.start-h.start <= g.WithinMin+MS && a.bands|h.bands == g.bands {
			return true
		}
	}
	return false
}
