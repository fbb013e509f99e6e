package store_test

import (
	"fmt"
	"math"
	"slices"
	"time"

	"pgregory.net/rapid"

	"cadencewright/scheduler"
)

// anyCampaign is any valid campaign of a few things of each sort.
func anyCampaign(t *rapid.T) *scheduler.Campaign {
	start := anyInstant(t)
	c := &scheduler.Campaign{Name: anyName(t), Start: start, End: start.Add(anySpan(t, scheduler.MaxCampaign)),
		GridMin: rapid.SampledFrom([]int{1, 2, 5, 10}).Draw(t, "grid"), DUT1S: number(t, -1, 1)}
	for i := range rapid.IntRange(1, 3).Draw(t, "telescopes") {
		c.Telescopes = append(c.Telescopes, anyTelescope(t, fmt.Sprintf("%s%d", anyName(t), i)))
	}
	for i := range rapid.IntRange(1, 4).Draw(t, "sources") {
		c.Sources = append(c.Sources, anySource(t, fmt.Sprintf("%s%d", anyName(t), i), c.GridMin))
	}
	anyGoals(t, c)
	anyBlocks(t, c)
	for range rapid.IntRange(0, 5).Draw(t, "history") {
		tel := rapid.SampledFrom(c.Telescopes).Draw(t, "telescope")
		c.History = append(c.History, scheduler.HistoryScan{Source: rapid.SampledFrom(c.Sources).Draw(t, "source").Name, Telescope: tel.Code,
			Receiver: rapid.SampledFrom(tel.Receivers).Draw(t, "receiver").Code, Start: anyInstant(t),
			Minutes: positive(t, scheduler.MaxBlock.Minutes()), Counted: rapid.Bool().Draw(t, "counted")})
	}
	return c
}

// anyName is a text in many scripts, with all that a quotation may stumble on.
func anyName(t *rapid.T) string {
	return rapid.StringMatching(`[a-zA-Zé°Ω☉'"\\/%_~+\-{},;]{1,10}`).Draw(t, "name")
}

// number is any float between, the ends included.
func number(t *rapid.T, lo, hi float64) float64 {
	return rapid.OneOf(rapid.Float64Range(lo, hi), rapid.Just(lo), rapid.Just(hi)).Draw(t, "number")
}

// positive is a float above 0 of any order of magnitude up to hi.
func positive(t *rapid.T, hi float64) float64 {
	return min(hi, math.Pow(10, rapid.Float64Range(-6, math.Log10(hi)).Draw(t, "magnitude")))
}

// sometimes is the value or, as often, zero.
func sometimes(t *rapid.T, v float64) float64 {
	if rapid.Bool().Draw(t, "none") {
		return 0
	}
	return v
}

// anyInstant is a whole millisecond with room for a campaign after it.
func anyInstant(t *rapid.T) time.Time {
	first, last := scheduler.FirstInstant.AddDate(1, 0, 0), scheduler.EndInstant.Add(-2*scheduler.MaxCampaign)
	return time.UnixMilli(rapid.Int64Range(first.UnixMilli(), last.UnixMilli()).Draw(t, "instant")).UTC()
}

// anySpan is a whole number of milliseconds up to most.
func anySpan(t *rapid.T, most time.Duration) time.Duration {
	return time.Duration(rapid.Int64Range(1, most.Milliseconds()).Draw(t, "span")) * time.Millisecond
}

