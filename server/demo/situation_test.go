package demo

import (
	"math"
	"slices"
	"sort"
	"testing"
	"time"

	"cadencewright/astro/sky"
	"cadencewright/scheduler"
)

var keptMonday = scheduler.WeekStart(keptDay)

// lastServed is the last counted scan that satisfies a cadence target, before
// this week.
func lastServed(c *scheduler.Campaign, g *scheduler.CadenceTarget) (last time.Time) {
	s := c.SourceByName(g.Source)
	for _, h := range c.History {
		r := c.TelescopeByCode(h.Telescope).ReceiverByCode(h.Receiver)
		m := radiometer(s, r)
		if h.Counted && h.Source == g.Source && g.AllowsTelescope(h.Telescope) && len(g.BandsOf(r)) > 0 &&
			m.Detectable() && h.Start.After(last) {
			last = h.Start
		}
	}
	return last
}

// Every scan of the history was up, by the careful recipe at its start, its
// middle and its end.
func TestHistoryWasPossible(t *testing.T) {
	for _, h := range kept.History {
		tel, s := kept.TelescopeByCode(h.Telescope), kept.SourceByName(h.Source)
		for _, at := range []time.Time{h.Start, h.Start.Add(h.End().Sub(h.Start) / 2), h.End()} {
			p, err := sky.Observe(tel.Site(), s.Star(), at, kept.DUT1S)
			if err != nil {
				t.Fatal(err)
			}
			const slack = 0.02 // between grid instants
			up := p.ElDeg > math.Max(tel.ElevationMinDeg, tel.Mask().ElevationDeg(p.AzDeg))-slack &&
				p.ElDeg < tel.ElevationMaxDeg+slack &&
				p.SunDeg > math.Max(tel.SunMinDeg, s.SunMinDeg)-slack
			switch tel.Mount {
			case scheduler.MountEquatorial:
				up = up && math.Abs(p.HADeg/15) < tel.HourAngleRangeH[1]+slack
			case scheduler.MountTransit:
				up = up && math.Abs(p.HADeg)*4*math.Cos(p.DecDeg*math.Pi/180) < tel.TrackHalfMin+slack
			}
			if !up {
				t.Errorf("%s at %s, %v: elevation %.2f, hour angle %.2f, Sun at %.2f", h.Source, h.Telescope, at,
					p.ElDeg, p.HADeg, p.SunDeg)
			}
		}
		if r := tel.ReceiverByCode(h.Receiver); r == nil {
			t.Errorf("%s at %s with %s", h.Source, h.Telescope, h.Receiver)
		}
	}
}

// A telescope does one scan at a time, with time to move between them.
func TestHistoryOfOneTelescopeDoesNotOverlap(t *testing.T) {
	for _, tel := range kept.Telescopes {
		var mine []scheduler.HistoryScan
		for _, h := range kept.History {
			if h.Telescope == tel.Code {
				mine = append(mine, h)
			}
		}
		for i := 1; i < len(mine); i++ {
			if room := mine[i].Start.Sub(mine[i-1].End()); room < 5*time.Minute {
				t.Errorf("%s: %s starts %v after the end of %s", tel.Code, mine[i].Source, room, mine[i-1].Source)
			}
		}
	}
}

// scansIn counts the scans of a telescope in a week counted from this one.
func scansIn(telescope string, week int) (n int, receivers map[string]bool) {
	receivers = map[string]bool{}
	h := scheduler.Horizon{From: keptMonday.Add(time.Duration(week) * scheduler.Week)}
	h.To = h.From.Add(scheduler.Week)
	for _, s := range kept.History {
		if s.Telescope == telescope && h.Contains(s.Start) {
			n++
			receivers[s.Receiver] = true
		}
	}
	return n, receivers
}

