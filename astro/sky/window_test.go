package sky_test

import (
	"math"
	"reflect"
	"sync"
	"testing"
	"time"

	"pgregory.net/rapid"

	"cadencewright/astro"
	"cadencewright/astro/sky"
	"cadencewright/astro/timescale"
)

// The fast path against the careful one at any sample of any window: 0.02
// arcsec for the star; for the Sun 1, and what two hours of its way bend close
// to it and to the point opposite.
func TestTrackEqualsObserve(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		site, star, start := drawSite(t), drawStar(t), drawTime(t)
		n := rapid.OneOf(rapid.IntRange(1, 3), rapid.IntRange(1, 600)).Draw(t, "n")
		step := time.Duration(rapid.OneOf(rapid.IntRange(1, 600), rapid.IntRange(3600, 86400)).Draw(t, "step")) * time.Second
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
		if d := apart(tr.AzDeg[i], tr.ElDeg[i], p.AzDeg, p.ElDeg); d > 0.02 {
			t.Errorf("place off by %.3f arcsec", d)
		}
		if d := apart(tr.HADeg[i], tr.DecDeg[i], p.HADeg, p.DecDeg); d > 0.02 {
			t.Errorf("hour angle and declination off by %.3f arcsec", d)
		}
		if d := math.Abs(sin[i] - math.Sin(p.ElDeg*math.Pi/180)); d > 1e-8 {
			t.Errorf("sine of the elevation off by %g", d)
		}
		if d := math.Abs(tr.SunDeg[i]-p.SunDeg) * 3600; d > 1+4/math.Max(math.Min(p.SunDeg, 180-p.SunDeg), 0.02) {
			t.Errorf("separation from the Sun %.5f deg, %.5f expected", tr.SunDeg[i], p.SunDeg)
		}
		if math.Abs(math.Remainder(w.LSTDeg(i)-p.HADeg-p.RADeg, 360)) > 1e-5 && math.Abs(p.DecDeg) < 89 {
			t.Errorf("sidereal time %.6f deg is not hour angle and right ascension %.6f", w.LSTDeg(i), p.HADeg+p.RADeg)
		}
		if tr.AzDeg[i] < 0 || tr.AzDeg[i] >= 360 || tr.HADeg[i] <= -180 || tr.HADeg[i] > 180 {
			t.Errorf("azimuth %g or hour angle %g outside its range", tr.AzDeg[i], tr.HADeg[i])
		}
	})
}

func TestWindowRefuses(t *testing.T) {
	at := time.Date(2027, 1, 1, 0, 0, 0, 0, time.UTC)
	for name, f := range map[string]func() error{
		"long step": func() error { _, err := sky.NewWindow(astro.Geodetic{}, at, 25*time.Hour, 5, 0); return err },
		"latitude": func() error {
			_, err := sky.NewWindow(astro.Geodetic{Lat: astro.FromDeg(91)}, at, time.Minute, 5, 0)
			return err
		},
		"no latitude": func() error {
			_, err := sky.NewWindow(astro.Geodetic{Lat: astro.Angle(math.NaN())}, at, time.Minute, 5, 0)
			return err
		},
		"longitude": func() error {
			_, err := sky.NewWindow(astro.Geodetic{Lon: astro.FromDeg(-400)}, at, time.Minute, 5, 0)
			return err
		},
		"UT1-UTC":    func() error { _, err := sky.NewWindow(astro.Geodetic{}, at, time.Minute, 5, 69.184); return err },
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

// A window may begin and end with the dates that can be used.
func TestWindowReachesBothEndsOfItsDates(t *testing.T) {
	first, last := timescale.First, timescale.Last
	for _, c := range []struct {
		name  string
		start time.Time
		step  time.Duration
		n     int
	}{
		{"one sample at the start", first, time.Minute, 1},
		{"one sample at the end", last.Add(-time.Second), 24 * time.Hour, 1},
		{"the last day", last.Add(-24 * time.Hour), time.Minute, 1440},
		{"the last days, one a day", last.Add(-100 * time.Hour), 24 * time.Hour, 5},
		{"the last minute", last.Add(-time.Minute), time.Second, 60},
	} {
		w, err := sky.NewWindow(benchSite, c.start, c.step, c.n, 0)
		if err != nil {
			t.Errorf("%s: %v", c.name, err)
			continue
		}
		var tr sky.Track
		w.Track(benchStar, &tr)
		at := c.start.Add(time.Duration(c.n-1) * c.step)
		p, err := sky.Observe(benchSite, benchStar, at, 0)
		if err != nil {
			t.Fatal(err)
		}
		if d := apart(tr.AzDeg[c.n-1], tr.ElDeg[c.n-1], p.AzDeg, p.ElDeg); d > 0.02 {
			t.Errorf("%s: off by %.3f arcsec", c.name, d)
		}
	}
	if _, err := sky.NewWindow(benchSite, last.Add(-time.Minute), time.Second, 61, 0); err == nil {
		t.Error("a window that ends on the first instant that cannot be used: no error")
	}
}

// A used Track must not show in the next star's, whatever its length.
func TestTrackReusesItsColumns(t *testing.T) {
	long, err := sky.NewWindow(benchSite, benchStart, time.Minute, 500, 0)
	if err != nil {
		t.Fatal(err)
	}
	short, err := sky.NewWindow(benchSite, benchStart.Add(time.Hour), time.Minute, 120, 0)
	if err != nil {
		t.Fatal(err)
	}
	var used, fresh sky.Track
	other := astro.Star{RA: 4, Dec: 0.7, PosEpochMJD: 51544.5}
	long.Track(other, &used)
	column := &used.AzDeg[0]
	short.Track(benchStar, &used)
	short.Track(benchStar, &fresh)
	if !reflect.DeepEqual(used, fresh) {
		t.Error("a track in used columns differs from one in fresh ones")
	}
	if column != &used.AzDeg[0] {
		t.Error("columns that were long enough were made anew")
	}
	sin := short.SinElevation(benchStar, long.SinElevation(other, nil))
	if !reflect.DeepEqual(sin, short.SinElevation(benchStar, nil)) {
		t.Error("sines in a used slice differ from those in a fresh one")
	}
}

func TestTrackAllocatesNothing(t *testing.T) {
	w, err := sky.NewWindow(benchSite, benchStart, time.Minute, 2000, 0)
	if err != nil {
		t.Fatal(err)
	}
	var tr sky.Track
	w.Track(benchStar, &tr)
	sin := w.SinElevation(benchStar, nil)
	if n := testing.AllocsPerRun(10, func() { w.Track(benchStar, &tr) }); n > 0 {
		t.Errorf("Track allocates %g times", n)
	}
	if n := testing.AllocsPerRun(10, func() { sin = w.SinElevation(benchStar, sin) }); n > 0 {
		t.Errorf("SinElevation allocates %g times", n)
	}
}

// Many goroutines may use one window (meant for the race detector too).
func TestWindowIsSharedSafely(t *testing.T) {
	w, err := sky.NewWindow(benchSite, benchStart, 5*time.Minute, 300, 0)
	if err != nil {
		t.Fatal(err)
	}
	var want sky.Track
	w.Track(benchStar, &want)
	var wg sync.WaitGroup
	for range 8 {
		wg.Go(func() {
			var got sky.Track
			for range 5 {
				w.Track(benchStar, &got)
			}
			if !reflect.DeepEqual(got, want) {
				t.Error("a track made beside others differs")
			}
		})
	}
	wg.Wait()
}
