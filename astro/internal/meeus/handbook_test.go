package meeus

import (
	"math"
	"testing"

	"cadencewright/astro"
)

// Examples are those of J. Meeus, Astronomical Algorithms, 2nd ed. 1998, by
// their number there; "ERFA" marks what that library's own test program
// (t_erfa_c.c) expects. Each check has half a unit of the last digit printed,
// or the accuracy that the theory promises.

func hms(h, m, s float64) astro.Angle { return astro.FromHours(h + m/60 + s/3600) }

func dms(sign, d, m, s float64) astro.Angle { return astro.FromDeg(sign * (d + m/60 + s/3600)) }

// near compares two angles, whole turns aside.
func near(t *testing.T, what string, got, want, allowed astro.Angle) {
	t.Helper()
	if d := math.Abs((got - want).WrapSigned().Rad()); !(d <= allowed.Rad()) {
		t.Errorf("%s: %.9f rad, want %.9f: off by %.4g arcsec, %.4g allowed", what, got, want, astro.Angle(d).Arcsec(), allowed.Arcsec())
	}
}

const (
	tenthOfMs = astro.Angle(0.00005 / 86400 * 2 * math.Pi) // half of the last digit of a time printed to 0.1 ms
	april1987 = 2446895.5                                  // 1987 April 10, 0h
	nov2028   = 2462088.69                                 // 2028 November 13.19 TD
	oct1992   = 2448908.5                                  // 1992 October 13, 0h TD
)

func TestSiderealTimeExamples(t *testing.T) {
	near(t, "12.a mean", MeanSidereal(april1987), hms(13, 10, 46.3668), tenthOfMs)
	near(t, "12.a apparent", ApparentSidereal(april1987), hms(13, 10, 46.1351), tenthOfMs)
	// 19:21:00 UT; the Julian Date as one number is good to 20 us.
	near(t, "12.b mean", MeanSidereal(april1987+(19+21.0/60)/24), hms(8, 34, 57.0896), tenthOfMs+astro.Angle(2e-5/86400*2*math.Pi))
	near(t, "ERFA gmst82", MeanSidereal(2400000.5+53736), 1.754174981860675096, 1e-9)
	near(t, "ERFA gst94", ApparentSidereal(2400000.5+53736), 1.754166136020645203, 1e-8)
}

func TestNutationExamples(t *testing.T) {
	dpsi, deps, eps := Nutation(april1987)
	half := astro.FromArcsec(0.0006)
	near(t, "22.a in longitude", dpsi, astro.FromArcsec(-3.788), half)
	near(t, "22.a in obliquity", deps, astro.FromArcsec(9.443), half)
	near(t, "22.a mean obliquity", eps, dms(1, 23, 26, 27.407), half)
	near(t, "22.a true obliquity", eps+deps, dms(1, 23, 26, 36.850), half)

	// The whole series of 106 terms; the book leaves out the smallest 43.
	dpsi, deps, _ = Nutation(2400000.5 + 53736)
	near(t, "ERFA nut80 in longitude", dpsi, -0.9643658353226563966e-5, astro.FromArcsec(0.003))
	near(t, "ERFA nut80 in obliquity", deps, 0.4060051006879713322e-4, astro.FromArcsec(0.003))
	_, _, eps = Nutation(2400000.5 + 54388)
	near(t, "ERFA obl80", eps, 0.4090751347643816218, astro.FromArcsec(0.001))
}

