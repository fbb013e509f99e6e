package orbit

import (
	"math"
	"testing"

	"pgregory.net/rapid"

	"cadencewright/astro/timescale"
)

// TestKeplerHandbook holds the solver against worked examples.
func TestKeplerHandbook(t *testing.T) {
	deg := math.Pi / 180
	tests := []struct {
		name   string
		m, ecc float64
		want   float64
		tolDeg float64
	}{
		{"Meeus, Astronomical Algorithms, ex. 30.a", 5 * deg, 0.1, 5.554589, 1e-6},
		{"Meeus, table 30.a", 2 * deg, 0.99, 32.361007, 1e-6},
		{"a circle", 123 * deg, 0, 123, 1e-12},
		{"periastron", 0, 0.999, 0, 0},
		{"apastron", 180 * deg, 0.999, 180, 1e-12},
	}
	for _, tt := range tests {
		if got := EccentricAnomaly(tt.m, tt.ecc) / deg; math.Abs(got-tt.want) > tt.tolDeg {
			t.Errorf("%s: got %.7f deg, want %.7f", tt.name, got, tt.want)
		}
	}
}

var eccentricities = rapid.OneOf(rapid.Float64Range(0, 0.999), rapid.SampledFrom([]float64{0, 1e-300, 1e-12, 0.5, 0.9, 0.99, 0.999, 1 - 1e-9, math.Nextafter(1, 0)}))

func TestKeplerSolvesItsEquation(t *testing.T) {
	anomalies := rapid.OneOf(rapid.Float64Range(-math.Pi, math.Pi), rapid.Float64Range(-1e-6, 1e-6), rapid.Float64Range(-1e5, 1e5),
		rapid.SampledFrom([]float64{0, math.Pi, -math.Pi, 3 * math.Pi, 5e-324, 1e-18, math.Nextafter(math.Pi, 4)}))
	rapid.Check(t, func(t *rapid.T) {
		m, ecc := anomalies.Draw(t, "mean anomaly"), eccentricities.Draw(t, "eccentricity")
		e := EccentricAnomaly(m, ecc)
		if left := e - ecc*math.Sin(e) - m; !(math.Abs(left) <= 4e-16*(1+math.Abs(m))) {
			t.Fatalf("E = %v leaves %v of Kepler's equation", e, left)
		}
		if math.Abs(e-m) > ecc+1e-15*math.Abs(m) {
			t.Fatalf("E = %v is further than e from M", e)
		}
	})
}

func TestKeplerOutsideItsRange(t *testing.T) {
	for _, p := range [][2]float64{{1, 1}, {1, -0.1}, {1, math.NaN()}, {math.NaN(), 0.5}, {math.Inf(1), 0.5}, {1, math.Inf(1)}} {
		if got := EccentricAnomaly(p[0], p[1]); !math.IsNaN(got) {
			t.Errorf("M %v, e %v: got %v, want NaN", p[0], p[1], got)
		}
	}
}

// TestAnomaliesInvert goes from the mean anomaly to the true one and back; on
// the way the true anomaly must obey its textbook relation
// tan(nu/2) = sqrt((1+e)/(1-e)) tan(E/2).
func TestAnomaliesInvert(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		m := rapid.Float64Range(-50, 50).Draw(t, "mean anomaly")
		ecc := rapid.Float64Range(0, 0.999).Draw(t, "eccentricity")
		e := EccentricAnomaly(m, ecc)
		nu := TrueAnomaly(e, ecc)
		// dM/dnu is at most 2.8/sqrt(1-e) at apastron.
		if back := MeanAnomalyOf(nu, ecc); math.Abs(back-m) > 1e-13*(1+math.Abs(nu))/math.Sqrt(1-ecc) {
			t.Fatalf("M %v comes back as %v", m, back)
		}
		sin, cos := math.Sincos(e / 2)
		want := 2 * math.Atan2(math.Sqrt(1+ecc)*sin, math.Sqrt(1-ecc)*cos)
		if d := math.Remainder(nu-want, turn); math.Abs(d) > 1e-12 {
			t.Fatalf("true anomaly %v, want %v", nu, want)
		}
		if math.Abs(nu-m) > math.Pi {
			t.Fatalf("true anomaly %v is in another turn than %v", nu, m)
		}
	})
}

