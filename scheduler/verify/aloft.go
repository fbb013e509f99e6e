package verify

import (
	"math"

	"cadencewright/astro/sky"
	"cadencewright/scheduler"
)

// pose is where the two axes of a mount stand at the end of a slew: motor
// azimuth and elevation, or hour angle and declination. A transit mount has
// only the second.
type pose struct{ first, second float64 }

// observe works out where the source stands at every grid instant of a scan,
// both ends included, and adds up the information at the middle of every step.
func (k *checker) observe(s *scan) ([]sky.Place, error) {
	var places []sky.Place
	t := s.block.telescope
	rad := &s.source.radiometer[s.receiver.index]
	dut1 := k.campaign.DUT1S
	for at := s.start; ; at += k.grid {
		p, err := sky.Observe(t.site, s.source.star, at.time(), dut1)
		if err != nil {
			return nil, err
		}
		places = append(places, p)
		if at >= s.end {
			return places, nil
		}
		mid := at + k.grid/2
		p, err = sky.Observe(t.site, s.source.star, mid.time(), dut1)
		if err != nil {
			return nil, err
		}
		sinEl := math.Sin(p.ElDeg * math.Pi / 180)
		s.info += rad.InfoRate(max(sinEl, lowestSinEl), s.receiver.usable(t.localHour(mid))) * k.grid.seconds()
	}
}

// limit is a quantity that must keep to one side of a limit.
type limit struct {
	kind      Kind
	text      string // of value and limit
	measure   string
	value, at func(sky.Place) float64 // what it is, and the limit there
	under     bool                    // the limit is the most that is allowed
}

// limits are those of a telescope for a source, but for the motor azimuth.
func limits(t *telescope, s *source) []limit {
	fixed := func(x float64) func(sky.Place) float64 { return func(sky.Place) float64 { return x } }
	el := func(p sky.Place) float64 { return p.ElDeg }
	list := []limit{
		{KindLow, "elevation %.3f deg, the limit there is %.3f deg", "deg", el,
			func(p sky.Place) float64 { return max(t.ElevationMinDeg, t.mask.ElevationDeg(p.AzDeg)) }, false},
		{KindHigh, "elevation %.3f deg, the highest allowed is %.3f deg", "deg", el, fixed(t.ElevationMaxDeg), true},
		{KindSun, "%.3f deg from the Sun, the least allowed is %.3f deg", "deg",
			func(p sky.Place) float64 { return p.SunDeg }, fixed(max(t.SunMinDeg, s.SunMinDeg)), false},
	}
	ha := func(p sky.Place) float64 { return p.HADeg }
	switch t.Mount {
	case scheduler.MountEquatorial:
		list = append(list,
			limit{KindHourAngle, "hour angle %.3f deg, the range begins at %.3f deg", "deg", ha, fixed(15 * t.HourAngleRangeH[0]), false},
			limit{KindHourAngle, "hour angle %.3f deg, the range ends at %.3f deg", "deg", ha, fixed(15 * t.HourAngleRangeH[1]), true})
	case scheduler.MountTransit:
		list = append(list, limit{KindMeridian, "hour angle %.3f deg, the mount follows to %.3f deg from transit", "deg",
			func(p sky.Place) float64 { return math.Abs(p.HADeg) }, t.trackHalfDeg, true})
	}
	return list
}

// trackHalfDeg is how far in hour angle a transit mount follows a source.
func (t *telescope) trackHalfDeg(p sky.Place) float64 {
	return t.TrackHalfMin / 4 / max(math.Cos(p.DecDeg*math.Pi/180), 1e-6)
}

// All limits are written as a value that must keep to one side of a limit, so
// that a check and a candidate ask the same question with another tolerance,
// and a violation can show both numbers.

// excess is how far a place is beyond the limit, in degrees of the sky; not
// above 0: inside. Hour angle shrinks toward the pole on a transit mount.
func (l limit) excess(p sky.Place) float64 {
	d := l.at(p) - l.value(p)
	if l.under {
		d = -d
	}
	if l.kind == KindMeridian {
		d *= max(math.Cos(p.DecDeg*math.Pi/180), 1e-3)
	}
	return d
}

// checkUp checks the limits of the sky at every grid instant of a scan. Of
// each limit it reports the worst instant.
func (k *checker) checkUp(s *scan, places []sky.Place) {
	for _, l := range limits(s.block.telescope, s.source) {
		worst, most := 0, math.Inf(-1)
		for i, p := range places {
			if x := l.excess(p); x > most {
				worst, most = i, x
			}
		}
		if most > k.options.LimitDeg {
			p := places[worst]
			k.badScan(s, l.kind, figures{l.value(p), l.at(p), l.measure}, l.text+", at %s",
				l.value(p), l.at(p), at(s.start+msec(worst)*k.grid))
		}
	}
	first, last := places[0], places[len(places)-1]
	if s.block.telescope.Mount == scheduler.MountEquatorial && last.HADeg < first.HADeg {
		k.badScan(s, KindHourAngle, figures{last.HADeg, first.HADeg, "deg"},
			"the hour angle passes 12 h within the scan, from %.3f deg to %.3f deg", first.HADeg, last.HADeg)
	}
	s.first = pose{first.HADeg, first.DecDeg}
	s.last = pose{last.HADeg, last.DecDeg}
}

// checkMotor follows the motor azimuth of an alt-azimuth mount through a scan.
// A limit of the azimuth is allowed its tolerance on the sky.
func (k *checker) checkMotor(s *scan, places []sky.Place) {
	az, highest := make([]float64, len(places)), 0.0
	for i, p := range places {
		az[i], highest = p.AzDeg, max(highest, p.ElDeg)
	}
	// The drive follows the sky the short way from instant to instant; the plan
	// chooses only how many whole turns it has at the start.
	path := sky.UnwrapDeg(az, nil)
	slack := k.options.LimitDeg / math.Cos(min(highest, 89.9)*math.Pi/180)
	turn := 0.0
	if listed := s.listed.MotorAzDeg; listed == nil {
		k.badScan(s, KindMotorAz, none, "the motor azimuth is missing")
	} else {
		turn = 360 * math.Round((*listed-path[0])/360)
		if !(math.Abs(*listed-path[0]-turn) <= slack) {
			k.badScan(s, KindMotorAz, figures{*listed, path[0], "deg"},
				"motor azimuth %.4f deg is not the azimuth %.4f deg plus whole turns", *listed, path[0])
		}
		if math.IsNaN(turn) || math.IsInf(turn, 0) { // go on without a turn, as if none were given
			turn = 0
		}
	}
	lo, hi := path[0], path[0]
	for _, a := range path {
		lo, hi = min(lo, a), max(hi, a)
	}
	lo, hi = lo+turn, hi+turn
	allowed := s.block.telescope.AzimuthRangeDeg
	if lo < allowed[0]-slack || hi > allowed[1]+slack {
		f := figures{lo, allowed[0], "deg"}
		if hi > allowed[1]+slack {
			f = figures{hi, allowed[1], "deg"}
		}
		k.badScan(s, KindMotor, f, "motor azimuth %.3f to %.3f deg leaves its range of %g to %g deg", lo, hi, allowed[0], allowed[1])
	}
	s.first = pose{path[0] + turn, places[0].ElDeg}
	s.last = pose{path[len(path)-1] + turn, places[len(places)-1].ElDeg}
}
