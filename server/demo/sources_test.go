package demo

import (
	"math"
	"regexp"
	"testing"

	"cadencewright/astro"
	"cadencewright/astro/sensitivity"
	"cadencewright/scheduler"
)

// Sources are named after their places, and no two stand close together.
func TestSourceNames(t *testing.T) {
	pattern := regexp.MustCompile(`^SIM J([01]\d|2[0-3])[0-5]\d[+-][0-8]\d[0-5]\d$`)
	seen := map[string]bool{}
	for i := range kept.Sources {
		s := &kept.Sources[i]
		if !pattern.MatchString(s.Name) || seen[s.Name] {
			t.Errorf("name %q, or twice", s.Name)
		}
		seen[s.Name] = true
		if got := nameOf(s.Star()); got != s.Name {
			t.Errorf("%s stands at %.5f %.5f, which would be named %s", s.Name, s.RADeg, s.DecDeg, got)
		}
		for j := range i {
			if d := separationDeg(s.Star(), kept.Sources[j].Star()); d < 2.4 {
				t.Errorf("%s and %s are %.2f degrees apart", s.Name, kept.Sources[j].Name, d)
			}
		}
	}
}

func TestNameOf(t *testing.T) {
	for _, x := range []struct {
		ra, dec float64
		want    string
	}{
		{63.0625, 18.5625, "SIM J0412+1833"}, {359.999, -0.01, "SIM J2359-0000"}, {0, 89.999, "SIM J0000+8959"},
		{179.99, -65.99, "SIM J1159-6559"},
	} {
		if got := nameOf(astro.Star{RA: astro.FromDeg(x.ra), Dec: astro.FromDeg(x.dec)}); got != x.want {
			t.Errorf("%v %v is named %s, want %s", x.ra, x.dec, got, x.want)
		}
	}
}

// The pulsars are millisecond pulsars, and crowd toward the Galactic plane.
func TestSourcesArePlausible(t *testing.T) {
	near := 0
	for i := range kept.Sources {
		s := &kept.Sources[i]
		if s.PeriodS < 0.0015 || s.PeriodS > 0.02 || s.WidthS < 0.015*s.PeriodS || s.WidthS > 0.21*s.PeriodS {
			t.Errorf("%s: period %v s, width %v s", s.Name, s.PeriodS, s.WidthS)
		}
		if s.FluxMJy < 0.1 || s.FluxMJy > 9 || s.DMPcCm3 < 5 || s.DMPcCm3 > 300 || s.JitterUs1h <= 0 ||
			s.JitterUs1h > 0.4 {
			t.Errorf("%s: %v mJy, DM %v, jitter %v us", s.Name, s.FluxMJy, s.DMPcCm3, s.JitterUs1h)
		}
		if _, b := sensitivity.Galactic(s.Star()); math.Abs(b.Deg()) < 20 {
			near++
		}
		if best := bestTOAUs(kept, s, "L"); best < 0.1 || best > 5 && best < 9 || best > 40 {
			t.Errorf("%s is timed to %.3f us at best", s.Name, best)
		}
	}
	// A third of the sky lies within 20 degrees of the plane.
	if near < 22 || near > 38 {
		t.Errorf("%d of %d sources lie within 20 degrees of the Galactic plane", near, len(kept.Sources))
	}
}

// Orbits run from 0.1 to 150 days and from circular to e = 0.6, in both
// models; sizes and masses fit each other.
func TestBinariesArePlausible(t *testing.T) {
	models := map[scheduler.BinaryModel]int{}
	shortest, longest, roundest, longestE, masses := math.Inf(1), 0.0, 1.0, 0.0, 0
	for i := range kept.Sources {
		b := kept.Sources[i].Binary
		if b == nil {
			continue
		}
		models[b.Model]++
		e := b.Ecc
		if b.Model == scheduler.BinaryELL1 {
			e = math.Hypot(b.Eps1, b.Eps2)
			if b.A1Ls*e*e > 1e-5 {
				t.Errorf("%s: ell1 with x e² of %.2g s", kept.Sources[i].Name, b.A1Ls*e*e)
			}
		}
		shortest, longest = math.Min(shortest, b.PbD), math.Max(longest, b.PbD)
		roundest, longestE = math.Min(roundest, e), math.Max(longestE, e)
		// The mass function bounds the companion: m2 sin i of a pulsar of 1.3
		// to 1.7 solar masses (Lorimer & Kramer 2005, section 8.3, from memory).
		n := 2 * math.Pi / (b.PbD * dayS)
		f := b.A1Ls * b.A1Ls * b.A1Ls * n * n / sunLightS
		if f <= 0 || f > 0.3 {
			t.Errorf("%s: mass function %.4g", kept.Sources[i].Name, f)
		}
		if b.M2Msun > 0 {
			masses++
			implied := func(m1 float64) float64 {
				projected, total := b.M2Msun*b.Sini, m1+b.M2Msun
				return projected * projected * projected / (total * total)
			}
			if f < 0.98*implied(1.7) || f > 1.02*implied(1.3) {
				t.Errorf("%s: mass function %.4g, its masses imply %.4g to %.4g", kept.Sources[i].Name, f, implied(1.7),
					implied(1.3))
			}
		}
		if _, err := b.Elements(); err != nil {
			t.Errorf("%s: %v", kept.Sources[i].Name, err)
		}
	}
	if models[scheduler.BinaryKepler] < 3 || models[scheduler.BinaryELL1] < 5 || masses < 3 || masses == 14 {
		t.Errorf("models %v, %d with masses", models, masses)
	}
	if shortest < 0.1 || shortest > 0.12 || longest < 140 || longest > 150 || roundest > 1e-5 || longestE < 0.55 ||
		longestE > 0.6 {
		t.Errorf("periods %.3f to %.1f d, eccentricities %.2g to %.2f", shortest, longest, roundest, longestE)
	}
}

// The advance of periastron of two neutron stars in a tight orbit is that of
// general relativity: PSR J0737-3039A has 16.8995 degrees a year (Kramer et
// al. 2006) with 1.338 and 1.249 solar masses; the kind here is close to it.
func TestOrbitsFollowRelativity(t *testing.T) {
	k := orbits[0]
	for seed := range uint64(20) {
		b := k.make(stream(seed, "orbit"), scheduler.WeekStart(keptDay))
		scale := math.Pow(0.102251562/b.PbD, 5.0/3) * 16.8995
		if b.OmdotDegYr < scale*0.97 || b.OmdotDegYr > scale*1.15 {
			t.Errorf("advance %.2f degrees a year in %.4f d, expected about %.2f", b.OmdotDegYr, b.PbD, scale)
		}
		// Its orbit decays by 1.252e-12 (Kramer et al. 2006).
		if decay := b.Pbdot / -1.252e-12; decay < 0.85 || decay > 1.35 {
			t.Errorf("decay %.3g", b.Pbdot)
		}
	}
}
