package orbit

import (
	"math"
	"testing"

	"cadencewright/astro/timescale"
)

// TestPublishedRelativity holds the relativistic formulas against published
// values of measured binaries.
func TestPublishedRelativity(t *testing.T) {
	tests := []struct {
		name, source string
		got, want    float64
		tol          float64
	}{
		{"advance of B1913+16", "Weisberg & Huang 2016: masses 1.438 + 1.390, measured 4.226585",
			PeriastronAdvanceDegYr(0.322997448918, 0.617134, 1.438, 1.390), 4.2262, 5e-4},
		{"advance of J0737-3039A", "Kramer et al. 2021: masses 1.338185 + 1.248868, measured 16.899323",
			PeriastronAdvanceDegYr(0.1022515592973, 0.087777023, 1.338185, 1.248868), 16.8993, 1e-3},
		{"mass function of J0737-3039A", "Kramer et al. 2006: 0.29096571", MassFunctionMsun(0.10225156248, 1.415032), 0.29096571, 2e-7},
		{"stigma of sin i 0.8", "Freire & Wex 2010: 0.8/(1+0.6)", Stigma(0.8), 0.5, 1e-15},
		{"h3 of 0.3 Msun at sin i 0.8", "Freire & Wex 2010: 0.1847 us", H3Us(0.3, 0.8), 0.1847, 5e-5},
	}
	for _, tt := range tests {
		if d := math.Abs(tt.got - tt.want); !(d <= tt.tol) {
			t.Errorf("%s: got %v, want %v within %v (%s)", tt.name, tt.got, tt.want, tt.tol, tt.source)
		}
	}
}

// TestOrthometricInverts recovers mass and inclination from h3 and h4 by the
// relations of Freire & Wex 2010, eqs 22-23.
func TestOrthometricInverts(t *testing.T) {
	m2, s := 0.42, 0.93
	h3 := H3Us(m2, s) * 1e-6
	h4 := h3 * Stigma(s)
	if got := 2 * h3 * h4 / (h3*h3 + h4*h4); math.Abs(got-s) > 1e-14 {
		t.Errorf("sin i %v, want %v", got, s)
	}
	if got := h3 * h3 * h3 * h3 / (h4 * h4 * h4 * SunMassS); math.Abs(got-m2) > 1e-14 {
		t.Errorf("companion %v, want %v", got, m2)
	}
}

// TestShapiroDelayOverAnOrbit holds the swing of the Shapiro delay against
// that of two edge-on binaries (elements and masses: Demorest et al. 2010,
// Kramer et al. 2021).
func TestShapiroDelayOverAnOrbit(t *testing.T) {
	elements, _ := binaries(t)
	for name, want := range map[string][2]float64{"PSR J1614-2230": {-3.41, 45.12}, "PSR J0737-3039A": {-9.5, 119.8}} {
		e := elements[name]
		low, high := math.Inf(1), math.Inf(-1)
		for k := range 200_000 {
			at := timescale.NewMJD(61000, 0).AddS(e.PbD * 86400 * float64(k) / 200_000)
			d := 1e6 * e.ShapiroDelayS(at)
			low, high = min(low, d), max(high, d)
		}
		if math.Abs(low-want[0]) > 0.15 || math.Abs(high-want[1]) > 0.15 {
			t.Errorf("%s: %.2f to %.2f us, want %v", name, low, high, want)
		}
	}
}

func TestUnknownCompanionDelaysNothing(t *testing.T) {
	p := ordinary()
	p.Sini = 0
	if got := mustKepler(t, p).ShapiroDelayS(timescale.NewMJD(61000, 0.5)); got != 0 {
		t.Errorf("got %v", got)
	}
}

func TestShapiroDelayStaysFinite(t *testing.T) {
	e, err := ELL1(ELL1Params{PbD: 1, A1Ls: 3, TascMJD: 61000, M2Msun: 0.5, Sini: 1})
	if err != nil {
		t.Fatal(err)
	}
	// A quarter of an orbit after the node the pulsar is exactly behind.
	if got := 1e6 * e.ShapiroDelayS(timescale.NewMJD(61000, 0.25)); !(got > 50 && got < 150) {
		t.Errorf("got %v us, want a large but finite delay", got)
	}
}
