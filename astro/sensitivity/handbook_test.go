package sensitivity

import (
	"math"
	"testing"

	"cadencewright/astro"
)

// TestHandbooks holds each formula against a worked or published value, with
// the tolerance that the source's digits allow.
func TestHandbooks(t *testing.T) {
	inf := math.Inf(1)
	radio := Receiver{FreqMHz: 1400, BandwidthMHz: 400, NPol: 2, GainKPerJy: 1, Digitisation: 1}
	tests := []struct {
		name, source string
		got, want    float64
		tol          float64 // absolute
	}{
		{"dispersion, DM 10, 1400 MHz", "Lorimer & Kramer 2005: 4.148808 ms GHz² pc^-1 cm³",
			1e3 * DispersionDelayS(10, 1400, inf), 21.167, 0.001},
		{"dispersion between two bands", "the same, by hand: 4148.808·100·(1/430² - 1/1400²)",
			DispersionDelayS(100, 430, 1400), 2.0321379, 1e-6},
		{"radiometer, 1 h", "Lorimer & Kramer 2005, A1.22: 1 mJy, 1 K/Jy, 30 K, W/P 0.1",
			SNR(SNRRate(1, radio, 30, 0.01, 0.001), 3600), 169.7, 0.05},
		{"TOA of W 0.1 ms at S/N 100", "Lorimer & Kramer 2005, section 8.2: W over S/N",
			TOAUs(OneSecondVariance(1e-4, 100, 0), 1), 1, 1e-12},
		{"jitter of J0437-4715 after 15 min", "Shannon et al. 2014: 50 ns in 1 h, falling as t^-1/2",
			1e3 * JitterUs(0.050, 900), 100, 1e-9},
		{"jitter alone limits a bright pulsar", "Cordes & Shannon 2010",
			TOAUs(OneSecondVariance(1e-4, inf, 0.05), 3600), 0.05, 1e-12},
		{"sky at the Galactic centre, 408 MHz", "Narayan 1987: 25 + 275 K", SkyTempK(0, 0, 408), 300, 1e-9},
		{"sky half way down in l and b", "Narayan 1987: 25 + 275/4", SkyTempK(-42, 3, 408), 93.75, 1e-9},
		{"sky at 1400 MHz from 408", "Lawson et al. 1987: 2.6", SkyTempK(0, 0, 1400) / 300, math.Pow(408.0/1400, 2.6), 1e-12},
		{"system temperature at 30 deg", "sum of the four parts, atmosphere twice that of the zenith",
			SystemTempK(20, 2, 5, 30), 20 + 2.73 + 5 + 4, 1e-12},
		{"spectrum, 1 mJy at 1400, at 800", "Jankowski et al. 2018: mean index -1.6",
			FluxMJy(1, 1400, -1.6, 800), 2.45, 0.005},
		{"scattering of DM 100 at 1 GHz", "Bhat et al. 2004: 13.4 us", 1e6 * BhatScatterS(100, 1000), 13.4, 0.05},
		{"scattering at 2 GHz", "Kolmogorov: 2^-4.4", ScatterS(1, 2000), 0.047366, 1e-6},
		{"scintles", "Cordes & Shannon 2010: (1+0.2·3)(1+0.2·10)", Scintles(3600, 1200, 400, 40, ScintFilling), 4.8, 1e-12},
		{"their scatter", "the same: 46 %", SNRScatter(4.8), 0.456, 0.0005},
		{"solar wind at 90 deg", "Edwards et al. 2006, eqs 29-30: 5 cm^-3, 1400 MHz", SolarWindDelayUs(5, 90, 1, 1400), 0.081, 0.0005},
		{"solar wind at 10 deg", "the same", SolarWindDelayUs(5, 10, 1, 1400), 0.88, 0.005},
		{"solar wind opposite the Sun", "the same: rho/sin(rho) = 1", SolarWindDelayUs(5, 180, 1, 1400), 0.051, 0.0005},
		{"Hellings-Downs at 0", "Hellings & Downs 1983", HellingsDowns(0), 0.5, 0},
		{"Hellings-Downs at 30 deg", "the same", HellingsDowns(30), 0.2116, 0.00005},
		{"Hellings-Downs at 90 deg", "the same", HellingsDowns(90), -0.1449, 0.00005},
		{"Hellings-Downs at 180 deg", "the same", HellingsDowns(180), 0.25, 1e-15},
		{"lowest frequency of 15 years", "1/T: about 2 nHz in 15-year data sets", GWLowestNHz(15), 2.11, 0.005},
		{"highest frequency at 14 days", "1/(2·14 d)", GWHighestNHz(14), 413.36, 0.01},
	}
	for _, tt := range tests {
		t.Run(tt.name, func(t *testing.T) {
			if d := math.Abs(tt.got - tt.want); !(d <= tt.tol) {
				t.Errorf("got %v, want %v within %v (%s)", tt.got, tt.want, tt.tol, tt.source)
			}
		})
	}
}

