// Package demo invents the campaign that a first visitor finds: an array of
// five telescopes on three continents, 45 millisecond pulsars, some 110 goals,
// ten past weeks of history with their gaps, and blocks for the coming four
// weeks.
//
// Everything in it is invented: sites, telescopes, pulsars (named SIM J… after
// their invented places) and orbits. What is generated follows from a seed and
// a date alone. The past was observed by simple people under the real sky:
// every scan of the history was up at its time, at its telescope.
//
// The demo shows an array's actual situation, so not all is well: some goals
// are overdue, some pulsars were never observed, some goals cannot be met at
// all (never up where they are wanted, too near the Sun, scattered away,
// beyond any precision the array reaches), and one of the coming weeks has far
// less telescope time than it needs.
package demo

import (
	"math"
	"time"

	"cadencewright/scheduler"
)

const (
	// gridMin is the planning grid. Scans of pulsars last twenty minutes and
	// more, so five minutes lose little, and a week is planned in seconds; on
	// a grid of one minute it would take several times as long.
	gridMin = 5

	pastWeeks   = 10 // with history
	comingWeeks = 4  // with blocks, this week included

	// dut1S is a UT1-UTC of the size it has had since 2020.
	dut1S = 0.03
)

// The dates between which the demo can be made: the years in which time scales
// are tabulated, less the campaign's own length.
var (
	firstDay = scheduler.FirstInstant.AddDate(1, 0, 0)
	lastDay  = scheduler.EndInstant.AddDate(-2, 0, 0)
)

// Generate makes the demo campaign for the ISO week (UTC) that holds today.
// The same seed and week always give the same campaign, and it is valid. A
// date outside the years 1973 to 2097 is taken as the nearest of them.
func Generate(seed uint64, today time.Time) *scheduler.Campaign {
	switch {
	case today.Before(firstDay):
		today = firstDay
	case today.After(lastDay):
		today = lastDay
	}
	monday := scheduler.WeekStart(today)
	c := &scheduler.Campaign{
		Name:       "Demonstration array",
		Start:      monday.Add(-(pastWeeks + 2) * scheduler.Week),
		End:        monday.Add(40 * scheduler.Week),
		GridMin:    gridMin,
		DUT1S:      dut1S,
		Telescopes: telescopes(),
	}
	kinds := makeSources(c, seed, monday)
	makeGoals(c, seed, kinds)
	past := observe(c, seed, monday, kinds)
	c.History = past
	c.Blocks = comingBlocks(c, seed, monday)
	c.Pins = onePin(c)
	return c
}

// round keeps a number to so many decimals, as people write them; it also makes
// the campaign the same where processors round the last bit differently.
func round(v float64, decimals int) float64 {
	p := math.Pow(10, float64(decimals))
	return math.Round(v*p) / p
}

// significant keeps so many significant digits.
func significant(v float64, digits int) float64 {
	if v == 0 {
		return 0
	}
	return round(v, digits-1-int(math.Floor(math.Log10(math.Abs(v)))))
}
