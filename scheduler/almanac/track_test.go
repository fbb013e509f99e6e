package almanac

import (
	"math"
	"slices"
	"testing"
	"time"

	"pgregory.net/rapid"

	"cadencewright/scheduler"
)

// drawQuestion draws a telescope of any mount, a source and a time.
func drawQuestion(t *rapid.T) (*scheduler.Telescope, *scheduler.Source, time.Time) {
	f := func(name string, lo, hi float64) float64 { return rapid.Float64Range(lo, hi).Draw(t, name) }
	tel := &scheduler.Telescope{Code: "X", LongitudeDeg: f("longitude", -180, 180), LatitudeDeg: f("latitude", -89, 89),
		Mount:           rapid.SampledFrom([]scheduler.MountKind{scheduler.MountAltAz, scheduler.MountEquatorial, scheduler.MountTransit}).Draw(t, "mount"),
		ElevationMinDeg: f("lowest", 0, 40), ElevationMaxDeg: f("highest", 60, 90), SunMinDeg: f("Sun", 0, 60),
		AzimuthRangeDeg: [2]float64{f("motor from", -200, 0), f("motor to", 60, 400)},
		HourAngleRangeH: [2]float64{f("east", -12, -1), f("west", 1, 12)}, TrackHalfMin: f("half track", 5, 200)}
	if rapid.Bool().Draw(t, "has a horizon") {
		tel.Horizon = []scheduler.HorizonPoint{{AzimuthDeg: 10, ElevationDeg: f("north", 0, 30)}, {AzimuthDeg: 190, ElevationDeg: f("south", 0, 30)}}
	}
	src := &scheduler.Source{Name: "S", RADeg: f("ra", 0, 360), DecDeg: f("dec", -90, 90), PosEpochMJD: scheduler.DefaultPosEpochMJD}
	from := time.Date(2026+rapid.IntRange(0, 4).Draw(t, "year"), 1, rapid.IntRange(1, 365).Draw(t, "day"), rapid.IntRange(0, 23).Draw(t, "hour"), 0, 0, 0, time.UTC)
	return tel, src, from
}

// TestTrackEqualsAt compares the quick track with the careful route at single
// instants.
func TestTrackEqualsAt(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		tel, src, from := drawQuestion(t)
		samples, err := Track(tel, src, 0.1, from, from.Add(26*time.Hour), 2*time.Hour)
		if err != nil {
			t.Fatal(err)
		}
		if len(samples) != 14 {
			t.Fatalf("%d samples, want 14: both ends count", len(samples))
		}
		for _, s := range samples {
			one, err := At(tel, src, 0.1, s.At)
			if err != nil {
				t.Fatal(err)
			}
			cosEl := math.Cos(s.ElDeg * math.Pi / 180)
			for what, d := range map[string]float64{
				"elevation": s.ElDeg - one.ElDeg, "azimuth": math.Remainder(s.AzDeg-one.AzDeg, 360) * cosEl,
				"declination": s.DecDeg - one.DecDeg, "LST": math.Remainder(s.LSTDeg-one.LSTDeg, 360), "Sun": (s.SunDeg - one.SunDeg) / 10,
				"hour angle": math.Remainder(s.HADeg-one.HADeg, 360) * math.Cos(s.DecDeg*math.Pi/180),
			} {
				if math.Abs(d) > 0.001 {
					t.Fatalf("at %s the %s differs by %v deg", s.At, what, d)
				}
			}
		}
	})
}

// TestStretchesAndCausesFillTheTime checks that what is up and what is down
// add up, and that every stretch is one.
func TestStretchesAndCausesFillTheTime(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		tel, src, from := drawQuestion(t)
		to := from.Add(30 * time.Hour)
		v, err := When(tel, src, 0, from, to)
		if err != nil {
			t.Fatal(err)
		}
		var up time.Duration
		last := from
		for _, u := range v.Up {
			if u.Start.Before(last) || u.End.Before(u.Start) || u.End.After(to) {
				t.Fatalf("stretches %+v are not in order within %s to %s", v.Up, from, to)
			}
			if u.CutStart != u.Start.Equal(from) || (u.CutEnd && !u.End.Equal(to)) {
				t.Fatalf("%+v: wrongly marked as cut", u)
			}
			if u.HighestDeg < tel.ElevationMinDeg-0.01 || u.HighestDeg > tel.ElevationMaxDeg+0.01 {
				t.Fatalf("%+v: its highest is outside the telescope's limits", u)
			}
			for _, edge := range []time.Time{u.Start, u.End} {
				s, err := At(tel, src, 0, edge)
				if err != nil {
					t.Fatal(err)
				}
				if s.Down != 0 && !edge.Equal(to) && !edge.Equal(from) {
					t.Fatalf("at the edge %s of %+v it is kept down by %s", edge, u, s.Down)
				}
			}
			up += u.End.Sub(u.Start)
			last = u.End
		}
		// Each cause holds for no longer than the source is down, all together
		// for no less; a sample stands for its minute.
		slack := time.Duration(2*len(v.Up)+2) * time.Minute
		var all time.Duration
		for c, d := range v.Down {
			if len(c.Each()) != 1 || d > to.Sub(from)-up+slack {
				t.Fatalf("%s holds for %v of %v, up for %v", c, d, to.Sub(from), up)
			}
			all += d
		}
		if all < to.Sub(from)-up-slack {
			t.Fatalf("down for %v by all causes, but up for only %v of %v", all, up, to.Sub(from))
		}
		if n := len(v.Transits); n < 1 || n > 2 || !slices.IsSortedFunc(v.Transits, func(a, b Sample) int { return a.At.Compare(b.At) }) {
			t.Fatalf("transits in 30 hours: %+v", v.Transits)
		}
	})
}

func TestCausesAsASet(t *testing.T) {
	if got := (Low | Sun).Each(); !slices.Equal(got, []Cause{Low, Sun}) {
		t.Errorf("got %v", got)
	}
	if got := Cause(0).Each(); len(got) != 0 {
		t.Errorf("nothing holds: got %v", got)
	}
	if got := (Mount | Hidden).String(); got != "horizon,mount" {
		t.Errorf("got %q", got)
	}
}
