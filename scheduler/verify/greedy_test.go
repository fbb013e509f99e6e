package verify

import (
	"cmp"
	"math"
	"slices"
	"testing"

	"cadencewright/astro/sky"
	"cadencewright/scheduler"
)

// greedy makes a plan to check: units in order of weight, each at the best
// place that is still free, nothing ever moved. It is no good planner, but its
// plans hold pins, all kinds of goals and mounts, and real slews.
type greedy struct {
	*checker
	views  map[*block]map[*source]*view // without the sky's samples
	placed map[*block][]*scan
}

// tries bounds the search for one unit.
const tries = 60

func newGreedy(t testing.TB, c *scheduler.Campaign, h scheduler.Horizon) *greedy {
	t.Helper()
	m, err := newModel(c, h)
	if err != nil {
		t.Fatal(err)
	}
	g := &greedy{checker: &checker{model: m, options: Options{}.filled(), report: &Report{}},
		views: map[*block]map[*source]*view{}, placed: map[*block][]*scan{}}
	for _, b := range m.blocks {
		f, err := m.newField(b)
		if err != nil {
			t.Fatal(err)
		}
		g.views[b] = map[*source]*view{}
		for _, s := range m.wanted(b, func(*goal) bool { return true }) {
			var v view
			if f != nil && v.look(f, s) {
				v.sinEl, v.track, v.path = nil, sky.Track{}, nil
				g.views[b][s] = &v
			}
		}
	}
	return g
}

// greedyPlan is a whole plan with a certificate at some prices.
func greedyPlan(t testing.TB, c *scheduler.Campaign, h scheduler.Horizon) *scheduler.Plan {
	t.Helper()
	g := newGreedy(t, c, h)
	for _, p := range g.pins {
		if !g.insert(g.newScan(p.block, p.source, p.receiver, p.start, p.end-p.start)) {
			t.Fatalf("the pin of %s at %s does not fit", p.Source, at(p.start))
		}
	}
	units := slices.Clone(g.units)
	slices.SortStableFunc(units, func(a, b *unit) int { return cmp.Compare(b.weight, a.weight) })
	for _, u := range units {
		g.serve(u)
	}
	return g.finish(t)
}

// choice is one candidate scan for a unit.
type choice struct {
	block    *block
	receiver *receiver
	length   int64
	start    int64
	value    float64
}

// choices are candidates for a unit, the best first; keep filters and values
// them by start and length.
func (g *greedy) choices(u *unit, bands uint32, value func(start, long msec) float64) []choice {
	var list []choice
	for _, b := range g.blocks {
		v := g.views[b][u.goal.source]
		if v == nil {
			continue
		}
		for _, r := range b.receivers {
			if u.goal.bands(r)&bands == 0 {
				continue
			}
			for _, length := range v.lengths {
				for _, s := range v.starts(length, r) {
					step := max(1, (s.hi-s.lo)/12)
					for at := s.lo; at <= s.hi; at += step {
						if x := value(msec(at)*g.grid, msec(length)*g.grid); x > 0 {
							list = append(list, choice{b, r, length, at, x})
						}
					}
				}
			}
		}
	}
	slices.SortStableFunc(list, func(a, b choice) int { return cmp.Compare(b.value, a.value) })
	return list
}

// serve tries to earn a unit.
func (g *greedy) serve(u *unit) {
	timely := func(start, _ msec) float64 { return u.timeliness(start) }
	switch u.goal.kind {
	case scheduler.KindCadence:
		g.serveAlone(u, 1, g.choices(u, u.goal.allBands(), timely))
	case scheduler.KindPhase:
		for i := range u.passages {
			p := u.passages[i]
			g.serveAlone(u, u.times, g.choices(u, u.goal.allBands(), func(start, long msec) float64 {
				if p.coveredBy(start, start+long, u.goal.dwell, 0) {
					return 1
				}
				return 0
			}))
		}
	case scheduler.KindOverlap:
		g.serveOverlap(u, g.choices(u, u.goal.allBands(), func(start, long msec) float64 {
			if long < u.goal.overlap {
				return 0
			}
			return u.timeliness(start)
		}))
	case scheduler.KindBandPair:
		g.servePair(u, g.choices(u, 1, timely), g.choices(u, 2, timely))
	}
}

