package explain

import (
	"testing"

	"cadencewright/scheduler"
)

// wantOverlap asks for the source at both telescopes at once, wantPair for it
// in both bands.
func wantOverlap(c *scheduler.Campaign) *scheduler.OverlapGoal {
	c.OverlapGoals = []scheduler.OverlapGoal{{Goal: goalFor("two", "L", "S"), Count: 2, OverlapMin: 20, EveryD: 9}}
	return &c.OverlapGoals[0]
}

func wantPair(c *scheduler.Campaign) *scheduler.BandPairGoal {
	c.BandPairGoals = []scheduler.BandPairGoal{{Goal: goalFor("duo", "L", "S"), WithinH: 3, EveryD: 9}}
	return &c.BandPairGoals[0]
}

func TestWhyAnOverlapIsUnmet(t *testing.T) {
	for _, x := range []struct {
		name   string
		change func(*scheduler.Campaign, *scheduler.OverlapGoal)
		scans  []scheduler.Scan
		code   scheduler.ReasonCode
		count  int
		says   []string
	}{
		{"room", func(c *scheduler.Campaign, _ *scheduler.OverlapGoal) { addBlock(c, "b2", "TWO", 0, 7, "L") }, nil,
			Fits, 2, []string{"ONE with L in block b1 from", "TWO with L in block b2 from", "would earn 3.00"}},
		{"one telescope", func(*scheduler.Campaign, *scheduler.OverlapGoal) {}, nil,
			NoOverlap, 0, []string{"Only ONE can observe it in the time in which it counts; 2 telescopes at once are wanted."}},
		{"one after the other", func(c *scheduler.Campaign, _ *scheduler.OverlapGoal) { addBlock(c, "b2", "TWO", 9, 4, "L") }, nil,
			NoOverlap, 0, []string{"the nearest are block b1 of ONE until 2027-01-18 07:00 UTC and block b2 of TWO from 2027-01-18 09:15 UTC, 2.2 h later"}},
		{"too short a time together", func(c *scheduler.Campaign, g *scheduler.OverlapGoal) {
			addBlock(c, "b2", "TWO", 6.25, 4, "L")
			g.OverlapMin = 35
		}, nil, NoOverlap, 0, []string{"at once for 30 min at most", "from 2027-01-18 06:30 UTC", "35 min are wanted"}},
		{"longer than any scan", func(c *scheduler.Campaign, g *scheduler.OverlapGoal) {
			addBlock(c, "b2", "TWO", 0, 7, "L")
			g.OverlapMin = 45
		}, nil, NoOverlap, 0, []string{"longest allowed scan takes 40 min", "45 min"}},
		{"no common band", func(c *scheduler.Campaign, _ *scheduler.OverlapGoal) { addBlock(c, "b2", "TWO", 0, 7, "S") }, nil,
			NoOverlap, 0, []string{"ONE and TWO can observe it, but no two of them in the same band"}},
		{"three wanted", func(c *scheduler.Campaign, g *scheduler.OverlapGoal) {
			c.Telescopes = append(c.Telescopes, site("TRI", 0, 48, front("L", 1400, "L")))
			addBlock(c, "b2", "TWO", 0, 7, "L")
			addBlock(c, "b3", "TRI", 8, 4, "L")
			g.Count = 3
		}, nil, NoOverlap, 0, []string{"At most 2 telescopes", "3 are wanted"}},
		{"another scan in the way", func(c *scheduler.Campaign, _ *scheduler.OverlapGoal) {
			c.Blocks[0].End = after(1.2)
			addBlock(c, "b2", "TWO", 0, 7, "L")
		}, []scheduler.Scan{observed(other, "b1", 0.5, 40)},
			Displaced, 2, []string{"earning 3.00 in place of SIM J0842+4404 at 00:30 (earns 0.00)"}},
		{"half of it planned", func(c *scheduler.Campaign, _ *scheduler.OverlapGoal) { addBlock(c, "b2", "TWO", 0, 7, "L") },
			[]scheduler.Scan{observed(asked, "b1", 0.25, 20)}, Fits, 2, []string{"the planned ONE with L in block b1 from 2027-01-18 00:15 UTC for 20 min and TWO with L"}},
	} {
		t.Run(x.name, func(t *testing.T) {
			c := lone()
			x.change(c, wantOverlap(c))
			list := explained(t, c, "two#1", x.scans...)
			if len(list) == 0 {
				t.Fatal("no reason")
			}
			says(t, list[0], x.code, x.count, x.says...)
		})
	}
}

