package feasible

import (
	"math"
	"slices"
	"strings"
	"testing"
	"time"

	"cadencewright/astro/sky"
	"cadencewright/scheduler"
)

// transitMin is when the campaign's source crosses the meridian, in minutes
// from the block's start.
func transitMin(t *testing.T, c *scheduler.Campaign) float64 {
	t.Helper()
	at, _, err := sky.UpperTransit(c.Telescopes[0].Site(), c.Sources[0].Star(), monday, c.DUT1S)
	if err != nil {
		t.Fatal(err)
	}
	return at.Sub(monday).Minutes()
}

// southward moves the source so that it transits about two hours into the
// block, at a declination.
func southward(c *scheduler.Campaign, decDeg float64) {
	// Sidereal time on 2027-01-18 at 00:00 UTC in Greenwich is 7.83 h.
	c.Sources[0].RADeg, c.Sources[0].DecDeg = 15*(7.83+2), decDeg
}

// Section 2 by hand: a mount that follows an hour angle of ±1 h has a source
// for two sidereal hours about its transit; one that follows ±20 min at the
// equator has it for 40 min divided by the cosine of the declination.
func TestStartsAboutTheMeridian(t *testing.T) {
	const sidereal = 0.99726957 // of a solar hour
	for _, tt := range []struct {
		name    string
		mount   scheduler.MountKind
		dec     float64
		halfMin float64 // solar minutes from transit
	}{
		{"equatorial, ±1 h", scheduler.MountEquatorial, 20, 60 * sidereal},
		{"transit, ±20 min at the equator", scheduler.MountTransit, 0, 20 * sidereal},
		{"transit, twice as long at declination 60", scheduler.MountTransit, 60, 40 * sidereal},
	} {
		c := circumpolar(tt.mount)
		c.GridMin = 1
		c.Telescopes[0].HourAngleRangeH, c.Telescopes[0].TrackHalfMin = [2]float64{-1, 1}, 20
		c.Telescopes[0].ElevationMaxDeg = 90
		southward(c, tt.dec)
		at := transitMin(t, c)
		if at < 90 || at > 150 {
			t.Fatalf("%s: transit at minute %.1f: the sidereal time by hand is wrong", tt.name, at)
		}
		b := block(t, c)
		pl := b.PlaceOf(0)
		for k := 12; k <= 220; k++ {
			margin := math.Min(float64(k)-(at-tt.halfMin), at+tt.halfMin-float64(k+20))
			if math.Abs(margin) > 0.3 && pl.Allows(20, k) != (margin > 0) { // precession since 2000 changes the declination, and with it the range
				t.Errorf("%s: start at minute %d, transit at %.2f: allowed %t", tt.name, k, at, pl.Allows(20, k))
			}
		}
	}
}

// The Sun's limits of telescope and source: the larger one counts. On
// 2027-01-18 the Sun is near 299.7, -20.6 deg.
func TestTheLargerSunLimitCounts(t *testing.T) {
	for _, tt := range []struct {
		telescope, source float64
		up                bool
	}{{0, 0, true}, {9, 9, true}, {11, 0, false}, {0, 11, false}} {
		c := circumpolar(scheduler.MountEquatorial)
		c.Telescopes[0].LatitudeDeg = -60 // by day, from the south
		c.Telescopes[0].LongitudeDeg = 180
		c.Sources[0].RADeg, c.Sources[0].DecDeg = 299.7, -30.6
		c.Telescopes[0].SunMinDeg, c.Sources[0].SunMinDeg = tt.telescope, tt.source
		r := block(t, c).Rejects[0]
		if math.Abs(r.SunDeg-10) > 0.3 {
			t.Fatalf("%.2f deg from the Sun, by hand 10", r.SunDeg)
		}
		if (r.Up == r.Samples) != tt.up || (r.NearSun == r.Samples) == tt.up {
			t.Errorf("limits %g and %g deg: %+v", tt.telescope, tt.source, r)
		}
	}
}

