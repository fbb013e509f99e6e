package demo

import (
	"math"
	"testing"
	"time"

	"cadencewright/scheduler"
)

// Nobody observed for nothing: every scan could serve a goal of its source,
// with a receiver that sees it, for a length that is one of the source's or
// was cut short.
func TestHistoryServesGoals(t *testing.T) {
	short := 0
	for _, h := range kept.History {
		tel, s := kept.TelescopeByCode(h.Telescope), kept.SourceByName(h.Source)
		r := tel.ReceiverByCode(h.Receiver)
		serves := false
		kept.EachGoal(func(_ scheduler.GoalKind, _ int, g *scheduler.Goal) {
			serves = serves || g.Source == h.Source && g.AllowsTelescope(h.Telescope) && len(g.BandsOf(r)) > 0
		})
		if m := radiometer(s, r); !serves || !m.Detectable() {
			t.Errorf("%s with %s of %s serves no goal", h.Source, h.Receiver, h.Telescope)
		}
		whole := false
		for _, m := range s.ScanMinutes {
			whole = whole || float64(m) == h.Minutes
		}
		if !whole {
			short++
		}
		if h.Minutes < 8 || h.Minutes > float64(s.ScanMinutes[len(s.ScanMinutes)-1]) {
			t.Errorf("%s observed for %v min", h.Source, h.Minutes)
		}
		if h.Start.Sub(h.Start.Truncate(time.Minute)) != 0 {
			t.Errorf("%s started at %v, not on a minute", h.Source, h.Start)
		}
	}
	if short < 5 || short > len(kept.History)/6 {
		t.Errorf("%d of %d scans were cut short", short, len(kept.History))
	}
}

// Band pairs of the past were taken close together where they were taken.
func TestHistoryHasPairs(t *testing.T) {
	done := 0
	for _, g := range kept.BandPairGoals {
		best := math.Inf(1)
		for _, a := range kept.History {
			for _, b := range kept.History {
				if a.Source != g.Source || b.Source != g.Source || !a.Counted || !b.Counted {
					continue
				}
				bands := map[string]bool{}
				for _, h := range []scheduler.HistoryScan{a, b} {
					for _, band := range g.BandsOf(kept.TelescopeByCode(h.Telescope).ReceiverByCode(h.Receiver)) {
						bands[band] = true
					}
				}
				if len(bands) == 2 {
					best = math.Min(best, math.Abs(a.Start.Sub(b.Start).Hours()))
				}
			}
		}
		if best <= g.WithinH {
			done++
		}
	}
	if done < 5 {
		t.Errorf("%d of %d band pairs were ever taken", done, len(kept.BandPairGoals))
	}
}

// Time was shared out: no source had very many scans, and few had hardly any.
func TestHistoryIsSpreadOverSources(t *testing.T) {
	scans := map[string]int{}
	for _, h := range kept.History {
		scans[h.Source]++
	}
	most, rare := 0, 0
	for _, n := range scans {
		most = max(most, n)
		if n < 3 {
			rare++
		}
	}
	average := float64(len(kept.History)) / float64(len(scans))
	if most > 40 || rare > 6 || average < 6 || average > 20 {
		t.Errorf("%d scans of one source, %d sources with fewer than 3, %.1f on average", most, rare, average)
	}
}

// A joint scan is only agreed on where all telescopes can: an overlap goal of
// a source that is never up together stays without.
func TestAgreeNeedsCommonSky(t *testing.T) {
	c := kept.Clone()
	g := &c.OverlapGoals[0]
	g.Telescopes = []string{kvitvarden, saltbush} // far north and south
	s := c.SourceByName(g.Source)
	s.DecDeg = 80
	p := &past{c: c, r: stream(1, "test"), last: map[string]time.Time{}, kept: map[string][]reservation{}}
	blocks := weekBlocks(c, keptSeed, keptMonday, 0)
	var tables []*upTable
	for i := range blocks {
		tables = append(tables, newUpTable(c, &blocks[i]))
	}
	for range 20 {
		p.agree(tables, g)
	}
	if len(p.kept) != 0 || len(p.last) != 0 {
		t.Errorf("a joint scan of a source that never rises at one of the two: %v", p.kept)
	}
}

// Reserved time is kept free, with room to slew on both sides.
func TestReservedTimeIsKeptFree(t *testing.T) {
	blocks := weekBlocks(kept, keptSeed, keptMonday, 0)
	u := newUpTable(kept, &blocks[0])
	start := u.first().Add(2 * time.Hour)
	p := &past{c: kept, kept: map[string][]reservation{u.block.ID: {{start: start, minutes: 30}}}}
	for _, x := range []struct {
		from, to time.Duration // from the start of what is reserved
		free     bool
	}{
		{-time.Hour, -gap, true}, {-time.Hour, -gap + time.Minute, false}, {0, 30 * time.Minute, false},
		{10 * time.Minute, 20 * time.Minute, false},
		{30*time.Minute + gap, time.Hour + gap, true}, {30*time.Minute + gap - time.Minute, time.Hour, false},
		{-3 * time.Hour, -150 * time.Minute, false},
		{10 * time.Hour, 11 * time.Hour, false}, // after the block
	} {
		if got := p.free(u, start.Add(x.from), start.Add(x.to)); got != x.free {
			t.Errorf("from %v to %v of a reserved half hour: free is %v", x.from, x.to, got)
		}
	}
}
