package feasible_test

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"
	"time"

	"pgregory.net/rapid"

	"cadencewright/astro/sky"
	"cadencewright/scheduler"
	"cadencewright/scheduler/feasible"
	"cadencewright/scheduler/units"
	"cadencewright/scheduler/verify"
)

var monday = time.Date(2027, 1, 18, 0, 0, 0, 0, time.UTC)

func after(minutes float64) time.Time {
	return monday.Add(time.Duration(minutes * float64(time.Minute)))
}

// site draws a telescope of any mount whose limits cut into the sky.
func site(t *rapid.T) scheduler.Telescope {
	tel := scheduler.Telescope{Code: "A", Name: "A", LongitudeDeg: rapid.Float64Range(-180, 180).Draw(t, "lon"),
		LatitudeDeg: rapid.Float64Range(-60, 60).Draw(t, "lat"), HeightM: 300, Timezone: rapid.SampledFrom([]string{"UTC", "Asia/Kathmandu", "America/St_Johns"}).Draw(t, "zone"),
		ElevationMinDeg: rapid.Float64Range(0, 25).Draw(t, "el min"), ElevationMaxDeg: rapid.Float64Range(60, 90).Draw(t, "el max"),
		SunMinDeg: rapid.Float64Range(0, 40).Draw(t, "sun"), SetupS: rapid.Float64Range(0, 900).Draw(t, "setup"), CalS: rapid.Float64Range(0, 120).Draw(t, "cal"),
		SwitchS: 100, SettleS: rapid.Float64Range(0, 60).Draw(t, "settle")}
	switch tel.Mount = rapid.SampledFrom([]scheduler.MountKind{scheduler.MountAltAz, scheduler.MountEquatorial, scheduler.MountTransit}).Draw(t, "mount"); tel.Mount {
	case scheduler.MountAltAz:
		lo := rapid.Float64Range(-300, 100).Draw(t, "az lo")
		tel.AzimuthRangeDeg = [2]float64{lo, lo + rapid.Float64Range(100, 600).Draw(t, "az range")}
		tel.RateAzDegS, tel.RateElDegS = 0.5, 0.3
	case scheduler.MountEquatorial:
		tel.HourAngleRangeH = [2]float64{-rapid.Float64Range(1, 12).Draw(t, "east"), rapid.Float64Range(1, 12).Draw(t, "west")}
		tel.RateHADegS, tel.RateDecDegS = 0.5, 0.3
	default:
		tel.TrackHalfMin, tel.RateElDegS = rapid.Float64Range(20, 200).Draw(t, "track"), 0.2
	}
	if rapid.Bool().Draw(t, "mask") {
		for az := 30.0; az < 360; az += 90 {
			tel.Horizon = append(tel.Horizon, scheduler.HorizonPoint{AzimuthDeg: az, ElevationDeg: rapid.Float64Range(0, 50).Draw(t, "horizon")})
		}
	}
	loss := make([]float64, 24)
	for h := range loss {
		loss[h] = float64(h%5) / 6
	}
	tel.Receivers = []scheduler.Receiver{{Code: "L", Bands: []string{"L"}, FreqMHz: 1400, BandwidthMHz: 400, NPol: 2, TrecK: 20, TatmK: 2, GainKPerJy: 1, Digitisation: 1, RFILoss: loss},
		{Code: "P", Bands: []string{"P"}, FreqMHz: 350, BandwidthMHz: 80, NPol: 2, TrecK: 50, TatmK: 2, GainKPerJy: 1, Digitisation: 1.1}}
	return tel
}