func anyTelescope(t *rapid.T, code string) scheduler.Telescope {
	x := scheduler.Telescope{Code: code, Name: anyName(t), LongitudeDeg: number(t, -180, 360), LatitudeDeg: number(t, -90, 90),
		HeightM: number(t, -500, 9000), Timezone: "Europe/Berlin", ElevationMinDeg: number(t, 0, 20), ElevationMaxDeg: number(t, 21, 90),
		SunMinDeg: number(t, 0, 180), SetupS: number(t, 0, 86400), CalS: number(t, 0, 86400), SwitchS: number(t, 0, 86400), SettleS: number(t, 0, 86400),
		Mount: rapid.SampledFrom([]scheduler.MountKind{scheduler.MountAltAz, scheduler.MountEquatorial, scheduler.MountTransit}).Draw(t, "mount")}
	switch x.Mount {
	case scheduler.MountAltAz:
		x.AzimuthRangeDeg = [2]float64{number(t, -720, 0), number(t, 1, 720)}
		x.RateAzDegS, x.RateElDegS = positive(t, 100), positive(t, 100)
		x.AccelAzDegS2, x.AccelElDegS2 = sometimes(t, positive(t, 1000)), sometimes(t, positive(t, 1000))
	case scheduler.MountEquatorial:
		x.HourAngleRangeH = [2]float64{number(t, -12, 0), number(t, 1, 12)}
		x.RateHADegS, x.RateDecDegS = positive(t, 100), positive(t, 100)
		x.AccelHADegS2, x.AccelDecDegS2 = sometimes(t, positive(t, 1000)), sometimes(t, positive(t, 1000))
	default:
		x.TrackHalfMin, x.RateElDegS, x.AccelElDegS2 = positive(t, 1440), positive(t, 100), sometimes(t, positive(t, 1000))
	}
	for i := range rapid.IntRange(0, 4).Draw(t, "corners") {
		x.Horizon = append(x.Horizon, scheduler.HorizonPoint{AzimuthDeg: float64(90*i) + number(t, 0, 89), ElevationDeg: number(t, -90, 90)})
	}
	for i := range rapid.IntRange(1, 3).Draw(t, "receivers") {
		freq := number(t, 10, 1e6)
		r := scheduler.Receiver{Code: fmt.Sprintf("%s%d", anyName(t), i), Bands: []string{"L", "S", "U"}[:1+i], FreqMHz: freq,
			BandwidthMHz: min(1e6, freq*number(t, 0.001, 1.9)), NPol: rapid.IntRange(1, 2).Draw(t, "npol"), TrecK: positive(t, 1e5), TatmK: number(t, 0, 1000),
			GainKPerJy: positive(t, 1e4), Digitisation: number(t, 1, 10)}
		if rapid.Bool().Draw(t, "rfi") {
			for range 24 {
				r.RFILoss = append(r.RFILoss, number(t, 0, 0.999))
			}
		}
		x.Receivers = append(x.Receivers, r)
	}
	return x
}

func anySource(t *rapid.T, name string, grid int) scheduler.Source {
	period := positive(t, 100)
	s := scheduler.Source{Name: name, RADeg: number(t, 0, 360), DecDeg: number(t, -90, 90), PosEpochMJD: number(t, 15020, 88069),
		PMRAMasYr: number(t, -1e5, 1e5), PMDecMasYr: number(t, -1e5, 1e5), PeriodS: period, DMPcCm3: number(t, 0, 1e5), FluxMJy: positive(t, 1e6),
		FluxFreqMHz: number(t, 10, 1e6), SpectralIdx: number(t, -10, 10), WidthS: period * number(t, 0.001, 0.9), Scatter1GHzS: number(t, 0, 1000),
		JitterUs1h: number(t, 0, 1e9), SunMinDeg: number(t, 0, 180), ScanMinutes: []int{10 * grid, 20 * grid}}
	b := &scheduler.Binary{PbD: number(t, 0.01, 1e6), A1Ls: number(t, 0, 1e6), Pbdot: number(t, -1e-6, 1e-6),
		M2Msun: sometimes(t, positive(t, 1000)), Sini: sometimes(t, number(t, 0, 1))}
	switch rapid.IntRange(0, 2).Draw(t, "model") {
	case 0:
		return s
	case 1:
		b.Model, b.Ecc, b.OmDeg = scheduler.BinaryKepler, number(t, 0, 0.999), number(t, -360, 360)
		b.T0MJD, b.OmdotDegYr = number(t, 15020, 88069), number(t, -3600, 3600)
	default:
		b.Model, b.TascMJD, b.Eps1, b.Eps2 = scheduler.BinaryELL1, number(t, 15020, 88069), number(t, -0.7, 0.7), number(t, -0.7, 0.7)
	}
	s.Binary = b
	return s
}

