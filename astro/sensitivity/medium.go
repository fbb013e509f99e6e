package sensitivity

import "math"

// DispersionS is the dispersion constant: the delay in seconds at 1 MHz for a
// dispersion measure of 1 pc cm^-3, K = e²/(2π m c), s MHz² pc^-1 cm³ (Lorimer
// & Kramer 2005, from memory). Many programs use the rounded
// 1/2.41e-4 = 4149.378 instead (Manchester & Taylor 1977, Pulsars, p. 129).
const DispersionS = 4148.808

// auPerParsec is the number of astronomical units in a parsec, 648000/π.
const auPerParsec = 648000 / math.Pi

// DispersionDelayS is how many seconds later a pulse arrives at freq1MHz than
// at freq2MHz, through the dispersion measure dm in pc cm^-3; freq2MHz may be
// +Inf.
func DispersionDelayS(dm, freq1MHz, freq2MHz float64) float64 {
	return DispersionS * dm * (1/(freq1MHz*freq1MHz) - 1/(freq2MHz*freq2MHz))
}

// BhatScatterS is the scattering time at freqMHz that is typical of a
// dispersion measure, in seconds:
//
//	log10 tau[ms] = -6.46 + 0.154 log10 DM + 1.07 (log10 DM)² - 3.86 log10 freq[GHz]
//
// (Bhat et al. 2004, ApJ 605, 759). A single line of sight may lie a factor
// of ten off, so a measured time comes first.
func BhatScatterS(dm, freqMHz float64) float64 {
	d := math.Log10(dm)
	return 1e-3 * math.Pow(10, -6.46+0.154*d+1.07*d*d-3.86*math.Log10(freqMHz/1000))
}

// ScintBandwidthMHz scales the decorrelation bandwidth of diffractive
// scintillation from refFreqMHz to freqMHz: proportional to freq^4.4, for
// Kolmogorov turbulence (Cordes, Weisberg & Boriakoff 1985, ApJ 288, 221,
// from memory).
func ScintBandwidthMHz(atRefMHz, refFreqMHz, freqMHz float64) float64 {
	return atRefMHz * math.Pow(freqMHz/refFreqMHz, 4.4)
}

// ScintTimeS scales the scintillation time from refFreqMHz to freqMHz:
// proportional to freq^1.2 (same source).
func ScintTimeS(atRefS, refFreqMHz, freqMHz float64) float64 {
	return atRefS * math.Pow(freqMHz/refFreqMHz, 1.2)
}

// ScintFilling is the usual filling factor of scintles in time and frequency.
const ScintFilling = 0.2

// Scintles is how many independent scintles a scan of timeS seconds over
// bandwidthMHz averages, with the scintillation time and bandwidth at its
// frequency and the filling factor, about ScintFilling (Cordes 1986, ApJ 311,
// 183; Cordes & Shannon 2010, arXiv:1010.3785):
//
//	(1 + filling T/dt)(1 + filling B/df)
func Scintles(timeS, scintTimeS, bandwidthMHz, scintBandwidthMHz, filling float64) float64 {
	return (1 + filling*timeS/scintTimeS) * (1 + filling*bandwidthMHz/scintBandwidthMHz)
}

// SNRScatter is the relative root-mean-square scatter of the signal-to-noise
// ratio from scan to scan that averaging n scintles leaves: n^-1/2.
func SNRScatter(scintles float64) float64 { return 1 / math.Sqrt(scintles) }

// SolarWindDM is the dispersion measure of a spherical solar wind in pc cm^-3,
//
//	n0 (1 au)² rho/(r sin rho),  rho = 180° - elongation
//
// (Edwards, Hobbs & Manchester 2006, MNRAS 372, 1549, eqs 29-30) with the
// electron density n0 at 1 au in cm^-3 (4 to 10), the source elongationDeg
// from the Sun, (0, 180], and the observer earthSunAU from it. It grows
// without bound towards the Sun, where the wind is no longer spherical.
func SolarWindDM(n0, elongationDeg, earthSunAU float64) float64 {
	rho := math.Pi - elongationDeg*math.Pi/180
	path := 1.0 // rho/sin(rho) opposite the Sun
	if s := math.Sin(rho); s != 0 {
		path = rho / s
	}
	return n0 * path / earthSunAU / auPerParsec
}

// SolarWindDelayUs is the delay of the solar wind at freqMHz against infinite
// frequency, microseconds; the other arguments are those of SolarWindDM.
func SolarWindDelayUs(n0, elongationDeg, earthSunAU, freqMHz float64) float64 {
	return 1e6 * DispersionDelayS(SolarWindDM(n0, elongationDeg, earthSunAU), freqMHz, math.Inf(1))
}
