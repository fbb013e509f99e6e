package sensitivity

import "math"

// undetectableDuty is the pulse width over the period from which on nothing
// pulsed is left to detect.
const undetectableDuty = 0.9

// FluxMJy is the mean flux density at freqMHz of a power-law spectrum that has
// fluxMJy at fluxFreqMHz: S = S0 (freq/freq0)^index, in the unit of fluxMJy.
// The mean index of pulsars is -1.6 (Jankowski et al. 2018, MNRAS 473, 4436,
// from memory).
func FluxMJy(fluxMJy, fluxFreqMHz, index, freqMHz float64) float64 {
	return fluxMJy * math.Pow(freqMHz/fluxFreqMHz, index)
}

// ScatterS is the scattering time at freqMHz, seconds, of a line of sight with
// scatter1GHzS at 1 GHz: proportional to freq^-4.4, the law of Kolmogorov
// turbulence.
func ScatterS(scatter1GHzS, freqMHz float64) float64 {
	return scatter1GHzS * math.Pow(freqMHz/1000, -4.4)
}

// BroadenedWidthS is the width of a pulse of intrinsic width widthS after
// scattering with time tauS: the root of the summed squares, seconds.
func BroadenedWidthS(widthS, tauS float64) float64 { return math.Hypot(widthS, tauS) }

// Detectable reports whether a pulse of the (broadened) width widthS leaves
// anything to detect at the given period: W < 0.9 P.
func Detectable(widthS, periodS float64) bool { return widthS < undetectableDuty*periodS }

// SNRRate is the signal-to-noise ratio of a folded profile per square root of
// a second, s^-1/2, by the radiometer equation for pulsars (Lorimer & Kramer
// 2005, Handbook of Pulsar Astronomy, A1.22):
//
//	S G sqrt(npol B) / (beta Tsys) · sqrt((P-W)/W)
//
// with the flux density S in Jy and the bandwidth B in Hz inside. Of the
// receiver it uses gain, polarisations, bandwidth and digitisation. widthS is
// the broadened width; from W >= P on the result is NaN.
func SNRRate(fluxMJy float64, r Receiver, tsysK, periodS, widthS float64) float64 {
	signal := fluxMJy * 1e-3 * r.GainKPerJy * math.Sqrt(float64(r.NPol)*r.BandwidthMHz*1e6)
	return signal / (r.Digitisation * tsysK) * math.Sqrt((periodS-widthS)/widthS)
}

// SNR is the signal-to-noise ratio after timeS seconds at the given rate.
func SNR(rate, timeS float64) float64 { return rate * math.Sqrt(timeS) }

// OneSecondVariance is the variance of an arrival time from one second of
// data, in s²·s: divide it by the seconds observed. Its two parts are the
// radiometer noise, W over the signal-to-noise ratio (Lorimer & Kramer 2005,
// section 8.2, from memory), and pulse jitter, which falls with the number of
// pulses whatever the signal (Cordes & Shannon 2010, arXiv:1010.3785, from
// memory) and is stated as what is left after one hour, microseconds.
func OneSecondVariance(widthS, rate, jitterUs1h float64) float64 {
	noise := widthS / rate
	jitter := jitterUs1h * 1e-6
	return noise*noise + jitter*jitter*3600
}

// TOAUs is the uncertainty of an arrival time in microseconds after timeS
// seconds, given the variance of one second.
func TOAUs(oneSecondVariance, timeS float64) float64 {
	return 1e6 * math.Sqrt(oneSecondVariance/timeS)
}

// TimeForTOAS is how many seconds an arrival time of uncertainty toaUs takes,
// given the variance of one second.
func TimeForTOAS(oneSecondVariance, toaUs float64) float64 {
	sigma := toaUs * 1e-6
	return oneSecondVariance / (sigma * sigma)
}

// TOAOfInfoUs is the uncertainty in microseconds that the information info,
// in s^-2, allows: information is the inverse of variance, so it adds up over
// the parts of a scan. No information gives +Inf.
func TOAOfInfoUs(info float64) float64 { return 1e6 / math.Sqrt(info) }

// JitterUs is the pulse jitter left after timeS seconds, microseconds, of a
// pulsar with jitterUs1h after one hour.
func JitterUs(jitterUs1h, timeS float64) float64 { return jitterUs1h * math.Sqrt(3600/timeS) }
