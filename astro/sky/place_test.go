package sky_test

import (
	"errors"
	"math"
	"testing"
	"time"

	"pgregory.net/rapid"

	"cadencewright/astro"
	"cadencewright/astro/sky"
)

func finite(p sky.Place) bool {
	for _, x := range []float64{p.AzDeg, p.ElDeg, p.HADeg, p.RADeg, p.DecDeg, p.SunDeg, p.ParallacticDeg} {
		if math.IsNaN(x) || math.IsInf(x, 0) {
			return false
		}
	}
	return p.AzDeg >= 0 && p.AzDeg < 360 && math.Abs(p.ElDeg) <= 90 && p.HADeg > -180 && p.HADeg <= 180 && p.RADeg >= 0 && p.RADeg < 360
}

func observe(t interface{ Fatal(...any) }, site astro.Geodetic, star astro.Star, at time.Time) sky.Place {
	p, err := sky.Observe(site, star, at, 0.2)
	if err != nil {
		t.Fatal(err)
	}
	return p
}

// bringToZenith moves a star until it stands at the zenith.
func bringToZenith(t *testing.T, site astro.Geodetic, star astro.Star, at time.Time) astro.Star {
	for range 8 {
		p := observe(t, site, star, at)
		star.RA += astro.FromDeg(p.HADeg)
		star.Dec += astro.FromDeg(site.Lat.Deg() - p.DecDeg)
	}
	return star
}

// At the very zenith an arc sine of a rounded sum is NaN one time in ten.
func TestZenithStaysFinite(t *testing.T) {
	at := time.Date(2027, 3, 1, 5, 0, 0, 0, time.UTC)
	for lat := -80.0; lat <= 80; lat += 5 {
		site := astro.Geodetic{Lon: astro.FromDeg(20), Lat: astro.FromDeg(lat)}
		star := bringToZenith(t, site, astro.Star{RA: 1, Dec: site.Lat, PosEpochMJD: 51544.5}, at)
		p := observe(t, site, star, at)
		if !finite(p) || p.ElDeg < 89.99999 {
			t.Errorf("latitude %g: at the zenith %+v", lat, p)
		}
		w, err := sky.NewWindow(site, at.Add(-time.Minute), time.Second, 121, 0.2)
		if err != nil {
			t.Fatal(err)
		}
		var tr sky.Track
		w.Track(star, &tr)
		for i := range tr.ElDeg {
			if !(tr.ElDeg[i] > 89 && tr.ElDeg[i] <= 90) || !(tr.AzDeg[i] >= 0 && tr.AzDeg[i] < 360) {
				t.Fatalf("latitude %g: sample %d stands at az %g, el %g", lat, i, tr.AzDeg[i], tr.ElDeg[i])
			}
		}
	}
}

func TestPolesStayFinite(t *testing.T) {
	at := time.Date(2027, 3, 1, 5, 0, 0, 0, time.UTC)
	for _, lat := range []float64{-90, -50, 0, 50, 90} {
		for _, dec := range []float64{-90, 90} {
			site := astro.Geodetic{Lon: astro.FromDeg(20), Lat: astro.FromDeg(lat)}
			p := observe(t, site, astro.Star{Dec: astro.FromDeg(dec), PosEpochMJD: 51544.5, PMRAMasYr: 5}, at)
			// Precession has taken the pole 0.15 deg away by 2027.
			if want := lat * dec / 90; !finite(p) || math.Abs(p.ElDeg-want) > 0.2 {
				t.Errorf("pole %g from latitude %g: %+v", dec, lat, p)
			}
		}
	}
}

// Right ascension 0h is no place to lose a turn in.
func TestAcrossRightAscensionZero(t *testing.T) {
	at := time.Date(2027, 3, 1, 5, 0, 0, 0, time.UTC)
	site := astro.Geodetic{Lon: astro.FromDeg(20), Lat: astro.FromDeg(-31)}
	before := observe(t, site, astro.Star{RA: astro.FromDeg(359.65), Dec: 0.2, PosEpochMJD: 51544.5}, at)
	w, err := sky.NewWindow(site, at, time.Hour, 48, 0.2)
	if err != nil {
		t.Fatal(err)
	}
	var last, tr sky.Track
	w.Track(astro.Star{RA: astro.FromDeg(359.64), Dec: 0.2, PosEpochMJD: 51544.5}, &last)
	for ra := 359.65; ra < 360.4; ra += 0.01 {
		star := astro.Star{RA: astro.FromDeg(ra), Dec: 0.2, PosEpochMJD: 51544.5}
		p := observe(t, site, star, at)
		if !finite(p) || apart(p.AzDeg, p.ElDeg, before.AzDeg, before.ElDeg) > 40 {
			t.Fatalf("right ascension %g: %+v after %+v", ra, p, before)
		}
		before = p
		w.Track(star, &tr)
		for i := range tr.HADeg {
			if d := math.Abs(math.Remainder(tr.HADeg[i]-last.HADeg[i]+0.01, 360)); d > 1e-4 {
				t.Fatalf("right ascension %g, sample %d: the hour angle jumps by %g deg", ra, i, d)
			}
		}
		last, tr = tr, last
	}
}