// The gaps of the past are there: a telescope closed, snow, a storm, a
// receiver away; and all telescopes work in the other weeks.
func TestHistoryHasGaps(t *testing.T) {
	for week := -pastWeeks; week < 0; week++ {
		for _, tel := range kept.Telescopes {
			n, receivers := scansIn(tel.Code, week)
			closed := week == maintenanceWeek && tel.Code == wolkenried || week == snowWeek && tel.Code == kvitvarden ||
				week == stormWeek && tel.Code == kestrel
			if closed && n > 0 {
				t.Errorf("%s made %d scans in week %d, when it was closed", tel.Code, n, week)
			}
			if !closed && n == 0 && tel.Mount != scheduler.MountTransit {
				t.Errorf("%s made no scan in week %d", tel.Code, week)
			}
			if tel.Code == saltbush {
				if out := week == receiverOut || week == receiverOut+1; out == receivers["W1"] {
					t.Errorf("week %d: W1 used is %v", week, receivers["W1"])
				}
			}
		}
	}
	uncounted := 0
	for _, h := range kept.History {
		if !h.Counted {
			uncounted++
		}
	}
	if uncounted < 10 || uncounted > len(kept.History)/8 {
		t.Errorf("%d of %d scans do not count", uncounted, len(kept.History))
	}
}

// Some goals are overdue, some come due this week, some are well served; three
// pulsars that could be observed never were.
func TestSomeAreOverdue(t *testing.T) {
	never, overdue, due, served := 0, 0, 0, 0
	for i := range kept.CadenceTargets {
		g := &kept.CadenceTargets[i]
		switch last := lastServed(kept, g); {
		case last.IsZero():
			never++
		case keptMonday.Sub(last).Hours()/24 > g.EveryD:
			overdue++
		case keptMonday.Sub(last).Hours()/24 > g.EveryD-7:
			due++
		default:
			served++
		}
	}
	if never < 5 || never > 10 || overdue < 8 || overdue > 25 || due < 15 || served < 10 {
		t.Errorf("targets never served %d, overdue %d, due this week %d, served %d", never, overdue, due, served)
	}
	observed := map[string]bool{}
	for _, h := range kept.History {
		observed[h.Source] = true
	}
	if n := len(kept.Sources) - len(observed); n != newCount {
		t.Errorf("%d sources were never observed, want %d", n, newCount)
	}
}

// joint scans of the past really were joint: most overlap goals were served.
func TestHistoryServesOverlaps(t *testing.T) {
	served := 0
	for _, g := range kept.OverlapGoals {
		for _, a := range kept.History {
			on := map[string]bool{}
			for _, b := range kept.History {
				if a.Counted && b.Counted && a.Source == g.Source && b.Source == g.Source && !b.Start.After(a.Start) &&
					b.End().Sub(a.Start).Minutes() >= g.OverlapMin && g.AllowsTelescope(b.Telescope) {
					on[b.Telescope] = true
				}
			}
			if len(on) >= g.Count {
				served++
				break
			}
		}
	}
	if served < 3 || served == len(kept.OverlapGoals) {
		t.Errorf("%d of %d overlap goals were ever served", served, len(kept.OverlapGoals))
	}
}

// goalWith finds the one cadence target whose id ends so.
func goalWith(t *testing.T, suffix byte) *scheduler.CadenceTarget {
	t.Helper()
	i := slices.IndexFunc(kept.CadenceTargets,
		func(g scheduler.CadenceTarget) bool { return g.ID[len(g.ID)-1] == suffix })
	if i < 0 {
		t.Fatalf("no target ends in %c", suffix)
	}
	return &kept.CadenceTargets[i]
}

