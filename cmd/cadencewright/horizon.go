package main

import (
	"flag"
	"fmt"
	"time"

	"cadencewright/scheduler"
)

// horizonFlags name the stretch of time to plan: an ISO week, or any other
// from a start to an end.
type horizonFlags struct{ week, from, to string }

// declare adds the flags to a command's.
func (h *horizonFlags) declare(flags *flag.FlagSet) {
	flags.StringVar(&h.week, "week", "", "ISO `WEEK` to plan, such as 2027-W03; that of the campaign's first block if left out")
	flags.StringVar(&h.from, "from", "", "`START` of another stretch of time to plan: 2027-01-18 or 2027-01-18T12:00Z; with --at, the file of a plan")
	flags.StringVar(&h.to, "to", "", "`END` of it, excluded; a week after --from if left out")
}

// maxHorizon is the longest time planned at once.
const maxHorizon = 8 * scheduler.Week

// horizon is the stretch of time that the flags name. It must hold a block.
func (h *horizonFlags) horizon(c *scheduler.Campaign) (scheduler.Horizon, error) {
	var horizon scheduler.Horizon
	var err error
	switch {
	// Two ways to say the same could say different things.
	case h.week != "" && (h.from != "" || h.to != ""):
		return horizon, usagef("give --week or --from and --to, not both")
	case h.week != "":
		if horizon, err = scheduler.WeekHorizon(h.week); err != nil {
			return horizon, usagef("--week: %v", err)
		}
	case h.from != "":
		if horizon, err = h.stretch(); err != nil {
			return horizon, err
		}
	case h.to != "":
		return horizon, usagef("--to goes with --from")
	default:
		// The week of the first block: what a campaign file for one week means.
		horizon = scheduler.DefaultHorizon(c)
	}
	// An empty plan would be a right answer and never what was wanted: most
	// likely the week is mistyped.
	if len(horizon.Blocks(c)) == 0 {
		return horizon, inputError{fmt.Errorf("no block starts in %s; %s", describeHorizon(horizon), blocksReach(c))}
	}
	return horizon, nil
}

// stretch reads --from and --to.
func (h *horizonFlags) stretch() (scheduler.Horizon, error) {
	from, err := parseInstant("from", h.from, time.Time{})
	if err != nil {
		return scheduler.Horizon{}, err
	}
	// A horizon need not begin on a Monday or at midnight.
	to := from.Add(scheduler.Week)
	if h.to != "" {
		if to, err = parseInstant("to", h.to, time.Time{}); err != nil {
			return scheduler.Horizon{}, err
		}
	}
	switch {
	case !from.Before(to):
		return scheduler.Horizon{}, usagef("--to %s is not after --from %s", h.to, h.from)
	case to.Sub(from) > maxHorizon:
		return scheduler.Horizon{}, usagef("--from %s to %s is %.0f days; at most %d weeks are planned at once", h.from, h.to,
			to.Sub(from).Hours()/24, int(maxHorizon/scheduler.Week))
	}
	return scheduler.Horizon{From: from, To: to}, nil
}

// describeHorizon names a horizon: a whole ISO week by its name.
func describeHorizon(h scheduler.Horizon) string {
	// Weeks begin on Monday 00:00 UTC, whatever the telescopes' zones.
	if h.From.Equal(scheduler.WeekStart(h.From)) && h.To.Sub(h.From) == scheduler.Week {
		return scheduler.WeekName(h.From)
	}
	return h.From.Format(minuteLayout) + " to " + h.To.Format(minuteLayout) + " UTC"
}

// blocksReach says when the campaign's blocks are.
func blocksReach(c *scheduler.Campaign) string {
	if len(c.Blocks) == 0 {
		return "the campaign has no blocks"
	}
	// A file's blocks may stand in any order.
	first, last := c.Blocks[0].Start, c.Blocks[0].Start
	for _, b := range c.Blocks {
		if b.Start.Before(first) {
			first = b.Start
		}
		if b.Start.After(last) {
			last = b.Start
		}
	}
	return fmt.Sprintf("the campaign's %d blocks start from %s (%s) to %s (%s)", len(c.Blocks), first.Format(minuteLayout),
		scheduler.WeekName(first), last.Format(minuteLayout), scheduler.WeekName(last))
}
