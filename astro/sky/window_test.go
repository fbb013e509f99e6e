package sky_test

import (
	"math"
	"testing"
	"time"

	"pgregory.net/rapid"

	"cadencewright/astro"
	"cadencewright/astro/sky"
)

// The fast path against the careful one at any sample of any window, poles
// and zenith included: 0.05 arcsec for the star, 1 for the Sun.
func TestTrackEqualsObserve(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		site, star, start := drawSite(t), drawStar(t), drawTime(t)
		n := rapid.IntRange(1, 3000).Draw(t, "n")
		step := time.Duration(rapid.IntRange(1, 600).Draw(t, "step")) * time.Second
		w, err := sky.NewWindow(site, start, step, n, 0.3)
		if err != nil {
			t.Fatal(err)
		}
		var tr sky.Track
		w.Track(star, &tr)
		sin := w.SinElevation(star, nil)
		i := rapid.IntRange(0, n-1).Draw(t, "i")
		p, err := sky.Observe(site, star, start.Add(time.Duration(i)*step), 0.3)
		if err != nil {
			t.Fatal(err)
		}
		if d := apart(tr.AzDeg[i], tr.ElDeg[i], p.AzDeg, p.ElDeg); d > 0.05 {
			t.Errorf("place off by %.3f arcsec", d)
		}
		if d := apart(tr.HADeg[i], tr.DecDeg[i], p.HADeg, p.DecDeg); d > 0.05 {
			t.Errorf("hour angle and declination off by %.3f arcsec", d)
		}
		if d := math.Abs(sin[i] - math.Sin(p.ElDeg*math.Pi/180)); d > 3e-7 {
			t.Errorf("sine of the elevation off by %g", d)
		}
		if d := math.Abs(tr.SunDeg[i]-p.SunDeg) * 3600; d > 1 && p.SunDeg > 0.5 {
			t.Errorf("separation from the Sun %.4f deg, %.4f expected", tr.SunDeg[i], p.SunDeg)
		}
		if tr.AzDeg[i] < 0 || tr.AzDeg[i] >= 360 || tr.HADeg[i] <= -180 || tr.HADeg[i] > 180 {
			t.Errorf("azimuth %g or hour angle %g outside its range", tr.AzDeg[i], tr.HADeg[i])
		}
	})
}

// At the zenith and at the pole every number stays finite.
func TestPlacesStayFinite(t *testing.T) {
	at := time.Date(2027, 3, 1, 5, 0, 0, 0, time.UTC)
	site := astro.Geodetic{Lon: astro.FromDeg(20), Lat: astro.FromDeg(50)}
	pole := astro.Star{Dec: math.Pi / 2, PosEpochMJD: 51544.5, PMRAMasYr: 5}
	p, err := sky.Observe(site, pole, at, 0)
	if err != nil {
		t.Fatal(err)
	}
	if math.Abs(p.ElDeg-50) > 0.2 || math.IsNaN(p.AzDeg) || math.IsNaN(p.HADeg) {
		t.Errorf("the pole stands at az %g el %g ha %g", p.AzDeg, p.ElDeg, p.HADeg)
	}
	// A star brought to the very zenith by its declination and right ascension.
	zenith := astro.Star{RA: 1, Dec: site.Lat, PosEpochMJD: 51544.5}
	for range 6 {
		q, err := sky.Observe(site, zenith, at, 0)
		if err != nil {
			t.Fatal(err)
		}
		zenith.RA += astro.FromDeg(q.HADeg)
		zenith.Dec += astro.FromDeg(site.Lat.Deg() - q.DecDeg)
	}
	q, err := sky.Observe(site, zenith, at, 0)
	if err != nil {
		t.Fatal(err)
	}
	if !(q.ElDeg > 89.9999) || math.IsNaN(q.AzDeg) || math.IsNaN(q.ParallacticDeg) {
		t.Errorf("at the zenith: %+v", q)
	}
}

func TestWindowRefuses(t *testing.T) {
	at := time.Date(2027, 1, 1, 0, 0, 0, 0, time.UTC)
	for name, f := range map[string]func() error{
		"no samples": func() error { _, err := sky.NewWindow(astro.Geodetic{}, at, time.Minute, 0, 0); return err },
		"too many":   func() error { _, err := sky.NewWindow(astro.Geodetic{}, at, time.Minute, 1<<20, 0); return err },
		"no step":    func() error { _, err := sky.NewWindow(astro.Geodetic{}, at, 0, 5, 0); return err },
		"before 1972": func() error {
			_, err := sky.NewWindow(astro.Geodetic{}, at.AddDate(-60, 0, 0), time.Minute, 5, 0)
			return err
		},
		"after 2099": func() error {
			_, err := sky.NewWindow(astro.Geodetic{}, at.AddDate(100, 0, 0), time.Minute, 5, 0)
			return err
		},
	} {
		if f() == nil {
			t.Errorf("%s: no error", name)
		}
	}
}