func TestWhyAPairIsUnmet(t *testing.T) {
	for _, x := range []struct {
		name   string
		change func(*scheduler.Campaign, *scheduler.BandPairGoal)
		scans  []scheduler.Scan
		code   scheduler.ReasonCode
		count  int
		says   []string
	}{
		{"room at one telescope", func(c *scheduler.Campaign, _ *scheduler.BandPairGoal) { c.Blocks[0].Receivers = []string{"L", "S"} }, nil,
			Fits, 1, []string{"ONE with L in block b1", "and ONE with S in block b1"}},
		{"room for one wide scan", func(c *scheduler.Campaign, _ *scheduler.BandPairGoal) { c.Blocks[0].Receivers = []string{"W"} }, nil,
			Fits, 1, []string{"There is room: ONE with W in block b1 from 2027-01-18 00:15 UTC for 20 min would earn 3.00"}},
		{"one band only", func(*scheduler.Campaign, *scheduler.BandPairGoal) {}, nil,
			NoPair, 0, []string{"L can be observed in 1 block, S in none"}},
		{"too far apart", func(c *scheduler.Campaign, _ *scheduler.BandPairGoal) { addBlock(c, "b2", "TWO", 11, 2, "S") }, nil,
			NoPair, 0, []string{"The nearest starts in the two bands are 4.6 h apart", "L: ONE with L in block b1 from 2027-01-18 06:40 UTC",
				"S: TWO with S in block b2 from 2027-01-18 11:15 UTC", "3.0 h are allowed"}},
		{"time for one scan only", func(c *scheduler.Campaign, _ *scheduler.BandPairGoal) {
			c.Blocks[0].Receivers, c.Blocks[0].End = []string{"L", "S"}, after(0.6)
		}, nil, NoPair, 0, []string{"L and S can be observed near each other only in block b1 of ONE, which has no time for both"}},
		{"another scan in the way", func(c *scheduler.Campaign, _ *scheduler.BandPairGoal) {
			c.Blocks[0].End = after(1.2)
			addBlock(c, "b2", "TWO", 1, 3, "S")
		}, []scheduler.Scan{observed(other, "b1", 0.5, 40)},
			Displaced, 2, []string{"ONE with L in block b1", "TWO with S in block b2", "in place of SIM J0842+4404"}},
		{"half of it planned", func(c *scheduler.Campaign, _ *scheduler.BandPairGoal) { addBlock(c, "b2", "TWO", 2, 3, "S") },
			[]scheduler.Scan{observed(asked, "b1", 0.25, 20)}, Fits, 2, []string{"the planned ONE with L in block b1 from 2027-01-18 00:15 UTC", "TWO with S in block b2"}},
	} {
		t.Run(x.name, func(t *testing.T) {
			c := lone()
			x.change(c, wantPair(c))
			list := explained(t, c, "duo#1", x.scans...)
			if len(list) == 0 {
				t.Fatal("no reason")
			}
			says(t, list[0], x.code, x.count, x.says...)
		})
	}
}

// Reasons of a pair say which band they are about.
func TestReasonsByBand(t *testing.T) {
	c := lone()
	wantPair(c)
	addBlock(c, "b2", "ONE", 12, 2, "L", "S")
	c.Sources[0].DecDeg = 20 // not up in b2
	list := explained(t, c, "duo#1")
	if len(list) != 4 {
		t.Fatalf("reasons %v", list)
	}
	says(t, list[0], NoPair, 0, "L can be observed in 1 block, S in none")
	says(t, list[1], TooLow, 1, "L: Never up in 1 block")
	says(t, list[2], TooLow, 1, "S: Never up in 1 block")
	says(t, list[3], NoReceiver, 1, "S: 1 block has no receiver for S")
}

// Windows of pairs and overlaps keep their distance, too.
func TestNeighbouringWindowsOfPairsAndOverlaps(t *testing.T) {
	c := lone()
	wantPair(c).EveryD = 4
	wantOverlap(c).EveryD = 4
	c.Blocks = nil
	addBlock(c, "b1", "ONE", 80, 4, "L", "S")
	addBlock(c, "b2", "TWO", 80, 4, "L", "S")
	first := observed(asked, "b1", 80.25, 20, earning("duo#1", 1), earning("two#1", 1))
	second := observed(asked, "b2", 80.25, 20, earning("duo#1", 1), earning("two#1", 1))
	second.Telescope, second.Receiver = "TWO", "S"
	for _, unit := range []string{"duo#2", "two#2"} {
		list := explained(t, c, unit, first, second)
		if len(list) == 0 {
			t.Fatal("no reason")
		}
		says(t, list[0], TooClose, 0, "half of the interval (2.00 d)", "2027-01-21 08:15 UTC")
	}
}

// Pins stand in the way of everything at a telescope that moves too slowly.
func TestPinsInTheWayOfBoth(t *testing.T) {
	c := lone()
	wantPair(c)
	wantOverlap(c)
	c.Blocks[0].End = after(1.1)
	c.Telescopes[0].RateAzDegS = 0.001
	c.Sources[0].ScanMinutes = []int{15}
	c.OverlapGoals[0].OverlapMin = 15
	addBlock(c, "b2", "TWO", 0, 3, "L", "S")
	c.OverlapGoals[0].Bands = []string{"L"}
	c.BandPairGoals[0].Telescopes = []string{"ONE", "TWO"}
	c.Blocks[0].Receivers, c.Blocks[1].Receivers = []string{"L"}, []string{"L", "S"}
	c.Pins = []scheduler.Pin{{Block: "b1", Source: other, Receiver: "L", Start: after(0.25), Minutes: 20}}
	pin := observed(other, "b1", 0.25, 20)
	pin.Pinned = true
	list := explained(t, c, "two#1", pin)
	says(t, list[0], Displaced, 0, "pinned scans stand in the way at every common start")

	c.Blocks[1].Receivers = []string{"S"}
	list = explained(t, c, "duo#1", pin)
	says(t, list[0], Displaced, 0, "pinned scans stand in the way at every possible start of one of them")
}
