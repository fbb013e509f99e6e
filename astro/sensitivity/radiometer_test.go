package sensitivity

import (
	"math"
	"testing"

	"pgregory.net/rapid"

	"cadencewright/astro"
)

// drawRadiometer draws a pulsar and a receiver of the kinds that exist.
func drawRadiometer(t *rapid.T) (Pulsar, Receiver) {
	f := func(name string, lo, hi float64) float64 { return rapid.Float64Range(lo, hi).Draw(t, name) }
	p := Pulsar{
		Star:        astro.Star{RA: astro.FromDeg(f("ra", 0, 360)), Dec: astro.FromDeg(f("dec", -90, 90))},
		PeriodS:     f("period", 0.0015, 0.02),
		FluxMJy:     f("flux", 0.05, 100),
		FluxFreqMHz: 1400, SpectralIdx: f("index", -3, 0),
		Scatter1GHzS: f("scatter", 0, 1e-5), JitterUs1h: f("jitter", 0, 1),
	}
	p.WidthS = p.PeriodS * f("duty", 0.01, 0.3)
	r := Receiver{
		FreqMHz: f("freq", 700, 4000), BandwidthMHz: f("band", 50, 1000), NPol: rapid.IntRange(1, 2).Draw(t, "npol"),
		TrecK: f("trec", 5, 80), TatmK: f("tatm", 0, 5), GainKPerJy: f("gain", 0.1, 15), Digitisation: f("beta", 1, 1.3),
	}
	return p, r
}

func TestInfoRateIsTheFormulasMultipliedOut(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		p, r := drawRadiometer(t)
		m := NewRadiometer(p, r)
		if !m.Detectable() {
			t.Fatalf("%+v should be detectable with %+v", p, r)
		}
		elDeg := rapid.Float64Range(1, 90).Draw(t, "elevation")
		part := rapid.Float64Range(0.01, 1).Draw(t, "part of the band")
		sinEl := math.Sin(elDeg * math.Pi / 180)

		// The planning model, section 4, formula by formula.
		l, b := Galactic(p.Star)
		tau := ScatterS(p.Scatter1GHzS, r.FreqMHz)
		width := BroadenedWidthS(p.WidthS, tau)
		tsys := SystemTempK(r.TrecK, r.TatmK, SkyTempK(l.Deg(), b.Deg(), r.FreqMHz), elDeg)
		usable := r
		usable.BandwidthMHz *= part
		rate := SNRRate(FluxMJy(p.FluxMJy, p.FluxFreqMHz, p.SpectralIdx, r.FreqMHz), usable, tsys, p.PeriodS, width)
		want := 1 / OneSecondVariance(width, rate, p.JitterUs1h)

		for _, c := range []struct {
			what      string
			got, want float64
		}{
			{"information", m.InfoRate(sinEl, part), want},
			{"signal-to-noise rate", m.SNRRate(sinEl, part), rate},
			{"system temperature", m.SystemTempK(sinEl), tsys},
			{"width", m.WidthS(), width},
			{"TOA uncertainty of 30 minutes", TOAOfInfoUs(1800 * m.InfoRate(sinEl, part)), TOAUs(1/want, 1800)},
		} {
			if math.Abs(c.got-c.want) > 1e-12*c.want {
				t.Fatalf("%s: got %v, want %v", c.what, c.got, c.want)
			}
		}
	})
}

func TestInfoRateGrowsWithElevationAndBand(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		m := NewRadiometer(drawRadiometer(t))
		s := rapid.Float64Range(0.01, 0.99).Draw(t, "sine")
		part := rapid.Float64Range(0.01, 0.99).Draw(t, "part")
		here := m.InfoRate(s, part)
		if here <= 0 || math.IsInf(here, 0) {
			t.Fatalf("information %v is not positive and finite", here)
		}
		if higher := m.InfoRate(s+0.01, part); higher < here*(1-1e-14) {
			t.Fatalf("information falls from %v to %v with elevation", here, higher)
		}
		if wider := m.InfoRate(s, part+0.01); wider < here*(1-1e-14) {
			t.Fatalf("information falls from %v to %v with bandwidth", here, wider)
		}
	})
}

