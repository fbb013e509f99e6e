package sensitivity

import (
	"math"

	"cadencewright/astro"
)

// Receiver is what the radiometer equation needs to know of a front end.
type Receiver struct {
	FreqMHz      float64 // centre of the band
	BandwidthMHz float64
	NPol         int     // polarisations summed: 1 or 2
	TrecK        float64 // receiver temperature
	TatmK        float64 // atmosphere and spill-over at the zenith
	GainKPerJy   float64
	Digitisation float64 // loss factor beta >= 1
}

// Pulsar is what the radiometer equation needs to know of a source.
type Pulsar struct {
	Star         astro.Star // place, for the temperature of the sky behind it
	PeriodS      float64
	FluxMJy      float64 // mean flux density at FluxFreqMHz
	FluxFreqMHz  float64
	SpectralIdx  float64
	WidthS       float64 // full width at half maximum, before scattering
	Scatter1GHzS float64 // scattering time at 1 GHz
	JitterUs1h   float64 // pulse jitter left after one hour, microseconds
}

// Radiometer gives the timing precision of one pulsar with one receiver at
// any elevation. The zero value detects nothing. It holds no pointer and may
// be copied and used from several goroutines.
type Radiometer struct {
	fluxMJy  float64
	skyK     float64
	widthS   float64 // broadened
	periodS  float64
	receiver Receiver

	constK  float64 // the part of the system temperature that elevation leaves alone
	noise   float64 // (W/s1)² at 1 K and the whole band, s²·s/K²
	jitter  float64 // jitter part of the one-second variance, s²·s
	detects bool
}

// NewRadiometer works out all that elevation and interference leave alone.
// Where the pulse is scattered over nine tenths of the period, or the values
// are not those of a telescope and a pulsar (a flux, gain, bandwidth or width
// that is not positive and finite), the radiometer detects nothing.
func NewRadiometer(p Pulsar, r Receiver) Radiometer {
	l, b := Galactic(p.Star)
	m := Radiometer{
		fluxMJy:  FluxMJy(p.FluxMJy, p.FluxFreqMHz, p.SpectralIdx, r.FreqMHz),
		skyK:     SkyTempK(l.Deg(), b.Deg(), r.FreqMHz),
		widthS:   BroadenedWidthS(p.WidthS, ScatterS(p.Scatter1GHzS, r.FreqMHz)),
		periodS:  p.PeriodS,
		receiver: r,
	}
	m.constK = r.TrecK + CMBTempK + m.skyK
	rateAt1K := SNRRate(m.fluxMJy, r, 1, m.periodS, m.widthS)
	root := m.widthS / rateAt1K
	m.noise = root * root
	jitter := p.JitterUs1h * 1e-6
	m.jitter = jitter * jitter * 3600
	m.detects = m.widthS > 0 && Detectable(m.widthS, m.periodS) &&
		m.noise > 0 && !math.IsInf(m.noise, 0) && m.constK > 0 && r.TatmK >= 0 && m.jitter >= 0
	return m
}

// Detectable reports whether the receiver sees pulses of this pulsar at all.
func (m *Radiometer) Detectable() bool { return m.detects }

// FluxMJy is the pulsar's mean flux density in the receiver's band.
func (m *Radiometer) FluxMJy() float64 { return m.fluxMJy }

// SkyTempK is the temperature of the sky behind the pulsar in the band.
func (m *Radiometer) SkyTempK() float64 { return m.skyK }

// WidthS is the width of the pulse in the band, scattering included.
func (m *Radiometer) WidthS() float64 { return m.widthS }

// SystemTempK is the system temperature at the elevation with sine sinEl > 0.
func (m *Radiometer) SystemTempK(sinEl float64) float64 {
	return m.constK + m.receiver.TatmK/sinEl
}

// SNRRate is the signal-to-noise ratio per square root of a second with
// bandFraction of the band usable, [0, 1]; 0 at or below the horizon and
// where nothing is detectable.
func (m *Radiometer) SNRRate(sinEl, bandFraction float64) float64 {
	if !m.detects || !(sinEl > 0) || !(bandFraction > 0) {
		return 0
	}
	r := m.receiver
	r.BandwidthMHz *= bandFraction
	return SNRRate(m.fluxMJy, r, m.SystemTempK(sinEl), m.periodS, m.widthS)
}

// InfoRate is the information on the arrival time that one second gives, in
// s^-2 per second: the inverse of the one-second variance. sinEl is the sine
// of the elevation, bandFraction the usable part of the band, [0, 1]. It is 0
// at or below the horizon and where nothing is detectable; it grows with both
// arguments and is bounded by the pulse jitter.
//
// This is the formula of SNRRate and OneSecondVariance multiplied out so that
// one division is left: a plan asks for it millions of times.
func (m *Radiometer) InfoRate(sinEl, bandFraction float64) float64 {
	// With Tsys = (constK sin e + tatm)/sin e, the variance of one second is
	// noise (constK sin e + tatm)²/(sin² e · bandFraction) + jitter.
	weight := sinEl * sinEl * bandFraction
	if !m.detects || !(sinEl > 0) || !(weight > 0) {
		return 0
	}
	t := m.constK*sinEl + m.receiver.TatmK
	return weight / (m.noise*t*t + m.jitter*weight)
}
