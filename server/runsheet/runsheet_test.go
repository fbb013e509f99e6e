package runsheet

import (
	"bytes"
	"encoding/csv"
	"math"
	"os"
	"strings"
	"testing"
	"time"

	"cadencewright/astro"
	"cadencewright/astro/sky"
	"cadencewright/scheduler"
	"cadencewright/scheduler/feasible"
	"cadencewright/scheduler/solve"
	"cadencewright/testdata"
)

func planned(t *testing.T, name string) (*scheduler.Campaign, []PlannedScan) {
	t.Helper()
	data, err := os.ReadFile(testdata.Path("campaigns", name+".json"))
	if err != nil {
		t.Fatal(err)
	}
	c, err := scheduler.ReadCampaign(data)
	if err != nil {
		t.Fatal(err)
	}
	p, err := feasible.Build(c, scheduler.Horizon{From: c.Start, To: c.End})
	if err != nil {
		t.Fatal(err)
	}
	r, err := solve.Solve(p, solve.Options{Effort: 100})
	if err != nil {
		t.Fatal(err)
	}
	var scans []PlannedScan
	for i, s := range r.Plan.Scans {
		scans = append(scans, PlannedScan{Scan: s, ID: "s" + time.Duration(i).String(), State: "planned"})
	}
	return c, scans
}

// Every sheet of a planned week: each scan of the week stands on exactly one
// sheet of its telescope, with figures that the planner and the sky agree with.
func TestSheetsOfAWeek(t *testing.T) {
	for _, name := range []string{"small-1", "medium-1"} {
		c, scans := planned(t, name)
		seen := map[string]int{}
		for i := range c.Telescopes {
			tel := &c.Telescopes[i]
			for d := -1; d < 8; d++ {
				night := c.Start.AddDate(0, 0, d).Format(time.DateOnly)
				s, err := Build(Input{Campaign: c, Telescope: tel.Code, Night: night, Scans: scans, Plan: PlanInfo{Revision: 3, IssuedAt: c.Start}})
				if err != nil {
					t.Fatal(err)
				}
				n := 0
				for _, b := range s.Blocks {
					for k, x := range b.Scans {
						n++
						seen[x.ID]++
						if x.Number != n {
							t.Errorf("%s %s: scan %d is numbered %d", tel.Code, night, n, x.Number)
						}
						check(t, c, tel, x)
						if first := k == 0 || lostBetween(b.Lost, b.Scans[k-1].End, x.Start); first != x.Begins {
							t.Errorf("scan %s: begins %v, want %v", x.ID, x.Begins, first)
						}
						if x.Begins && x.SlewS != 0 {
							t.Errorf("scan %s begins and slews %g s", x.ID, x.SlewS)
						}
						if k > 0 {
							room := x.Start.Sub(b.Scans[k-1].End).Seconds()
							if room < x.SlewS+x.CalS-1 {
								t.Errorf("scan %s: %g s of room, %g s of slew and %g s of calibration", x.ID, room, x.SlewS, x.CalS)
							}
						}
					}
				}
			}
		}
		for _, x := range scans {
			if seen[x.ID] != 1 {
				t.Errorf("%s: scan %s stands on %d sheets", name, x.ID, seen[x.ID])
			}
		}
	}
}

