package solve_test

import (
	"fmt"
	"time"

	"cadencewright/scheduler"
	"cadencewright/scheduler/feasible"

	"pgregory.net/rapid"
)

// monday is the first instant of the invented campaigns here.
var monday = time.Date(2027, 1, 18, 0, 0, 0, 0, time.UTC)

func after(hours float64) time.Time {
	return monday.Add(time.Duration(hours * float64(time.Hour)))
}

// site is an invented telescope of some mount, with receivers for L, for S and
// for both at once.
func site(code string, mount scheduler.MountKind, lon float64) scheduler.Telescope {
	rx := func(code string, freqMHz float64, bands ...string) scheduler.Receiver {
		return scheduler.Receiver{Code: code, Bands: bands, FreqMHz: freqMHz, BandwidthMHz: 400, NPol: 2, TrecK: 20, TatmK: 3,
			GainKPerJy: 1.2, Digitisation: 1}
	}
	t := scheduler.Telescope{Code: code, Name: code, LongitudeDeg: lon, LatitudeDeg: 40, HeightM: 200, Timezone: "UTC", Mount: mount,
		ElevationMinDeg: 20, ElevationMaxDeg: 88, SunMinDeg: 5, SetupS: 600, CalS: 60, SwitchS: 180, SettleS: 20,
		Receivers: []scheduler.Receiver{rx("L", 1400, "L"), rx("S", 2500, "S"), rx("W", 1900, "L", "S")}}
	switch mount {
	case scheduler.MountAltAz:
		t.AzimuthRangeDeg, t.RateAzDegS, t.RateElDegS, t.AccelAzDegS2 = [2]float64{-90, 450}, 0.4, 0.2, 0.05
	case scheduler.MountEquatorial:
		t.HourAngleRangeH, t.RateHADegS, t.RateDecDegS = [2]float64{-5, 5}, 0.3, 0.2
	case scheduler.MountTransit:
		t.TrackHalfMin, t.RateElDegS, t.AccelElDegS2 = 60, 0.1, 0.01
	}
	return t
}

func pulsar(i int, decDeg float64) scheduler.Source {
	return scheduler.Source{Name: fmt.Sprintf("SIM J%02d00+4000", 6+i), RADeg: 90 + 14*float64(i), DecDeg: decDeg, PosEpochMJD: 58000,
		PeriodS: 0.005, DMPcCm3: 20, FluxMJy: 3, FluxFreqMHz: 1400, SpectralIdx: -1.6, WidthS: 0.0004, JitterUs1h: 0.1,
		ScanMinutes: []int{20, 40}}
}

// drawCampaign is a small valid campaign: one to three telescopes of all
// mounts, three to eight sources, all kinds of goal, history, lost parts and
// now and then a pin.
func drawCampaign(t *rapid.T) *scheduler.Campaign {
	c := &scheduler.Campaign{Name: "drawn", Start: monday, End: after(96), GridMin: rapid.SampledFrom([]int{5, 10}).Draw(t, "grid")}
	mounts := []scheduler.MountKind{scheduler.MountAltAz, scheduler.MountEquatorial, scheduler.MountTransit}
	first := rapid.IntRange(0, 2).Draw(t, "mount")
	for i := range rapid.IntRange(1, 3).Draw(t, "telescopes") {
		c.Telescopes = append(c.Telescopes, site(fmt.Sprintf("T%d", i), mounts[(first+i)%3], 10*float64(i)))
	}
	for i := range rapid.IntRange(3, 8).Draw(t, "sources") {
		c.Sources = append(c.Sources, pulsar(i, rapid.Float64Range(0, 70).Draw(t, "dec")))
	}
	c.Sources[0].Binary = &scheduler.Binary{Model: scheduler.BinaryKepler, PbD: 0.4, A1Ls: 2, Ecc: 0.3, OmDeg: 40, T0MJD: 59000.1}
	drawGoals(t, c)
	drawBlocks(t, c)
	drawHistory(t, c)
	if rapid.Bool().Draw(t, "pin") {
		drawPin(t, c)
	}
	if err := c.Validate(); err != nil {
		t.Fatalf("the drawn campaign is not valid: %v", err)
	}
	return c
}

