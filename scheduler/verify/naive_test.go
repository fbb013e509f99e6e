package verify

import (
	"math"
	"testing"
	"time"

	"cadencewright/astro/sky"
	"cadencewright/scheduler"
)

// naive lists the candidates of a campaign one by one, straight from the words
// of the model: a start and a length, and every rule asked of every instant.
// It is slow and holds nothing that the fast way uses, but the units.
type naive struct {
	m     *model
	grid  time.Duration
	by    map[*goal][]candidate // of goals that several scans share
	place map[placeKey]sky.Place
}

type placeKey struct {
	t  *telescope
	s  *source
	at int64
}

type candidate struct {
	block      *block
	source     *source
	receiver   *receiver
	start, end time.Time
}

func newNaive(t testing.TB, c *scheduler.Campaign) *naive {
	t.Helper()
	n := &naive{m: unitsOf(t, c), grid: time.Duration(c.GridMin) * time.Minute, by: map[*goal][]candidate{}, place: map[placeKey]sky.Place{}}
	for _, s := range n.m.sources {
		for _, g := range s.groups {
			if g.goal.together() {
				n.by[g.goal] = n.candidates(t, s, g.goal)
			}
		}
	}
	return n
}

func (n *naive) at(t testing.TB, tel *telescope, s *source, when time.Time) sky.Place {
	k := placeKey{tel, s, when.Unix()}
	p, ok := n.place[k]
	if !ok {
		var err error
		if p, err = sky.Observe(tel.site, s.star, when, n.m.campaign.DUT1S); err != nil {
			t.Fatal(err)
		}
		n.place[k] = p
	}
	return p
}

// candidates are all those of a source that can serve a goal.
func (n *naive) candidates(t testing.TB, s *source, g *goal) []candidate {
	var list []candidate
	for _, b := range n.m.blocks {
		for _, r := range b.receivers {
			if g.bands(r) != 0 {
				list = append(list, n.inBlock(t, b, s, r)...)
			}
		}
	}
	return list
}

func (n *naive) inBlock(t testing.TB, b *block, s *source, r *receiver) []candidate {
	var list []candidate
	for start := b.Start.Truncate(n.grid); start.Before(b.End); start = start.Add(n.grid) {
		for _, minutes := range s.ScanMinutes {
			c := candidate{b, s, r, start, start.Add(time.Duration(minutes) * time.Minute)}
			if n.isPin(c) || n.allowed(t, c) {
				list = append(list, c)
			}
		}
		for _, p := range b.Pins(n.m.campaign) {
			c := candidate{b, s, r, p.Start, p.End()}
			if p.Start.Equal(start) && n.isPin(c) && !allowsLength(s.Source, p.Minutes) {
				list = append(list, c)
			}
		}
	}
	return list
}

// Pins are the campaign's pins in the block.
func (b *block) Pins(c *scheduler.Campaign) []scheduler.Pin {
	var list []scheduler.Pin
	for _, p := range c.Pins {
		if p.Block == b.ID {
			list = append(list, p)
		}
	}
	return list
}

func (n *naive) isPin(c candidate) bool {
	for _, p := range c.block.Pins(n.m.campaign) {
		if p.Source == c.source.Name && p.Receiver == c.receiver.Code && p.Start.Equal(c.start) && p.End().Equal(c.end) {
			return true
		}
	}
	return false
}

// allowed asks the block, its lost parts, the pins and the sky.
func (n *naive) allowed(t testing.TB, c candidate) bool {
	tel := c.block.telescope
	seconds := func(s float64) time.Duration { return time.Duration(s * float64(time.Second)) }
	ready := seconds(tel.SetupS + tel.CalS)
	if c.start.Sub(c.block.Start) < ready || c.end.After(c.block.End) {
		return false
	}
	for _, l := range c.block.Lost {
		if c.start.Before(l.End) && c.end.After(l.Start) || !c.start.Before(l.Start) && c.start.Sub(l.End) < ready {
			return false
		}
	}
	gap := time.Duration(math.Ceil(float64(seconds(tel.SettleS+tel.CalS))/float64(n.grid))) * n.grid
	for _, p := range c.block.Pins(n.m.campaign) {
		if c.start.Before(p.End().Add(gap)) && c.end.Add(gap).After(p.Start) {
			return false
		}
	}
	return n.isUp(t, c)
}

