package scheduler

import (
	"slices"
	"strconv"
	"strings"
	"time"
)

// checkTogether reports what is wrong between values that are each right in
// themselves: names used twice, references to nothing, limits that cross. A
// rule is left out where one of the values it needs already has a problem.
func checkTogether(c *checker, campaign *Campaign) {
	t := &together{checker: c, c: campaign, receivers: map[string]map[string]bool{}}
	t.head()
	t.telescopes()
	t.sources()
	t.goals()
	t.blocks()
	t.history()
	t.pins()
}

// together is the state of checkTogether: the names seen so far.
type together struct {
	*checker
	c *Campaign

	telescopeCodes, sourceNames, blockIDs []string
	telescopeAt, sourceAt, blockAt        map[string]int
	receivers                             map[string]map[string]bool // by telescope
}

// place is a JSON Pointer from a list, an index and what lies below.
func place(list string, i int, below ...string) string {
	p := "/" + list + "/" + strconv.Itoa(i)
	for _, b := range below {
		p += "/" + b
	}
	return p
}

// fault reports a problem at the first of the places, unless one of them (or
// what holds it) has one already.
func (t *together) fault(places []string, format string, args ...any) {
	for _, p := range places {
		if t.isBad(p) {
			return
		}
	}
	t.add(places[0], format, args...)
}

// unique reports names that stand twice in a list and returns where each name
// first stands. at is the place of an item's name.
func (t *together) unique(n int, key string, name, at func(i int) string) map[string]int {
	first := make(map[string]int, n)
	for i := range n {
		v := name(i)
		if j, twice := first[v]; twice && v != "" {
			t.fault([]string{at(i)}, "%s %s stands at %s already; it must be unique", key, quote(v), at(j))
		} else {
			first[v] = i
		}
	}
	return first
}

// head checks the campaign's own values.
func (t *together) head() {
	c := t.c
	ends := []string{"/campaign/end", "/campaign/start"}
	switch {
	case !c.Start.Before(c.End):
		t.fault(ends, "end is %s, not after start, %s", instantText(c.End), instantText(c.Start))
	case c.End.Sub(c.Start) > MaxCampaign:
		t.fault(ends, "the campaign lasts %.0f days; at most 5 years are allowed", c.End.Sub(c.Start).Hours()/24)
	}
}

// telescopes checks limits against each other, zones and receivers.
func (t *together) telescopes() {
	list := t.c.Telescopes
	t.telescopeAt = t.unique(len(list), "code", func(i int) string { return list[i].Code },
		func(i int) string { return place("telescopes", i, "code") })
	for i := range list {
		tel := &list[i]
		t.telescopeCodes = append(t.telescopeCodes, tel.Code)
		if tel.ElevationMinDeg >= tel.ElevationMaxDeg {
			t.fault([]string{place("telescopes", i, "elevation_max_deg"), place("telescopes", i, "elevation_min_deg")},
				"elevation_max_deg is %s; it must be above elevation_min_deg, %s", short(tel.ElevationMaxDeg), short(tel.ElevationMinDeg))
		}
		if _, err := loadZone(tel.Timezone); err != nil {
			t.fault([]string{place("telescopes", i, "timezone")}, "%v", err)
		}
		t.unique(len(tel.Receivers), "code", func(j int) string { return tel.Receivers[j].Code },
			func(j int) string { return place("telescopes", i, "receivers", strconv.Itoa(j), "code") })
		codes := map[string]bool{}
		for j := range tel.Receivers {
			r := &tel.Receivers[j]
			codes[r.Code] = true
			at := place("telescopes", i, "receivers", strconv.Itoa(j))
			if r.BandwidthMHz > 2*r.FreqMHz {
				t.fault([]string{at + "/bandwidth_mhz", at + "/freq_mhz"},
					"bandwidth_mhz is %s; a band about %s MHz can be at most %s MHz wide", short(r.BandwidthMHz), short(r.FreqMHz),
					short(2*r.FreqMHz))
			}
		}
		if t.receivers[tel.Code] == nil {
			t.receivers[tel.Code] = codes
		}
	}
}

