package explain

import (
	"testing"
	"time"

	"cadencewright/scheduler"
)

// Every cause of a cadence unit, each by the one thing that makes it.
func TestWhyACadenceUnitIsUnmet(t *testing.T) {
	for _, x := range []struct {
		name   string
		change func(*scheduler.Campaign, *scheduler.CadenceTarget)
		scans  []scheduler.Scan
		code   scheduler.ReasonCode
		count  int
		says   []string
	}{
		{"no block at an allowed telescope", func(_ *scheduler.Campaign, g *scheduler.CadenceTarget) { g.Telescopes = []string{"TWO"} }, nil,
			NoBlock, 0, []string{"(TWO)", "block in this horizon"}},
		{"no receiver of the band", func(_ *scheduler.Campaign, g *scheduler.CadenceTarget) { g.Bands = []string{"P", "S"} }, nil,
			NoReceiver, 1, []string{"1 block has no receiver for P or S"}},
		{"pulse too broad", func(c *scheduler.Campaign, _ *scheduler.CadenceTarget) { c.Sources[0].WidthS = 0.0046 }, nil,
			NotDetectable, 1, []string{"4.6 ms with L of ONE at 1400 MHz", "period is 5 ms"}},
		{"not yet due", func(c *scheduler.Campaign, g *scheduler.CadenceTarget) {
			g.EveryD, g.EarlyD = 6, 1
			c.History = []scheduler.HistoryScan{{Source: asked, Telescope: "ONE", Receiver: "L", Start: after(-48), Minutes: 20, Counted: true}}
		}, nil, OutsideWindow, 1, []string{"2027-01-21 00:00 UTC to 2027-01-28 00:00 UTC", "2.7 d too early"}},
		{"never high enough", func(c *scheduler.Campaign, _ *scheduler.CadenceTarget) { c.Sources[0].DecDeg = -30 }, nil,
			TooLow, 1, []string{"Never up in 1 block", "deg at the highest (block b1 of ONE)", "limit there is 15.0 deg"}},
		{"behind the horizon", func(c *scheduler.Campaign, _ *scheduler.CadenceTarget) {
			c.Telescopes[0].Horizon = []scheduler.HorizonPoint{{AzimuthDeg: 0, ElevationDeg: 89}}
		}, nil, TooLow, 1, []string{"limit there is 89.0 deg"}},
		{"too high", func(c *scheduler.Campaign, _ *scheduler.CadenceTarget) { c.Telescopes[0].ElevationMaxDeg = 20 }, nil,
			TooHigh, 1, []string{"20 deg is the highest allowed"}},
		{"Sun too near", func(c *scheduler.Campaign, _ *scheduler.CadenceTarget) { c.Sources[0].SunMinDeg = 175 }, nil,
			NearSun, 1, []string{"1 block: 149.6 deg away", "175 deg are wanted"}},
		{"equatorial mount", func(c *scheduler.Campaign, _ *scheduler.CadenceTarget) {
			equatorial(&c.Telescopes[0], -5, 0)
		}, nil, OffMount, 1, []string{"hour angles from -5 to 0 h"}},
		{"transit mount", func(c *scheduler.Campaign, _ *scheduler.CadenceTarget) {
			transit(&c.Telescopes[0], 5)
		}, nil, OffMount, 1, []string{"5 min on either side of transit"}},
		{"12 h in every scan", func(c *scheduler.Campaign, _ *scheduler.CadenceTarget) {
			equatorial(&c.Telescopes[0], -12, 12)
			c.Sources[0].DecDeg = 80
			c.Blocks[0].Start, c.Blocks[0].End = after(11).Add(-2*time.Minute), after(12).Add(-12*time.Minute)
			c.Sources[0].ScanMinutes = []int{30}
		}, nil, OffMount, 1, []string{"hour angle would pass 12 h", "30 min"}},
		{"block too short", func(c *scheduler.Campaign, _ *scheduler.CadenceTarget) { c.Blocks[0].End = after(0.25) }, nil,
			TooShort, 1, []string{"15 min in block b1", "20 min"}},
		{"up too briefly", func(c *scheduler.Campaign, _ *scheduler.CadenceTarget) {
			transit(&c.Telescopes[0], 45)
			c.Blocks[0].Start = after(0.25)
		}, nil,
			TooShort, 1, []string{"min at a stretch (block b1 of ONE)", "takes 20 min"}},
		{"lost parts", func(c *scheduler.Campaign, _ *scheduler.CadenceTarget) {
			for h := 0.5; h < 7; h += 0.5 {
				c.Blocks[0].Lost = append(c.Blocks[0].Lost, scheduler.Span{Start: after(h), End: after(h + 0.1)})
			}
		}, nil, NoTime, 1, []string{"leave 15 min at a stretch", "20 min"}},
		{"cable wrap", func(c *scheduler.Campaign, _ *scheduler.CadenceTarget) {
			c.Telescopes[0].AzimuthRangeDeg = [2]float64{20, 60}
		}, nil,
			CableWrap, 1, []string{"no scan of 20 min", "20 to 60 deg"}},
		{"precision", func(_ *scheduler.Campaign, g *scheduler.CadenceTarget) { g.TOAUs = 0.1 }, nil,
			Precision, 1, []string{"us at best (ONE with L in block b1 from", "for 40 min)", "0.1 us wanted", "counts from 0.141 us"}},
		{"another scan in its place", func(c *scheduler.Campaign, _ *scheduler.CadenceTarget) { c.Blocks[0].End = after(1.2) },
			[]scheduler.Scan{observed(other, "b1", 0.5, 40, earning("none", 9))},
			Displaced, 1, []string{"in place of SIM J0842+4404 at 00:30 (earns 0.00)", "gain 3.00"}},
		{"a pin in its place", func(c *scheduler.Campaign, _ *scheduler.CadenceTarget) {
			c.Blocks[0].End = after(1.1)
			c.Telescopes[0].RateAzDegS = 0.001
			c.Sources[0].ScanMinutes = []int{15}
			c.Pins = []scheduler.Pin{{Block: "b1", Source: other, Receiver: "L", Start: after(0.25), Minutes: 20}}
		}, []scheduler.Scan{{Block: "b1", Telescope: "ONE", Source: other, Receiver: "L", Start: after(0.25), Minutes: 20, Pinned: true}},
			Displaced, 1, []string{"pinned scan stands in the way of every one of"}},
	} {
		t.Run(x.name, func(t *testing.T) {
			c := lone()
			x.change(c, wantScan(c))
			list := explained(t, c, "cad#1", x.scans...)
			if len(list) != 1 {
				t.Fatalf("%d reasons: %v", len(list), list)
			}
			says(t, list[0], x.code, x.count, x.says...)
		})
	}
}

