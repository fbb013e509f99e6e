package explain

import (
	"fmt"
	"math"
	"strings"

	"cadencewright/scheduler"
	"cadencewright/scheduler/feasible"
	"cadencewright/scheduler/units"
)

// Texts are one sentence or two, with units at every number: degrees and
// microseconds as people write them, times in UTC to the minute, lengths of
// time in the unit that suits them. They name telescopes, receivers and blocks
// by their codes.

// sentence is a format with its figures.
func sentence(format string, args ...any) string { return fmt.Sprintf(format, args...) }

// clock is an instant in words, to the nearest minute.
func clock(minutes float64) string {
	return units.Instant(math.Round(minutes)).Format("2006-01-02 15:04") + " UTC"
}

// hourOf is the time of day alone.
func hourOf(minutes float64) string { return units.Instant(math.Round(minutes)).Format("15:04") }

// span is a length of time in the unit that suits it.
func span(minutes float64) string {
	switch {
	case minutes < 1:
		return "less than 1 min"
	case minutes < 120:
		return fmt.Sprintf("%.0f min", minutes)
	case minutes < 48*60:
		return fmt.Sprintf("%.1f h", minutes/60)
	}
	return fmt.Sprintf("%.1f d", minutes/1440)
}

// blocks is a number of blocks.
func blocks(n int) string {
	if n == 1 {
		return "1 block"
	}
	return fmt.Sprintf("%d blocks", n)
}

// blocksHave is a number of blocks with its verb.
func blocksHave(n int) string {
	if n == 1 {
		return "1 block has"
	}
	return fmt.Sprintf("%d blocks have", n)
}

// times is a number of times.
func times(n int) string {
	if n == 1 {
		return "once"
	}
	return fmt.Sprintf("%d times", n)
}

// block names a block with its telescope.
func block(q *question, b *feasible.Block) string {
	return "block " + q.Campaign.Blocks[b.Index].ID + " of " + q.telescope(b).Code
}

// bandNames are bands of the goal: "L", "L or S".
func (q *question) bandNames(bits uint32) string {
	var names []string
	for i, band := range q.wants.Bands {
		if bits&(1<<i) != 0 {
			names = append(names, band)
		}
	}
	return either(names)
}

// allowed are the telescopes that may serve the goal.
func (q *question) allowed() string {
	if len(q.wants.Telescopes) > 0 {
		return either(q.wants.Telescopes)
	}
	return "any"
}

// either joins names: "a", "a or b", "a, b or c".
func either(names []string) string { return join(names, " or ") }

// both joins names: "a", "a and b", "a, b and c".
func both(names []string) string { return join(names, " and ") }

func join(names []string, last string) string {
	if len(names) < 2 {
		return strings.Join(names, "")
	}
	n := len(names) - 1
	return strings.Join(names[:n], ", ") + last + names[n]
}

// mountReach is what a mount reaches in words.
func mountReach(t *scheduler.Telescope) string {
	switch t.Mount {
	case scheduler.MountEquatorial:
		return fmt.Sprintf("hour angles from %g to %g h", t.HourAngleRangeH[0], t.HourAngleRangeH[1])
	case scheduler.MountTransit:
		return fmt.Sprintf("%g min on either side of transit, divided by cos(dec)", t.TrackHalfMin)
	}
	return fmt.Sprintf("motor azimuths from %g to %g deg", t.AzimuthRangeDeg[0], t.AzimuthRangeDeg[1])
}

// titled says what an option is: telescope, receiver, block, start and length.
func (q *question) titled(o *option) string {
	b := &q.Blocks[o.block]
	t := q.telescope(b)
	return sentence("%s with %s in block %s from %s for %d min", t.Code, t.Receivers[b.Receivers[o.receiver]].Code,
		q.Campaign.Blocks[b.Index].ID, clock(o.startMin), o.steps*q.GridMin)
}

// listed names scans of the plan with what each earns by itself; after the
// third it counts the others.
func (q *question) listed(scans []*planned) string {
	const most = 3 // names; a longer list says nothing more that helps
	var names []string
	for i, x := range scans {
		if i == most && len(scans) > most+1 {
			names = append(names, fmt.Sprintf("%d others", len(scans)-most))
			break
		}
		names = append(names, fmt.Sprintf("%s at %s (earns %.2f)", x.scan.Source, hourOf(x.startMin), q.loss([]*planned{x})))
	}
	return both(names)
}
