package almanac

import (
	"math"
	"strings"

	"cadencewright/astro/sky"
	"cadencewright/scheduler"
)

// Cause is a set of the causes that keep a source from being up.
type Cause uint8

// The single causes.
const (
	Low    Cause = 1 << iota // below the telescope's least elevation
	Hidden                   // below its horizon mask
	High                     // above its greatest elevation
	Mount                    // outside the range of azimuth, hour angle or the transit track
	Sun                      // too near to the Sun

	causes = 5
)

var causeNames = [causes]string{"low", "horizon", "high", "mount", "sun"}

// Each are the single causes in the set.
func (c Cause) Each() []Cause {
	var list []Cause
	for i := range causes {
		if one := Cause(1) << i; c&one != 0 {
			list = append(list, one)
		}
	}
	return list
}

// String names the causes, with commas between them; it is empty for none.
func (c Cause) String() string {
	var names []string
	for i, name := range causeNames {
		if c&(1<<i) != 0 {
			names = append(names, name)
		}
	}
	return strings.Join(names, ",")
}

// limits are a telescope's and a source's limits, ready to be tested.
type limits struct {
	tel    *scheduler.Telescope
	mask   sky.Mask
	sunMin float64
}

func newLimits(tel *scheduler.Telescope, src *scheduler.Source) *limits {
	return &limits{tel: tel, mask: tel.Mask(), sunMin: max(tel.SunMinDeg, src.SunMinDeg)}
}

// check is what keeps a source down that stands at p; nothing: it is up.
func (l *limits) check(p *Sample) Cause {
	// All that hold are kept, not the first: lifting one limit then shows what
	// is left.
	var c Cause
	if p.ElDeg < l.tel.ElevationMinDeg {
		c |= Low
	}
	if p.ElDeg < l.mask.ElevationDeg(p.AzDeg) {
		c |= Hidden
	}
	if p.ElDeg > l.tel.ElevationMaxDeg {
		c |= High
	}
	if p.SunDeg < l.sunMin {
		c |= Sun
	}
	if !l.inReach(p) {
		c |= Mount
	}
	return c
}

// inReach reports whether the mount can point there.
func (l *limits) inReach(p *Sample) bool {
	switch l.tel.Mount {
	case scheduler.MountEquatorial:
		r := l.tel.HourAngleRangeH
		return p.HADeg >= 15*r[0] && p.HADeg <= 15*r[1]
	case scheduler.MountTransit:
		// Minutes from upper transit; near the pole the track takes all day.
		cosDec := max(math.Cos(p.DecDeg*math.Pi/180), 1e-6)
		return math.Abs(p.HADeg)*4 <= l.tel.TrackHalfMin/cosDec
	}
	// One instant needs some turn of the motor; a scan needs one for all of it.
	lo, hi := sky.MotorTurns(p.AzDeg, p.AzDeg, l.tel.AzimuthRangeDeg)
	return lo <= hi
}
