package feasible

import (
	"math"
	"testing"
	"time"

	"cadencewright/astro/sky"
	"cadencewright/scheduler"
)

var monday = time.Date(2027, 1, 18, 0, 0, 0, 0, time.UTC)

func after(minutes float64) time.Time {
	return monday.Add(time.Duration(minutes * float64(time.Minute)))
}

// circumpolar is a campaign of one telescope, one source that never sets and
// one block of four hours.
func circumpolar(mount scheduler.MountKind) *scheduler.Campaign {
	t := scheduler.Telescope{Code: "A", Name: "A", LatitudeDeg: 60, Timezone: "UTC", Mount: mount, ElevationMinDeg: 10, ElevationMaxDeg: 89,
		SetupS: 600, CalS: 60, SwitchS: 120, SettleS: 30, AzimuthRangeDeg: [2]float64{-270, 270}, RateAzDegS: 1, RateElDegS: 1,
		HourAngleRangeH: [2]float64{-12, 12}, RateHADegS: 1, RateDecDegS: 1, TrackHalfMin: 60,
		Receivers: []scheduler.Receiver{{Code: "L", Bands: []string{"L"}, FreqMHz: 1400, BandwidthMHz: 400, NPol: 2, TrecK: 20, TatmK: 2, GainKPerJy: 1, Digitisation: 1}}}
	c := &scheduler.Campaign{Name: "c", Start: monday, End: after(1440), GridMin: 5, Telescopes: []scheduler.Telescope{t}}
	c.Sources = []scheduler.Source{{Name: "SIM J0800+7001", RADeg: 120, DecDeg: 70, PosEpochMJD: 58000, PeriodS: 0.005, FluxMJy: 2,
		FluxFreqMHz: 1400, WidthS: 0.0005, ScanMinutes: []int{20, 40}}}
	c.CadenceTargets = []scheduler.CadenceTarget{{Goal: scheduler.Goal{ID: "g", Source: c.Sources[0].Name, Bands: []string{"L"}, Priority: 1}, EveryD: 1, EarlyD: 0.25}}
	c.Blocks = []scheduler.Block{{ID: "b", Telescope: "A", Start: monday, End: after(240), Receivers: []string{"L"}}}
	return c
}

func block(t *testing.T, c *scheduler.Campaign) *Block {
	t.Helper()
	p, err := Build(c, scheduler.Horizon{From: c.Start, To: c.End})
	if err != nil {
		t.Fatal(err)
	}
	if len(p.Blocks) != 1 {
		t.Fatalf("%d blocks, want 1", len(p.Blocks))
	}
	return &p.Blocks[0]
}

// starts are the allowed starts of a length, as minutes.
func starts(b *Block, minutes int) map[int]bool {
	set := map[int]bool{}
	pl := b.PlaceOf(0)
	if pl == nil {
		return set
	}
	for i := range pl.Lengths {
		if pl.Lengths[i].Minutes != minutes {
			continue
		}
		for k := 0; k <= b.Steps; k++ {
			if pl.Lengths[i].Allowed(k) {
				set[5*k] = true
			}
		}
	}
	return set
}

// span expects the starts from lo to hi, but for those in a gap, on a grid of
// five minutes.
func span(t *testing.T, got map[int]bool, ok func(start int) bool) {
	t.Helper()
	for m := 0; m <= 240; m += 5 {
		if got[m] != ok(m) {
			t.Errorf("start at minute %d: allowed %t", m, got[m])
		}
	}
}

// Setup and calibration take eleven minutes: the first start is minute 15, the
// last ends with the block.
func TestStartsInABlock(t *testing.T) {
	b := block(t, circumpolar(scheduler.MountEquatorial))
	span(t, starts(b, 20), func(m int) bool { return m >= 15 && m <= 220 })
	span(t, starts(b, 40), func(m int) bool { return m >= 15 && m <= 200 })
	if b.MinGap != 1 || b.Steps != 48 {
		t.Errorf("least gap %d, steps %d, want 1 and 48", b.MinGap, b.Steps)
	}
}

// After a lost part from 60 to 90 setup and calibration are due again.
func TestStartsAroundALostPart(t *testing.T) {
	c := circumpolar(scheduler.MountEquatorial)
	c.Blocks[0].Lost = []scheduler.Span{{Start: after(60), End: after(90)}}
	span(t, starts(block(t, c), 20), func(m int) bool { return m >= 15 && m <= 40 || m >= 105 && m <= 220 })
}

// A pin from 60 to 95 keeps settle and calibration, a step, clear on both
// sides; its length is none of the source's.
func TestStartsAroundAPin(t *testing.T) {
	c := circumpolar(scheduler.MountEquatorial)
	c.Pins = []scheduler.Pin{{Block: "b", Source: c.Sources[0].Name, Receiver: "L", Start: after(60), Minutes: 35}}
	b := block(t, c)
	span(t, starts(b, 20), func(m int) bool { return m >= 15 && m <= 35 || m >= 100 && m <= 220 })
	if p := b.Pins[0]; p.Start != 12 || p.Steps != 7 || p.Minutes != 35 {
		t.Errorf("pin %+v", p)
	}
}

