package solve

import (
	"cadencewright/scheduler"
	"cadencewright/scheduler/units"
)

// goal is a goal in the form that weighing scans wants: fast.
type goal struct {
	kind    units.Kind
	index   int          // into units.Set.Goals
	first   int          // its first unit
	units   []units.Unit // all of its units
	wants   units.BandSet
	bands   []units.BandSet // what each receiver can give, over all telescopes
	wanted2 float64         // square of the wanted TOA uncertainty in s; 0: none
	count   int
	overlap float64 // minutes, less a millisecond
	within  float64 // minutes, and a millisecond
	dwell   float64
	every   float64
	weight  float64 // of all its units
	// entangled: a scan may be so long, or a partner so far, that two due
	// windows could want the same scan.
	entangled bool
}

// newGoals compiles the goals that have units; those without are nil.
func newGoals(t *table) []*goal {
	set, c := t.p.Units, t.p.Campaign
	list := make([]*goal, len(set.Goals))
	for gi := range set.Goals {
		g := &set.Goals[gi]
		if len(g.Units) == 0 {
			continue
		}
		n := len(g.Units)
		o := &goal{kind: g.Kind, index: gi, first: g.Units[0], units: set.Units[g.Units[0] : g.Units[n-1]+1], wants: g.Wants(),
			wanted2: g.TOAUs * g.TOAUs * 1e-12, count: g.Count, overlap: g.OverlapMin - units.MS, within: g.WithinMin + units.MS,
			dwell: g.DwellMin, every: g.EveryMin}
		for ti := range c.Telescopes {
			for ri := range c.Telescopes[ti].Receivers {
				b := set.Bands(g, ti, ri)
				if !set.Detectable(g.Source, ti, ri) {
					b = 0
				}
				o.bands = append(o.bands, b)
			}
		}
		longest := 0
		for _, m := range c.Sources[g.Source].ScanMinutes {
			longest = max(longest, m)
		}
		for _, p := range c.Pins {
			if p.Source == c.Sources[g.Source].Name {
				longest = max(longest, p.Minutes)
			}
		}
		switch g.Kind {
		case scheduler.KindOverlap:
			o.entangled = float64(longest) >= g.EveryMin/2-units.MS
		case scheduler.KindBandPair:
			o.entangled = g.WithinMin >= g.EveryMin/2-2*units.MS
		}
		for i := range o.units {
			o.weight += o.units[i].Weight
		}
		list[gi] = o
	}
	return list
}

// of are the bands that a scan gives to the goal; nothing where it detects
// nothing.
func (g *goal) of(x *scan) units.BandSet {
	if x.info <= 0 {
		return 0
	}
	return g.bands[x.flat]
}

// quality is what a scan's information is worth against the wanted TOA
// uncertainty.
func (g *goal) quality(x *scan) float64 {
	if g.wanted2 == 0 {
		return 1
	}
	q := x.info * g.wanted2
	if q >= 1 {
		return 1
	}
	if q < 0.5 {
		return 0
	}
	return q
}
