package demo

import (
	"fmt"
	"math"
	"time"

	"cadencewright/scheduler"
)

// award is one block of a telescope's weekly timetable. Time is awarded by
// sidereal time, so that the same pulsars are up every week.
type award struct {
	telescope string
	day       int     // 0: Monday, UTC
	lstH      float64 // local sidereal time at the start
	hours     float64
	receivers []string
	label     string
}

// timetable is an ordinary week. Some awards are matched so that telescopes
// observe together.
var timetable = []award{
	{wolkenried, 0, 16.5, 5.5, []string{"L1", "S1"}, "joint with KVV and KES"},
	{wolkenried, 2, 3, 4, []string{"L1", "U1"}, ""},
	{wolkenried, 4, 18.5, 4, []string{"L1", "U1", "S1"}, "joint with KVV"},
	{kvitvarden, 0, 17.5, 5, []string{"L1", "S1"}, "joint with WKR"},
	{kvitvarden, 4, 19, 4, []string{"L1"}, "joint with WKR"},
	{kvitvarden, 5, 8, 4, []string{"L1", "S1"}, reserve},
	{kestrel, 0, 11, 6, []string{"L1", "P1"}, "joint with WKR"},
	{kestrel, 3, 21.5, 4, []string{"L1", "P1"}, ""},
	{quandong, 1, 16, 4.5, []string{"U1", "L1"}, "joint with SBP"},
	{quandong, 3, 22, 3.5, []string{"U1", "L1"}, ""},
	{quandong, 5, 8, 4, []string{"U1"}, reserve},
	{saltbush, 1, 15.5, 5, []string{"L1", "W1"}, "joint with QDG"},
	{saltbush, 4, 22, 4, []string{"W1"}, ""},
	{saltbush, 6, 7, 4, []string{"L1", "W1"}, reserve},
}

// reserve is the label of awards that are given every third week only.
const reserve = "reserve"

// What happens, by weeks from this one.
const (
	maintenanceWeek = -4 // WKR is painted
	receiverOut     = -7 // W1 of SBP is away for repair, two weeks
	snowWeek        = -2 // KVV is snowed in
	stormWeek       = -1 // WKR parked from Wednesday on, KES a broken drive, SBP short of staff
	trackWorkWeek   = 1  // WKR's azimuth track is ground: a lost part
	fullWeek        = 2  // KES closed, SBP has one block: far too little time
)

// weekBlocks are the awarded blocks of a week, counted from this one.
func weekBlocks(c *scheduler.Campaign, seed uint64, monday time.Time, week int) []scheduler.Block {
	r := stream(seed, fmt.Sprint("blocks of ", scheduler.WeekName(monday)))
	number := map[string]int{}
	var blocks []scheduler.Block
	for _, a := range timetable {
		shift := r.between(-0.5, 0.5)
		if !given(a, week) {
			continue
		}
		t := c.TelescopeByCode(a.telescope)
		start := atLST(t.LongitudeDeg, monday.AddDate(0, 0, a.day), a.lstH+shift).Round(30 * time.Minute)
		if !start.Before(monday.Add(scheduler.Week)) { // a late Sunday sidereal start, rounded into the next week
			start = start.Add(-30 * time.Minute)
		}
		number[a.telescope]++
		b := scheduler.Block{
			ID:        fmt.Sprintf("%s-%s-%d", a.telescope, scheduler.WeekName(monday), number[a.telescope]),
			Telescope: a.telescope, Start: start, End: start.Add(time.Duration(a.hours * float64(time.Hour))),
			Receivers: receiversIn(a, week), Label: a.label,
		}
		if week == trackWorkWeek && a.telescope == wolkenried && number[wolkenried] == 2 {
			b.Lost = []scheduler.Span{{Start: b.Start.Add(90 * time.Minute), End: b.Start.Add(3 * time.Hour)}}
			b.Label = "azimuth track work inside"
		}
		blocks = append(blocks, b)
	}
	return blocks
}

// given reports whether the award is given in a week.
func given(a award, week int) bool {
	switch week {
	case fullWeek:
		return a.telescope != kestrel && (a.telescope != saltbush || a.day == 1) && a.label != reserve
	case maintenanceWeek:
		return a.telescope != wolkenried
	case snowWeek:
		return a.telescope != kvitvarden
	case stormWeek:
		return a.telescope != kestrel && (a.telescope != wolkenried || a.day < 2) && (a.telescope != saltbush || a.day > 1)
	}
	return a.label != reserve || week%3 == 0
}

// receiversIn are the award's receivers that work in a week.
func receiversIn(a award, week int) []string {
	if a.telescope == saltbush && (week == receiverOut || week == receiverOut+1) {
		return []string{"L1"}
	}
	return a.receivers
}

// comingBlocks are the blocks of this week and those that follow.
func comingBlocks(c *scheduler.Campaign, seed uint64, monday time.Time) []scheduler.Block {
	var all []scheduler.Block
	for week := range comingWeeks {
		all = append(all, weekBlocks(c, seed, monday.Add(time.Duration(week)*scheduler.Week), week)...)
	}
	return all
}

// atLST is the first instant of a UTC day with the mean local sidereal time,
// within a minute or so: the rate of 24 h in 23 h 56 min 4 s, and 18.697375 h
// at Greenwich at 2000 January 1.5 (Meeus, Astronomical Algorithms, ch. 12).
func atLST(longitudeDeg float64, day time.Time, lstH float64) time.Time {
	const perDay = 24.06570982
	days := (mjd(day) - 51544.5)
	now := math.Mod(18.697375+perDay*days+longitudeDeg/15, 24)
	wait := math.Mod(lstH-now+72, 24) * 24 / perDay
	return day.Add(time.Duration(wait * float64(time.Hour)))
}