// serveAlone earns a unit by one scan.
func (g *greedy) serveAlone(u *unit, most int, list []choice) {
	if n := g.report.Units[u.name]; n >= most {
		return
	}
	for _, c := range list[:min(len(list), tries)] {
		s := g.scanOf(u, c)
		if !g.insert(s) {
			continue
		}
		value := u.value
		if u.goal.kind == scheduler.KindCadence {
			value *= u.timeliness(s.start) * quality(s.info, u.goal.toaUs)
		}
		if value > 0 && g.earn(u, value, s) {
			return
		}
		g.remove(s)
	}
}

// serveOverlap earns a unit by scans that start together.
func (g *greedy) serveOverlap(u *unit, list []choice) {
	for i, a := range list[:min(len(list), tries)] {
		together := []*scan{g.scanOf(u, a)}
		bands, telescopes := u.goal.bands(a.receiver), []*telescope{a.block.telescope}
		for _, b := range list[i+1:] {
			if b.start == a.start && len(together) < u.goal.count &&
				!slices.Contains(telescopes, b.block.telescope) && bands&u.goal.bands(b.receiver) != 0 {
				bands &= u.goal.bands(b.receiver)
				telescopes, together = append(telescopes, b.block.telescope), append(together, g.scanOf(u, b))
			}
		}
		start := together[0].start
		if len(together) == u.goal.count && g.insert(together...) {
			if g.earn(u, u.weight*u.timeliness(start), together...) {
				return
			}
			g.remove(together...)
		}
	}
}

// servePair earns a unit by a scan with both bands or by two.
func (g *greedy) servePair(u *unit, one, two []choice) {
	for _, a := range one[:min(len(one), tries)] {
		first := g.scanOf(u, a)
		if u.goal.bands(a.receiver) == u.goal.allBands() {
			if g.insert(first) {
				if g.earn(u, u.weight*u.timeliness(first.start), first) {
					return
				}
				g.remove(first)
			}
			continue
		}
		for _, b := range two[:min(len(two), tries)] {
			second := g.scanOf(u, b)
			later, earlier := max(first.start, second.start), min(first.start, second.start)
			if later-earlier > u.goal.within || u.timeliness(later) == 0 {
				continue
			}
			if g.insert(first, second) {
				if g.earn(u, u.weight*u.timeliness(later), first, second) {
					return
				}
				g.remove(first, second)
			}
		}
	}
}

func (g *greedy) scanOf(u *unit, c choice) *scan {
	return g.newScan(c.block, u.goal.source, c.receiver, msec(c.start)*g.grid, msec(c.length)*g.grid)
}

func (g *greedy) newScan(b *block, s *source, r *receiver, start, long msec) *scan {
	return &scan{block: b, source: s, receiver: r, start: start, end: start + long, listed: &scheduler.Scan{
		Block: b.ID, Telescope: b.Telescope, Source: s.Name, Receiver: r.Code, Start: start.time(), Minutes: int(long / minute)}}
}

// insert places scans together, or none of them.
func (g *greedy) insert(list ...*scan) bool {
	for i, s := range list {
		if !g.insertOne(s) {
			g.remove(list[:i]...)
			return false
		}
	}
	return true
}

