//go:build erfa

package sky_test

import (
	"math"
	"math/rand/v2"
	"testing"
	"time"

	"cadencewright/astro"
	"cadencewright/astro/internal/erfabench"
	"cadencewright/astro/sky"
)

// The comparison with ERFA in C: forty stars all over the sky, a week at one
// minute. It needs Debian's liberfa-dev:
//
//	go test -tags erfa -run ERFAOverAWeek -bench ERFA ./astro/sky
const (
	erfaStars = 40
	erfaStep  = time.Minute
	erfaTimes = int(7 * 24 * time.Hour / erfaStep)
)

// sampled are the stars and ERFA's sampler of them.
func sampled() ([]astro.Star, *erfabench.Sampler) {
	r := rand.New(rand.NewPCG(1, 2))
	stars := make([]astro.Star, erfaStars)
	for i := range stars {
		stars[i] = astro.Star{RA: astro.Angle(2 * math.Pi * r.Float64()), Dec: astro.Angle(math.Asin(2*r.Float64() - 1)), PosEpochMJD: 51544.5,
			PMRAMasYr: 40*r.Float64() - 20, PMDecMasYr: 40*r.Float64() - 20}
	}
	return stars, erfabench.New(benchSite, stars, benchStart, erfaStep, erfaTimes, 0.1)
}

// difference is the largest angle on the sky between ERFA's places and a
// window's, in seconds of arc, over every sample of every star.
func difference(stars []astro.Star, s *erfabench.Sampler, w *sky.Window) float64 {
	s.Read()
	var tr sky.Track
	worst := 0.0
	for j, star := range stars {
		w.Track(star, &tr)
		for i := range tr.AzDeg {
			k := i*len(stars) + j
			worst = math.Max(worst, apart(tr.AzDeg[i], tr.ElDeg[i], s.AzRad[k]*180/math.Pi, s.ElRad[k]*180/math.Pi))
		}
	}
	return worst
}

// ERFA has diurnal aberration (0.3 arcsec) and light deflection (1 arcsec only
// within a degree or two of the Sun), which planning leaves out.
func TestTrackAgainstERFAOverAWeek(t *testing.T) {
	stars, s := sampled()
	if err := s.Sample(); err != nil {
		t.Fatal(err)
	}
	worst := difference(stars, s, benchErfaWindow(t))
	if worst > 1 {
		t.Errorf("%.3f arcsec apart, allowed is 1", worst)
	}
	t.Logf("largest difference of %d places: %.3f arcsec", erfaStars*erfaTimes, worst)
}

func benchErfaWindow(t testing.TB) *sky.Window {
	w, err := sky.NewWindow(benchSite, benchStart, erfaStep, erfaTimes, 0.1)
	if err != nil {
		t.Fatal(err)
	}
	return w
}

// BenchmarkAgainstERFA samples the same week both ways, in turns, and reports
// how many times faster the window is, with what it has to prepare counted in:
// whole tracks (azimuth, elevation, hour angle, declination and Sun), and the
// sines of elevation on which limits can be tested.
func BenchmarkAgainstERFA(b *testing.B) {
	stars, s := sampled()
	var erfa, tracks, sines time.Duration
	var tr sky.Track
	var sin []float64
	clock := func(total *time.Duration, f func()) {
		start := time.Now()
		f()
		*total += time.Since(start)
	}
	for b.Loop() {
		clock(&erfa, func() {
			if err := s.Sample(); err != nil {
				b.Fatal(err)
			}
		})
		clock(&tracks, func() {
			w := benchErfaWindow(b)
			for _, star := range stars {
				w.Track(star, &tr)
			}
		})
		clock(&sines, func() {
			w := benchErfaWindow(b)
			for _, star := range stars {
				sin = w.SinElevation(star, sin)
			}
		})
	}
	places := float64(b.N * erfaStars * erfaTimes)
	b.ReportMetric(float64(erfa.Nanoseconds())/places, "erfa-ns/place")
	b.ReportMetric(float64(tracks.Nanoseconds())/places, "track-ns/place")
	b.ReportMetric(float64(sines.Nanoseconds())/places, "sine-ns/place")
	b.ReportMetric(erfa.Seconds()/tracks.Seconds(), "track-ratio")
	b.ReportMetric(erfa.Seconds()/sines.Seconds(), "sine-ratio")
	b.ReportMetric(difference(stars, s, benchErfaWindow(b)), "arcsec")
}
