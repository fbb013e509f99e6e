package demo

import (
	"math"
	"slices"
	"sort"
	"time"

	"cadencewright/scheduler"
)

// past is the array being observed week by week by people who take what is
// most overdue among what is up, near enough.
type past struct {
	c     *scheduler.Campaign
	r     *random
	kinds map[string]part

	wants map[string][]want        // by source
	last  map[string]time.Time     // by goal: when it was last served
	made  []scheduler.HistoryScan  // so far
	kept  map[string][]reservation // by block: scans agreed on beforehand
}

// want is a goal as the people of the past saw it.
type want struct {
	goal     *scheduler.Goal
	everyD   float64
	overlap  *scheduler.OverlapGoal // set for those
	pair     bool
	priority float64
}

// reservation is a scan agreed on with another telescope.
type reservation struct {
	source   int
	receiver string
	start    time.Time
	minutes  int
	goal     string
}

// observe simulates the past weeks and returns their scans in order of time.
func observe(c *scheduler.Campaign, seed uint64, monday time.Time, kinds map[string]part) []scheduler.HistoryScan {
	p := &past{c: c, r: stream(seed, "history"), kinds: kinds, wants: map[string][]want{}, last: map[string]time.Time{}}
	for i := range c.CadenceTargets {
		g := &c.CadenceTargets[i]
		p.add(want{goal: &g.Goal, everyD: g.EveryD, priority: g.Priority})
	}
	for i := range c.OverlapGoals {
		g := &c.OverlapGoals[i]
		p.add(want{goal: &g.Goal, everyD: g.EveryD, overlap: g, priority: g.Priority})
	}
	for i := range c.BandPairGoals {
		g := &c.BandPairGoals[i]
		p.add(want{goal: &g.Goal, everyD: g.EveryD, pair: true, priority: g.Priority})
	}
	for week := -pastWeeks; week < 0; week++ {
		p.week(seed, monday.Add(time.Duration(week)*scheduler.Week), week)
	}
	sort.SliceStable(p.made, func(i, j int) bool { return p.made[i].Start.Before(p.made[j].Start) })
	return p.made
}

func (p *past) add(w want) { p.wants[w.goal.Source] = append(p.wants[w.goal.Source], w) }

// week observes one week: joint scans first, then every block filled.
func (p *past) week(seed uint64, monday time.Time, week int) {
	blocks := weekBlocks(p.c, seed, monday, week)
	sort.SliceStable(blocks, func(i, j int) bool { return blocks[i].Start.Before(blocks[j].Start) })
	tables := make([]*upTable, 0, len(blocks))
	for i := range blocks {
		p.spoil(&blocks[i])
		if blocks[i].End.Sub(blocks[i].Start) > time.Hour {
			tables = append(tables, newUpTable(p.c, &blocks[i]))
		}
	}
	p.kept = map[string][]reservation{}
	for i := range p.c.OverlapGoals {
		p.agree(tables, &p.c.OverlapGoals[i])
	}
	for _, u := range tables {
		p.fill(u)
	}
}

// spoil lets wind or a fault end a block early, or eat it whole.
func (p *past) spoil(b *scheduler.Block) {
	odds := 0.1
	if b.Telescope == kvitvarden {
		odds = 0.16 // a windy place
	}
	if p.r.chance(odds) {
		b.End = b.Start.Add(time.Duration(p.r.below(6)) * 30 * time.Minute)
	}
}

// agree reserves a joint scan for an overlap goal that is due, at the first
// instant of the week when enough telescopes have the source up.
func (p *past) agree(tables []*upTable, g *scheduler.OverlapGoal) {
	i := slices.IndexFunc(p.c.Sources, func(s scheduler.Source) bool { return s.Name == g.Source })
	minutes := 0
	for _, m := range p.c.Sources[i].ScanMinutes {
		if minutes == 0 && float64(m) >= g.OverlapMin {
			minutes = m
		}
	}
	// People do not get round to agreeing every week.
	if minutes == 0 || !p.r.chance(0.6) {
		return
	}
	for _, u := range tables {
		if last, done := p.last[g.ID]; done && u.start.Sub(last) < time.Duration(0.8*g.EveryD*24)*time.Hour {
			continue
		}
		for at := u.first(); !at.After(u.block.End); at = at.Add(grid) {
			if p.joint(tables, g, i, at, minutes) {
				return
			}
		}
	}
}

// joint reserves a scan at one instant on as many telescopes as the goal wants,
// if it can.
func (p *past) joint(tables []*upTable, g *scheduler.OverlapGoal, source int, at time.Time, minutes int) bool {
	end := at.Add(time.Duration(minutes) * time.Minute)
	var on []*upTable
	for _, u := range tables {
		if len(on) < g.Count && g.AllowsTelescope(u.tel.Code) && p.receiverFor(u, &g.Goal) != "" && p.free(u, at, end) &&
			u.up(source, at, end) &&
			!slices.ContainsFunc(on, func(o *upTable) bool { return o.tel == u.tel }) {
			on = append(on, u)
		}
	}
	if len(on) < g.Count {
		return false
	}
	for _, u := range on {
		p.kept[u.block.ID] = append(p.kept[u.block.ID], reservation{source, p.receiverFor(u, &g.Goal), at, minutes, g.ID})
		sort.Slice(p.kept[u.block.ID], func(i, j int) bool { return p.kept[u.block.ID][i].start.Before(p.kept[u.block.ID][j].start) })
	}
	p.last[g.ID] = at
	return true
}

// gap is what people leave between scans for slewing and calibration.
const gap = 10 * time.Minute

