package edit

import (
	"slices"
	"testing"
	"time"

	"pgregory.net/rapid"

	"cadencewright/scheduler"
	"cadencewright/scheduler/feasible"
	"cadencewright/scheduler/verify"
)

// A whole plan made by hand, one change after the other, in campaigns with lost
// parts, pins, horizons, interference, every mount and slow drives: whatever Try
// calls legal, the independent check accepts, with the same score.
func TestPlansMadeByHand(t *testing.T) {
	made := 0
	rapid.Check(t, func(t *rapid.T) {
		c := drawCampaign(t)
		h := scheduler.Horizon{From: c.Start, To: c.End}
		p, err := feasible.Build(c, h)
		if err != nil {
			t.Fatal(err)
		}
		s := emptyBut(t, p)
		for range rapid.IntRange(1, 12).Draw(t, "changes") {
			change := drawChange(t, s)
			o, err := s.Try(change)
			if err != nil || o.Brings() > 0 || o.Score < o.Before {
				continue
			}
			made++
			plan, pins, err := s.Apply(change)
			if err != nil {
				t.Fatal(err)
			}
			if change.Op == OpPin || change.Op == OpUnpin {
				next := *c
				next.Pins = pins
				if c = &next; c.Validate() != nil {
					t.Skip("the pins make no campaign")
				}
				if p, err = feasible.Build(c, h); err != nil {
					t.Fatal(err)
				}
			}
			if s, err = New(p, plan); err != nil {
				t.Fatal(err)
			}
			if !near(s.Score(), o.Score) {
				t.Errorf("%+v: score %.9f, said was %.9f", change, s.Score(), o.Score)
			}
		}
		plan, _, err := s.Apply()
		if err != nil {
			t.Fatal(err)
		}
		report, err := verify.Check(c, plan, verify.Options{SkipBound: true, LimitDeg: 2e-4, TimeS: 0.01, Relative: 1e-6})
		if err != nil {
			t.Fatal(err)
		}
		for _, v := range report.Violations {
			t.Error(v)
		}
	})
	if made < 20 {
		t.Errorf("only %d changes were made", made)
	}
}

// emptyBut is a session on a plan of the campaign's pins alone.
func emptyBut(t *rapid.T, p *feasible.Problem) *Session {
	plan := &scheduler.Plan{Campaign: p.Campaign.Name, From: p.Horizon.From, To: p.Horizon.To}
	for _, q := range p.Campaign.Pins {
		plan.Scans = append(plan.Scans, scheduler.Scan{Block: q.Block, Telescope: p.Campaign.BlockByID(q.Block).Telescope, Source: q.Source,
			Receiver: q.Receiver, Start: q.Start, Minutes: q.Minutes, Pinned: true})
	}
	s, err := New(p, plan)
	if err != nil {
		t.Fatal(err)
	}
	if len(s.Violations()) > 0 {
		t.Skip("a pin that breaks rules") // a campaign may have such
	}
	return s
}

// drawCampaign is the invented night at three telescopes of different mounts,
// with goals of all kinds, and what is drawn.
func drawCampaign(t *rapid.T) *scheduler.Campaign {
	c := wanted()
	c.GridMin = rapid.SampledFrom([]int{1, 5}).Draw(t, "grid")
	c.Sources = append(c.Sources, pulsar(other, 130, 44))
	c.CadenceTargets = append(c.CadenceTargets, scheduler.CadenceTarget{Goal: scheduler.Goal{ID: "oth", Source: other, Bands: []string{"L"}, Priority: 2}, EveryD: 0.4, EarlyD: 0.1})
	for i := range c.Telescopes {
		drawTelescope(t, &c.Telescopes[i], i)
	}
	for i := range c.Blocks {
		b := &c.Blocks[i]
		b.End = b.Start.Add(time.Duration(60*rapid.IntRange(3, 12).Draw(t, "hours")) * time.Minute)
		b.Receivers = slices.Clone(b.Receivers[:rapid.IntRange(1, 3).Draw(t, "receivers")])
		if rapid.Bool().Draw(t, "lost") {
			from := b.Start.Add(time.Duration(rapid.IntRange(61, 120).Draw(t, "from")) * time.Minute)
			b.Lost = []scheduler.Span{{Start: from, End: from.Add(time.Duration(rapid.IntRange(1, 50).Draw(t, "for")) * time.Minute)}}
		}
		if rapid.IntRange(0, 2).Draw(t, "pin") == 0 {
			c.Pins = append(c.Pins, scheduler.Pin{Block: b.ID, Source: other, Receiver: b.Receivers[0], Start: b.Start.Add(25 * time.Minute),
				Minutes: 5 * rapid.IntRange(1, 7).Draw(t, "pinned")})
		}
	}
	if err := c.Validate(); err != nil {
		t.Fatal(err)
	}
	return c
}

// drawTelescope makes the second an equatorial and the third a transit mount.
func drawTelescope(t *rapid.T, tel *scheduler.Telescope, i int) {
	tel.Receivers = slices.Clone(tel.Receivers)
	accel := rapid.SampledFrom([]float64{0, 0.01}).Draw(t, "acceleration")
	switch i {
	case 0:
		lo := float64(rapid.IntRange(-300, 0).Draw(t, "azimuth from"))
		tel.AzimuthRangeDeg = [2]float64{lo, lo + float64(rapid.IntRange(200, 600).Draw(t, "azimuths"))}
		tel.AccelAzDegS2, tel.AccelElDegS2 = accel, accel
		if rapid.Bool().Draw(t, "horizon") {
			tel.Horizon = []scheduler.HorizonPoint{{AzimuthDeg: 0, ElevationDeg: 20}, {AzimuthDeg: 90, ElevationDeg: 50}, {AzimuthDeg: 270, ElevationDeg: 30}}
		}
	case 1:
		tel.Mount, tel.AzimuthRangeDeg, tel.RateAzDegS, tel.RateElDegS = scheduler.MountEquatorial, [2]float64{}, 0, 0
		tel.HourAngleRangeH, tel.RateHADegS, tel.RateDecDegS = [2]float64{-float64(rapid.IntRange(1, 12).Draw(t, "east")), 6}, 0.3, 0.2
		tel.AccelHADegS2, tel.AccelDecDegS2 = accel, accel
	default:
		tel.Mount, tel.AzimuthRangeDeg, tel.RateAzDegS = scheduler.MountTransit, [2]float64{}, 0
		tel.TrackHalfMin, tel.AccelElDegS2 = float64(rapid.IntRange(10, 120).Draw(t, "track")), accel
	}
	if rapid.Bool().Draw(t, "interference") {
		loss := make([]float64, 24)
		for h := range loss {
			loss[h] = float64(h%5) / 6
		}
		tel.Receivers[0].RFILoss = loss
		tel.Timezone = "Europe/Berlin"
	}
}
