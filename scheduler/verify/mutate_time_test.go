package verify

import (
	"testing"
	"time"

	"cadencewright/scheduler"
)

// roomAfter are the seconds between a scan of the plan and the one before it in
// its block, and those that are needed.
func roomAfter(t testing.TB, c *scheduler.Campaign, p *scheduler.Plan, s *scheduler.Scan) (have, need float64) {
	t.Helper()
	m, err := newModel(c, week(c))
	if err != nil {
		t.Fatal(err)
	}
	k := &checker{model: m, plan: p, options: Options{}.filled(), report: &Report{}}
	k.readScans()
	if err := k.checkBlocks(); err != nil {
		t.Fatal(err)
	}
	var before *scan
	for _, x := range k.scans {
		if x.listed == s {
			need = x.block.telescope.slewS(before.last, x.first) + x.block.telescope.CalS
			if before.receiver != x.receiver {
				need += x.block.telescope.SwitchS
			}
			return (x.start - before.end).seconds(), need
		}
		before = x
	}
	t.Fatal("the scan is not in the plan")
	return 0, 0
}

// onlyBlock empties the plan but for one block.
func onlyBlock(c *scheduler.Campaign, p *scheduler.Plan, block string) {
	var left []scheduler.Scan
	for _, s := range p.Scans {
		if s.Block == block {
			s.Earns = nil
			left = append(left, s)
		}
	}
	p.Scans = left
	c.Pins = nil
}

// tooSlow makes a telescope slower until a scan of the plan comes by seconds
// too early, or not quite.
func tooSlow(block string, missingS float64, slower func(*scheduler.Telescope, float64)) func(testing.TB, *scheduler.Campaign, *scheduler.Plan) {
	return func(t testing.TB, c *scheduler.Campaign, p *scheduler.Plan) {
		onlyBlock(c, p, block)
		p.Scans = p.Scans[:2]
		p.Scans[0].Pinned, p.Scans[1].Pinned = false, false
		have, need := roomAfter(t, c, p, &p.Scans[1])
		slower(c.TelescopeByCode(p.Scans[1].Telescope), have-need+missingS)
	}
}

func settle(t *scheduler.Telescope, s float64)    { t.SettleS += s }
func calibrate(t *scheduler.Telescope, s float64) { t.CalS += s; t.SetupS -= min(s, t.SetupS) }
func change(t *scheduler.Telescope, s float64)    { t.SwitchS += s }

// timeCorruptions: one telescope's time.
var timeCorruptions = []corruption{
	{name: "block starts too late for its first scan", change: func(t testing.TB, c *scheduler.Campaign, p *scheduler.Plan) {
		onlyBlock(c, p, "t2")
		c.Blocks[5].Start = p.Scans[0].Start.Add(-(660 - 2) * time.Second)
	}, want: []Kind{KindSetup}},
	{name: "block starts a second too late", change: func(t testing.TB, c *scheduler.Campaign, p *scheduler.Plan) {
		onlyBlock(c, p, "t2")
		c.Blocks[5].Start = p.Scans[0].Start.Add(-(660 - 1) * time.Second)
	}},
	{name: "scan before its block", change: func(t testing.TB, c *scheduler.Campaign, p *scheduler.Plan) {
		onlyBlock(c, p, "t2")
		c.Blocks[5].Start = p.Scans[0].Start.Add(5 * time.Minute)
	}, want: []Kind{KindSetup}},
	{name: "block ends before its last scan", change: func(t testing.TB, c *scheduler.Campaign, p *scheduler.Plan) {
		onlyBlock(c, p, "t2")
		c.Blocks[5].End = p.Scans[0].End().Add(-time.Second)
	}, want: []Kind{KindBlockEnd}},
	{name: "lost part in a scan", change: func(t testing.TB, c *scheduler.Campaign, p *scheduler.Plan) {
		onlyBlock(c, p, "t2")
		s := p.Scans[0]
		c.Blocks[5].Lost = []scheduler.Span{{Start: s.End().Add(-time.Second), End: s.End().Add(time.Hour)}}
	}, want: []Kind{KindLost}},
	{name: "lost part right after a scan", change: func(t testing.TB, c *scheduler.Campaign, p *scheduler.Plan) {
		onlyBlock(c, p, "t2")
		s := p.Scans[0]
		c.Blocks[5].Lost = []scheduler.Span{{Start: s.End(), End: s.End().Add(time.Hour)}}
	}},
	{name: "lost part too short before a scan", change: func(t testing.TB, c *scheduler.Campaign, p *scheduler.Plan) {
		onlyBlock(c, p, "t2")
		s := p.Scans[0]
		c.Blocks[5].Lost = []scheduler.Span{{Start: s.Start.Add(-20 * time.Minute), End: s.Start.Add(-10 * time.Minute)}}
	}, want: []Kind{KindSetup}},
	{name: "lost part over the start of a scan", change: func(t testing.TB, c *scheduler.Campaign, p *scheduler.Plan) {
		onlyBlock(c, p, "t2")
		s := p.Scans[0]
		c.Blocks[5].Lost = []scheduler.Span{{Start: s.Start.Add(-20 * time.Minute), End: s.Start.Add(time.Second)}}
	}, want: []Kind{KindLost}},
	{name: "alt-azimuth settles too slowly", change: tooSlow("a2", 1.5, settle), want: []Kind{KindRoom}},
	{name: "alt-azimuth settles slowly", change: tooSlow("a2", 0.5, settle)},
	{name: "equatorial settles too slowly", change: tooSlow("e2", 1.5, settle), want: []Kind{KindRoom}},
	{name: "equatorial settles slowly", change: tooSlow("e2", 0.5, settle)},
	{name: "transit settles too slowly", change: tooSlow("t1", 1.5, settle), want: []Kind{KindRoom}},
	{name: "transit settles slowly", change: tooSlow("t1", 0.5, settle)},
	{name: "calibration too long", change: tooSlow("e2", 1.5, calibrate), want: []Kind{KindRoom}},
	{name: "receiver change too slow", change: tooSlow("e1", 1.5, change), want: []Kind{KindRoom}},
	{name: "receiver change slow", change: tooSlow("e1", 0.5, change)},
	{name: "no receiver change that could be slow", change: tooSlow("e2", 1000, change)},
	{name: "drive without power", change: func(t testing.TB, c *scheduler.Campaign, p *scheduler.Plan) {
		onlyBlock(c, p, "t1")
		c.Telescopes[2].RateElDegS = 0.001
	}, want: []Kind{KindRoom}},
	{name: "two scans at once", change: func(t testing.TB, c *scheduler.Campaign, p *scheduler.Plan) {
		onlyBlock(c, p, "t2")
		p.Scans = append(p.Scans, p.Scans[0])
		p.Scans[1].Minutes = 40
	}, want: []Kind{KindRoom}},
}
