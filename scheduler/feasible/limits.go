package feasible

import (
	"math"

	"cadencewright/astro/sky"
	"cadencewright/scheduler"
)

// limits are a telescope's pointing limits.
type limits struct {
	kind         scheduler.MountKind
	elMin, elMax float64
	mask         sky.Mask
	sunMin       float64
	ha           [2]float64 // degrees
	trackMin     float64
}

func newLimits(t *scheduler.Telescope) *limits {
	return &limits{kind: t.Mount, elMin: t.ElevationMinDeg, elMax: t.ElevationMaxDeg, mask: t.Mask(), sunMin: t.SunMinDeg,
		ha: [2]float64{15 * t.HourAngleRangeH[0], 15 * t.HourAngleRangeH[1]}, trackMin: t.TrackHalfMin}
}

// check tests one sample of a track and counts why it fails. The cable wrap is
// not tested here: it belongs to whole scans.
func (l *limits) check(tr *sky.Track, i int, sunMin float64, r *Reject) bool {
	el, sun := tr.ElDeg[i], tr.SunDeg[i]
	r.Samples++
	r.SunDeg = math.Min(r.SunDeg, sun)
	if el < l.elMin && (len(l.mask) == 0 || el <= r.MaxElDeg) {
		r.TooLow++
		if el > r.MaxElDeg {
			r.MaxElDeg, r.NeedElDeg = el, l.elMin
		}
		return false
	}
	need := math.Max(l.elMin, l.mask.ElevationDeg(tr.AzDeg[i]))
	if el > r.MaxElDeg {
		r.MaxElDeg, r.NeedElDeg = el, need
	}
	switch {
	case el < l.elMin:
		r.TooLow++
	case el < need:
		r.Masked++
	case el > l.elMax:
		r.TooHigh++
	case sun < math.Max(l.sunMin, sunMin):
		r.NearSun++
	case !l.mount(tr, i):
		r.OffMount++
	default:
		r.Up++
		return true
	}
	return false
}

// mount tests the limits that a kind of mount adds.
func (l *limits) mount(tr *sky.Track, i int) bool {
	switch l.kind {
	case scheduler.MountEquatorial:
		return tr.HADeg[i] >= l.ha[0] && tr.HADeg[i] <= l.ha[1]
	case scheduler.MountTransit:
		// Minutes of time from the meridian; four to the degree.
		return math.Abs(tr.HADeg[i])*4 <= l.trackMin/math.Max(math.Cos(tr.DecDeg[i]*math.Pi/180), 1e-6)
	}
	return true
}

// usable tells whether a scan over [start, start+steps) keeps out of lost
// parts and leaves setup and calibration after the block's start and after
// each lost part. Times in minutes.
type usable struct {
	readyMin float64 // first allowed start
	endMin   float64
	lost     []lostPart
}

type lostPart struct{ from, to, ready float64 }

const ms = 1e-3 / 60

func (u *usable) span(start, end float64) bool {
	if start < u.readyMin-ms || end > u.endMin+ms {
		return false
	}
	for _, l := range u.lost {
		if !(start < l.from || start >= l.ready-ms) || !(end <= l.from+ms || start >= l.to-ms) {
			return false
		}
	}
	return true
}
