package sky_test

import (
	"math"
	"testing"
	"time"

	"cadencewright/astro"
	"cadencewright/astro/sky"
	"cadencewright/testdata"
)

func site(r testdata.Row) astro.Geodetic {
	return astro.Geodetic{Lon: astro.FromDeg(r.Num("lon_deg_e")), Lat: astro.FromDeg(r.Num("lat_deg")), HeightM: r.Num("height_m")}
}

func star(r testdata.Row) astro.Star {
	s := astro.Star{RA: astro.FromDeg(r.Num("ra_deg")), Dec: astro.FromDeg(r.Num("dec_deg")), PosEpochMJD: 51544.5}
	if r.Has("pos_epoch_mjd") {
		s.PosEpochMJD = r.Num("pos_epoch_mjd")
		s.PMRAMasYr, s.PMDecMasYr = r.Num("pm_ra_cosdec_mas_yr"), r.Num("pm_dec_mas_yr")
	}
	return s
}

// apart is the angle between two directions in seconds of arc.
func apart(lon1, lat1, lon2, lat2 float64) float64 {
	a := astro.Spherical(astro.FromDeg(lon1), astro.FromDeg(lat1))
	return a.AngleTo(astro.Spherical(astro.FromDeg(lon2), astro.FromDeg(lat2))).Arcsec()
}

// ERFA apco13, atciq, atioq; 5 arcsec on the sky.
func TestObserveAgainstERFA(t *testing.T) {
	azel := testdata.Watch(t, "altaz: place on the sky", "arcsec")
	hadec := testdata.Watch(t, "altaz: hour angle and declination", "arcsec")
	par := testdata.Watch(t, "altaz: parallactic angle times sin(zenith distance) or cos(dec), the smaller", "arcsec")
	for _, r := range testdata.Table(t, "altaz") {
		p, err := sky.Observe(site(r), star(r), r.Time("utc"), r.Num("dut1_s"))
		if err != nil {
			t.Fatalf("%s: %v", r, err)
		}
		azel.Error(r, apart(p.AzDeg, p.ElDeg, r.Num("az_deg"), r.Num("el_deg")), 5)
		hadec.Error(r, apart(p.HADeg, p.DecDeg, r.Num("ha_deg"), r.Num("dec_apparent_deg")), 5)
		// Near the zenith and the pole the angle itself has no meaning.
		weight := math.Min(math.Cos(p.ElDeg*math.Pi/180), math.Cos(p.DecDeg*math.Pi/180))
		d := math.Remainder(p.ParallacticDeg-r.Num("parallactic_deg"), 360)
		par.Error(r, math.Abs(d)*3600*weight, 5)
	}
}

// The fast path must say the same as the careful one, wherever in the window.
func TestTrackAgainstERFA(t *testing.T) {
	azel := testdata.Watch(t, "altaz by window: place on the sky", "arcsec")
	hadec := testdata.Watch(t, "altaz by window: hour angle and declination", "arcsec")
	var tr sky.Track
	for i, r := range testdata.Table(t, "altaz") {
		n := 1 + 97*(i%17)
		at := (i * 31) % n
		w, err := sky.NewWindow(site(r), r.Time("utc").Add(-time.Duration(at)*time.Minute), time.Minute, n, r.Num("dut1_s"))
		if err != nil {
			t.Fatal(err)
		}
		w.Track(star(r), &tr)
		azel.Error(r, apart(tr.AzDeg[at], tr.ElDeg[at], r.Num("az_deg"), r.Num("el_deg")), 5)
		hadec.Error(r, apart(tr.HADeg[at], tr.DecDeg[at], r.Num("ha_deg"), r.Num("dec_apparent_deg")), 5)
	}
}

// epv00 for the Sun (30 arcsec), DE405 for the Moon (30 arcsec, 60 km).
func TestSunAndMoonAgainstERFA(t *testing.T) {
	sun := testdata.Watch(t, "sun_moon: Sun", "arcsec")
	sunDist := testdata.Watch(t, "sun_moon: Sun's distance", "au")
	sunOver := testdata.Watch(t, "sun_moon: Sun over the site", "arcsec")
	moon := testdata.Watch(t, "sun_moon: Moon", "arcsec")
	moonDist := testdata.Watch(t, "sun_moon: Moon's distance", "km")
	moonOver := testdata.Watch(t, "sun_moon: Moon over the site", "arcsec")
	topoDist := testdata.Watch(t, "sun_moon: Moon's distance from the site", "km")
	for _, r := range testdata.Table(t, "sun_moon") {
		s, err := sky.Sun(r.Time("utc"))
		if err != nil {
			t.Fatal(err)
		}
		sun.Error(r, apart(s.RADeg, s.DecDeg, r.Num("sun_ra_deg"), r.Num("sun_dec_deg")), 30)
		sunDist.Check(r, s.DistanceAU(), r.Num("sun_dist_au"), 5e-5)
		m, err := sky.Moon(r.Time("utc"))
		if err != nil {
			t.Fatal(err)
		}
		moon.Error(r, apart(m.RADeg, m.DecDeg, r.Num("moon_ra_deg"), r.Num("moon_dec_deg")), 30)
		moonDist.Check(r, m.DistanceKm, r.Num("moon_dist_km"), 60)
		so, err := sky.SunOver(site(r), r.Time("utc"), r.Num("dut1_s"))
		if err != nil {
			t.Fatal(err)
		}
		sunOver.Error(r, apart(so.AzDeg, so.ElDeg, r.Num("sun_az_deg"), r.Num("sun_el_deg")), 30)
		mo, err := sky.MoonOver(site(r), r.Time("utc"), r.Num("dut1_s"))
		if err != nil {
			t.Fatal(err)
		}
		moonOver.Error(r, apart(mo.AzDeg, mo.ElDeg, r.Num("moon_az_deg"), r.Num("moon_el_deg")), 30)
		topoDist.Check(r, mo.DistanceKm, r.Num("moon_topo_dist_km"), 60)
	}
}

func TestSolarElongationAgainstERFA(t *testing.T) {
	sep := testdata.Watch(t, "solar_elongation", "deg")
	for _, r := range testdata.Table(t, "solar_elongation") {
		p, err := sky.Observe(astro.Geodetic{}, star(r), r.Time("utc"), 0)
		if err != nil {
			t.Fatal(err)
		}
		sep.Check(r, p.SunDeg, r.Num("elongation_deg"), 0.01)
	}
}
