package sky_test

import (
	"fmt"
	"testing"
	"time"

	"cadencewright/astro"
	"cadencewright/astro/sky"
)

var (
	benchSite  = astro.Geodetic{Lon: astro.FromDeg(20), Lat: astro.FromDeg(-31), HeightM: 1000}
	benchStar  = astro.Star{RA: 1, Dec: -0.3, PosEpochMJD: 55000, PMRAMasYr: 10}
	benchStart = time.Date(2027, 3, 1, 0, 0, 0, 0, time.UTC)
)

// benchWeek is a week at a step.
func benchWeek(b *testing.B, step time.Duration) *sky.Window {
	w, err := sky.NewWindow(benchSite, benchStart, step, int(7*24*time.Hour/step), 0.1)
	if err != nil {
		b.Fatal(err)
	}
	return w
}

var benchSteps = []time.Duration{30 * time.Second, 5 * time.Minute}

// perSample reports the time one star takes at one instant.
func perSample(b *testing.B, samples int) {
	b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N*samples), "ns/sample")
}

// One star over a week, azimuth, elevation, hour angle, declination and Sun.
func BenchmarkTrack(b *testing.B) {
	for _, step := range benchSteps {
		b.Run(fmt.Sprint(step), func(b *testing.B) {
			w := benchWeek(b, step)
			var tr sky.Track
			b.ReportAllocs()
			for b.Loop() {
				w.Track(benchStar, &tr)
			}
			perSample(b, w.Len())
			if len(tr.ElDeg) != w.Len() || tr.ElDeg[0] == 0 {
				b.Fatal("no track was made")
			}
		})
	}
}

// One star over a week, what is needed to test a limit.
func BenchmarkSinElevation(b *testing.B) {
	for _, step := range benchSteps {
		b.Run(fmt.Sprint(step), func(b *testing.B) {
			w := benchWeek(b, step)
			var sin []float64
			b.ReportAllocs()
			for b.Loop() {
				sin = w.SinElevation(benchStar, sin)
			}
			perSample(b, w.Len())
			if len(sin) != w.Len() || sin[0] == 0 {
				b.Fatal("no elevations were found")
			}
		})
	}
}

// What all stars of a site share over a week.
func BenchmarkNewWindow(b *testing.B) {
	for _, step := range benchSteps {
		b.Run(fmt.Sprint(step), func(b *testing.B) {
			for b.Loop() {
				benchWeek(b, step)
			}
		})
	}
}

func BenchmarkObserve(b *testing.B) {
	for b.Loop() {
		if _, err := sky.Observe(benchSite, benchStar, benchStart, 0); err != nil {
			b.Fatal(err)
		}
	}
}

// The crossings of a limit in a week, of which there are fourteen.
func BenchmarkCrossings(b *testing.B) {
	for b.Loop() {
		found, _, err := sky.Crossings(benchSite, benchStar, 20, benchStart, 7*24*time.Hour, 0)
		if err != nil || len(found) < 13 {
			b.Fatal(found, err)
		}
	}
}