// sources checks pulse widths and that scan lengths fit the grid.
func (t *together) sources() {
	list := t.c.Sources
	t.sourceAt = t.unique(len(list), "name", func(i int) string { return list[i].Name },
		func(i int) string { return place("sources", i, "name") })
	grid := t.c.GridMin
	for i := range list {
		s := &list[i]
		t.sourceNames = append(t.sourceNames, s.Name)
		if s.WidthS >= s.PeriodS {
			t.fault([]string{place("sources", i, "width_s"), place("sources", i, "period_s")},
				"width_s is %s; it must be less than period_s, %s s", short(s.WidthS), short(s.PeriodS))
		}
		for j, m := range s.ScanMinutes {
			if grid > 0 && m%grid != 0 {
				t.fault([]string{place("sources", i, "scan_minutes", strconv.Itoa(j)), "/campaign/grid_min"},
					"scan_minutes[%d] is %d; it must be a multiple of the grid, %d minutes", j, m, grid)
			}
		}
	}
}

// goalLists are the names of the four lists in a file.
var goalLists = map[GoalKind]string{
	KindCadence: "cadence_targets", KindPhase: "phase_goals", KindOverlap: "overlap_goals", KindBandPair: "band_pair_goals",
}

// goals checks what all kinds have in common, then each kind's own rules.
func (t *together) goals() {
	first := map[string]string{}
	t.c.EachGoal(func(kind GoalKind, i int, g *Goal) {
		at := place(goalLists[kind], i)
		if p, twice := first[g.ID]; twice && g.ID != "" {
			t.fault([]string{at + "/id"}, "id %s stands at %s/id already; it must be unique over all four lists", quote(g.ID), p)
		} else {
			first[g.ID] = at
		}
		if strings.ContainsAny(g.ID, "#@") {
			t.fault([]string{at + "/id"}, "id is %s; it must not hold # or @", quote(g.ID))
		}
		t.refers(at+"/source", "source", g.Source, t.sourceAt, func() []string { return t.sourceNames })
		for j, code := range g.Telescopes {
			t.refers(at+"/telescopes/"+strconv.Itoa(j), "telescope", code, t.telescopeAt, func() []string { return t.telescopeCodes })
		}
	})
	for i := range t.c.CadenceTargets {
		t.cadence(place("cadence_targets", i), &t.c.CadenceTargets[i])
	}
	for i := range t.c.PhaseGoals {
		t.phase(place("phase_goals", i), &t.c.PhaseGoals[i])
	}
	for i := range t.c.OverlapGoals {
		t.overlap(place("overlap_goals", i), &t.c.OverlapGoals[i])
	}
	for i := range t.c.BandPairGoals {
		t.pair(place("band_pair_goals", i), &t.c.BandPairGoals[i])
	}
}

// refers reports a name that no thing has.
func (t *together) refers(at, thing, name string, known map[string]int, names func() []string) {
	if _, ok := known[name]; !ok {
		t.fault([]string{at, "/" + thing + "s"}, "there is no %s %s%s", thing, quote(name), t.suggest(name, names()))
	}
}

// cadence: a scan that counts earlier than half an interval could serve two
// windows.
func (t *together) cadence(at string, g *CadenceTarget) {
	if g.EarlyD > g.EveryD/2 {
		t.fault([]string{at + "/early_d", at + "/every_d"}, "early_d is %s; it must be at most half of every_d, %s d", short(g.EarlyD),
			short(g.EveryD/2))
	}
}

// phase: a goal on phases needs an orbit, and windows of at most one turn.
func (t *together) phase(at string, g *PhaseGoal) {
	if i, ok := t.sourceAt[g.Source]; ok && t.c.Sources[i].Binary == nil {
		t.fault([]string{at + "/source", place("sources", i, "binary")}, "source %s has no binary, so it has no orbital phase",
			quote(g.Source))
	}
	for j, w := range g.Windows {
		if !(w.From < w.To && w.To <= w.From+1) {
			below := at + "/windows/" + strconv.Itoa(j)
			t.fault([]string{below + "/to", below + "/from"}, "to is %s; it must be greater than from, %s, and at most %s", short(w.To),
				short(w.From), short(w.From+1))
		}
	}
}