// Information by hand, section 4: at constant elevation, away from the Galaxy,
// one receiver, half an hour.
func TestInformationByHand(t *testing.T) {
	c := circumpolar(scheduler.MountEquatorial)
	c.Telescopes[0].LatitudeDeg = 89.999 // at the pole nothing rises or sets: elevation is declination
	c.Sources[0].RADeg, c.Sources[0].DecDeg = 192.86, 27.13
	c.Sources[0].SpectralIdx, c.Sources[0].Scatter1GHzS, c.Sources[0].JitterUs1h, c.Sources[0].WidthS = -2, 1e-4, 0.3, 0.0004
	r := &c.Telescopes[0].Receivers[0]
	r.FreqMHz, r.TrecK, r.TatmK, r.Digitisation = 1000, 25, 4, 1.1
	// The source is near the Galactic pole: l is anything, b 90 deg, and
	// 275/((1+(l/42)²)·(1+30²)) is at most 0.3 K at 408 MHz.
	sky := 25.15 * math.Pow(0.408, 2.6)
	tsys := 25 + 2.73 + sky + 4/math.Sin(27.0*math.Pi/180)
	flux := 2e-3 * math.Pow(1000.0/1400, -2)
	w := math.Hypot(0.0004, 1e-4)
	s1 := flux * 1 * math.Sqrt(2*400e6) / (1.1 * tsys) * math.Sqrt((0.005-w)/w)
	v1 := w*w/(s1*s1) + 0.3e-6*0.3e-6*3600
	want := 1800 / v1
	got := block(t, c).PlaceOf(0).InfoOf(0, 4, 6)
	if math.Abs(got/want-1) > 5e-3 {
		t.Errorf("information %.5g, by hand %.5g 1/s²", got, want)
	}
}

// Half past the hour in one zone is a full hour in another: the part of the
// band that interference leaves follows the telescope's clock, also when it is
// put forward.
func TestLocalHours(t *testing.T) {
	for _, tt := range []struct {
		zone  string
		start time.Time
		want  []int // every 15 minutes
	}{
		{"UTC", monday, []int{0, 0, 0, 0, 1, 1}},
		{"Asia/Kathmandu", monday, []int{5, 6, 6, 6, 6, 7}},                                             // +5:45
		{"America/St_Johns", monday, []int{20, 20, 21, 21, 21, 21}},                                     // -3:30
		{"Europe/Berlin", time.Date(2027, 3, 28, 0, 30, 0, 0, time.UTC), []int{1, 1, 3, 3, 3, 3}},       // from 2 to 3 at 01:00 UTC
		{"Australia/Lord_Howe", time.Date(2027, 4, 3, 14, 30, 0, 0, time.UTC), []int{1, 1, 1, 1, 2, 2}}, // back by half an hour at 15:00 UTC
	} {
		zone, err := time.LoadLocation(tt.zone)
		if err != nil {
			t.Fatal(err)
		}
		got := localHours(zone, &Block{FirstMin: int(tt.start.Unix() / 60), Steps: 18}, 5)
		for k, h := range got {
			if h != tt.want[k/3] {
				t.Errorf("%s: %d minutes after %s it is %d o'clock, want %d", tt.zone, 5*k, tt.start.Format(time.RFC3339), h, tt.want[k/3])
			}
		}
	}
}

// A block that begins and ends off the grid is used from the first grid
// instant to the last in it.
func TestBlocksOffTheGrid(t *testing.T) {
	for _, tt := range []struct {
		from, to    float64 // minutes
		first, last int
	}{
		{0, 240, 0, 240}, {0.1, 240, 5, 240}, {4.99, 239.99, 5, 235}, {5, 244.9, 5, 240}, {1.0 / 60000, 20, 5, 20}, {1, 4, 5, 5}, {6, 9, 10, 10},
	} {
		c := circumpolar(scheduler.MountEquatorial)
		c.Blocks[0].Start, c.Blocks[0].End = after(tt.from), after(tt.to)
		b := block(t, c)
		if first := float64(b.FirstMin) - float64(monday.Unix())/60; first != float64(tt.first) || b.Steps != (tt.last-tt.first)/5 {
			t.Errorf("[%g, %g): from minute %g, %d steps; want %d and %d", tt.from, tt.to, first, b.Steps, tt.first, (tt.last-tt.first)/5)
		}
		if b.Minute(1, 5) != float64(b.FirstMin+5) {
			t.Errorf("step 1 is minute %g", b.Minute(1, 5))
		}
	}
}

