package sky

import (
	"math"
	"testing"
	"time"

	"cadencewright/astro"
	"cadencewright/astro/timescale"
)

// Examples are those of J. Meeus, Astronomical Algorithms, 2nd ed. 1998, by
// their number there; "ERFA" marks what that library's own test program
// (t_erfa_c.c) expects.

func hms(h, m, s float64) astro.Angle { return astro.FromHours(h + m/60 + s/3600) }

func dms(sign, d, m, s float64) astro.Angle { return astro.FromDeg(sign * (d + m/60 + s/3600)) }

// ttMJD is a Terrestrial Time in two parts.
func ttMJD(jde float64) timescale.MJD {
	day := math.Floor(jde - 2400000.5)
	return timescale.NewMJD(int(day), jde-2400000.5-day)
}

// utcOf is the UTC of a TT, given TAI-UTC.
func utcOf(tt time.Time, taiUTC float64) time.Time {
	return tt.Add(-time.Duration((taiUTC + timescale.TTMinusTAIS) * float64(time.Second)))
}

func wantDeg(t *testing.T, what string, got, want, allowed float64) {
	t.Helper()
	if d := math.Abs(math.Remainder(got-want, 360)); !(d <= allowed) {
		t.Errorf("%s: %.6f deg, want %.6f, %.2g allowed", what, got, want, allowed)
	}
}

// Venus over the US Naval Observatory, whose longitude the book counts
// westward and whose azimuth it counts from the south.
func TestHorizontalExample(t *testing.T) {
	venus := astro.Spherical(hms(23, 9, 16.641), dms(-1, 6, 43, 11.61))
	washington := astro.Geodetic{Lon: -hms(5, 8, 15.7), Lat: dms(1, 38, 55, 17)} // 77 deg 3 min 56 s as the book computes with it
	lst, err := timescale.LST(time.Date(1987, 4, 10, 19, 21, 0, 0, time.UTC), 0, washington.Lon)
	if err != nil {
		t.Fatal(err)
	}
	p := over(venus, lst, washington.Lat)
	wantDeg(t, "13.b hour angle", p.HADeg, 64.352133, 2e-6)
	wantDeg(t, "13.b azimuth", p.AzDeg, 68.0337+180, 6e-5)
	wantDeg(t, "13.b elevation", p.ElDeg, 15.1249, 6e-5)
}

func TestHourAngleToHorizonERFA(t *testing.T) {
	const ha, dec, lat = 1.1, 1.2, 0.3
	p := over(astro.Spherical(-ha, dec), 0, lat)
	wantDeg(t, "ERFA hd2ae azimuth", p.AzDeg, astro.Angle(5.916889243730066194).Deg(), 1e-12)
	wantDeg(t, "ERFA hd2ae elevation", p.ElDeg, astro.Angle(0.4472186304990486228).Deg(), 1e-12)
	wantDeg(t, "ERFA hd2pa", p.ParallacticDeg, astro.Angle(1.906227428001995580).Deg(), 1e-12)
}

// Theta Persei on 2028 November 13.19 TD; the place by Ron and Vondrak's
// aberration, as here. The book adds nutation to first order.
func TestApparentPlaceExample(t *testing.T) {
	star := astro.Star{RA: hms(2, 44, 11.986), Dec: dms(1, 49, 13, 42.48), PosEpochMJD: 51544.5, PMDecMasYr: -89.5}
	star.PMRAMasYr = 0.03425 * 15000 * star.Dec.Cos() // printed in seconds of time
	f := newFrame(ttMJD(2462088.69))
	d := f.apparent(star)
	wantDeg(t, "23.b right ascension", d.Lon().Deg(), hms(2, 46, 14.392).Deg(), 0.0012*15/3600)
	wantDeg(t, "23.b declination", d.Lat().Deg(), dms(1, 49, 21, 7.45).Deg(), 0.015/3600)
	// 23.a, the simpler theory of the Sun's longitude.
	wantDeg(t, "23.a right ascension", d.Lon().Deg(), hms(2, 46, 14.390).Deg(), 0.003*15/3600)
	wantDeg(t, "23.a declination", d.Lat().Deg(), dms(1, 49, 21, 7.45).Deg(), 0.03/3600)
}

// The relativistic aberration that ERFA's own test of ab expects, but for the
// Sun's potential and terms of the third order.
func TestAberrationERFA(t *testing.T) {
	v := astro.Vec3{2.1044018893653786e-5, -8.9108923304429319e-5, -3.8633714797716569e-5}
	f := frame{velocity: v}
	got := f.aberrate(astro.Vec3{-0.76321968546737951, -0.60869453983060384, -0.21676408580639883})
	want := astro.Vec3{-0.7631631094219556269, -0.6087553082505590832, -0.2167926269368471279}
	if d := got.AngleTo(want).Arcsec(); d > 0.001 {
		t.Errorf("aberration is off by %.5f arcsec", d)
	}
}

// Venus at Boston, 1988 March 20: the hour angle of the horizon, from which
// the book's rising, transit and setting follow.
func TestHourAngleOfLimitExample(t *testing.T) {
	c := crossing{site: astro.Geodetic{Lat: astro.FromDeg(42.3333)}, sinEl: math.Sin(-0.5667 * math.Pi / 180)}
	h, ok := c.hourAngleOf(astro.FromDeg(18.44092))
	if !ok {
		t.Fatal("15.a: Venus neither rises nor sets")
	}
	wantDeg(t, "15.a", h.Deg(), 108.5344, 6e-5)
	// m0 = 0.81965, m1 = m0 - H/360 = 0.51817, m2 = 1.12113.
	m0 := (41.73129 + 71.0833 - 177.74208) / 360
	wantDeg(t, "15.a transit", (m0+1)*360, 0.81965*360, 0.004)
	wantDeg(t, "15.a rising", (m0+1)*360-h.Deg(), 0.51817*360, 0.004)
	wantDeg(t, "15.a setting", m0*360+h.Deg(), 0.12113*360, 0.004)
}

