package verify

import (
	"math"
	"slices"
	"testing"
	"time"

	"cadencewright/astro/sky"
	"cadencewright/scheduler"
)

// along is where a scan of the plan stands at each of its grid instants.
func along(t testing.TB, c *scheduler.Campaign, s *scheduler.Scan) []sky.Place {
	t.Helper()
	m, err := newModel(c, week(c))
	if err != nil {
		t.Fatal(err)
	}
	var list []sky.Place
	for at := s.Start; !at.After(s.End()); at = at.Add(time.Duration(c.GridMin) * time.Minute) {
		p, err := sky.Observe(m.telescopes[s.Telescope].site, m.sources[s.Source].star, at, c.DUT1S)
		if err != nil {
			t.Fatal(err)
		}
		list = append(list, p)
	}
	return list
}

// most is the largest of a quantity along a scan.
func most(t testing.TB, c *scheduler.Campaign, s *scheduler.Scan, of func(sky.Place) float64) float64 {
	t.Helper()
	top := math.Inf(-1)
	for _, p := range along(t, c, s) {
		top = max(top, of(p))
	}
	return top
}

// onlyScanIn empties the plan but for the first scan of a block, which it
// gives: limits can then be moved up to it without touching others.
func onlyScanIn(t testing.TB, c *scheduler.Campaign, p *scheduler.Plan, block string) *scheduler.Scan {
	t.Helper()
	s := *firstIn(t, p, block)
	p.Scans = []scheduler.Scan{s}
	c.Pins = nil
	return &p.Scans[0]
}

func elevation(p sky.Place) float64 { return p.ElDeg }
func below(p sky.Place) float64     { return -p.ElDeg }

