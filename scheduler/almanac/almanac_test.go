package almanac

import (
	"errors"
	"math"
	"os"
	"strings"
	"testing"
	"time"

	"cadencewright/astro/sky"
	"cadencewright/scheduler"
	"cadencewright/testdata"
)

// campaign reads one of the campaigns in testdata.
func campaign(t *testing.T, name string) *scheduler.Campaign {
	t.Helper()
	data, err := os.ReadFile(testdata.Path("campaigns", name+".json"))
	if err != nil {
		t.Fatal(err)
	}
	c, err := scheduler.ReadCampaign(data)
	if err != nil {
		t.Fatal(err)
	}
	return c
}

// TestWhenAgreesWithCrossings compares the edges found by sampling with the
// closed form of rise and set, on a telescope that has only an elevation
// limit.
func TestWhenAgreesWithCrossings(t *testing.T) {
	c := campaign(t, "medium-1")
	from := c.Start
	to := from.Add(48 * time.Hour)
	edges := 0
	for i := range c.Sources {
		src := c.Sources[i]
		tel := scheduler.Telescope{Code: "X", LongitudeDeg: 21.4, LatitudeDeg: -30.7, Mount: scheduler.MountAltAz,
			ElevationMinDeg: 17, ElevationMaxDeg: 90, AzimuthRangeDeg: [2]float64{-180, 360}}
		src.SunMinDeg = 0
		v, err := When(&tel, &src, c.DUT1S, from, to)
		if err != nil {
			t.Fatal(err)
		}
		crossings, state, err := sky.Crossings(tel.Site(), src.Star(), 17, from, to.Sub(from), c.DUT1S)
		if err != nil {
			t.Fatal(err)
		}
		var want []time.Time
		for _, x := range crossings {
			want = append(want, x.At)
		}
		var got []time.Time
		for _, s := range v.Up {
			if !s.CutStart {
				got = append(got, s.Start)
			}
			if !s.CutEnd {
				got = append(got, s.End)
			}
			if s.HighestDeg < 17 || s.HighestDeg > v.Highest.ElDeg {
				t.Errorf("%s: highest in %v is %v, over all %v", src.Name, s, s.HighestDeg, v.Highest.ElDeg)
			}
		}
		if len(got) != len(want) {
			t.Errorf("%s: %d edges, want %d (%s)", src.Name, len(got), len(want), state)
			continue
		}
		for k := range got {
			edges++
			if d := got[k].Sub(want[k]).Abs(); d > 1500*time.Millisecond {
				t.Errorf("%s: edge %d is %v off", src.Name, k, d)
			}
		}
		if state == sky.AlwaysBelow && (len(v.Up) != 0 || v.Down[Low] != to.Sub(from)) {
			t.Errorf("%s never rises, but is up %v, low for %v", src.Name, v.Up, v.Down[Low])
		}
	}
	if edges < 50 {
		t.Errorf("only %d edges were compared", edges)
	}
}

// TestWhenAgreesWithSamples walks each campaign's real telescopes and checks
// the stretches against the definition, instant by instant.
func TestWhenAgreesWithSamples(t *testing.T) {
	c := campaign(t, "every-field")
	from := c.Start
	to := from.Add(30 * time.Hour)
	for i := range c.Telescopes {
		for j := range c.Sources {
			tel, src := &c.Telescopes[i], &c.Sources[j]
			v, err := When(tel, src, c.DUT1S, from, to)
			if err != nil {
				t.Fatal(err)
			}
			samples, err := Track(tel, src, c.DUT1S, from, to, 7*time.Minute)
			if err != nil {
				t.Fatal(err)
			}
			for _, s := range samples {
				in := false
				for _, u := range v.Up {
					in = in || (!s.At.Before(u.Start) && s.At.Before(u.End)) || (u.CutEnd && s.At.Equal(u.End))
				}
				if in != (s.Down == 0) {
					t.Errorf("%s at %s, %s: in a stretch %v, kept down by %q", src.Name, tel.Code, s.At, in, s.Down)
				}
			}
			for _, tr := range v.Transits {
				if math.Abs(tr.HADeg) > 0.001 {
					t.Errorf("%s at %s: transit at hour angle %v deg", src.Name, tel.Code, tr.HADeg)
				}
			}
			if len(v.Transits) == 0 || len(v.Transits) > 2 {
				t.Errorf("%s at %s: %d transits in 30 hours", src.Name, tel.Code, len(v.Transits))
			}
		}
	}
}