func check(t *testing.T, c *scheduler.Campaign, tel *scheduler.Telescope, x Scan) {
	t.Helper()
	p, err := sky.Observe(tel.Site(), c.SourceByName(x.Source).Star(), x.Start, c.DUT1S)
	if err != nil {
		t.Fatal(err)
	}
	if math.Abs(p.ElDeg-x.First.ElDeg) > 1e-3 || math.Abs(math.Remainder(p.AzDeg-x.First.AzDeg, 360)) > 0.1 {
		t.Errorf("scan %s starts at az %.3f el %.3f, the sky says %.3f %.3f", x.ID, x.First.AzDeg, x.First.ElDeg, p.AzDeg, p.ElDeg)
	}
	if x.LowestElDeg < tel.ElevationMinDeg-0.02 {
		t.Errorf("scan %s goes down to %.3f deg, the limit is %g", x.ID, x.LowestElDeg, tel.ElevationMinDeg)
	}
	if tel.Mount == scheduler.MountAltAz {
		m := *x.First.MotorAzDeg
		if m < tel.AzimuthRangeDeg[0]-0.02 || m > tel.AzimuthRangeDeg[1]+0.02 || math.Abs(math.Remainder(m-x.First.AzDeg, 360)) > 1e-6 {
			t.Errorf("scan %s: motor azimuth %.3f for azimuth %.3f", x.ID, m, x.First.AzDeg)
		}
	}
	if x.TOAUs > 0 && !(x.SNR > 0) {
		t.Errorf("scan %s: an uncertainty of %g us, but S/N %g", x.ID, x.TOAUs, x.SNR)
	}
}

// A block of three scans with ten minutes lost between the last two: the first
// scan begins the block and the third begins after the loss; the second is
// slewed to, if only for the settling time.
func TestWhatBegins(t *testing.T) {
	c, scans := planned(t, "small-1")
	var block *scheduler.Block
	var mine []PlannedScan
	for i := 0; len(mine) < 3 && i < len(c.Blocks); i++ {
		block, mine = &c.Blocks[i], nil
		for _, x := range scans {
			if x.Block == block.ID {
				mine = append(mine, x)
			}
		}
	}
	if len(mine) < 3 {
		t.Fatal("no block of the plan has three scans")
	}
	mine = mine[:3]
	tel := c.TelescopeByCode(block.Telescope)
	night, err := NightAt(tel, block.Start)
	if err != nil {
		t.Fatal(err)
	}
	gap := mine[2].Start
	for name, x := range map[string]struct {
		lost   []scheduler.Span
		begins [3]bool
	}{
		"no loss":      {nil, [3]bool{true, false, false}},
		"loss between": {[]scheduler.Span{{Start: gap.Add(-10 * time.Minute), End: gap}}, [3]bool{true, false, true}},
		"loss before":  {[]scheduler.Span{{Start: block.Start, End: mine[0].Start}}, [3]bool{true, false, false}},
		"loss after":   {[]scheduler.Span{{Start: mine[2].End(), End: block.End}}, [3]bool{true, false, false}},
	} {
		block.Lost = x.lost
		s, err := Build(Input{Campaign: c, Telescope: tel.Code, Night: night.Name, Scans: mine, Plan: PlanInfo{Week: "2027-W08", Revision: 1}})
		if err != nil {
			t.Fatal(err)
		}
		if s.PlanWeek != "2027-W08" {
			t.Errorf("%s: the plan is of week %q", name, s.PlanWeek)
		}
		for _, b := range s.Blocks {
			for i, y := range b.Scans {
				if y.Begins != x.begins[i] || y.Begins && y.SlewS != 0 || !y.Begins && y.SlewS < tel.SettleS {
					t.Errorf("%s: scan %d begins %v and is slewed to in %g s, want %v", name, i+1, y.Begins, y.SlewS, x.begins[i])
				}
			}
		}
	}
}

// Clocks change on 2027-03-28 and 2027-10-31 in Europe: those nights begin on
// the day before and last 23 and 25 hours.
func TestNightsAcrossClockChanges(t *testing.T) {
	tel := &scheduler.Telescope{Code: "X", Timezone: "Europe/Berlin"}
	for date, hours := range map[string]float64{"2027-01-18": 24, "2027-03-27": 23, "2027-10-30": 25} {
		n, err := NightNamed(tel, date)
		if err != nil {
			t.Fatal(err)
		}
		if got := n.To.Sub(n.From).Hours(); got != hours {
			t.Errorf("the night of %s lasts %g h, want %g", date, got, hours)
		}
		if n.From.In(n.Zone).Hour() != 12 || n.To.In(n.Zone).Hour() != 12 {
			t.Errorf("the night of %s does not run from noon to noon", date)
		}
		for _, at := range []time.Time{n.From, n.To.Add(-time.Second)} {
			m, err := NightAt(tel, at)
			if err != nil || m.Name != date || !m.Holds(at) {
				t.Errorf("the night at %s is %s (%v), want %s", at, m.Name, err, date)
			}
		}
	}
}