// skyCorruptions move a limit until it lies a little inside what a scan does:
// by more than what is allowed, and by less.
var skyCorruptions = slices.Concat(
	bothSides("elevation limit", KindLow, func(t testing.TB, c *scheduler.Campaign, p *scheduler.Plan, by float64) {
		s := onlyScanIn(t, c, p, "e1")
		c.Telescopes[1].ElevationMinDeg = -most(t, c, s, below) + by
	}),
	bothSides("horizon", KindLow, func(t testing.TB, c *scheduler.Campaign, p *scheduler.Plan, by float64) {
		s := onlyScanIn(t, c, p, "a2")
		lowest := -most(t, c, s, below) + by
		c.Telescopes[0].Horizon = []scheduler.HorizonPoint{{AzimuthDeg: 0, ElevationDeg: lowest}, {AzimuthDeg: 180, ElevationDeg: lowest}}
	}),
	bothSides("highest elevation", KindHigh, func(t testing.TB, c *scheduler.Campaign, p *scheduler.Plan, by float64) {
		s := onlyScanIn(t, c, p, "t2")
		c.Telescopes[2].ElevationMaxDeg = most(t, c, s, elevation) - by
	}),
	bothSides("Sun and telescope", KindSun, func(t testing.TB, c *scheduler.Campaign, p *scheduler.Plan, by float64) {
		s := onlyScanIn(t, c, p, "e1")
		c.Telescopes[1].SunMinDeg = -most(t, c, s, func(p sky.Place) float64 { return -p.SunDeg }) + by
	}),
	bothSides("Sun and source", KindSun, func(t testing.TB, c *scheduler.Campaign, p *scheduler.Plan, by float64) {
		s := onlyScanIn(t, c, p, "e1")
		c.SourceByName(s.Source).SunMinDeg = -most(t, c, s, func(p sky.Place) float64 { return -p.SunDeg }) + by
	}),
	bothSides("eastern end of the hour angle", KindHourAngle, func(t testing.TB, c *scheduler.Campaign, p *scheduler.Plan, by float64) {
		s := onlyScanIn(t, c, p, "e1")
		c.Telescopes[1].HourAngleRangeH[0] = (-most(t, c, s, func(p sky.Place) float64 { return -p.HADeg }) + by) / 15
	}),
	bothSides("western end of the hour angle", KindHourAngle, func(t testing.TB, c *scheduler.Campaign, p *scheduler.Plan, by float64) {
		s := onlyScanIn(t, c, p, "e1")
		c.Telescopes[1].HourAngleRangeH[1] = (most(t, c, s, func(p sky.Place) float64 { return p.HADeg }) - by) / 15
	}),
	bothSides("transit", KindMeridian, func(t testing.TB, c *scheduler.Campaign, p *scheduler.Plan, by float64) {
		s := onlyScanIn(t, c, p, "t1")
		c.Telescopes[2].TrackHalfMin = most(t, c, s, func(p sky.Place) float64 {
			return 4 * (math.Abs(p.HADeg)*math.Cos(p.DecDeg*math.Pi/180) - by)
		})
	}),
	bothSides("motor's lower end", KindMotor, func(t testing.TB, c *scheduler.Campaign, p *scheduler.Plan, by float64) {
		s := onlyScanIn(t, c, p, "a1")
		lowest := -most(t, c, s, func(p sky.Place) float64 { return -p.AzDeg })
		slack := 1 / math.Cos(most(t, c, s, elevation)*math.Pi/180)
		*s.MotorAzDeg = along(t, c, s)[0].AzDeg
		c.Telescopes[0].AzimuthRangeDeg = [2]float64{lowest + by*slack, 500}
	}),
	bothSides("motor azimuth", KindMotorAz, func(t testing.TB, c *scheduler.Campaign, p *scheduler.Plan, by float64) {
		s := onlyScanIn(t, c, p, "a1")
		*s.MotorAzDeg += by / math.Cos(most(t, c, s, elevation)*math.Pi/180)
	}),
	[]corruption{
		{name: "hour angle through 12 h", change: func(t testing.TB, c *scheduler.Campaign, p *scheduler.Plan) {
			s := onlyScanIn(t, c, p, "e1")
			c.Telescopes[1].HourAngleRangeH, c.Telescopes[1].LatitudeDeg = [2]float64{-12, 12}, 75
			c.Blocks[1].Start, c.Blocks[1].End, c.Blocks[1].Lost = after(11), after(14), nil
			s.Source, s.Start, s.Minutes, s.Earns = c.Sources[2].Name, after(12), 20, nil
		}, want: []Kind{KindHourAngle}},
		{name: "motor azimuth missing", change: func(t testing.TB, c *scheduler.Campaign, p *scheduler.Plan) {
			onlyScanIn(t, c, p, "a1").MotorAzDeg = nil
		}, want: []Kind{KindMotorAz}},
		{name: "motor azimuth is no number", change: func(t testing.TB, c *scheduler.Campaign, p *scheduler.Plan) {
			*onlyScanIn(t, c, p, "a1").MotorAzDeg = math.NaN()
		}, want: []Kind{KindMotorAz}},
		{name: "a turn too many", change: func(t testing.TB, c *scheduler.Campaign, p *scheduler.Plan) {
			*onlyScanIn(t, c, p, "a1").MotorAzDeg += 720
		}, want: []Kind{KindMotor}},
	},
)

// bothSides are two corruptions: one just beyond what is allowed at a limit,
// and one within it, which is none.
func bothSides(name string, kind Kind, change func(t testing.TB, c *scheduler.Campaign, p *scheduler.Plan, by float64)) []corruption {
	by := func(deg float64) func(testing.TB, *scheduler.Campaign, *scheduler.Plan) {
		return func(t testing.TB, c *scheduler.Campaign, p *scheduler.Plan) { change(t, c, p, deg) }
	}
	return []corruption{
		{name: name + " passed by 0.011 deg", change: by(0.011), want: []Kind{kind}},
		{name: name + " passed by 0.009 deg", change: by(0.009)},
	}
}