func TestEachCauseIsNamed(t *testing.T) {
	altaz := scheduler.Telescope{Mount: scheduler.MountAltAz, ElevationMinDeg: 10, ElevationMaxDeg: 80, SunMinDeg: 5,
		AzimuthRangeDeg: [2]float64{-100, 100}, Horizon: []scheduler.HorizonPoint{{AzimuthDeg: 0, ElevationDeg: 20}}}
	equatorial := scheduler.Telescope{Mount: scheduler.MountEquatorial, ElevationMaxDeg: 90, HourAngleRangeH: [2]float64{-6, 4}}
	transit := scheduler.Telescope{Mount: scheduler.MountTransit, ElevationMaxDeg: 90, TrackHalfMin: 30}
	src := scheduler.Source{SunMinDeg: 8}
	tests := []struct {
		name string
		tel  scheduler.Telescope
		at   Sample
		want string
	}{
		{"up", altaz, Sample{AzDeg: 50, ElDeg: 45, SunDeg: 90}, ""},
		{"under the limit and the mask", altaz, Sample{AzDeg: 50, ElDeg: 9, SunDeg: 90}, "low,horizon"},
		{"under the mask", altaz, Sample{AzDeg: 50, ElDeg: 15, SunDeg: 90}, "horizon"},
		{"too high", altaz, Sample{AzDeg: 50, ElDeg: 81, SunDeg: 90}, "high"},
		{"out of the motor's range", altaz, Sample{AzDeg: 180, ElDeg: 45, SunDeg: 90}, "mount"},
		{"in range by a turn", altaz, Sample{AzDeg: 300, ElDeg: 45, SunDeg: 90}, ""},
		{"near the Sun, by the source's limit", altaz, Sample{AzDeg: 50, ElDeg: 45, SunDeg: 7}, "sun"},
		{"everything", altaz, Sample{AzDeg: 180, ElDeg: 5, SunDeg: 7}, "low,horizon,mount,sun"},
		{"hour angle 4 h", equatorial, Sample{ElDeg: 30, HADeg: 60, SunDeg: 90}, ""},
		{"hour angle past 4 h", equatorial, Sample{ElDeg: 30, HADeg: 60.1, SunDeg: 90}, "mount"},
		{"hour angle -6 h", equatorial, Sample{ElDeg: 30, HADeg: -90, SunDeg: 90}, ""},
		{"30 minutes from transit", transit, Sample{ElDeg: 30, HADeg: -7.5, SunDeg: 90}, ""},
		{"31 minutes from transit", transit, Sample{ElDeg: 30, HADeg: 7.75, SunDeg: 90}, "mount"},
		{"an hour, but at 60 deg", transit, Sample{ElDeg: 30, HADeg: 14.9, DecDeg: 60, SunDeg: 90}, ""},
		{"at the pole", transit, Sample{ElDeg: 30, HADeg: 170, DecDeg: 90, SunDeg: 90}, ""},
	}
	for _, tt := range tests {
		t.Run(tt.name, func(t *testing.T) {
			if got := newLimits(&tt.tel, &src).check(&tt.at).String(); got != tt.want {
				t.Errorf("got %q, want %q", got, tt.want)
			}
		})
	}
}

func TestQuestionsOutOfBounds(t *testing.T) {
	c := campaign(t, "every-field")
	tel, src := &c.Telescopes[0], &c.Sources[0]
	now := c.Start
	tests := []struct {
		name     string
		from, to time.Time
		step     time.Duration
		want     string
	}{
		{"backwards", now, now.Add(-time.Hour), time.Minute, "before it begins"},
		{"nothing", now, now, time.Minute, "before it begins"},
		{"two years", now, now.AddDate(2, 0, 0), time.Hour, "at most 366 days"},
		{"no step", now, now.Add(time.Hour), 0, "too short"},
		{"a million samples", now, now.AddDate(0, 6, 0), time.Second, "at most 200000 samples"},
	}
	for _, tt := range tests {
		t.Run(tt.name, func(t *testing.T) {
			_, err := Track(tel, src, 0, tt.from, tt.to, tt.step)
			if !errors.Is(err, scheduler.ErrInvalid) || !strings.Contains(err.Error(), tt.want) {
				t.Errorf("track: got %v, want %q", err, tt.want)
			}
			o, err := NewOrbit(src, now, now)
			if err != nil {
				t.Fatal(err)
			}
			if _, err := o.Series(tt.from, tt.to, tt.step); !errors.Is(err, scheduler.ErrInvalid) || !strings.Contains(err.Error(), tt.want) {
				t.Errorf("series: got %v, want %q", err, tt.want)
			}
		})
	}
	if _, err := When(tel, src, 0, time.Date(1960, 1, 1, 0, 0, 0, 0, time.UTC), time.Date(1960, 1, 2, 0, 0, 0, 0, time.UTC)); err == nil {
		t.Error("1960: want an error")
	}
}