// anyGoals gives every source some goals.
func anyGoals(t *rapid.T, c *scheduler.Campaign) {
	for i := range c.Sources {
		s := &c.Sources[i]
		goal := func(kind string, bands ...string) scheduler.Goal {
			g := scheduler.Goal{ID: fmt.Sprintf("%s%d%s", kind, i, anyName(t)), Source: s.Name, Bands: bands, Priority: positive(t, 1e6)}
			for _, tel := range c.Telescopes {
				if rapid.Bool().Draw(t, "named") {
					g.Telescopes = append(g.Telescopes, tel.Code)
				}
			}
			if rapid.Bool().Draw(t, "turned") {
				slices.Reverse(g.Telescopes)
			}
			return g
		}
		every := number(t, 1, 1e5)
		c.CadenceTargets = append(c.CadenceTargets, scheduler.CadenceTarget{Goal: goal("c", "L"), EveryD: every, EarlyD: every * number(t, 0, 0.5),
			TOAUs: sometimes(t, positive(t, 1e9))})
		c.BandPairGoals = append(c.BandPairGoals, scheduler.BandPairGoal{Goal: goal("b", "S", "L"), EveryD: every, WithinH: min(1e5, every*number(t, 0, 12))})
		if o := goal("o", "L", "S"); len(o.Telescopes) >= 2 {
			c.OverlapGoals = append(c.OverlapGoals, scheduler.OverlapGoal{Goal: o, Count: 2, OverlapMin: positive(t, 1e6), EveryD: every})
		}
		if s.Binary == nil {
			continue
		}
		p := scheduler.PhaseGoal{Goal: goal("p", "U"), DwellMin: positive(t, 1e6), PerHorizon: rapid.IntRange(1, 1000).Draw(t, "per horizon"),
			Reference: rapid.SampledFrom([]scheduler.PhaseReference{scheduler.RefPeriastron, scheduler.RefNode, scheduler.RefConjunction}).Draw(t, "reference")}
		for range rapid.IntRange(0, 3).Draw(t, "windows") {
			from := number(t, 0, 0.999)
			p.Windows = append(p.Windows, scheduler.PhaseWindow{From: from, To: from + number(t, 0.01, 1), Need: rapid.IntRange(1, 1e6).Draw(t, "need")})
		}
		c.PhaseGoals = append(c.PhaseGoals, p)
	}
}

// anyBlocks gives every telescope some blocks, with lost parts and pins.
func anyBlocks(t *rapid.T, c *scheduler.Campaign) {
	grid := time.Duration(c.GridMin) * time.Minute
	for i := range c.Telescopes {
		tel := &c.Telescopes[i]
		at := c.Start.Truncate(time.Hour)
		for j := range rapid.IntRange(0, 3).Draw(t, "blocks") {
			at = at.Add(anySpan(t, 48*time.Hour))
			b := scheduler.Block{ID: fmt.Sprintf("%d-%d%s", i, j, anyName(t)), Telescope: tel.Code, Start: at,
				End: at.Add(4*time.Hour + anySpan(t, 48*time.Hour)), Label: rapid.SampledFrom([]string{"", "a label"}).Draw(t, "label")}
			for _, r := range tel.Receivers {
				b.Receivers = append(b.Receivers, r.Code)
			}
			slices.Reverse(b.Receivers)
			if rapid.Bool().Draw(t, "lost") {
				half := b.Start.Add(2 * time.Hour)
				b.Lost = []scheduler.Span{{Start: half, End: half.Add(time.Hour)}, {Start: b.Start, End: half.Add(time.Minute)}}
			}
			if rapid.Bool().Draw(t, "pin") {
				c.Pins = append(c.Pins, scheduler.Pin{Block: b.ID, Source: rapid.SampledFrom(c.Sources).Draw(t, "source").Name, Receiver: b.Receivers[0],
					Start: b.Start.Truncate(time.Hour).Add(time.Hour), Minutes: int(grid / time.Minute)})
			}
			c.Blocks = append(c.Blocks, b)
			at = b.End
		}
	}
}