// drawn is a campaign of one telescope, three sources and one block, which
// need not begin or end on the grid.
func drawn(t *rapid.T) *scheduler.Campaign {
	c := &scheduler.Campaign{Name: "drawn", Start: monday, End: after(3 * 1440), GridMin: rapid.SampledFrom([]int{2, 5, 10}).Draw(t, "grid"),
		DUT1S: rapid.Float64Range(-0.9, 0.9).Draw(t, "dut1"), Telescopes: []scheduler.Telescope{site(t)}}
	r := rand.New(rand.NewPCG(rapid.Uint64().Draw(t, "sky"), 2))
	for i := range 3 {
		name := fmt.Sprintf("SIM J%02d00+0000", i)
		ra, dec := 360*r.Float64(), 150*r.Float64()-75
		if i == 0 { // not far from the Sun of January
			ra, dec = 270+60*r.Float64(), -40+40*r.Float64()
		}
		c.Sources = append(c.Sources, scheduler.Source{Name: name, RADeg: ra, DecDeg: dec,
			PosEpochMJD: 55000, PMRAMasYr: 40, PMDecMasYr: -70, PeriodS: 0.005, FluxMJy: 3, FluxFreqMHz: 1400, SpectralIdx: -1.6, WidthS: 0.0004, JitterUs1h: 0.2,
			Scatter1GHzS: 1e-6, SunMinDeg: rapid.Float64Range(0, 40).Draw(t, "source sun"), ScanMinutes: []int{20, 60}})
		c.CadenceTargets = append(c.CadenceTargets, scheduler.CadenceTarget{Goal: scheduler.Goal{ID: fmt.Sprintf("g%d", i), Source: name, Bands: []string{"L", "P"}, Priority: 1}, EveryD: 7, EarlyD: 1})
	}
	from := r.IntN(1440 * 60)
	start := monday.Add(time.Duration(from) * time.Second)
	end := start.Add(time.Duration(6*3600+r.IntN(6*3600)) * time.Second)
	bl := scheduler.Block{ID: "b", Telescope: "A", Start: start, End: end, Receivers: []string{"L", "P"}}
	if rapid.Bool().Draw(t, "loses") {
		at := start.Add(time.Duration(r.IntN(5*3600)) * time.Second)
		bl.Lost = []scheduler.Span{{Start: at, End: at.Add(1111 * time.Second)}}
	}
	c.Blocks = []scheduler.Block{bl}
	if err := c.Validate(); err != nil {
		t.Fatal(err)
	}
	return c
}

// tighter is a telescope whose limits are narrower by more than two programs
// may differ about the sky.
func tighter(tel scheduler.Telescope) scheduler.Telescope {
	const deg = 4e-4
	tel.ElevationMinDeg += deg
	tel.ElevationMaxDeg -= deg
	tel.SunMinDeg += deg
	tel.Horizon = append([]scheduler.HorizonPoint(nil), tel.Horizon...)
	for i := range tel.Horizon {
		tel.Horizon[i].ElevationDeg += deg
	}
	switch tel.Mount {
	case scheduler.MountAltAz: // near the zenith azimuth runs fast
		tel.AzimuthRangeDeg[0] += 0.05
		tel.AzimuthRangeDeg[1] -= 0.05
	case scheduler.MountEquatorial: // and hour angle near the poles
		tel.HourAngleRangeH[0] += 2e-4
		tel.HourAngleRangeH[1] -= 2e-4
	default:
		tel.TrackHalfMin -= 0.01
	}
	return tel
}

// candidate is a scan that may or may not be allowed.
type candidate struct {
	scan    scheduler.Scan
	allowed bool
	info    float64 // 1/s²; 0: not known, the scan is not allowed
}