func drawGoals(t *rapid.T, c *scheduler.Campaign) {
	goal := func(id string, source int, bands ...string) scheduler.Goal {
		return scheduler.Goal{ID: id, Source: c.Sources[source].Name, Bands: bands, Priority: rapid.SampledFrom([]float64{1, 2, 3.5}).Draw(t, "priority")}
	}
	every := func() float64 { return rapid.SampledFrom([]float64{1.5, 3, 7}).Draw(t, "every") }
	n := len(c.Sources)
	for i := range c.Sources {
		g := scheduler.CadenceTarget{Goal: goal(fmt.Sprintf("cad%d", i), i, "L"), EveryD: every()}
		g.EarlyD = g.EveryD / 4
		g.TOAUs = rapid.SampledFrom([]float64{0, 0.5, 2}).Draw(t, "toa")
		c.CadenceTargets = append(c.CadenceTargets, g)
	}
	c.PhaseGoals = []scheduler.PhaseGoal{{Goal: goal("phase", 0, "L", "S"), Reference: scheduler.RefConjunction, DwellMin: 15,
		PerHorizon: rapid.IntRange(1, 3).Draw(t, "per"), Windows: []scheduler.PhaseWindow{{From: 0.1, To: 0.45, Need: 4}, {From: 0.8, To: 1.2, Need: 2}}}}
	if m := len(c.Telescopes); m > 1 {
		c.OverlapGoals = []scheduler.OverlapGoal{{Goal: goal("over", 1, "L", "S"), Count: rapid.IntRange(2, m).Draw(t, "count"), OverlapMin: 15, EveryD: every()}}
	}
	c.BandPairGoals = []scheduler.BandPairGoal{{Goal: goal("pair", n-1, "L", "S"), WithinH: 6, EveryD: every()}}
}

func drawBlocks(t *rapid.T, c *scheduler.Campaign) {
	for i := range c.Telescopes {
		for j := range rapid.IntRange(1, 2).Draw(t, "blocks") {
			from := 36*float64(j) + float64(rapid.IntRange(0, 8).Draw(t, "from"))/4
			bl := scheduler.Block{ID: fmt.Sprintf("b%d%d", i, j), Telescope: c.Telescopes[i].Code, Start: after(from),
				End:       after(from + float64(rapid.IntRange(4, 20).Draw(t, "long"))/4),
				Receivers: rapid.SampledFrom([][]string{{"L"}, {"L", "S"}, {"S", "W"}}).Draw(t, "receivers")}
			if rapid.IntRange(0, 3).Draw(t, "loss") == 0 {
				bl.Lost = []scheduler.Span{{Start: bl.Start.Add(20 * time.Minute), End: bl.Start.Add(33 * time.Minute)}}
			}
			c.Blocks = append(c.Blocks, bl)
		}
	}
}

func drawHistory(t *rapid.T, c *scheduler.Campaign) {
	for range rapid.IntRange(0, 4).Draw(t, "history") {
		s := rapid.IntRange(0, len(c.Sources)-1).Draw(t, "of")
		c.History = append(c.History, scheduler.HistoryScan{Source: c.Sources[s].Name, Telescope: c.Telescopes[0].Code, Receiver: "W",
			Start: after(-float64(rapid.IntRange(1, 200).Draw(t, "ago"))), Minutes: 30, Counted: true})
	}
}

// drawPin pins a scan that is possible by itself.
func drawPin(t *rapid.T, c *scheduler.Campaign) {
	p, err := feasible.Build(c, scheduler.Horizon{From: c.Start, To: c.End})
	if err != nil {
		t.Fatal(err)
	}
	for bi := range p.Blocks {
		b := &p.Blocks[bi]
		if len(b.Places) == 0 {
			continue
		}
		pl := &b.Places[rapid.IntRange(0, len(b.Places)-1).Draw(t, "place")]
		l := pl.Lengths[0]
		bl := &c.Blocks[b.Index]
		start := rapid.IntRange(l.Runs[0].From, l.Runs[0].To-1).Draw(t, "at")
		c.Pins = append(c.Pins, scheduler.Pin{Block: bl.ID, Source: c.Sources[pl.Source].Name, Receiver: bl.Receivers[0],
			Start: time.Unix(int64(b.Minute(start, c.GridMin))*60, 0).UTC(), Minutes: l.Minutes})
		return
	}
}