// A pin stands even where the source is not up, with its pointing.
func TestPinBelowTheHorizon(t *testing.T) {
	c := circumpolar(scheduler.MountEquatorial)
	c.Sources[0].DecDeg = -80
	c.Pins = []scheduler.Pin{{Block: "b", Source: c.Sources[0].Name, Receiver: "L", Start: after(60), Minutes: 20}}
	b := block(t, c)
	pl := b.PlaceOf(0)
	if pl == nil || pl.Lo > 12 || pl.Lo+len(pl.Axis1) < 17 || len(pl.Lengths) != 0 {
		t.Fatalf("place %+v", pl)
	}
	if r := b.Rejects[0]; r.TooLow != r.Samples || r.Up != 0 || r.MaxElDeg >= 0 || r.NeedElDeg != 10 {
		t.Errorf("reject %+v", r)
	}
}

// Lower culmination is 12 h: no scan on an equatorial mount passes it.
func TestNoScanPassesTwelveHours(t *testing.T) {
	c := circumpolar(scheduler.MountEquatorial)
	c.Sources[0].RADeg = 325 // 12 h about two hours into the block
	b := block(t, c)
	pl := b.PlaceOf(0)
	got, passed := starts(b, 20), 0
	for m := 15; m <= 220; m += 5 {
		passes := pl.Axis1[m/5+4-pl.Lo] < pl.Axis1[m/5-pl.Lo]
		if passes {
			passed++
		}
		if got[m] == passes {
			t.Errorf("minute %d: passes 12 h %t, allowed %t", m, passes, got[m])
		}
	}
	if passed < 3 || passed > 4 {
		t.Errorf("%d starts pass 12 h, want those of about 20 minutes", passed)
	}
}

// The cable wrap of a scan: whole turns inside the range.
func TestTurns(t *testing.T) {
	b := &Block{Mount: Mount{Kind: scheduler.MountAltAz, AzRange: [2]float64{-90, 450}}}
	pl := &Place{Axis1: []float64{350, 355, 360, 365, 370}, rising: []int32{0, 1, 2, 3, 4}}
	if lo, hi := b.Turns(pl, 0, 4); lo != -1 || hi != 0 {
		t.Errorf("turns [%d, %d], want [-1, 0]", lo, hi)
	}
	b.Mount.AzRange = [2]float64{0, 360}
	if lo, hi := b.Turns(pl, 0, 4); lo <= hi {
		t.Errorf("turns [%d, %d] through north, want none", lo, hi)
	}
	if lo, hi := b.Turns(pl, 0, 2); lo != 0 || hi != 0 {
		t.Errorf("turns [%d, %d] up to north, want [0, 0]", lo, hi)
	}
	back := &Place{Axis1: []float64{100, 80, 90}, rising: []int32{0, 0, 1}}
	b.Mount.AzRange = [2]float64{85, 300}
	if lo, hi := b.Turns(back, 0, 2); lo <= hi {
		t.Errorf("turns [%d, %d]: the track leaves the range in its middle", lo, hi)
	}
	b.Mount.Kind = scheduler.MountTransit
	if lo, hi := b.Turns(pl, 0, 4); lo != 0 || hi != 0 {
		t.Errorf("a transit mount has turns [%d, %d]", lo, hi)
	}
}

// The longest axis counts; a transit mount has only one.
func TestSlew(t *testing.T) {
	m := Mount{Kind: scheduler.MountAltAz, Axis1: sky.Axis{RateDegS: 0.5, AccelDegS2: 0.05}, Axis2: sky.Axis{RateDegS: 0.25}, SettleS: 20}
	for _, c := range [][5]float64{
		{0, 30, 100, 30, 20 + 100/0.5 + 0.5/0.05}, {0, 30, 1.25, 30, 20 + 2*5}, {0, 30, 1, 80, 20 + 50/0.25}, {0, 30, 0, 30, 20},
	} {
		if s := m.SlewS(c[0], c[1], c[2], c[3]); math.Abs(s-c[4]) > 1e-9 {
			t.Errorf("slew %v takes %g s", c, s)
		}
	}
	m.Kind = scheduler.MountTransit
	if s := m.SlewS(0, 30, 100, 30); s != 20 {
		t.Errorf("a transit mount without travel takes %g s, want 20", s)
	}
}

// Information adds up, and needs a receiver that sees the pulses.
func TestInformation(t *testing.T) {
	c := circumpolar(scheduler.MountEquatorial)
	pl := block(t, c).PlaceOf(0)
	a, b, both := pl.InfoOf(0, 4, 4), pl.InfoOf(0, 8, 4), pl.InfoOf(0, 4, 8)
	if a <= 0 || math.Abs(a+b-both) > 1e-9*both {
		t.Errorf("information %g and %g make %g", a, b, both)
	}
	c.Telescopes[0].Receivers[0].RFILoss = make([]float64, 24)
	for h := range 24 {
		c.Telescopes[0].Receivers[0].RFILoss[h] = 0.5
	}
	if half := block(t, c).PlaceOf(0).InfoOf(0, 4, 8); math.Abs(half/both-0.5) > 1e-9 {
		t.Errorf("half the band gives %g of the information", half/both)
	}
	c.Sources[0].WidthS = 0.0046
	if pl := block(t, c).PlaceOf(0); pl != nil && pl.InfoOf(0, 4, 4) != 0 {
		t.Error("a pulse of nine tenths of the period gives information")
	}
}
