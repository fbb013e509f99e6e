package orbit

import (
	"testing"
	"time"

	"cadencewright/astro"
)

func benchmarkOrbit(b *testing.B, pbD float64) (Elements, astro.Star) {
	b.Helper()
	e, err := Kepler(KeplerParams{PbD: pbD, A1Ls: 1.4, Ecc: 0.1, OmDeg: 30, T0MJD: 58000, OmdotDegYr: 15 * 0.1 / pbD})
	if err != nil {
		b.Fatal(err)
	}
	return e, astro.Star{RA: 2, Dec: -0.5, PosEpochMJD: 51544.5}
}

// BenchmarkPassages lists the passages of one window over three months, for a
// 2-hour and a 150-day orbit, with the Earth's table shared as a planner does.
func BenchmarkPassages(b *testing.B) {
	t0 := time.Date(2027, 1, 18, 0, 0, 0, 0, time.UTC)
	t1 := t0.AddDate(0, 3, 0)
	earth, err := NewEarth(t0, t1)
	if err != nil {
		b.Fatal(err)
	}
	for name, pb := range map[string]float64{"2 h": 2.0 / 24, "150 d": 150} {
		b.Run(name, func(b *testing.B) {
			e, star := benchmarkOrbit(b, pb)
			for b.Loop() {
				clock := earth.Clock(star)
				list, err := clock.Passages(e, Conjunction, 0.2, 0.4, t0, t1)
				if err != nil || len(list) == 0 {
					b.Fatalf("%d passages, %v", len(list), err)
				}
			}
		})
	}
}

// BenchmarkNewEarth tabulates three months.
func BenchmarkNewEarth(b *testing.B) {
	t0 := time.Date(2027, 1, 18, 0, 0, 0, 0, time.UTC)
	for b.Loop() {
		if _, err := NewEarth(t0, t0.AddDate(0, 3, 0)); err != nil {
			b.Fatal(err)
		}
	}
}

// BenchmarkClock tells barycentric time at one instant.
func BenchmarkClock(b *testing.B) {
	t0 := time.Date(2027, 1, 18, 0, 0, 0, 0, time.UTC)
	earth, err := NewEarth(t0, t0.AddDate(0, 0, 7))
	if err != nil {
		b.Fatal(err)
	}
	_, star := benchmarkOrbit(b, 1)
	clock := earth.Clock(star)
	for b.Loop() {
		if _, err := clock.TDB(t0); err != nil {
			b.Fatal(err)
		}
	}
}