func TestCSV(t *testing.T) {
	c, scans := planned(t, "small-1")
	var s *Sheet
	for d := 0; s == nil || s.Scans() == 0; d++ {
		var err error
		if s, err = Build(Input{Campaign: c, Telescope: "BRM", Night: c.Start.AddDate(0, 0, d).Format(time.DateOnly), Scans: scans,
			Plan: PlanInfo{Revision: 2, Superseded: &Superseded{ByRevision: 5}}}); err != nil {
			t.Fatal(err)
		}
	}
	s.Blocks[0].Scans[0].Notes = []string{"=1+1"}
	var b bytes.Buffer
	if err := s.WriteCSV(&b); err != nil {
		t.Fatal(err)
	}
	lines, err := csv.NewReader(&b).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	if len(lines) != s.Scans()+1 {
		t.Fatalf("%d lines for %d scans", len(lines), s.Scans())
	}
	cell := func(row int, name string) string {
		for i, h := range lines[0] {
			if h == name {
				return lines[row][i]
			}
		}
		t.Fatalf("no column %s", name)
		return ""
	}
	if got := cell(1, "notes"); got != "'=1+1" {
		t.Errorf("a formula stands in the file as %q", got)
	}
	if got := cell(1, "start_utc"); got != s.Blocks[0].Scans[0].Start.Format(time.RFC3339) {
		t.Errorf("start %q", got)
	}
	if cell(1, "superseded_by_revision") != "5" || cell(1, "plan_revision") != "2" {
		t.Error("the line does not say which revision it belongs to")
	}
}

func TestPlain(t *testing.T) {
	for in, want := range map[string]string{"": "", "L1": "L1", "-5.5": "-5.5", "+01:02:03": "+01:02:03", "-10:00:00.5": "-10:00:00.5",
		"=A1": "'=A1", "-1+2": "'-1+2", "@x": "'@x", "+cmd": "'+cmd"} {
		if got := plain(in); got != want {
			t.Errorf("%q becomes %q, want %q", in, got, want)
		}
	}
}

func TestFormats(t *testing.T) {
	if got := FormatRA(astro.FromHours(23.99999999)); got != "00:00:00.0" {
		t.Errorf("just below 24 h: %s", got)
	}
	if got := FormatRA(astro.FromDeg(64.75)); got != "04:19:00.0" {
		t.Errorf("64.75 deg: %s", got)
	}
	if got := FormatDec(astro.FromDeg(-0.5)); got != "-00:30:00" {
		t.Errorf("-0.5 deg: %s", got)
	}
}

func TestBuildRefuses(t *testing.T) {
	c, scans := planned(t, "small-1")
	for name, in := range map[string]Input{
		"telescope": {Campaign: c, Telescope: "NONE", Night: "2027-02-22"},
		"night":     {Campaign: c, Telescope: "BRM", Night: "yesterday"},
		"source": {Campaign: c, Telescope: scans[0].Telescope, Night: scans[0].Start.AddDate(0, 0, -1).Format(time.DateOnly),
			Scans: []PlannedScan{{ID: "z", Scan: scheduler.Scan{Block: scans[0].Block, Source: "gone", Receiver: "L1", Start: scans[0].Start, Minutes: 5}}}},
	} {
		_, err := Build(in)
		if name == "source" && err == nil { // the block may belong to the night after
			in.Night = scans[0].Start.Format(time.DateOnly)
			_, err = Build(in)
		}
		if err == nil || !strings.Contains(err.Error(), name) {
			t.Errorf("%s: %v", name, err)
		}
	}
}
