package verify

import "cadencewright/scheduler"

// A candidate scan earns from an overlap or a pair only together with others.
// partners holds when those others could be under way: all that the worth of a
// candidate needs to know of other blocks.
type partners struct {
	// cover, of overlap goals: the grid instants from which some candidate of
	// a telescope could be under way in a band for the wanted time.
	cover map[coverKey]runs
	// begin, of pair goals: the grid instants at which some candidate starts
	// in a band.
	begin map[beginKey]runs
}

type coverKey struct {
	goal      *goal
	band      uint32 // one bit
	telescope *telescope
}

type beginKey struct {
	goal *goal
	band uint32 // one bit
}

// together reports whether the goal needs several scans.
func (g *goal) together() bool {
	return g.kind == scheduler.KindOverlap || g.kind == scheduler.KindBandPair
}

// Partners are kept as runs of instants, not as scans: a certificate asks only
// whether and when some candidate could be there. They are found for all blocks
// before any candidate is appraised, since a partner may be in a later block.

// findPartners goes through all candidates of the sources that have such goals.
func (m *model) findPartners(o Options) (*partners, error) {
	found := make([]*partnerLists, len(m.blocks))
	err := m.eachBlock(o, func(i int, b *block, v *view) error {
		list, err := m.partnersIn(b, v)
		found[i] = list
		return err
	})
	if err != nil {
		return nil, err
	}
	all := newPartnerLists()
	for _, list := range found {
		for k, r := range list.cover {
			all.cover[k] = append(all.cover[k], r...)
		}
		for k, r := range list.begin {
			all.begin[k] = append(all.begin[k], r...)
		}
	}
	p := &partners{cover: map[coverKey]runs{}, begin: map[beginKey]runs{}}
	for k, r := range all.cover {
		p.cover[k] = unite(r)
	}
	for k, r := range all.begin {
		p.begin[k] = unite(r)
	}
	return p, nil
}

// partnerLists are partners whose runs are not yet in order.
type partnerLists struct {
	cover map[coverKey][]run
	begin map[beginKey][]run
}

func newPartnerLists() *partnerLists {
	return &partnerLists{cover: map[coverKey][]run{}, begin: map[beginKey][]run{}}
}

// partnersIn are the partners that one block can give.
func (m *model) partnersIn(b *block, v *view) (*partnerLists, error) {
	list := newPartnerLists()
	f, err := m.newField(b)
	if f == nil {
		return list, err
	}
	for _, s := range m.wanted(b, (*goal).together) {
		if !v.look(f, s) {
			continue
		}
		for _, g := range s.groups {
			if g.goal.together() {
				list.add(v, g.goal)
			}
		}
	}
	return list, nil
}

// add adds the candidates of one goal.
func (l *partnerLists) add(v *view, g *goal) {
	for _, r := range v.receivers {
		bands := g.bands(r)
		if bands == 0 {
			continue
		}
		for _, length := range v.lengths {
			spare := int64(0) // steps by which a start of the common time may lie after the start
			if g.kind == scheduler.KindOverlap {
				if spare = floorDiv(msec(length)*v.grid-g.overlap, v.grid); spare < 0 {
					continue
				}
			}
			for _, s := range v.starts(length, r) {
				for bit := uint32(1); bit <= bands; bit <<= 1 {
					switch {
					case bands&bit == 0:
					case g.kind == scheduler.KindOverlap:
						k := coverKey{g, bit, v.telescope}
						l.cover[k] = append(l.cover[k], run{s.lo, s.hi + spare})
					default:
						k := beginKey{g, bit}
						l.begin[k] = append(l.begin[k], s)
					}
				}
			}
		}
	}
}

// wanted are the sources that have a goal of the given sort which some receiver
// of the block can serve, in the order of the campaign.
func (m *model) wanted(b *block, sort func(*goal) bool) []*source {
	var list []*source
	for i := range m.campaign.Sources {
		if s := m.sources[m.campaign.Sources[i].Name]; s.servedBy(b, sort) {
			list = append(list, s)
		}
	}
	return list
}

func (s *source) servedBy(b *block, sort func(*goal) bool) bool {
	for _, g := range s.groups {
		if !sort(g.goal) {
			continue
		}
		for _, r := range b.receivers {
			if g.goal.bands(r) != 0 {
				return true
			}
		}
	}
	return false
}

// commonStarts are the grid instants in [lo, hi] from which, in one of the
// bands, enough other telescopes could be under way.
func (p *partners) commonStarts(m *model, g *goal, own *telescope, bands uint32, lo, hi int64) runs {
	var any []run
	for bit := uint32(1); bit <= bands; bit <<= 1 {
		if bands&bit == 0 {
			continue
		}
		var others []runs
		for _, t := range m.campaign.Telescopes {
			if t.Code != own.Code {
				others = append(others, p.cover[coverKey{g, bit, m.telescopes[t.Code]}].within(lo, hi))
			}
		}
		any = append(any, atLeast(others, g.count-1)...)
	}
	return unite(any)
}

// otherStarts are the grid instants in [lo, hi] at which a candidate could
// start that makes a pair with one in the given bands.
func (p *partners) otherStarts(g *goal, bands uint32, lo, hi int64) runs {
	other := g.allBands() &^ bands // what this scan lacks
	if other == 0 {
		other = bands // a scan in both bands pairs with any
	}
	var any []run
	for bit := uint32(1); bit <= other; bit <<= 1 {
		if other&bit != 0 {
			any = append(any, p.begin[beginKey{g, bit}].within(lo, hi)...)
		}
	}
	return unite(any)
}
