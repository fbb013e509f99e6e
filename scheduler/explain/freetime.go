package explain

import (
	"time"

	"cadencewright/scheduler"
	"cadencewright/scheduler/almanac"
	"cadencewright/scheduler/feasible"
	"cadencewright/scheduler/units"
)

// noTime says why a source that is up for long enough still leaves no room for
// a scan: setup, lost parts and pins cut the time up, or the azimuth drive runs
// into its stop. It looks at the sky again, since the planner's view holds only
// whole scans.
func (q *question) noTime(bi int) {
	b := &q.Blocks[bi]
	longest := q.longestFree(b)
	if longest >= q.shortest() && b.Mount.Kind == scheduler.MountAltAz {
		q.found(CableWrap, float64(longest), func(n int) string {
			return sentence("In %s the cable wrap allows no scan of %d min: the azimuth runs out of the motor's range, %g to %g deg (%s).",
				blocks(n), q.shortest(), b.Mount.AzRange[0], b.Mount.AzRange[1], block(q, b))
		})
		return
	}
	if longest >= q.shortest() { // the only other limit of a whole scan
		q.found(OffMount, 0, func(n int) string {
			return sentence("In %s the hour angle would pass 12 h within every scan of %d min (%s).", blocks(n), q.shortest(), block(q, b))
		})
		return
	}
	q.found(NoTime, float64(longest), func(n int) string {
		return sentence("In %s setup, lost parts and pins leave %d min at a stretch while it is up (%s); the shortest allowed scan takes %d min.",
			blocks(n), longest, block(q, b), q.shortest())
	})
}

// longestFree is the longest stretch in minutes in which the source is up and
// nothing else claims the telescope.
func (q *question) longestFree(b *feasible.Block) int {
	grid := time.Duration(q.GridMin) * time.Minute
	from := units.Instant(float64(b.FirstMin))
	samples, err := almanac.Track(q.telescope(b), q.source, q.Campaign.DUT1S, from, from.Add(time.Duration(b.Steps)*grid), grid)
	if err != nil {
		return 0 // the planner has sampled the same instants
	}
	ignored := almanac.Cause(0)
	if b.Mount.Kind == scheduler.MountAltAz {
		ignored = almanac.Mount // the azimuth of whole scans is another question
	}
	free := q.freeSteps(b)
	longest, run := 0, 0
	for k := range free {
		if free[k] && (samples[k].Down|samples[k+1].Down)&^ignored == 0 {
			run++
		} else {
			run = 0
		}
		longest = max(longest, run)
	}
	return longest * q.GridMin
}

// freeSteps tells for every step of a block, from one grid instant to the
// next, whether a scan may use it.
func (q *question) freeSteps(b *feasible.Block) []bool {
	bl, t := &q.Campaign.Blocks[b.Index], q.telescope(b)
	free := make([]bool, b.Steps)
	for k := range free {
		free[k] = true
	}
	taken := func(from, to float64) { // minutes
		for k := range free {
			if b.Minute(k, q.GridMin) < to && b.Minute(k+1, q.GridMin) > from {
				free[k] = false
			}
		}
	}
	// The same rules as for candidates: setup and calibration after the block's
	// start and after each lost part, and the least gap on either side of a pin.
	ready := (t.SetupS + t.CalS) / 60
	start := units.Minutes(bl.Start)
	taken(start-1, start+ready)
	for _, l := range bl.Lost {
		taken(units.Minutes(l.Start), units.Minutes(l.End)+ready)
	}
	for _, p := range b.Pins {
		taken(b.Minute(p.Start-b.MinGap, q.GridMin), b.Minute(p.Start+p.Steps+b.MinGap, q.GridMin))
	}
	return free
}