// typical is an ordinary millisecond pulsar with an ordinary receiver.
func typical() (Pulsar, Receiver) {
	return Pulsar{Star: astro.Star{RA: astro.FromDeg(63), Dec: astro.FromDeg(18)}, PeriodS: 0.005, FluxMJy: 1,
			FluxFreqMHz: 1400, SpectralIdx: -1.6, WidthS: 0.0003, JitterUs1h: 0.05},
		Receiver{FreqMHz: 1400, BandwidthMHz: 400, NPol: 2, TrecK: 20, TatmK: 2, GainKPerJy: 2, Digitisation: 1}
}

func TestNothingIsSeen(t *testing.T) {
	p, r := typical()
	up := NewRadiometer(p, r)
	for _, at := range [][2]float64{{0, 1}, {-0.5, 1}, {math.NaN(), 1}, {1, 0}, {1, -1}, {1, math.NaN()}} {
		if i, s := up.InfoRate(at[0], at[1]), up.SNRRate(at[0], at[1]); i != 0 || s != 0 {
			t.Errorf("sine %v, part of the band %v: information %v, S/N rate %v, want 0", at[0], at[1], i, s)
		}
	}
	tests := map[string]func(p *Pulsar, r *Receiver){
		"scattered over 0.9 periods": func(p *Pulsar, _ *Receiver) { p.WidthS, p.Scatter1GHzS = 0.9*p.PeriodS, 0 },
		"scattered over many":        func(p *Pulsar, r *Receiver) { p.Scatter1GHzS, r.FreqMHz = 1, 400 },
		"no flux":                    func(p *Pulsar, _ *Receiver) { p.FluxMJy = 0 },
		"no gain":                    func(_ *Pulsar, r *Receiver) { r.GainKPerJy = 0 },
		"no band":                    func(_ *Pulsar, r *Receiver) { r.BandwidthMHz = 0 },
		"no width":                   func(p *Pulsar, _ *Receiver) { p.WidthS = 0 },
		"no number":                  func(p *Pulsar, _ *Receiver) { p.FluxMJy = math.NaN() },
		"endless band":               func(_ *Pulsar, r *Receiver) { r.BandwidthMHz = math.Inf(1) },
	}
	for name, change := range tests {
		t.Run(name, func(t *testing.T) {
			p, r := typical()
			change(&p, &r)
			m := NewRadiometer(p, r)
			if m.Detectable() || m.InfoRate(1, 1) != 0 || m.SNRRate(1, 1) != 0 {
				t.Errorf("detectable %v, information %v", m.Detectable(), m.InfoRate(1, 1))
			}
		})
	}
	var zero Radiometer
	if zero.Detectable() || zero.InfoRate(1, 1) != 0 {
		t.Error("the zero radiometer should see nothing")
	}
}

func TestDetectableUpToNineTenths(t *testing.T) {
	if !Detectable(0.45-1e-12, 0.5) || Detectable(0.45, 0.5) {
		t.Error("a pulse of 0.9 periods is not detectable, a narrower one is")
	}
}

func TestJitterBoundsTheInformation(t *testing.T) {
	p, r := typical()
	p.FluxMJy = 1e9
	m := NewRadiometer(p, r)
	if got := TOAOfInfoUs(3600 * m.InfoRate(1, 1)); math.Abs(got-p.JitterUs1h) > 1e-6 {
		t.Errorf("an hour on an endlessly bright pulsar gives %v us, want its jitter %v", got, p.JitterUs1h)
	}
}

func TestTimeForTOAInvertsTOA(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		v := rapid.Float64Range(1e-16, 1e-6).Draw(t, "variance")
		us := rapid.Float64Range(0.01, 100).Draw(t, "us")
		if got := TOAUs(v, TimeForTOAS(v, us)); math.Abs(got-us) > 1e-9*us {
			t.Fatalf("got %v, want %v", got, us)
		}
	})
}

// BenchmarkInfoRate is the planner's innermost call.
func BenchmarkInfoRate(b *testing.B) {
	m := NewRadiometer(typical())
	sum := 0.0
	for i := range b.N {
		sum += m.InfoRate(0.3+float64(i&1023)/2048, 0.9)
	}
	if !(sum > 0) {
		b.Fatal("no information")
	}
}