func TestPrecessionExamples(t *testing.T) {
	// Theta Persei, moved by its proper motion of 28.87 years first.
	years := (nov2028 - 2451545) / 365.25
	ra := hms(2, 44, 11.986) + hms(0, 0, 0.03425*years)
	dec := dms(1, 49, 13, 42.48) + astro.FromArcsec(-0.0895*years)
	got := Precession(nov2028).Apply(astro.Spherical(ra, dec))
	near(t, "21.b right ascension", got.Lon(), hms(2, 46, 11.331), hms(0, 0, 0.0006))
	near(t, "21.b declination", got.Lat(), dms(1, 49, 20, 54.54), astro.FromArcsec(0.006))

	want := astro.Mat3{ // ERFA pmat76
		{0.9999995504328350733, 0.8696632209480960785e-3, 0.3779153474959888345e-3},
		{-0.8696632209485112192e-3, 0.9999996218428560614, -0.1643284776111886407e-6},
		{-0.3779153474950335077e-3, -0.1643306746147366896e-6, 0.9999999285899790119},
	}
	m := Precession(2400000.5 + 50123.9999)
	for i := range 3 {
		for j := range 3 {
			if math.Abs(m[i][j]-want[i][j]) > 1e-12 {
				t.Errorf("ERFA pmat76 [%d][%d]: %.15f, want %.15f", i, j, m[i][j], want[i][j])
			}
		}
	}
}

// Polaris, page 135: the first-order formulas fail here, the rotation does not.
func TestPrecessionNearThePole(t *testing.T) {
	for _, c := range []struct {
		jde     float64
		ra, dec astro.Angle
	}{
		{2415020.3135, hms(1, 22, 33.90), dms(1, 88, 46, 26.18)}, // B1900
		{2469807.5, hms(3, 48, 16.43), dms(1, 89, 27, 15.38)},    // J2050
		{2488070, hms(5, 53, 29.17), dms(1, 89, 32, 22.18)},      // J2100
	} {
		years := (c.jde - 2451545) / 365.25
		ra := hms(2, 31, 48.704) + hms(0, 0, 0.19877*years)
		dec := dms(1, 89, 15, 50.72) + astro.FromArcsec(-0.0152*years)
		got := Precession(c.jde).Apply(astro.Spherical(ra, dec))
		if off := got.AngleTo(astro.Spherical(c.ra, c.dec)).Arcsec(); off > 0.02 {
			t.Errorf("at JDE %.1f Polaris is off by %.3f arcsec", c.jde, off)
		}
	}
}

// Example 23.b: the velocity's effect on Theta Persei is the aberration printed.
func TestAberrationExample(t *testing.T) {
	ra, dec := hms(2, 44, 12.9747), dms(1, 49, 13, 39.896)
	v := EarthVelocity(nov2028)
	east := astro.Vec3{-ra.Sin(), ra.Cos(), 0}
	north := astro.Vec3{-dec.Sin() * ra.Cos(), -dec.Sin() * ra.Sin(), dec.Cos()}
	near(t, "23.b right ascension", astro.Angle(v.Dot(east)/dec.Cos()), 0.000145252, 1e-9)
	near(t, "23.b declination", astro.Angle(v.Dot(north)), 0.000032723, 1e-9)
}

func TestSunExamples(t *testing.T) {
	sun := SunEcliptic(oct1992)
	// 25.b, by the long series, its numbers from memory. Geometric, so that the
	// aberration of 20.539 arcsec is not yet off the longitude.
	near(t, "25.b longitude", sun.Lon(), astro.FromDeg(199.907372), astro.FromArcsec(10))
	near(t, "25.b latitude", sun.Lat(), astro.FromArcsec(0.62), astro.FromArcsec(1))
	if r := sun.Norm(); math.Abs(r-0.99760775) > 1e-5 {
		t.Errorf("25.b radius vector: %.8f au, want 0.99760775", r)
	}
}

func TestMoonExample(t *testing.T) {
	m := MoonEcliptic(2448724.5) // 1992 April 12, 0h TD
	near(t, "47.a longitude", m.Lon(), astro.FromDeg(133.162655), astro.FromDeg(1e-6))
	near(t, "47.a latitude", m.Lat(), astro.FromDeg(-3.229126), astro.FromDeg(1e-6))
	if km := m.Norm(); math.Abs(km-368409.7) > 0.06 {
		t.Errorf("47.a distance: %.2f km, want 368409.7", km)
	}
}
