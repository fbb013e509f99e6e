package explain

import (
	"strings"
	"testing"
	"time"

	"cadencewright/scheduler"
	"cadencewright/scheduler/feasible"
)

// monday is the first instant of the invented campaigns here.
var monday = time.Date(2027, 1, 18, 0, 0, 0, 0, time.UTC)

// after is an instant some hours into the campaign.
func after(hours float64) time.Time {
	return monday.Add(time.Duration(hours * float64(time.Hour)))
}

// Names of the sources: the first is the one that is asked about.
const (
	asked = "SIM J0748+5101"
	other = "SIM J0842+4404"
)

// site is an alt-azimuth telescope that reaches everything above 15 degrees.
func site(code string, lon, lat float64, receivers ...scheduler.Receiver) scheduler.Telescope {
	return scheduler.Telescope{Code: code, Name: code, LongitudeDeg: lon, LatitudeDeg: lat, HeightM: 200, Timezone: "Etc/UTC",
		Mount: scheduler.MountAltAz, ElevationMinDeg: 15, ElevationMaxDeg: 89, SetupS: 600, CalS: 60, SwitchS: 60, SettleS: 20,
		AzimuthRangeDeg: [2]float64{-270, 450}, RateAzDegS: 0.5, RateElDegS: 0.5, Receivers: receivers}
}

func front(code string, freqMHz float64, bands ...string) scheduler.Receiver {
	return scheduler.Receiver{Code: code, Bands: bands, FreqMHz: freqMHz, BandwidthMHz: 400, NPol: 2, TrecK: 20, TatmK: 3, GainKPerJy: 1.2, Digitisation: 1}
}

func pulsar(name string, raDeg, decDeg float64) scheduler.Source {
	return scheduler.Source{Name: name, RADeg: raDeg, DecDeg: decDeg, PosEpochMJD: 58000, PeriodS: 0.005, FluxMJy: 3, FluxFreqMHz: 1400,
		SpectralIdx: -1.6, WidthS: 0.0004, JitterUs1h: 0.1, ScanMinutes: []int{20, 40}}
}

func goalFor(id string, bands ...string) scheduler.Goal {
	return scheduler.Goal{ID: id, Source: asked, Bands: bands, Priority: 1}
}

// lone is a week with two telescopes, one night's block at the first of them,
// and two sources that are up all of it. It wants nothing yet.
func lone() *scheduler.Campaign {
	c := &scheduler.Campaign{Name: "lone", Start: monday, End: after(168), GridMin: 5, DUT1S: 0.1}
	c.Telescopes = []scheduler.Telescope{site("ONE", 10, 50, front("L", 1400, "L"), front("S", 2500, "S"), front("W", 1800, "L", "S")),
		site("TWO", 30, 45, front("L", 1400, "L"), front("S", 2500, "S"))}
	c.Telescopes[1].ElevationMinDeg = 1
	c.Sources = []scheduler.Source{pulsar(asked, 117, 51), pulsar(other, 130, 44)}
	addBlock(c, "b1", "ONE", 0, 7, "L")
	return c
}

func addBlock(c *scheduler.Campaign, id, telescope string, from, hours float64, receivers ...string) {
	c.Blocks = append(c.Blocks, scheduler.Block{ID: id, Telescope: telescope, Start: after(from), End: after(from + hours), Receivers: receivers})
}

// wantScan asks for a scan every five days.
func wantScan(c *scheduler.Campaign) *scheduler.CadenceTarget {
	c.CadenceTargets = append(c.CadenceTargets, scheduler.CadenceTarget{Goal: goalFor("cad", "L"), EveryD: 5, EarlyD: 1.25})
	return &c.CadenceTargets[0]
}

// observed is a scan of a plan in a block at ONE.
func observed(source, block string, hours float64, minutes int, earns ...scheduler.Earning) scheduler.Scan {
	return scheduler.Scan{Block: block, Telescope: "ONE", Source: source, Receiver: "L", Start: after(hours), Minutes: minutes, Earns: earns}
}

func earning(unit string, value float64) scheduler.Earning {
	goal, _, _ := strings.Cut(strings.ReplaceAll(unit, "@", "#"), "#")
	return scheduler.Earning{Goal: goal, Unit: unit, Value: value}
}

// explained are the causes for a unit under a plan of the given scans.
func explained(t *testing.T, c *scheduler.Campaign, unit string, scans ...scheduler.Scan) []scheduler.Reason {
	t.Helper()
	if err := c.Validate(); err != nil {
		t.Fatal(err)
	}
	p, err := feasible.Build(c, scheduler.Horizon{From: c.Start, To: c.End})
	if err != nil {
		t.Fatal(err)
	}
	for _, u := range unmet(p, &scheduler.Plan{Campaign: c.Name, From: c.Start, To: c.End, Scans: scans}, 0) {
		if u.Unit == unit {
			return u.Reasons
		}
	}
	t.Fatalf("%s is not among the unmet units", unit)
	return nil
}

// says reports a reason other than expected: the code, the count and all parts
// of the text.
func says(t *testing.T, r scheduler.Reason, code scheduler.ReasonCode, count int, parts ...string) {
	t.Helper()
	if r.Code != code || r.Count != count {
		t.Errorf("%s, count %d, want %s and %d: %s", r.Code, r.Count, code, count, r.Text)
	}
	for _, part := range parts {
		if !strings.Contains(r.Text, part) {
			t.Errorf("the text does not say %q: %s", part, r.Text)
		}
	}
}