// 1992 October 13.0 TD by the complete theory (page 165; 25.b has the same to
// 0.02 arcsec).
func TestApparentSunExample(t *testing.T) {
	s, err := Sun(utcOf(time.Date(1992, 10, 13, 0, 0, 0, 0, time.UTC), 27))
	if err != nil {
		t.Fatal(err)
	}
	wantDeg(t, "25.b right ascension", s.RADeg, hms(13, 13, 30.749).Deg(), 10.0/3600)
	wantDeg(t, "25.b declination", s.DecDeg, dms(-1, 7, 47, 1.74).Deg(), 10.0/3600)
	if r := s.DistanceAU(); math.Abs(r-0.99760775) > 1e-5 {
		t.Errorf("25.b distance: %.8f au, want 0.99760775", r)
	}
}

// 1992 April 12.0 TD.
func TestApparentMoonExample(t *testing.T) {
	m, err := Moon(utcOf(time.Date(1992, 4, 12, 0, 0, 0, 0, time.UTC), 26))
	if err != nil {
		t.Fatal(err)
	}
	wantDeg(t, "47.a right ascension", m.RADeg, 134.688470, 3e-6)
	wantDeg(t, "47.a declination", m.DecDeg, 13.768368, 3e-6)
	if math.Abs(m.DistanceKm-368409.7) > 0.1 {
		t.Errorf("47.a distance: %.2f km, want 368409.7", m.DistanceKm)
	}
}

// Table 27.E of the book (from memory): equinoxes and solstices of 2000 in TD.
// Ten seconds of arc are four minutes of the Sun's way.
func TestSeasons(t *testing.T) {
	for _, c := range []struct {
		tt  time.Time
		lon float64
	}{
		{time.Date(2000, 3, 20, 7, 36, 19, 0, time.UTC), 0},
		{time.Date(2000, 6, 21, 1, 48, 46, 0, time.UTC), 90},
		{time.Date(2000, 9, 22, 17, 28, 40, 0, time.UTC), 180},
		{time.Date(2000, 12, 21, 13, 38, 30, 0, time.UTC), 270},
	} {
		s, err := Sun(utcOf(c.tt, 32))
		if err != nil {
			t.Fatal(err)
		}
		eps := dms(1, 23, 26, 15) // true obliquity in 2000, to some arcsec
		ecliptic := astro.RotX(eps).Apply(astro.Spherical(astro.FromDeg(s.RADeg), astro.FromDeg(s.DecDeg)))
		wantDeg(t, c.tt.Format("longitude on 2 Jan 2006"), ecliptic.Lon().Deg(), c.lon, 10.0/3600)
	}
}

func TestSiteVectorERFA(t *testing.T) {
	// gd2gc, WGS84, in metres; sidereal time stands for the longitude.
	got := siteVector(astro.Geodetic{Lat: -0.5, HeightM: 2500}, 3.1)
	want := astro.Vec3{-5599.000557704994, 233.01167223479203, -3040.909470698336}
	if d := got.Add(want.Scale(-1)).Norm(); d > 1e-9 {
		t.Errorf("the site is off by %g km", d)
	}
}

// Two total eclipses of the Sun at their greatest (NASA's tables, from memory):
// seen from there the Moon stands before the Sun's centre to within an
// arcminute or so.
func TestEclipses(t *testing.T) {
	for _, c := range []struct {
		name             string
		ut               time.Time
		latDeg, lonDeg   float64
		dut1, sunElAbout float64
	}{
		{"2017 August 21, Kentucky", time.Date(2017, 8, 21, 18, 25, 32, 0, time.UTC), 36.97, -87.67, 0.35, 64},
		{"2027 August 2, Upper Egypt", time.Date(2027, 8, 2, 10, 6, 38, 0, time.UTC), 25.5, 33.2, 0, 82},
	} {
		site := astro.Geodetic{Lon: astro.FromDeg(c.lonDeg), Lat: astro.FromDeg(c.latDeg)}
		s, err := SunOver(site, c.ut, c.dut1)
		if err != nil {
			t.Fatal(err)
		}
		m, err := MoonOver(site, c.ut, c.dut1)
		if err != nil {
			t.Fatal(err)
		}
		apart := astro.Spherical(astro.FromDeg(s.AzDeg), astro.FromDeg(s.ElDeg)).AngleTo(astro.Spherical(astro.FromDeg(m.AzDeg), astro.FromDeg(m.ElDeg)))
		if apart.Arcsec() > 90 {
			t.Errorf("%s: Sun and Moon are %.0f arcsec apart", c.name, apart.Arcsec())
		}
		if math.Abs(s.ElDeg-c.sunElAbout) > 1 {
			t.Errorf("%s: the Sun stands at %.1f deg, want about %g", c.name, s.ElDeg, c.sunElAbout)
		}
		// A total eclipse needs a Moon that looks larger than the Sun.
		if moonDeg, sunDeg := 2*1737.4/m.DistanceKm, 2*695700/s.DistanceKm; moonDeg <= sunDeg {
			t.Errorf("%s: the Moon looks smaller than the Sun", c.name)
		}
	}
}
