package edit

import (
	"math"

	"cadencewright/astro/sky"
	"cadencewright/scheduler"
	"cadencewright/scheduler/feasible"
	"cadencewright/scheduler/units"
)

// Each rule is looked at by itself, also where another is broken already: a
// person who moves a scan wants to know all that is in the way at once.

// timeFaults notes what a scan breaks by when it is, and by what it is.
func (s *Session) timeFaults(x *scan) {
	c := s.p.Campaign
	bl := &c.Blocks[s.p.Blocks[x.block].Index]
	t := &c.Telescopes[x.tel]
	note := func(rule Rule, f figures, format string, args ...any) {
		x.faults = append(x.faults, s.breach(rule, x, f, format, args...))
	}
	if !x.gridded {
		note(RuleGrid, figures{float64(x.minutes), float64(s.p.GridMin), "min"},
			"start or length, %d min, is off the grid of %d min", x.minutes, s.p.GridMin)
	}
	allowed := false
	for _, m := range c.Sources[x.source].ScanMinutes {
		allowed = allowed || m == x.minutes
	}
	if !allowed {
		note(RuleLength, figures{float64(x.minutes), nearest(c.Sources[x.source].ScanMinutes, x.minutes), "min"},
			"%d min is not one of the source's scan lengths, %v min", x.minutes, c.Sources[x.source].ScanMinutes)
	}
	listed := false
	for _, code := range bl.Receivers {
		listed = listed || code == t.Receivers[x.rx].Code
	}
	if !listed {
		note(RuleReceiver, figures{}, "the block has only %v", bl.Receivers)
	}
	// Nothing distinguishes the first scan of a block: one that begins too soon
	// after its start does so whatever stands before it.
	ready := t.SetupS + t.CalS
	switch have := 60 * (x.startMin - units.Minutes(bl.Start)); {
	case have < -msS:
		note(RuleBlockStart, figures{have, ready, "s"},
			"begins %.0f s before its block, which needs %.0f s of setup and calibration", -have, ready)
	case have < ready-msS:
		note(RuleSetup, figures{have, ready, "s"},
			"begins %.0f s after its block, which needs %.0f s of setup and calibration", have, ready)
	}
	if late := 60 * (x.endMin - units.Minutes(bl.End)); late > msS {
		note(RuleBlockEnd, figures{late, 0, "s"}, "ends %.0f s after its block", late)
	}
	for _, l := range bl.Lost {
		from, to := units.Minutes(l.Start), units.Minutes(l.End)
		if used := 60 * (math.Min(x.endMin, to) - math.Max(x.startMin, from)); used > msS {
			note(RuleLost, figures{used, 0, "s"}, "uses %.0f s of the lost part from %s to %s", used, clock(from), clock(to))
		}
		// Calibration and setup come again after time that was lost.
		if have := 60 * (x.startMin - to); have >= -msS && have < ready-msS {
			note(RuleSetup, figures{have, ready, "s"},
				"begins %.0f s after the lost part that ends at %s; %.0f s of setup and calibration are needed", have, clock(to), ready)
		}
	}
}

// msS is a millisecond in seconds: the resolution at which instants compare.
const msS = 1e-3

// nearest is the number of a list that is nearest to n.
func nearest(list []int, n int) float64 {
	best := math.Inf(1)
	for _, m := range list {
		if math.Abs(float64(m-n)) < math.Abs(best-float64(n)) {
			best = float64(m)
		}
	}
	return best
}

// limit is a quantity of the sky that must keep to one side of a limit.
type limit struct {
	rule      Rule
	text      string // with value and limit
	value, at func(tr *sky.Track, i int) float64
	under     bool // the limit is the most that is allowed
}

