package verify

import (
	"testing"
	"time"

	"cadencewright/scheduler"
)

// monday is the first instant of the invented campaigns here.
var monday = time.Date(2027, 1, 18, 0, 0, 0, 0, time.UTC)

// after is an instant some hours into the campaign.
func after(hours float64) time.Time {
	return monday.Add(time.Duration(hours * float64(time.Hour)))
}

func receiverNamed(code string, freqMHz float64, bands ...string) scheduler.Receiver {
	return scheduler.Receiver{Code: code, Bands: bands, FreqMHz: freqMHz, BandwidthMHz: 400, NPol: 2, TrecK: 20,
		TatmK: 3, GainKPerJy: 1.2, Digitisation: 1}
}

func pulsar(name string, raDeg, decDeg float64) scheduler.Source {
	return scheduler.Source{Name: name, RADeg: raDeg, DecDeg: decDeg, PosEpochMJD: 58000, PMRAMasYr: 12, PMDecMasYr: -7,
		PeriodS: 0.005, DMPcCm3: 20, FluxMJy: 3, FluxFreqMHz: 1400, SpectralIdx: -1.6, WidthS: 0.0004, JitterUs1h: 0.1,
		ScanMinutes: []int{20, 40}}
}

func goalFor(id, source string, bands ...string) scheduler.Goal {
	return scheduler.Goal{ID: id, Source: source, Bands: bands, Priority: 1}
}

// tiny is a campaign with one telescope of every mount, every kind of goal,
// pins, a lost part, interference and a history, in ten days.
func tiny(t testing.TB) *scheduler.Campaign {
	t.Helper()
	c := &scheduler.Campaign{Name: "tiny", Start: monday, End: after(240), GridMin: 5, DUT1S: 0.1}
	wide := receiverNamed("W", 1800, "L", "S")
	busy := receiverNamed("L", 1400, "L")
	busy.RFILoss = make([]float64, 24)
	for h := range busy.RFILoss {
		busy.RFILoss[h] = float64(h%7) / 10
	}
	site := func(code, zone string, lon, lat float64, mount scheduler.MountKind, rx ...scheduler.Receiver) scheduler.Telescope {
		return scheduler.Telescope{Code: code, Name: code, LongitudeDeg: lon, LatitudeDeg: lat, HeightM: 200, Timezone: zone, Mount: mount,
			ElevationMinDeg: 15, ElevationMaxDeg: 88, SunMinDeg: 5, SetupS: 600, CalS: 60, SwitchS: 120, SettleS: 20, Receivers: rx}
	}
	a := site("ALT", "Europe/Berlin", 10, 50, scheduler.MountAltAz, busy, receiverNamed("S", 2500, "S"), wide)
	a.AzimuthRangeDeg, a.RateAzDegS, a.RateElDegS, a.AccelAzDegS2 = [2]float64{-90, 450}, 0.5, 0.25, 0.05
	a.Horizon = []scheduler.HorizonPoint{{AzimuthDeg: 30, ElevationDeg: 10}, {AzimuthDeg: 120, ElevationDeg: 18}, {AzimuthDeg: 300, ElevationDeg: 12}}
	e := site("EQU", "America/New_York", -5, 42, scheduler.MountEquatorial, receiverNamed("L", 1400, "L"), receiverNamed("S", 2500, "S"), receiverNamed("P", 350, "P"))
	e.HourAngleRangeH, e.RateHADegS, e.RateDecDegS = [2]float64{-5, 5}, 0.3, 0.3
	r := site("TRN", "Asia/Kolkata", 25, 35, scheduler.MountTransit, receiverNamed("L", 1400, "L"))
	r.TrackHalfMin, r.RateElDegS, r.AccelElDegS2 = 40, 0.1, 0.01
	c.Telescopes = []scheduler.Telescope{a, e, r}
	addTinySources(c)
	block := func(id, tel string, from, hours float64, rx ...string) {
		c.Blocks = append(c.Blocks, scheduler.Block{ID: id, Telescope: tel, Start: after(from), End: after(from + hours), Receivers: rx})
	}
	block("a1", "ALT", 0, 7, "L", "S")
	block("e1", "EQU", 0.5, 7, "L", "S", "P")
	block("t1", "TRN", 0, 6, "L")
	block("a2", "ALT", 120, 7, "L", "W")
	block("e2", "EQU", 120, 7, "L", "S")
	block("t2", "TRN", 144, 6, "L")
	c.Blocks[1].Lost = []scheduler.Span{{Start: after(3.2), End: after(3.6)}}
	addTinyGoals(c)
	if err := c.Validate(); err != nil {
		t.Fatal(err)
	}
	return c
}