func (n *naive) isUp(t testing.TB, c candidate) bool {
	tel := c.block.telescope
	lo, hi, last := 0.0, 0.0, sky.Place{}
	for at := c.start; !at.After(c.end); at = at.Add(n.grid) {
		p := n.at(t, tel, c.source, at)
		if p.ElDeg < tel.ElevationMinDeg || p.ElDeg < tel.mask.ElevationDeg(p.AzDeg) || p.ElDeg > tel.ElevationMaxDeg ||
			p.SunDeg < tel.SunMinDeg || p.SunDeg < c.source.SunMinDeg {
			return false
		}
		switch tel.Mount {
		case scheduler.MountEquatorial:
			if p.HADeg < 15*tel.HourAngleRangeH[0] || p.HADeg > 15*tel.HourAngleRangeH[1] || at.After(c.start) && p.HADeg < last.HADeg {
				return false
			}
		case scheduler.MountTransit:
			if math.Abs(p.HADeg)*4 > tel.TrackHalfMin/math.Cos(p.DecDeg*math.Pi/180) {
				return false
			}
		default:
			az := p.AzDeg
			if at.After(c.start) {
				az = last.AzDeg + math.Remainder(p.AzDeg-last.AzDeg, 360)
			} else {
				lo, hi = az, az
			}
			lo, hi = min(lo, az), max(hi, az)
			p.AzDeg = az
		}
		last = p
	}
	if tel.Mount != scheduler.MountAltAz {
		return true
	}
	for turn := -5.0; turn <= 5; turn++ {
		if lo+360*turn >= tel.AzimuthRangeDeg[0] && hi+360*turn <= tel.AzimuthRangeDeg[1] {
			return true
		}
	}
	return false
}

// worth is a candidate's worth at prices, by looking at every partner.
func (n *naive) worth(t testing.TB, c candidate, prices []float64) float64 {
	if !c.source.sees(c.receiver) {
		return 0
	}
	sum := 0.0
	for _, g := range c.source.groups {
		bands := g.goal.bands(c.receiver)
		if bands == 0 {
			continue
		}
		best := 0.0
		for _, u := range g.units {
			p := prices[u.index]
			switch g.goal.kind {
			case scheduler.KindCadence:
				best = max(best, u.weight*u.timeliness(instantOf(c.start))*quality(n.info(t, c), g.goal.toaUs)-p)
			case scheduler.KindPhase:
				for _, q := range u.passages {
					if q.coveredBy(instantOf(c.start), instantOf(c.end), g.goal.dwell, 0) {
						best = max(best, u.value-p)
					}
				}
			case scheduler.KindOverlap:
				best = max(best, u.weight*n.overlapBest(c, u)/float64(g.goal.count)-p)
			case scheduler.KindBandPair:
				best = max(best, u.weight*n.pairBest(c, u)/2-p)
				if bands == g.goal.allBands() {
					best = max(best, u.weight*u.timeliness(instantOf(c.start))-2*p)
				}
			}
		}
		sum += best
	}
	return sum
}

func (n *naive) info(t testing.TB, c candidate) float64 {
	sum := 0.0
	for at := c.start.Add(n.grid / 2); at.Before(c.end); at = at.Add(n.grid) {
		el := n.at(t, c.block.telescope, c.source, at).ElDeg
		part := 1.0
		if loss := c.receiver.RFILoss; len(loss) > 0 {
			part -= loss[at.In(c.block.telescope.zone).Hour()]
		}
		sum += c.source.radiometer[c.receiver.index].InfoRate(math.Sin(max(el, 0.1)*math.Pi/180), part) * n.grid.Seconds()
	}
	return sum
}

// overlapBest tries every start of the common time with every set of others.
func (n *naive) overlapBest(c candidate, u *unit) float64 {
	long := time.Duration(u.goal.overlap) * time.Millisecond
	best := 0.0
	for at := c.start; !at.Add(long).After(c.end); at = at.Add(n.grid) {
		for bit := uint32(1); bit <= u.goal.allBands(); bit <<= 1 {
			if u.goal.bands(c.receiver)&bit == 0 {
				continue
			}
			others := map[*telescope]bool{}
			for _, o := range n.by[u.goal] {
				if o.block.telescope != c.block.telescope && u.goal.bands(o.receiver)&bit != 0 &&
					!o.start.After(at) && !o.end.Before(at.Add(long)) {
					others[o.block.telescope] = true
				}
			}
			if len(others) >= u.goal.count-1 {
				best = max(best, u.timeliness(instantOf(at)))
			}
		}
	}
	return best
}

// pairBest tries every candidate in the other band.
func (n *naive) pairBest(c candidate, u *unit) float64 {
	g, best := u.goal, 0.0
	for _, o := range n.by[g] {
		apart := o.start.Sub(c.start)
		if g.bands(c.receiver)|g.bands(o.receiver) != g.allBands() || apart.Abs() > time.Duration(g.within)*time.Millisecond {
			continue
		}
		best = max(best, u.timeliness(max(instantOf(c.start), instantOf(o.start))))
	}
	return best
}