func equatorial(t *scheduler.Telescope, lo, hi float64) {
	t.Mount, t.AzimuthRangeDeg, t.RateAzDegS, t.RateElDegS = scheduler.MountEquatorial, [2]float64{}, 0, 0
	t.HourAngleRangeH, t.RateHADegS, t.RateDecDegS = [2]float64{lo, hi}, 0.5, 0.5
}

func transit(t *scheduler.Telescope, halfMin float64) {
	t.Mount, t.AzimuthRangeDeg, t.RateAzDegS = scheduler.MountTransit, [2]float64{}, 0
	t.TrackHalfMin = halfMin
}

func TestWhereThereIsRoom(t *testing.T) {
	c := lone()
	wantScan(c)
	list := explained(t, c, "cad#1")
	if len(list) != 1 {
		t.Fatalf("%d reasons: %v", len(list), list)
	}
	says(t, list[0], Fits, 1, "There is room: ONE with L in block b1 from 2027-01-18 00:15 UTC for 20 min would earn 3.00")
}

// Blocks that fail alike make one reason, told by the nearest; the reason that
// is nearest to a scan comes first.
func TestReasonsOfSeveralBlocks(t *testing.T) {
	c := lone()
	g := wantScan(c)
	g.TOAUs = 0.1
	c.Sources[0].DecDeg = 20
	addBlock(c, "b2", "ONE", 12, 5, "L") // below the limit then
	addBlock(c, "b3", "ONE", 40, 2, "S")
	addBlock(c, "b4", "TWO", 10, 4, "L")
	addBlock(c, "b5", "ONE", 48, 7, "L", "W")
	list := explained(t, c, "cad#1")
	codes := []scheduler.ReasonCode{}
	for _, r := range list {
		codes = append(codes, r.Code)
	}
	if len(list) != 3 {
		t.Fatalf("reasons %v", codes)
	}
	says(t, list[0], Precision, 2, "in 2 blocks", "(ONE with L in block b1 from")
	says(t, list[1], TooLow, 2, "Never up in 2 blocks")
	says(t, list[len(list)-1], NoReceiver, 1, "1 block has no receiver for L")
}

// Two windows, and one block in reach of both: the scan of the first is too
// near for the second.
func TestNeighbouringWindows(t *testing.T) {
	c := lone()
	wantScan(c)
	c.Blocks = nil
	addBlock(c, "b1", "ONE", 96, 7, "L")
	list := explained(t, c, "cad#2", observed(asked, "b1", 97, 20, earning("cad#1", 1)))
	if len(list) != 1 {
		t.Fatalf("reasons %v", list)
	}
	says(t, list[0], TooClose, 1, "less than half of the interval (2.50 d)", "cad#1", "2027-01-22 01:00 UTC")
}

// What displacing a scan costs holds what its partners lose with it.
func TestDisplacingOneOfTwoThatShare(t *testing.T) {
	c := lone()
	wantScan(c)
	c.OverlapGoals = []scheduler.OverlapGoal{{Goal: scheduler.Goal{ID: "two", Source: other, Bands: []string{"L"}, Priority: 4}, Count: 2, OverlapMin: 20, EveryD: 9}}
	c.Blocks[0].End = after(1.2)
	addBlock(c, "b2", "TWO", 0, 2, "L")
	there := observed(other, "b2", 0.5, 40, earning("two#1", 6))
	there.Telescope = "TWO"
	here := observed(other, "b1", 0.5, 40, earning("two#1", 6))
	// TWO is free beside its scan; without it only ONE is left.
	c.CadenceTargets[0].Telescopes = []string{"ONE"}
	list := explained(t, c, "cad#1", here, there)
	says(t, list[0], Displaced, 1, "earning 3.00 in place of SIM J0842+4404 at 00:30 (earns 12.00)")
}