// free reports whether a block has room for a scan beside what is reserved.
func (p *past) free(u *upTable, start, end time.Time) bool {
	if start.Before(u.first()) || end.After(u.block.End) {
		return false
	}
	for _, k := range p.kept[u.block.ID] {
		if start.Before(k.start.Add(time.Duration(k.minutes)*time.Minute+gap)) && end.Add(gap).After(k.start) {
			return false
		}
	}
	return true
}

// receiverFor is the first of the block's receivers with a band of the goal,
// or "".
func (p *past) receiverFor(u *upTable, g *scheduler.Goal) string {
	for _, code := range u.block.Receivers {
		if len(g.BandsOf(u.tel.ReceiverByCode(code))) > 0 {
			return code
		}
	}
	return ""
}

// fill observes one block from its start to its end.
func (p *past) fill(u *upTable) {
	agreed := p.kept[u.block.ID]
	for t := u.first(); t.Before(u.block.End); {
		if len(agreed) > 0 && !t.Add(20*time.Minute+gap).Before(agreed[0].start) {
			k := agreed[0]
			agreed = agreed[1:]
			p.scan(u, k.source, k.receiver, k.start, k.minutes)
			t = k.start.Add(time.Duration(k.minutes) * time.Minute).Add(gap)
			continue
		}
		s, receiver, minutes := p.choose(u, t)
		if s < 0 {
			t = t.Add(15 * time.Minute)
			continue
		}
		p.scan(u, s, receiver, t, minutes)
		t = t.Add(time.Duration(minutes)*time.Minute + gap/2)
		if second := p.partner(u, s, receiver); second != "" {
			at := t.Add(gap / 2)
			end := at.Add(time.Duration(minutes) * time.Minute)
			if p.free(u, at, end) && u.up(s, at, end) {
				p.scan(u, s, second, at, minutes)
				t = end.Add(gap / 2)
			}
		}
		if p.r.chance(0.3) {
			t = t.Add(time.Duration(1+p.r.below(6)) * grid) // people, coffee, a fault put right
		}
	}
}

// choose picks what is most overdue among what is up and fits, with some
// freedom; -1 where there is nothing worth it.
func (p *past) choose(u *upTable, t time.Time) (source int, receiver string, minutes int) {
	source = -1
	best := 0.45 // below this it is not worth a scan
	for i := range p.c.Sources {
		s := &p.c.Sources[i]
		if p.kinds[s.Name] == fresh {
			continue
		}
		length := s.ScanMinutes[p.r.below(len(s.ScanMinutes))]
		end := t.Add(time.Duration(length) * time.Minute)
		if !p.free(u, t, end) || !u.up(i, t, end) {
			continue
		}
		for _, code := range u.block.Receivers {
			if v := p.urgency(u, s, code, t) * p.r.between(0.2, 1.2); v > best {
				source, receiver, minutes, best = i, code, length, v
			}
		}
	}
	return source, receiver, minutes
}

// urgency is how much a source is due with a receiver: for each goal that a
// scan would serve, its part of the interval gone by, weighted.
func (p *past) urgency(u *upTable, s *scheduler.Source, receiver string, t time.Time) float64 {
	total := 0.0
	for _, w := range p.wants[s.Name] {
		if w.overlap != nil || !p.serves(u, s, receiver, w.goal) {
			continue
		}
		gone := 2.5 // never yet
		if last, ok := p.last[w.goal.ID]; ok {
			gone = math.Min(2.5, t.Sub(last).Hours()/24/w.everyD)
		}
		if gone < 0.7 {
			continue
		}
		if w.pair { // half of it comes from the scan in the other band
			gone /= 2
		}
		total += gone * math.Sqrt(w.priority)
	}
	return total
}

// serves reports whether a scan with the receiver counts for a goal.
func (p *past) serves(u *upTable, s *scheduler.Source, receiver string, g *scheduler.Goal) bool {
	r := u.tel.ReceiverByCode(receiver)
	if !g.AllowsTelescope(u.tel.Code) || len(g.BandsOf(r)) == 0 {
		return false
	}
	m := radiometer(s, r)
	return m.Detectable()
}

// partner is another receiver of the block that completes a band pair that is
// due, or "".
func (p *past) partner(u *upTable, source int, receiver string) string {
	s := &p.c.Sources[source]
	r := u.tel.ReceiverByCode(receiver)
	for _, w := range p.wants[s.Name] {
		have := w.goal.BandsOf(r)
		if !w.pair || len(have) != 1 {
			continue
		}
		for _, code := range u.block.Receivers {
			other := w.goal.BandsOf(u.tel.ReceiverByCode(code))
			if code != receiver && len(other) == 1 && other[0] != have[0] && p.r.chance(0.7) {
				p.last[w.goal.ID] = u.start
				return code
			}
		}
	}
	return ""
}

// scan notes a scan as made. Some are cut short, some turn out useless and do
// not count.
func (p *past) scan(u *upTable, source int, receiver string, start time.Time, minutes int) {
	s := &p.c.Sources[source]
	h := scheduler.HistoryScan{Source: s.Name, Telescope: u.tel.Code, Receiver: receiver, Start: start, Minutes: float64(minutes),
		Counted: !p.r.chance(0.06)}
	if p.r.chance(0.05) {
		h.Minutes -= float64(1 + p.r.below(minutes/2))
	}
	p.made = append(p.made, h)
	if !h.Counted {
		return
	}
	for _, w := range p.wants[s.Name] {
		if w.overlap != nil || !p.serves(u, s, receiver, w.goal) {
			continue
		}
		if !w.pair || len(w.goal.BandsOf(u.tel.ReceiverByCode(receiver))) == 2 {
			p.last[w.goal.ID] = start
		}
	}
}