// overlap: more telescopes at once than may take part can never be.
func (t *together) overlap(at string, g *OverlapGoal) {
	n, whose := len(g.Telescopes), "telescopes that the goal names"
	if n == 0 {
		n, whose = len(t.c.Telescopes), "telescopes in the campaign"
	}
	if g.Count > n {
		t.fault([]string{at + "/count", at + "/telescopes", "/telescopes"}, "count is %d; it must be at most the number of %s, %d", g.Count,
			whose, n)
	}
}

// pair: two scans further apart than half an interval could belong to different
// windows.
func (t *together) pair(at string, g *BandPairGoal) {
	if len(g.Bands) != 2 {
		t.fault([]string{at + "/bands"}, "bands holds %d bands; a band pair has exactly two", len(g.Bands))
	}
	if g.WithinH > g.EveryD*12 {
		t.fault([]string{at + "/within_h", at + "/every_d"}, "within_h is %s; it must be at most half of every_d, %s h", short(g.WithinH),
			short(g.EveryD*12))
	}
}

// blocks checks references, lengths, lost parts and overlaps.
func (t *together) blocks() {
	list := t.c.Blocks
	t.blockAt = t.unique(len(list), "id", func(i int) string { return list[i].ID },
		func(i int) string { return place("blocks", i, "id") })
	byTelescope := map[string][]int{}
	for i := range list {
		b := &list[i]
		t.blockIDs = append(t.blockIDs, b.ID)
		t.refers(place("blocks", i, "telescope"), "telescope", b.Telescope, t.telescopeAt, func() []string { return t.telescopeCodes })
		for j, r := range b.Receivers {
			t.receiver(place("blocks", i, "receivers", strconv.Itoa(j)), b.Telescope, r)
		}
		t.blockTimes(i, b)
		byTelescope[b.Telescope] = append(byTelescope[b.Telescope], i)
	}
	for _, code := range t.telescopeCodes {
		t.overlaps(byTelescope[code])
		delete(byTelescope, code) // a code that stands twice is told once
	}
}

// blockTimes checks one block's ends and lost parts.
func (t *together) blockTimes(i int, b *Block) {
	ends := []string{place("blocks", i, "end"), place("blocks", i, "start")}
	switch length := b.End.Sub(b.Start); {
	case length <= 0:
		t.fault(ends, "end is %s, not after start, %s", instantText(b.End), instantText(b.Start))
		return
	case length > MaxBlock:
		t.fault(ends, "the block lasts %.1f days; at most %.0f days are allowed, so give each awarded stretch as a block of its own",
			length.Hours()/24, MaxBlock.Hours()/24)
		return
	}
	for j, s := range b.Lost {
		if s.Start.Before(b.Start) || !s.Start.Before(s.End) || s.End.After(b.End) {
			t.fault(append([]string{place("blocks", i, "lost", strconv.Itoa(j)), place("blocks", i, "lost", strconv.Itoa(j), "0"),
				place("blocks", i, "lost", strconv.Itoa(j), "1")}, ends...),
				"lost[%d] is %s; it must be a stretch of time inside the block, %s", j, spanText(s.Start, s.End), spanText(b.Start, b.End))
		}
	}
}

// overlaps reports blocks of one telescope that share time; of two, the later
// in the file is named. Blocks whose times are wrong in themselves are left
// out.
func (t *together) overlaps(of []int) {
	list := t.c.Blocks
	of = slices.DeleteFunc(of, func(i int) bool {
		return t.isBad(place("blocks", i, "start")) || t.isBad(place("blocks", i, "end"))
	})
	slices.SortStableFunc(of, func(a, b int) int { return list[a].Start.Compare(list[b].Start) })
	longest := -1 // the block that ends last so far
	for _, i := range of {
		if longest >= 0 && list[i].Start.Before(list[longest].End) {
			later, earlier := max(i, longest), min(i, longest)
			t.add(place("blocks", later, "start"), "the block, %s, overlaps block %s of the same telescope, %s",
				spanText(list[later].Start, list[later].End), brief(list[earlier].ID), spanText(list[earlier].Start, list[earlier].End))
		}
		if longest < 0 || list[i].End.After(list[longest].End) {
			longest = i
		}
	}
}

