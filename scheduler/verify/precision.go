package verify

import (
	"math"

	"cadencewright/astro/sensitivity"
)

func newRadiometer(s *source, r *receiver) sensitivity.Radiometer {
	return sensitivity.NewRadiometer(
		sensitivity.Pulsar{Star: s.star, PeriodS: s.PeriodS, FluxMJy: s.FluxMJy, FluxFreqMHz: s.FluxFreqMHz,
			SpectralIdx: s.SpectralIdx, WidthS: s.WidthS, Scatter1GHzS: s.Scatter1GHzS, JitterUs1h: s.JitterUs1h},
		sensitivity.Receiver{FreqMHz: r.FreqMHz, BandwidthMHz: r.BandwidthMHz, NPol: r.NPol, TrecK: r.TrecK,
			TatmK: r.TatmK, GainKPerJy: r.GainKPerJy, Digitisation: r.Digitisation})
}

// sees reports whether pulses of the source can be told apart with a receiver.
func (s *source) sees(r *receiver) bool { return s.radiometer[r.index].Detectable() }

// lowestSinEl is the sine of the elevation, 0.1 degrees, below which the air is
// taken to be no thicker. Only scans that break a limit reach down there, and
// what they gather should not depend on an infinity at the horizon.
var lowestSinEl = math.Sin(0.1 * math.Pi / 180)

// localHour is the hour of the day, 0 to 23, at the telescope.
func (t *telescope) localHour(at msec) int { return at.time().In(t.zone).Hour() }

// usable is the part of the receiver's band that interference leaves in an
// hour of the telescope's day.
func (r *receiver) usable(localHour int) float64 {
	if len(r.RFILoss) == 0 {
		return 1
	}
	return 1 - r.RFILoss[localHour]
}

// quality is what a scan with the given information (s^-2) is worth to a
// target that wants an uncertainty of toaUs microseconds; 0 wants none stated.
func quality(info, toaUs float64) float64 {
	if toaUs == 0 {
		if info > 0 {
			return 1
		}
		return 0
	}
	q := rawQuality(info, toaUs)
	switch {
	case q < 0.5:
		return 0
	case q > 1:
		return 1
	}
	return q
}

// rawQuality is quality without its floor and its ceiling.
func rawQuality(info, toaUs float64) float64 { return info * (toaUs * 1e-6) * (toaUs * 1e-6) }