func (g *greedy) insertOne(s *scan) bool {
	row := g.placed[s.block]
	i := 0
	for i < len(row) && row[i].start < s.start {
		i++
	}
	if i > 0 && row[i-1].end+g.grid > s.start || i < len(row) && s.end+g.grid > row[i].start {
		return false
	}
	s.info = 0
	places, err := g.observe(s)
	if err != nil {
		return false
	}
	for turn := -2.0; turn <= 2; turn++ {
		g.report.Violations = nil
		motor := places[0].AzDeg + 360*turn
		s.listed.MotorAzDeg = &motor
		g.checkUp(s, places)
		if s.block.telescope.Mount == scheduler.MountAltAz {
			g.checkMotor(s, places)
		} else {
			s.listed.MotorAzDeg = nil
		}
		if i > 0 {
			g.checkRoom(row[i-1], s)
		}
		if i < len(row) {
			g.checkRoom(s, row[i])
		}
		if len(g.report.Violations) == 0 {
			g.placed[s.block] = slices.Insert(row, i, s)
			return true
		}
	}
	return false
}

func (g *greedy) remove(list ...*scan) {
	for _, s := range list {
		g.placed[s.block] = slices.DeleteFunc(g.placed[s.block], func(x *scan) bool { return x == s })
	}
}

// earn books a unit to scans in equal shares, unless a rule between units or
// scans forbids it.
func (g *greedy) earn(u *unit, value float64, scans ...*scan) bool {
	takers := make([][]taker, len(g.units))
	for _, row := range g.placed {
		for _, s := range row {
			g.report.Violations = nil
			g.readEarnings(s, takers)
		}
	}
	for _, s := range scans {
		takers[u.index] = append(takers[u.index], taker{s, value / float64(len(scans))})
	}
	g.report.Violations = nil
	when := make([]msec, len(g.units))
	for i, list := range takers {
		if len(list) > 0 {
			g.checkUnit(g.units[i], list, &when[i])
		}
	}
	g.checkSpacing(u.group, takers, when)
	if len(g.report.Violations) > 0 {
		return false
	}
	for _, s := range scans {
		s.listed.Earns = append(s.listed.Earns, scheduler.Earning{Goal: u.goal.ID, Unit: u.name, Value: value / float64(len(scans))})
	}
	if g.report.Units == nil {
		g.report.Units = map[string]int{}
	}
	g.report.Units[u.name]++
	return true
}

// finish writes the plan down.
func (g *greedy) finish(t testing.TB) *scheduler.Plan {
	p := &scheduler.Plan{Campaign: g.campaign.Name, From: g.horizon.From, To: g.horizon.To, Possible: g.possible()}
	for _, b := range g.blocks {
		for _, s := range g.placed[b] {
			out := *s.listed
			for _, q := range b.pins {
				out.Pinned = out.Pinned || s.is(q)
			}
			if s.info > 0 {
				out.TOAUs = 1e6 / math.Sqrt(s.info)
			}
			for _, e := range out.Earns {
				p.Score += e.Value
			}
			p.Scans = append(p.Scans, out)
		}
	}
	for _, u := range g.units {
		if g.report.Units[u.name] < u.times {
			p.Unmet = append(p.Unmet, scheduler.Unmet{Goal: u.goal.ID, Unit: u.name, Weight: u.weight})
		}
	}
	p.Certificate.Prices = somePrices(g.model)
	prices := make([]float64, len(g.units))
	for i, u := range g.units {
		prices[i] = p.Certificate.Prices[u.name]
	}
	bound, err := g.bound(prices, Options{})
	if err != nil {
		t.Fatal(err)
	}
	p.Certificate.Bound, p.Bound = bound, bound
	return p
}

// somePrices are prices of all sizes from nothing to nearly the unit's weight,
// a fraction that depends on the unit's place in the list alone.
func somePrices(m *model) map[string]float64 {
	prices := map[string]float64{}
	for i, u := range m.units {
		if part := i * 7 % 10; part > 0 {
			prices[u.name] = math.Round(u.value/u.load*float64(part)*1e5) / 1e6
		}
	}
	return prices
}

// week is the horizon of a whole campaign.
func week(c *scheduler.Campaign) scheduler.Horizon {
	return scheduler.Horizon{From: c.Start, To: c.End}
}