// receiver reports a receiver that its telescope does not have.
func (t *together) receiver(at, telescope, code string) {
	have := t.receivers[telescope]
	if have == nil || have[code] || have[""] {
		return // an unknown telescope or a receiver without a code is reported already
	}
	i := t.telescopeAt[telescope]
	var names []string
	for _, r := range t.c.Telescopes[i].Receivers {
		names = append(names, r.Code)
	}
	t.fault([]string{at, place("telescopes", i, "receivers")}, "telescope %s has no receiver %s; it has %s", telescope, quote(code),
		strings.Join(names, ", "))
}

// history checks references.
func (t *together) history() {
	for i := range t.c.History {
		h := &t.c.History[i]
		if _, ok := t.sourceAt[h.Source]; !ok {
			t.refers(place("history", i, "source"), "source", h.Source, t.sourceAt, func() []string { return t.sourceNames })
		}
		if have := t.receivers[h.Telescope]; have == nil {
			t.refers(place("history", i, "telescope"), "telescope", h.Telescope, t.telescopeAt, func() []string { return t.telescopeCodes })
		} else if !have[h.Receiver] {
			t.receiver(place("history", i, "receiver"), h.Telescope, h.Receiver)
		}
	}
}

// pins checks references, the grid and that a pin lies in its block.
func (t *together) pins() {
	for i := range t.c.Pins {
		p := &t.c.Pins[i]
		at := place("pins", i)
		t.refers(at+"/source", "source", p.Source, t.sourceAt, func() []string { return t.sourceNames })
		t.refers(at+"/block", "block", p.Block, t.blockAt, func() []string { return t.blockIDs })
		t.pinGrid(at, p)
		j, ok := t.blockAt[p.Block]
		if !ok {
			continue
		}
		b := &t.c.Blocks[j]
		if !contains(b.Receivers, p.Receiver) {
			t.fault([]string{at + "/receiver", place("blocks", j, "receivers")}, "receiver %s is not one of block %s, which has %s",
				quote(p.Receiver), brief(b.ID), few(b.Receivers))
		}
		if p.Start.Before(b.Start) || p.End().After(b.End) {
			t.fault([]string{at + "/start", at + "/minutes", place("blocks", j, "start"), place("blocks", j, "end")},
				"the pinned scan, %s, does not lie inside block %s, %s", spanText(p.Start, p.End()), brief(b.ID), spanText(b.Start, b.End))
		}
	}
}

// pinGrid checks that a pin starts and ends on the grid.
func (t *together) pinGrid(at string, p *Pin) {
	if t.c.GridMin < 1 {
		return
	}
	grid := time.Duration(t.c.GridMin) * time.Minute
	if p.Start.UnixMilli()%grid.Milliseconds() != 0 {
		t.fault([]string{at + "/start", "/campaign/grid_min"}, "start is %s; it must lie on the grid of %d minutes since 00:00 UTC",
			instantText(p.Start), t.c.GridMin)
	}
	if p.Minutes%t.c.GridMin != 0 {
		t.fault([]string{at + "/minutes", "/campaign/grid_min"}, "minutes is %d; it must be a multiple of the grid, %d minutes", p.Minutes,
			t.c.GridMin)
	}
}

// checkPlan reports what is wrong between the values of a plan file.
func checkPlan(c *checker, p *Plan) {
	if !p.From.Before(p.To) && !c.isBad("/from") && !c.isBad("/to") {
		c.add("/to", "to is %s, not after from, %s", instantText(p.To), instantText(p.From))
	}
}