// candidates draws scans of a problem's block, those with a cable wrap once for
// every turn about the range.
func candidates(t *rapid.T, c *scheduler.Campaign, b *feasible.Block) []candidate {
	var list []candidate
	r := rand.New(rand.NewPCG(rapid.Uint64().Draw(t, "seed"), 1)) // evenly, not near the ends
	for range 30 {
		si, rx, minutes := r.IntN(3), r.IntN(2), []int{20, 60}[r.IntN(2)]
		steps := minutes / c.GridMin
		start := r.IntN(b.Steps+4) - 3
		x := candidate{scan: scheduler.Scan{Block: "b", Telescope: "A", Source: c.Sources[si].Name, Receiver: []string{"L", "P"}[rx],
			Start: units.Instant(b.Minute(start, c.GridMin)), Minutes: minutes}}
		pl := b.PlaceOf(si)
		if x.allowed = pl != nil && pl.Allows(steps, start); x.allowed {
			x.info = pl.InfoOf(rx, start, steps)
			x.scan.TOAUs = 1e6 / math.Sqrt(x.info)
		}
		if c.Telescopes[0].Mount != scheduler.MountAltAz {
			list = append(list, x)
			continue
		}
		at, err := sky.Observe(c.Telescopes[0].Site(), c.Sources[si].Star(), x.scan.Start, c.DUT1S)
		if err != nil {
			t.Fatal(err)
		}
		may := x.allowed
		for turn := -2; turn <= 2; turn++ {
			az := at.AzDeg + 360*float64(turn)
			x.scan.MotorAzDeg, x.allowed = &az, false
			if may {
				lo, hi := b.Turns(pl, start, steps)
				k := int(math.Round((az - pl.Axis1[start-pl.Lo]) / 360))
				x.allowed = k >= lo && k <= hi
			}
			list = append(list, x)
		}
	}
	return list
}

// judged is, by the index of each scan, the rules that it breaks by the
// independent check; crowding is no matter of one scan, and what is earned is
// of none.
func judged(t *rapid.T, c *scheduler.Campaign, list []candidate, limitDeg float64) map[int][]verify.Violation {
	p := &scheduler.Plan{Campaign: c.Name, From: c.Start, To: c.End}
	for i := range list {
		p.Scans = append(p.Scans, list[i].scan)
	}
	report, err := verify.Check(c, p, verify.Options{SkipBound: true, LimitDeg: limitDeg, TimeS: 1e-3, Relative: 1e-5})
	if err != nil {
		t.Fatal(err)
	}
	bad := map[int][]verify.Violation{}
	for _, v := range report.Violations {
		if v.Scan < 0 || v.Kind == verify.KindRoom || v.Kind == verify.KindTOA && !list[v.Scan].allowed {
			continue
		}
		bad[v.Scan] = append(bad[v.Scan], v)
	}
	return bad
}

// What this package allows, the check that shares no code with it allows, with
// the same information; what it does not allow breaks a rule by that check, at
// limits narrower by an arcsecond or so.
func TestStartsAgreeWithTheCheck(t *testing.T) {
	var yes, no int
	kinds := map[verify.Kind]int{}
	rapid.Check(t, func(t *rapid.T) {
		c := drawn(t)
		p, err := feasible.Build(c, scheduler.Horizon{From: c.Start, To: c.End})
		if err != nil {
			t.Fatal(err)
		}
		list := candidates(t, c, &p.Blocks[0])
		wide := judged(t, c, list, 1.5e-3)
		narrow := *c
		narrow.Telescopes = []scheduler.Telescope{tighter(c.Telescopes[0])}
		narrow.Sources = append([]scheduler.Source(nil), c.Sources...)
		for i := range narrow.Sources {
			narrow.Sources[i].SunMinDeg += 4e-4
		}
		tight := judged(t, &narrow, list, 1e-9)
		for i := range list {
			x := &list[i]
			if x.allowed {
				yes++
				if len(wide[i]) > 0 {
					t.Errorf("allowed, but %s", wide[i][0].Text)
				}
				continue
			}
			no++
			if len(tight[i]) == 0 {
				t.Errorf("not allowed, but the check finds nothing: %+v", x.scan)
			}
			for _, v := range tight[i] {
				kinds[v.Kind]++
			}
		}
	})
	if t.Failed() {
		return
	}
	if yes < 100 || no < 100 {
		t.Errorf("%d candidates were allowed and %d not: too few of one to mean much", yes, no)
	}
	for _, k := range []verify.Kind{verify.KindLow, verify.KindHigh, verify.KindSun, verify.KindHourAngle, verify.KindMeridian, verify.KindMotor, verify.KindSetup,
		verify.KindBlockEnd, verify.KindLost} {
		if kinds[k] == 0 {
			t.Errorf("no candidate was refused for %s", k)
		}
	}
	t.Logf("%d allowed, %d not: %v", yes, no, kinds)
}