// TestTurnsAreContinuous walks along orbits whose periastron goes round
// several times: the count never jumps, and it always moves on.
func TestTurnsAreContinuous(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		e, _ := drawOrbit(t)
		e.OmdotDegYr = rapid.Float64Range(-30, 30).Draw(t, "omdot") / max(1, e.PbD)
		ref := references.Draw(t, "reference")
		years := 40.0
		step := e.PbD * 0.1
		at := timescale.NewMJD(50000, 0)
		before := e.TurnsAt(ref, at)
		for range 200 {
			at = at.AddS(step * 86400)
			now := e.TurnsAt(ref, at)
			if moved := now - before; moved < 0.02 || moved > 0.4 {
				t.Fatalf("a tenth of a period moved the count by %v", moved)
			}
			if phase := e.PhaseAt(ref, at); cycles(phase, now) > 1e-9 || phase < 0 || phase >= 1 {
				t.Fatalf("count %v, phase %v", now, phase)
			}
			before = now
		}
		// Over decades the count from the node gains what omega advances.
		later := at.AddS(years * 365.25 * 86400)
		gained := e.TurnsAt(Node, later) - e.TurnsAt(Node, at) - (e.TurnsAt(Periastron, later) - e.TurnsAt(Periastron, at))
		if advanced := e.OmdotDegYr * years / 360; math.Abs(gained-advanced) > 1 {
			t.Fatalf("the node is %v turns ahead, omega advanced %v", gained, advanced)
		}
	})
}

// TestReferencePoints checks the meaning of the three points: what the state
// is where the phase from each is 0.
func TestReferencePoints(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		e, _ := drawOrbit(t)
		for ref, want := range map[Reference]float64{Periastron: 0, Node: 0, Conjunction: 90} {
			at := timescale.NewMJD(60000, 0)
			for range 30 { // bring the phase to a whole number
				at = at.AddS(-math.Remainder(e.TurnsAt(ref, at), 1) * e.PbD * 86400)
			}
			s := e.At(at)
			got := s.Argument
			if ref == Periastron {
				got = s.True
			}
			// The mean anomaly is good to 1e-9 turns; the true one moves faster.
			speed := math.Sqrt(1-e.Ecc*e.Ecc) / math.Pow(1-e.Ecc*s.Eccentric.Cos(), 2)
			if d := 360 * cycles(got.Deg()/360, want/360); d > 1e-6*speed {
				t.Fatalf("at the %s the angle is %v deg off", ref, d)
			}
		}
	})
}

func TestDelaysAreBounded(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		e, _ := drawOrbit(t)
		at := timescale.NewMJD(60000+rapid.IntRange(0, 1000).Draw(t, "day"), rapid.Float64Range(0, 1).Draw(t, "fraction"))
		if r := e.RoemerDelayS(at); math.Abs(r) > e.A1Ls*(1+e.Ecc)+1e-12 {
			t.Fatalf("Roemer delay %v of an orbit of %v light-seconds", r, e.A1Ls)
		}
		shapiro := e.ShapiroDelayS(at)
		if (e.M2Msun == 0 || e.Sini == 0) != (shapiro == 0) && math.Abs(shapiro) > 0 {
			t.Fatalf("Shapiro delay %v with companion %v and inclination %v", shapiro, e.M2Msun, e.Sini)
		}
		if most := 2 * SunMassS * e.M2Msun * 40; math.Abs(shapiro) > most {
			t.Fatalf("Shapiro delay %v", shapiro)
		}
	})
}
