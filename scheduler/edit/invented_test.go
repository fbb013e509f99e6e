package edit

import (
	"testing"
	"time"

	"cadencewright/scheduler"
	"cadencewright/scheduler/feasible"
)

// monday is the first instant of the invented campaign here.
var monday = time.Date(2027, 1, 18, 0, 0, 0, 0, time.UTC)

// after is an instant some minutes into the campaign.
func after(minutes float64) time.Time {
	return monday.Add(time.Duration(minutes * float64(time.Minute)))
}

// Names of the sources: the first two are up all night, the third never.
const (
	high  = "SIM J0748+5101"
	other = "SIM J0842+4404"
	south = "SIM J0800-5000"
)

func front(code string, freqMHz float64, bands ...string) scheduler.Receiver {
	return scheduler.Receiver{Code: code, Bands: bands, FreqMHz: freqMHz, BandwidthMHz: 400, NPol: 2, TrecK: 20, TatmK: 3, GainKPerJy: 1.2, Digitisation: 1}
}

func pulsar(name string, raDeg, decDeg float64) scheduler.Source {
	return scheduler.Source{Name: name, RADeg: raDeg, DecDeg: decDeg, PosEpochMJD: 58000, PeriodS: 0.005, FluxMJy: 3, FluxFreqMHz: 1400,
		SpectralIdx: -1.6, WidthS: 0.0004, JitterUs1h: 0.1, ScanMinutes: []int{20, 40}}
}

// invented is a night at one telescope from midnight to six, with the hour
// from three lost, and one scan wanted of each of its sources.
func invented() *scheduler.Campaign {
	c := &scheduler.Campaign{Name: "invented", Start: monday, End: after(7 * 1440), GridMin: 5}
	c.Telescopes = []scheduler.Telescope{{Code: "ONE", Name: "One", LongitudeDeg: 10, LatitudeDeg: 50, HeightM: 200, Timezone: "Etc/UTC",
		Mount: scheduler.MountAltAz, ElevationMinDeg: 15, ElevationMaxDeg: 89, SetupS: 600, CalS: 60, SwitchS: 120, SettleS: 20,
		AzimuthRangeDeg: [2]float64{-270, 450}, RateAzDegS: 0.5, RateElDegS: 0.5,
		Receivers: []scheduler.Receiver{front("L", 1400, "L"), front("S", 2500, "S")}}}
	c.Sources = []scheduler.Source{pulsar(high, 117, 51), pulsar(other, 130, 44), pulsar(south, 120, -50)}
	for i, name := range []string{high, other, south} {
		c.CadenceTargets = append(c.CadenceTargets, scheduler.CadenceTarget{
			Goal:   scheduler.Goal{ID: []string{"high", "other", "south"}[i], Source: name, Bands: []string{"L", "S"}, Priority: 1},
			EveryD: 9, EarlyD: 2.25})
	}
	c.Blocks = []scheduler.Block{{ID: "b1", Telescope: "ONE", Start: monday, End: after(360), Receivers: []string{"L"},
		Lost: []scheduler.Span{{Start: after(180), End: after(240)}}}}
	return c
}

// started is a session on a plan of the given scans at ONE.
func started(t *testing.T, c *scheduler.Campaign, scans ...scheduler.Scan) *Session {
	t.Helper()
	s, err := newSession(c, scans...)
	if err != nil {
		t.Fatal(err)
	}
	return s
}

// newSession is a session on a plan of the given scans for all of a campaign.
func newSession(c *scheduler.Campaign, scans ...scheduler.Scan) (*Session, error) {
	if err := c.Validate(); err != nil {
		return nil, err
	}
	h := scheduler.Horizon{From: c.Start, To: c.End}
	p, err := feasible.Build(c, h)
	if err != nil {
		return nil, err
	}
	return New(p, &scheduler.Plan{Campaign: c.Name, From: h.From, To: h.To, Scans: scans})
}

// at is a scan of block b1 with L.
func at(source string, minute float64, minutes int) scheduler.Scan {
	return scheduler.Scan{Block: "b1", Telescope: "ONE", Source: source, Receiver: "L", Start: after(minute), Minutes: minutes}
}