// Blocks belong to the horizon in which they start.
func TestBlocksOfTheHorizon(t *testing.T) {
	c := circumpolar(scheduler.MountEquatorial)
	c.Blocks = nil
	for id, at := range map[string]float64{"before": -10, "first": 0, "within": 600, "last": 1435, "after": 1440} {
		c.Blocks = append(c.Blocks, scheduler.Block{ID: id, Telescope: "A", Start: after(at), End: after(at + 9), Receivers: []string{"L"}})
	}
	slices.SortFunc(c.Blocks, func(a, b scheduler.Block) int { return a.Start.Compare(b.Start) })
	p, err := Build(c, scheduler.Horizon{From: monday, To: after(1440)})
	if err != nil {
		t.Fatal(err)
	}
	var ids []string
	for _, b := range p.Blocks {
		ids = append(ids, c.Blocks[b.Index].ID)
	}
	if !slices.Equal(ids, []string{"first", "within", "last"}) {
		t.Errorf("blocks %v", ids)
	}
}

// Only what some goal can use is worked out: receivers of its bands that see
// the pulses, on its telescopes, and whatever is pinned.
func TestUsefulReceivers(t *testing.T) {
	wide := func(c *scheduler.Campaign) *scheduler.Telescope {
		t := &c.Telescopes[0]
		s := t.Receivers[0]
		s.Code, s.Bands, s.FreqMHz = "S", []string{"S"}, 2500
		p := t.Receivers[0]
		p.Code, p.Bands, p.FreqMHz = "P", []string{"L", "P"}, 350
		t.Receivers = append(t.Receivers, s, p)
		c.Blocks[0].Receivers = []string{"P", "S", "L"}
		return t
	}
	for _, tt := range []struct {
		name   string
		change func(*scheduler.Campaign)
		useful []bool // P, S, L, in the block's order
	}{
		{"those of the goal's band", func(*scheduler.Campaign) {}, []bool{true, false, true}},
		{"scattered away at 350 MHz", func(c *scheduler.Campaign) { c.Sources[0].Scatter1GHzS = 5e-5 }, []bool{false, false, true}}, // 5e-5·0.35^-4.4 = 5.1 ms
		{"another telescope's goal", func(c *scheduler.Campaign) {
			c.Telescopes = append(c.Telescopes, c.Telescopes[0])
			c.Telescopes[1].Code = "B"
			c.CadenceTargets[0].Telescopes = []string{"B"}
		}, nil},
		{"pinned", func(c *scheduler.Campaign) {
			c.Pins = []scheduler.Pin{{Block: "b", Source: c.Sources[0].Name, Receiver: "S", Start: after(60), Minutes: 20}}
		}, []bool{true, true, true}},
		{"no goals", func(c *scheduler.Campaign) { c.CadenceTargets = nil }, nil},
	} {
		c := circumpolar(scheduler.MountEquatorial)
		wide(c)
		tt.change(c)
		b := block(t, c)
		if !slices.Equal(b.Receivers, []int{2, 1, 0}) {
			t.Errorf("%s: receivers %v", tt.name, b.Receivers)
		}
		pl := b.PlaceOf(0)
		if pl == nil {
			if slices.Contains(tt.useful, true) {
				t.Errorf("%s: no place", tt.name)
			}
			continue
		}
		for j := range b.Receivers {
			want := j < len(tt.useful) && tt.useful[j]
			if got := pl.Info[j] != nil && pl.InfoOf(j, 5, 4) > 0; got != want {
				t.Errorf("%s: receiver %d is useful: %t", tt.name, j, got)
			}
		}
	}
}

func TestPinsThatCannotBe(t *testing.T) {
	for name, change := range map[string]func(*scheduler.Pin){
		"no such source: nobody":    func(p *scheduler.Pin) { p.Source = "nobody" },
		"block b has no receiver Z": func(p *scheduler.Pin) { p.Receiver = "Z" },
	} {
		c := circumpolar(scheduler.MountEquatorial)
		pin := scheduler.Pin{Block: "b", Source: c.Sources[0].Name, Receiver: "L", Start: after(60), Minutes: 20}
		change(&pin)
		c.Pins = []scheduler.Pin{pin}
		if _, err := Build(c, scheduler.Horizon{From: c.Start, To: c.End}); err == nil || !strings.Contains(err.Error(), "pin 0: "+name) || !strings.Contains(err.Error(), "block b: ") {
			t.Errorf("%s: %v", name, err)
		}
	}
}
