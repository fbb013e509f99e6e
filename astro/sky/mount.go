package sky

import (
	"math"
	"slices"
)

// MaskPoint is a corner of a horizon mask.
type MaskPoint struct {
	AzDeg float64 // [0, 360)
	ElDeg float64
}

// Mask is a horizon: the least elevation that can be seen at each azimuth,
// linear between points and wrapping at 360 degrees. Its points are in ascending
// azimuth; two at one azimuth make a wall. An empty mask is no obstruction.
type Mask []MaskPoint

// ElevationDeg is the horizon's elevation at an azimuth, which may be any
// number of degrees, also below 0 and beyond 360; -90 for an empty mask.
func (m Mask) ElevationDeg(azDeg float64) float64 {
	if len(m) == 0 {
		return -90
	}
	azDeg -= 360 * math.Floor(azDeg/360)
	i, _ := slices.BinarySearchFunc(m, azDeg, func(p MaskPoint, az float64) int {
		if p.AzDeg <= az {
			return -1
		}
		return 1
	}) // the first point beyond the azimuth
	before, after := m[(i+len(m)-1)%len(m)], m[i%len(m)]
	width := after.AzDeg - before.AzDeg
	if width <= 0 {
		width += 360
	}
	way := azDeg - before.AzDeg
	if way < 0 {
		way += 360
	}
	return before.ElDeg + (after.ElDeg-before.ElDeg)*way/width
}

// Axis is one drive of a mount.
type Axis struct {
	RateDegS   float64 // above 0
	AccelDegS2 float64 // 0: reaches its rate at once
}

// Seconds is the time the drive takes for a travel in degrees, either way, from
// rest to rest: it speeds up and slows down at the same acceleration, and holds
// its rate in between if the travel is long enough to reach it, which takes
// rate²/acceleration. Settling is not in it.
func (a Axis) Seconds(travelDeg float64) float64 {
	d := math.Abs(travelDeg)
	switch {
	case a.AccelDegS2 <= 0:
		return d / a.RateDegS
	case d < a.RateDegS*a.RateDegS/a.AccelDegS2: // never reaches its rate
		return 2 * math.Sqrt(d/a.AccelDegS2)
	default:
		return d/a.RateDegS + a.RateDegS/a.AccelDegS2
	}
}

// UnwrapDeg makes an azimuth track in degrees continuous, taking the shorter
// way from each sample to the next; the first stays as it is. Samples must be
// close enough for the shorter way to be the one taken: near the zenith azimuth
// turns by half a turn in the time that the star takes to pass, some seconds at
// 1 arcminute. It writes to dst where that is long enough, which may be az
// itself.
func UnwrapDeg(az, dst []float64) []float64 {
	if cap(dst) < len(az) {
		dst = make([]float64, len(az))
	}
	dst = dst[:len(az)]
	turns, before := 0.0, 0.0
	for i, a := range az {
		if i > 0 {
			turns -= 360 * math.Round((a-before)/360)
		}
		before = a
		dst[i] = a + turns
	}
	return dst
}

// MotorTurns are the whole turns by which a continuous azimuth path between
// two extremes in degrees can be shifted to stay inside a motor's range: all
// from lo to hi, none where lo > hi. A range wider than a turn may offer several,
// and one narrower than the path none. The motor stands at the azimuth plus 360
// degrees times the turn chosen.
func MotorTurns(pathLoDeg, pathHiDeg float64, rangeDeg [2]float64) (lo, hi int) {
	const rounding = 1e-12 // a path that just touches its range is inside
	lo = int(math.Ceil((rangeDeg[0]-pathLoDeg)/360 - rounding))
	hi = int(math.Floor((rangeDeg[1]-pathHiDeg)/360 + rounding))
	return lo, hi
}