// From azimuth and elevation back to hour angle and declination by the inverse
// formulas (Meeus, chapter 13): tan H = sin A/(cos A sin phi + tan h cos phi).
func TestHorizonTurnsBack(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		site, star, at := drawSite(t), drawStar(t), drawTime(t)
		p := observe(t, site, star, at)
		if !finite(p) {
			t.Fatalf("%+v", p)
		}
		a, h := astro.FromDeg(p.AzDeg+180), astro.FromDeg(p.ElDeg) // the book counts azimuth from the south
		dec := math.Asin(site.Lat.Sin()*h.Sin() - site.Lat.Cos()*h.Cos()*a.Cos())
		ha := math.Atan2(a.Sin()*h.Cos(), a.Cos()*h.Cos()*site.Lat.Sin()+h.Sin()*site.Lat.Cos())
		if d := apart(ha*180/math.Pi, dec*180/math.Pi, p.HADeg, p.DecDeg); d > 0.01 {
			t.Errorf("hour angle and declination come back %.4f arcsec off", d)
		}
	})
}

// East of the meridian a star stands in the east, its hour angle and parallactic
// angle negative; west of it all are turned.
func TestSidesOfTheMeridian(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		p := observe(t, drawSite(t), drawStar(t), drawTime(t))
		if math.Abs(p.HADeg) < 0.01 || math.Abs(p.HADeg) > 179.99 {
			return
		}
		east := p.HADeg < 0
		if (p.AzDeg > 0 && p.AzDeg < 180) != east {
			t.Errorf("hour angle %g deg at azimuth %g", p.HADeg, p.AzDeg)
		}
		if (p.ParallacticDeg < 0) != east {
			t.Errorf("hour angle %g deg with parallactic angle %g", p.HADeg, p.ParallacticDeg)
		}
	})
}

// The whole of aberration, precession and nutation since 2000: a star's
// apparent place is never further from its ICRS place than these carry it.
func TestApparentPlaceStaysNear(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		star, at := drawStar(t), drawTime(t)
		p := observe(t, drawSite(t), star, at)
		years := float64(at.Year()) + 1 - 2000
		allowed := years*50.3 + 21 + 18 + years*0.3 // arcsec
		if d := apart(p.RADeg, p.DecDeg, star.RA.Deg(), star.Dec.Deg()); d > allowed {
			t.Errorf("%.1f arcsec from its ICRS place in %d, at most %.1f expected", d, at.Year(), allowed)
		}
	})
}

// A star placed on the Sun is on the Sun.
func TestSunSeparation(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		at := drawTime(t)
		s, err := sky.Sun(at)
		if err != nil {
			t.Fatal(err)
		}
		star := drawStar(t)
		p := observe(t, drawSite(t), star, at)
		if want := apart(p.RADeg, p.DecDeg, s.RADeg, s.DecDeg); math.Abs(p.SunDeg*3600-want) > 0.01 {
			t.Errorf("separation %.3f arcsec, the Sun's own place says %.3f", p.SunDeg*3600, want)
		}
		if s.DistanceAU() < 0.983 || s.DistanceAU() > 1.0169 {
			t.Errorf("the Sun is %.4f au away", s.DistanceAU())
		}
	})
}

func TestObserveRefuses(t *testing.T) {
	good := time.Date(2027, 1, 1, 0, 0, 0, 0, time.UTC)
	for _, c := range []struct {
		name string
		site astro.Geodetic
		at   time.Time
		dut1 float64
	}{
		{"before 1972", astro.Geodetic{}, time.Date(1971, 12, 31, 23, 59, 59, 0, time.UTC), 0},
		{"after 2099", astro.Geodetic{}, time.Date(2100, 1, 1, 0, 0, 0, 0, time.UTC), 0},
		{"latitude", astro.Geodetic{Lat: astro.FromDeg(-90.1)}, good, 0},
		{"longitude", astro.Geodetic{Lon: astro.Angle(math.Inf(1))}, good, 0},
		{"UT1-UTC", astro.Geodetic{}, good, 37},
	} {
		_, e1 := sky.Observe(c.site, astro.Star{}, c.at, c.dut1)
		_, e2 := sky.SunOver(c.site, c.at, c.dut1)
		_, e3 := sky.MoonOver(c.site, c.at, c.dut1)
		_, _, e4 := sky.UpperTransit(c.site, astro.Star{}, c.at, c.dut1)
		_, _, e5 := sky.Crossings(c.site, astro.Star{}, 10, c.at, time.Hour, c.dut1)
		for i, err := range []error{e1, e2, e3, e4, e5} {
			var r *astro.RangeError
			if !errors.As(err, &r) {
				t.Errorf("%s, function %d: %v, wanted an error of range", c.name, i+1, err)
			}
		}
	}
}
