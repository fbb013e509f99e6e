package sensitivity

import "math"

// CMBTempK is the temperature of the cosmic microwave background in the model
// of the system temperature, kelvin.
const CMBTempK = 2.73

// skySpectralIndex is how the brightness temperature of the Galaxy falls with
// frequency (Lawson et al. 1987, MNRAS 225, 307; Johnston et al. 1992, MNRAS
// 255, 401).
const skySpectralIndex = -2.6

// SkyTempK is the brightness temperature of the sky towards Galactic
// longitude lDeg (any turn; taken within ±180) and latitude bDeg, in kelvin
// at freqMHz:
//
//	[25 + 275/((1 + (l/42)²)(1 + (b/3)²))] (408/freq)^2.6
//
// A smooth fit to the 408 MHz survey: good to perhaps a factor of 1.5, blind
// to single sources (Narayan 1987, ApJ 319, 162, from memory; the same form
// is eq. 5 of Yusifov & Küçük 2004, A&A 422, 545). The scaling covers the
// constant 25 K too, so the microwave background is added apart from it.
func SkyTempK(lDeg, bDeg, freqMHz float64) float64 {
	l := math.Remainder(lDeg, 360) / 42
	b := bDeg / 3
	at408 := 25 + 275/((1+l*l)*(1+b*b))
	return at408 * math.Pow(freqMHz/408, skySpectralIndex)
}

// SystemTempK is the system temperature at elevation elDeg > 0: receiver,
// microwave background, Galaxy, and the atmosphere with spill-over growing
// as 1/sin(elevation) from its value tatmK at the zenith. All in kelvin.
func SystemTempK(trecK, tatmK, skyK, elDeg float64) float64 {
	return trecK + CMBTempK + skyK + tatmK/math.Sin(elDeg*math.Pi/180)
}