func TestHellingsDownsHasItsMinimumNear82Degrees(t *testing.T) {
	best, at := 1.0, 0.0
	for a := 0.0; a <= 180; a += 0.1 {
		if c := HellingsDowns(a); c < best {
			best, at = c, a
		}
	}
	if math.Abs(best+0.152) > 0.0005 || math.Abs(at-82) > 1 {
		t.Errorf("minimum %v at %v deg, want -0.152 near 82", best, at)
	}
}

func TestGalactic(t *testing.T) {
	deg := astro.FromDeg
	tests := []struct {
		name, source string
		ra, dec      astro.Angle
		l, b         float64 // degrees
		tolDeg       float64 // on the sky
	}{
		{"north pole", "Hipparcos catalogue, ESA SP-1200, vol. 1, 1.5.3", deg(192.85948), deg(27.12825), 0, 90, 1e-9},
		{"north celestial pole", "the same: l 122.93192", 0, deg(90), 122.93192, 27.12825, 1e-9},
		{"Galactic centre", "origin of the system in J2000, 17h45m37.224s -28°56'10.23\" (Reid & Brunthaler 2004, from memory)",
			astro.FromHours(17 + 45.0/60 + 37.224/3600), deg(-(28 + 56.0/60 + 10.23/3600)), 0, 0, 2e-4},
		{"ERFA's test value", "t_erfa_c.c, t_icrs2g", 5.9338074302227188048671, -1.1784870613579944551540,
			5.5850536063818546461558 * 180 / math.Pi, -45, 1e-12},
		{"Crab nebula", "SIMBAD, ICRS 05 34 31.94 +22 00 52.2 is l 184.5575, b -5.7843",
			astro.FromHours(5 + 34.0/60 + 31.94/3600), deg(22 + 52.2/3600), 184.5575, -5.7843, 1e-3},
	}
	for _, tt := range tests {
		t.Run(tt.name, func(t *testing.T) {
			l, b := Galactic(astro.Star{RA: tt.ra, Dec: tt.dec})
			got := astro.Spherical(l, b)
			want := astro.Spherical(deg(tt.l), deg(tt.b))
			if d := got.AngleTo(want).Deg(); d > tt.tolDeg {
				t.Errorf("got l %v, b %v, %v deg from %v, %v (%s)", l.Deg(), b.Deg(), d, tt.l, tt.b, tt.source)
			}
			if l < 0 || l >= 2*math.Pi {
				t.Errorf("longitude %v is outside [0, 2π)", l)
			}
		})
	}
}

func TestGalacticAxesAreAFrame(t *testing.T) {
	for i := range 3 {
		for j := range 3 {
			want := 0.0
			if i == j {
				want = 1
			}
			if got := toGalactic[i].Dot(toGalactic[j]); math.Abs(got-want) > 1e-15 {
				t.Errorf("axes %d and %d: product %v, want %v", i, j, got, want)
			}
		}
	}
	third := toGalactic[0].Cross(toGalactic[1])
	if third.AngleTo(toGalactic[2]) > 1e-15 {
		t.Error("the axes are left-handed")
	}
}