// Some goals cannot be met, each for its own reason.
func TestSomeAreImpossible(t *testing.T) {
	never := goalWith(t, 'w')
	tel, s := kept.TelescopeByCode(never.Telescopes[0]), kept.SourceByName(never.Source)
	if highest := 90 - math.Abs(tel.LatitudeDeg-s.DecDeg); highest > 0 {
		t.Errorf("%s climbs to %.1f degrees at %s", s.Name, highest, tel.Code)
	}

	smeared := goalWith(t, 'u')
	s = kept.SourceByName(smeared.Source)
	for _, code := range smeared.Telescopes {
		for i := range kept.TelescopeByCode(code).Receivers {
			r := &kept.TelescopeByCode(code).Receivers[i]
			if m := radiometer(s, r); len(smeared.BandsOf(r)) > 0 && m.Detectable() {
				t.Errorf("%s is detectable with %s of %s", s.Name, r.Code, code)
			}
		}
	}

	beyond := 0
	for i := range kept.CadenceTargets {
		g := &kept.CadenceTargets[i]
		// q < 0.5 counts as 0: the best is more than 1.41 times what is wanted.
		if best := bestTOAUs(kept, kept.SourceByName(g.Source), g.Bands[0]); g.TOAUs > 0 && best > 2*g.TOAUs {
			beyond++
		}
	}
	if beyond < 1 || beyond > 5 {
		t.Errorf("%d targets are beyond any precision reached", beyond)
	}
}

// One pulsar stands beside the Sun all week, and would be up without it.
func TestOneIsBesideTheSun(t *testing.T) {
	beside := 0
	for i := range kept.Sources {
		s := &kept.Sources[i]
		near, up := 0, false
		for hour := range 7 * 24 {
			p, err := sky.Observe(kept.Telescopes[0].Site(), s.Star(), keptMonday.Add(time.Duration(hour)*time.Hour),
				kept.DUT1S)
			if err != nil {
				t.Fatal(err)
			}
			if p.SunDeg < s.SunMinDeg {
				near++
			}
			up = up || p.ElDeg > 15
		}
		if near == 7*24 && up {
			beside++
		}
	}
	if beside != 1 {
		t.Errorf("%d pulsars stand within their Sun limit all week, want 1", beside)
	}
}

// Blocks come in the coming four weeks, do not overlap, and one week has much
// less time than the others and than it needs.
func TestOneWeekIsTooFull(t *testing.T) {
	var hours [comingWeeks]float64
	for _, b := range kept.Blocks {
		hours[int(b.Start.Sub(keptMonday)/scheduler.Week)] += b.Duration().Hours()
	}
	sorted := append([]float64(nil), hours[:]...)
	sort.Float64s(sorted)
	if hours[fullWeek] != sorted[0] || sorted[0] > 0.75*sorted[1] || sorted[0] < 20 || sorted[3] > 90 {
		t.Errorf("hours by week %v", hours)
	}
	// The shortest scans that serve all that will be due in that week.
	need := 0.0
	from := keptMonday.Add(fullWeek * scheduler.Week)
	for i := range kept.CadenceTargets {
		g := &kept.CadenceTargets[i]
		last := lastServed(kept, g)
		if last.IsZero() || from.Add(scheduler.Week).Sub(last).Hours()/24 > g.EveryD {
			need += float64(kept.SourceByName(g.Source).ScanMinutes[0]+8) / 60
		}
	}
	if need < hours[fullWeek] {
		t.Errorf("%.1f hours are due in a week of %.1f", need, hours[fullWeek])
	}
	lost := 0
	for _, b := range kept.Blocks {
		lost += len(b.Lost)
	}
	if lost != 1 {
		t.Errorf("%d lost parts of coming blocks", lost)
	}
}

// The pinned scan can be made as it stands.
func TestPinIsPossible(t *testing.T) {
	if len(kept.Pins) != 1 {
		t.Fatalf("%d pins", len(kept.Pins))
	}
	p := kept.Pins[0]
	u := newUpTable(kept, kept.BlockByID(p.Block))
	s := slices.IndexFunc(kept.Sources, func(s scheduler.Source) bool { return s.Name == p.Source })
	if !u.up(s, p.Start, p.End()) || p.Start.Before(u.first()) {
		t.Errorf("pin %+v is not up or too early", p)
	}
	if week := p.Start.Sub(keptMonday) / scheduler.Week; week != 1 {
		t.Errorf("the pin lies in week %d", week)
	}
}

func BenchmarkGenerate(b *testing.B) {
	for b.Loop() {
		if c := Generate(keptSeed, keptDay); len(c.History) == 0 {
			b.Fatal("no history")
		}
	}
}