// limitsOf are those of a telescope for a source, but for the motor's range.
func (s *Session) limitsOf(tel, source int) []limit {
	t, src := &s.p.Campaign.Telescopes[tel], &s.p.Campaign.Sources[source]
	fixed := func(v float64) func(*sky.Track, int) float64 { return func(*sky.Track, int) float64 { return v } }
	el := func(tr *sky.Track, i int) float64 { return tr.ElDeg[i] }
	ha := func(tr *sky.Track, i int) float64 { return tr.HADeg[i] }
	// Masks are interpolated: only telescopes that have one pay for it.
	least := fixed(t.ElevationMinDeg)
	if mask := s.masks[tel]; len(mask) > 0 {
		least = func(tr *sky.Track, i int) float64 { return math.Max(t.ElevationMinDeg, mask.ElevationDeg(tr.AzDeg[i])) }
	}
	list := []limit{
		{RuleLow, "elevation %.2f deg, and the limit there is %.2f deg", el, least, false},
		{RuleHigh, "elevation %.2f deg, and the highest allowed is %.2f deg", el, fixed(t.ElevationMaxDeg), true},
		{RuleSun, "%.2f deg from the Sun, and the least allowed is %.2f deg",
			func(tr *sky.Track, i int) float64 { return tr.SunDeg[i] }, fixed(math.Max(t.SunMinDeg, src.SunMinDeg)), false},
	}
	switch t.Mount {
	case scheduler.MountEquatorial:
		list = append(list, limit{RuleHourAngle, "hour angle %.2f deg, and the range begins at %.2f deg", ha, fixed(15 * t.HourAngleRangeH[0]), false},
			limit{RuleHourAngle, "hour angle %.2f deg, and the range ends at %.2f deg", ha, fixed(15 * t.HourAngleRangeH[1]), true})
	case scheduler.MountTransit:
		// Minutes of time are a quarter of a degree, and circles of declination
		// are shorter towards the pole.
		list = append(list, limit{RuleMeridian, "%.2f deg of hour angle from transit, and the mount follows to %.2f deg",
			func(tr *sky.Track, i int) float64 { return math.Abs(tr.HADeg[i]) },
			func(tr *sky.Track, i int) float64 {
				return t.TrackHalfMin / 4 / math.Max(math.Cos(tr.DecDeg[i]*math.Pi/180), 1e-6)
			}, true})
	}
	return list
}

// beyond is how far a sample is beyond the limit; not above 0: inside.
func (l *limit) beyond(tr *sky.Track, i int) float64 {
	d := l.at(tr, i) - l.value(tr, i)
	if l.under {
		return -d
	}
	return d
}

// skyFaults notes the limits that a scan breaks at its grid instants, which are
// every second sample of the track: of each limit the worst.
func (s *Session) skyFaults(x *scan, tr *sky.Track) {
	limits := s.limitsOf(x.tel, x.source)
	for li := range limits {
		l := &limits[li]
		worst, most := 0, 0.0
		for k := 0; k <= x.steps; k++ {
			if d := l.beyond(tr, 2*k); d > most {
				worst, most = 2*k, d
			}
		}
		if most > slackDeg {
			value, allowed := l.value(tr, worst), l.at(tr, worst)
			at := clock(x.startMin + float64(worst*s.p.GridMin)/2)
			x.faults = append(x.faults, s.breach(l.rule, x, figures{value, allowed, "deg"}, l.text+", at %s", value, allowed, at))
		}
	}
	if first, last := tr.HADeg[0], tr.HADeg[2*x.steps]; s.p.Campaign.Telescopes[x.tel].Mount == scheduler.MountEquatorial && last < first {
		x.faults = append(x.faults, s.breach(RuleHourAngle, x, figures{last, first, "deg"},
			"the hour angle passes 12 h within the scan, from %.2f deg to %.2f deg", first, last))
	}
}

// motorFaults finds the whole turns of the azimuth drive that a scan may have.
func (s *Session) motorFaults(x *scan, az []float64) {
	lo, hi := az[0], az[0]
	for _, a := range az {
		lo, hi = math.Min(lo, a), math.Max(hi, a)
	}
	allowed := s.p.Campaign.Telescopes[x.tel].AzimuthRangeDeg
	x.turnLo, x.turnHi = turnsIn(lo, hi, allowed)
	if x.turnLo <= x.turnHi {
		return
	}
	// No turn fits: the one that comes nearest stands for it.
	turn := int(math.Round(((allowed[0]+allowed[1])/2 - (lo+hi)/2) / 360))
	x.turnLo, x.turnHi = turn, turn
	lo, hi = lo+360*float64(turn), hi+360*float64(turn)
	f := figures{lo, allowed[0], "deg"}
	if hi-allowed[1] > allowed[0]-lo {
		f = figures{hi, allowed[1], "deg"}
	}
	x.faults = append(x.faults, s.breach(RuleMotor, x, f, "motor azimuth %.2f to %.2f deg, and its range is %g to %g deg on any turn",
		lo, hi, allowed[0], allowed[1]))
}

func turnsIn(lo, hi float64, allowed [2]float64) (int, int) {
	return sky.MotorTurns(lo, hi, [2]float64{allowed[0] - slackDeg, allowed[1] + slackDeg})
}

// mount is the block's telescope as the drives see it.
func (s *Session) mount(bi int) *feasible.Mount { return &s.p.Blocks[bi].Mount }