func addTinySources(c *scheduler.Campaign) {
	for i, name := range []string{"SIM J0601+3011", "SIM J0655+2207", "SIM J0748+5101", "SIM J0842+3404", "SIM J0930+1802", "SIM J1025+4003", "SIM J1104+2601", "SIM J1205+3309"} {
		c.Sources = append(c.Sources, pulsar(name, 90+13*float64(i), []float64{30, 22, 51, 34, 18, 40, 26, 33}[i]))
	}
	c.Sources[2].Binary = &scheduler.Binary{Model: scheduler.BinaryKepler, PbD: 0.4, A1Ls: 2, Ecc: 0.3, OmDeg: 40, T0MJD: 59000.1, OmdotDegYr: 2}
	c.Sources[3].Binary = &scheduler.Binary{Model: scheduler.BinaryELL1, PbD: 1.7, A1Ls: 3, TascMJD: 59000.2, Eps1: 1e-4, Eps2: -2e-4}
	c.Sources[5].SunMinDeg = 20
}

func addTinyGoals(c *scheduler.Campaign) {
	for i, s := range c.Sources {
		g := scheduler.CadenceTarget{Goal: goalFor("cad-"+s.Name[4:9], s.Name, "L"), EveryD: 5, EarlyD: 1.25}
		if i%2 == 0 {
			g.TOAUs = 1
		}
		c.CadenceTargets = append(c.CadenceTargets, g)
	}
	c.PhaseGoals = []scheduler.PhaseGoal{
		{Goal: goalFor("con", c.Sources[2].Name, "L", "S"), Reference: scheduler.RefConjunction, DwellMin: 20, PerHorizon: 3,
			Windows: []scheduler.PhaseWindow{{From: 0, To: 0.4, Need: 4}, {From: 0.5, To: 0.9, Need: 3}}},
		{Goal: goalFor("node", c.Sources[3].Name, "S"), Reference: scheduler.RefNode, DwellMin: 15, PerHorizon: 1,
			Windows: []scheduler.PhaseWindow{{From: 0.6, To: 1.3, Need: 2}}},
	}
	c.OverlapGoals = []scheduler.OverlapGoal{
		{Goal: goalFor("both", c.Sources[4].Name, "L", "S"), Count: 2, OverlapMin: 15, EveryD: 6},
		{Goal: goalFor("three", c.Sources[1].Name, "L"), Count: 3, OverlapMin: 20, EveryD: 9},
	}
	c.BandPairGoals = []scheduler.BandPairGoal{
		{Goal: goalFor("pair", c.Sources[6].Name, "L", "S"), WithinH: 6, EveryD: 4},
		{Goal: goalFor("wide", c.Sources[7].Name, "S", "L"), WithinH: 2, EveryD: 8},
	}
	had := func(source int, tel, rx string, hours, minutes float64) {
		c.History = append(c.History, scheduler.HistoryScan{Source: c.Sources[source].Name, Telescope: tel, Receiver: rx,
			Start: after(hours), Minutes: minutes, Counted: true})
	}
	had(0, "ALT", "L", -130, 30)
	had(1, "EQU", "L", -210, 30)
	had(5, "TRN", "L", -60, 20)
	had(6, "ALT", "L", -100, 30)
	had(6, "EQU", "S", -99, 30)
	c.Pins = []scheduler.Pin{{Block: "a1", Source: c.Sources[5].Name, Receiver: "S", Start: after(3), Minutes: 35}}
}
