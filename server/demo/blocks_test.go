package demo

import (
	"fmt"
	"math"
	"strings"
	"testing"
	"time"

	"cadencewright/astro"
	"cadencewright/astro/timescale"
	"cadencewright/scheduler"
)

// atLST finds the first instant of a day with a sidereal time, to a minute.
func TestAtLST(t *testing.T) {
	for _, lon := range []float64{-116.9, 0, 10.73, 143.8} {
		for _, day := range []time.Time{keptMonday, time.Date(1990, 7, 1, 0, 0, 0, 0, time.UTC),
			time.Date(2090, 12, 31, 0, 0, 0, 0, time.UTC)} {
			for lst := 0.0; lst < 24; lst += 1.75 {
				at := atLST(lon, day, lst)
				if at.Before(day) || at.Sub(day) > 24*time.Hour {
					t.Errorf("LST %.2f h of %v comes at %v", lst, day, at)
				}
				got, err := timescale.LST(at, dut1S, astro.FromDeg(lon))
				if err != nil {
					t.Fatal(err)
				}
				// A minute: the seconds that an instant of the site's formula is off.
				if off := math.Remainder(got.Hours()-lst, 24) * 60; math.Abs(off) > 1 {
					t.Errorf("at longitude %.2f, %v the sidereal time is off by %.2f min", lon, at, off)
				}
			}
		}
	}
}

// In whatever week, blocks of one telescope do not overlap, are named after
// telescope and week, keep to receivers that exist, and drift with the stars.
func TestWeekBlocks(t *testing.T) {
	for week := -pastWeeks; week < comingWeeks; week++ {
		monday := keptMonday.Add(time.Duration(week) * scheduler.Week)
		blocks := weekBlocks(kept, keptSeed, monday, week)
		if len(blocks) < 7 || len(blocks) > len(timetable) {
			t.Errorf("week %d has %d blocks", week, len(blocks))
		}
		c := kept.Clone()
		c.Blocks, c.Pins = blocks, nil
		if err := c.Validate(); err != nil {
			t.Errorf("week %d: %v", week, err)
		}
		for _, b := range blocks {
			if want := b.Telescope + "-" + scheduler.WeekName(monday) + "-"; !strings.HasPrefix(b.ID, want) {
				t.Errorf("block %s of %s", b.ID, want)
			}
			if b.Start.Before(monday) || !b.Start.Before(monday.Add(scheduler.Week)) || b.Start.Minute()%30 != 0 {
				t.Errorf("block %s starts %v", b.ID, b.Start)
			}
			if d := b.Duration(); d < 3*time.Hour || d > 7*time.Hour {
				t.Errorf("block %s lasts %v", b.ID, d)
			}
		}
	}
	// Ten weeks later the same sidereal time comes 4 h 36 min earlier.
	first := weekBlocks(kept, keptSeed, keptMonday.Add(-10*scheduler.Week), -10)[0].Start
	later := weekBlocks(kept, keptSeed, keptMonday, 0)[0].Start
	drift := math.Mod(later.Sub(first).Hours()+48, 24)
	if drift > 12 {
		drift -= 24
	}
	if math.Abs(drift+4.6) > 1.6 {
		t.Errorf("in ten weeks the first block drifts by %.1f h", drift)
	}
}

// Adjacent weeks never collide, over the turn of the year and for a whole
// year of Mondays.
func TestBlocksOfAYearDoNotCollide(t *testing.T) {
	c := kept.Clone()
	c.Pins = nil
	c.Blocks = nil
	for week := range 53 {
		monday := keptMonday.Add(time.Duration(week) * scheduler.Week)
		c.Blocks = append(c.Blocks, weekBlocks(kept, 99, monday, week%3*3)...) // with and without reserves
	}
	if err := c.Validate(); err != nil {
		t.Error(err)
	}
	if len(c.Blocks) < 53*10 {
		t.Errorf("%d blocks in a year", len(c.Blocks))
	}
}

// Joint blocks share time and sky: in most weeks some source is up at both.
func TestJointBlocksShareSky(t *testing.T) {
	for _, pair := range [][2]string{{wolkenried, kvitvarden}, {quandong, saltbush}, {wolkenried, kestrel}} {
		shared := 0
		for week := range comingWeeks {
			blocks := weekBlocks(kept, keptSeed, keptMonday.Add(time.Duration(week)*scheduler.Week), 0)
			var tables []*upTable
			for i := range blocks {
				if blocks[i].Telescope == pair[0] || blocks[i].Telescope == pair[1] {
					tables = append(tables, newUpTable(kept, &blocks[i]))
				}
			}
			if sharesSky(tables) {
				shared++
			}
		}
		if shared < comingWeeks-1 {
			t.Errorf("%s and %s share sky in %d of %d weeks", pair[0], pair[1], shared, comingWeeks)
		}
	}
}

// sharesSky reports whether a source is up for half an hour at two telescopes.
func sharesSky(tables []*upTable) bool {
	for _, a := range tables {
		for _, b := range tables {
			if a.tel == b.tel {
				continue
			}
			for at := a.first(); at.Before(a.block.End); at = at.Add(grid) {
				end := at.Add(30 * time.Minute)
				for s := range kept.Sources {
					if !at.Before(b.first()) && !end.After(a.block.End) && !end.After(b.block.End) &&
						a.up(s, at, end) && b.up(s, at, end) {
						return true
					}
				}
			}
		}
	}
	return false
}

// The troubles of the timetable, week by week.
func TestGiven(t *testing.T) {
	for _, x := range []struct {
		telescope string
		week      int
		want      bool // any block at all
	}{
		{wolkenried, maintenanceWeek, false}, {kvitvarden, maintenanceWeek, true}, {kvitvarden, snowWeek, false},
		{kestrel, snowWeek, true},
		{kestrel, stormWeek, false}, {wolkenried, stormWeek, true}, {kestrel, fullWeek, false},
		{saltbush, fullWeek, true}, {kestrel, 0, true},
	} {
		got := false
		for _, a := range timetable {
			got = got || a.telescope == x.telescope && given(a, x.week)
		}
		if got != x.want {
			t.Errorf("%s has time in week %d: %v", x.telescope, x.week, got)
		}
	}
	for _, a := range timetable {
		if r := receiversIn(a, receiverOut); a.telescope == saltbush && fmt.Sprint(r) != "[L1]" {
			t.Errorf("SBP has %v while W1 is away", r)
		}
		if r := receiversIn(a, receiverOut+2); fmt.Sprint(r) != fmt.Sprint(a.receivers) {
			t.Errorf("%s has %v after W1 is back", a.telescope, r)
		}
	}
}
