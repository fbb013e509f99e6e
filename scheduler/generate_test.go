package scheduler

import (
	"fmt"
	"math"
	"time"

	"pgregory.net/rapid"
)

// anyCampaign draws a valid campaign: few of everything, values anywhere in
// their ranges.
func anyCampaign(t *rapid.T) *Campaign {
	grid := rapid.SampledFrom([]int{1, 2, 5, 10}).Draw(t, "grid")
	start := anyInstant(t)
	c := &Campaign{Name: anyText(t), Start: start, End: start.Add(anyLength(t, MaxCampaign)), GridMin: grid,
		DUT1S: inRange(t, -1, 1)}
	for i := range rapid.IntRange(0, 3).Draw(t, "telescopes") {
		c.Telescopes = append(c.Telescopes, anyTelescope(t, fmt.Sprintf("T%d%s", i, anyText(t))))
	}
	for i := range rapid.IntRange(0, 3).Draw(t, "sources") {
		c.Sources = append(c.Sources, anySource(t, fmt.Sprintf("S%d%s", i, anyText(t)), grid))
	}
	if len(c.Sources) > 0 && len(c.Telescopes) > 0 {
		anyGoals(t, c)
		anyBlocks(t, c)
	}
	return c
}

// anyText is a name: letters of many scripts, quotes, backslashes, blanks.
func anyText(t *rapid.T) string {
	return rapid.StringMatching(`[a-zA-Zé°Ω☉ "\\/~+\-]{1,12}`).Draw(t, "text")
}

// inRange is a float anywhere between, ends included.
func inRange(t *rapid.T, lo, hi float64) float64 {
	return rapid.OneOf(rapid.Float64Range(lo, hi), rapid.Just(lo), rapid.Just(hi)).Draw(t, "number")
}

// positive is a float above 0 of any order of magnitude up to hi.
func positive(t *rapid.T, hi float64) float64 {
	return min(hi, math.Pow(10, rapid.Float64Range(-6, math.Log10(hi)).Draw(t, "magnitude")))
}

// anyInstant is a whole millisecond of the years that are allowed, with room
// for a campaign after it.
func anyInstant(t *rapid.T) time.Time {
	last := EndInstant.Add(-2 * MaxCampaign)
	ms := rapid.Int64Range(FirstInstant.Add(365*24*time.Hour).UnixMilli(), last.UnixMilli()).Draw(t, "instant")
	return time.UnixMilli(ms).UTC()
}

// anyLength is a whole number of milliseconds up to most.
func anyLength(t *rapid.T, most time.Duration) time.Duration {
	return time.Duration(rapid.Int64Range(1, most.Milliseconds()).Draw(t, "length")) * time.Millisecond
}

func anyTelescope(t *rapid.T, code string) Telescope {
	tel := Telescope{Code: code, Name: anyText(t), LongitudeDeg: inRange(t, -180, 360),
		LatitudeDeg: inRange(t, -90, 90), HeightM: inRange(t, -500, 9000),
		Timezone:        rapid.SampledFrom([]string{"UTC", "Europe/Berlin", "America/Argentina/Salta"}).Draw(t, "zone"),
		ElevationMinDeg: inRange(t, 0, 20), ElevationMaxDeg: inRange(t, 21, 90),
		SunMinDeg: inRange(t, 0, 180), SetupS: inRange(t, 0, 86400), CalS: inRange(t, 0, 86400),
		SwitchS: inRange(t, 0, 86400), SettleS: inRange(t, 0, 86400)}
	switch tel.Mount = rapid.SampledFrom([]MountKind{MountAltAz, MountEquatorial, MountTransit}).Draw(t,
		"mount"); tel.Mount {
	case MountAltAz:
		tel.AzimuthRangeDeg = [2]float64{inRange(t, -720, 0), inRange(t, 1, 720)}
		tel.RateAzDegS, tel.RateElDegS, tel.AccelAzDegS2 = positive(t, 100), positive(t, 100), positive(t, 1000)
	case MountEquatorial:
		tel.HourAngleRangeH = [2]float64{inRange(t, -12, 0), inRange(t, 1, 12)}
		tel.RateHADegS, tel.RateDecDegS, tel.AccelDecDegS2 = positive(t, 100), positive(t, 100), positive(t, 1000)
	case MountTransit:
		tel.TrackHalfMin, tel.RateElDegS = positive(t, 1440), positive(t, 100)
	}
	az := 0.0
	for range rapid.IntRange(0, 3).Draw(t, "corners") {
		az += rapid.Float64Range(0.5, 100).Draw(t, "azimuth")
		tel.Horizon = append(tel.Horizon, HorizonPoint{az, inRange(t, -90, 90)})
	}
	for i := range rapid.IntRange(1, 3).Draw(t, "receivers") {
		freq := inRange(t, 10, 1e6)
		r := Receiver{Code: fmt.Sprintf("R%d", i), Bands: []string{"L"}, FreqMHz: freq,
			BandwidthMHz: inRange(t, 1e-3, 2*freq), NPol: rapid.IntRange(1, 2).Draw(t, "npol"),
			TrecK: positive(t, 1e5), TatmK: inRange(t, 0, 1000), GainKPerJy: positive(t, 1e4),
			Digitisation: inRange(t, 1, 10)}
		r.BandwidthMHz = min(r.BandwidthMHz, 1e6)
		if rapid.Bool().Draw(t, "rfi") {
			r.RFILoss = rapid.SliceOfN(rapid.Float64Range(0, 0.999), 24, 24).Draw(t, "loss")
			r.Bands = []string{"U", "L", "S"}
		}
		tel.Receivers = append(tel.Receivers, r)
	}
	return tel
}

func anySource(t *rapid.T, name string, grid int) Source {
	s := Source{Name: name, RADeg: inRange(t, 0, 360), DecDeg: inRange(t, -90, 90),
		PosEpochMJD: inRange(t, 15020, 88069), PMRAMasYr: inRange(t, -1e5, 1e5), PMDecMasYr: inRange(t, -1e5, 1e5),
		PeriodS: positive(t, 100), DMPcCm3: inRange(t, 0, 1e5), FluxMJy: positive(t, 1e6),
		FluxFreqMHz: inRange(t, 10, 1e6), SpectralIdx: inRange(t, -10, 10),
		Scatter1GHzS: inRange(t, 0, 1000), JitterUs1h: inRange(t, 0, 1e9), SunMinDeg: inRange(t, 0, 180)}
	s.WidthS = s.PeriodS * rapid.Float64Range(1e-4, 0.999).Draw(t, "duty")
	m := 0
	for range rapid.IntRange(1, 4).Draw(t, "lengths") {
		m += grid * rapid.IntRange(1, 20).Draw(t, "steps")
		s.ScanMinutes = append(s.ScanMinutes, m)
	}
	switch rapid.IntRange(0, 2).Draw(t, "binary") {
	case 1:
		s.Binary = &Binary{Model: BinaryKepler, PbD: inRange(t, 0.01, 1e6), A1Ls: inRange(t, 0, 1e6),
			Ecc: inRange(t, 0, 0.999), OmDeg: inRange(t, -360, 360), T0MJD: inRange(t, 15020, 88069),
			OmdotDegYr: inRange(t, -3600, 3600), Pbdot: inRange(t, -1e-6, 1e-6), M2Msun: inRange(t, 0, 1000),
			Sini: inRange(t, 0, 1)}
	case 2:
		s.Binary = &Binary{Model: BinaryELL1, PbD: inRange(t, 0.01, 1e6), A1Ls: inRange(t, 0, 1e6),
			TascMJD: inRange(t, 15020, 88069), Eps1: inRange(t, -0.7, 0.7), Eps2: inRange(t, -0.7, 0.7)}
	}
	return s
}

// anyGoals adds goals of all kinds on any of the sources.
func anyGoals(t *rapid.T, c *Campaign) {
	n := 0
	goal := func(s *Source, bands ...string) Goal {
		n++
		g := Goal{ID: fmt.Sprintf("g%d%s", n, anyText(t)), Source: s.Name, Bands: bands, Priority: positive(t, 1e6)}
		if rapid.Bool().Draw(t, "some telescopes") {
			for i := range c.Telescopes {
				g.Telescopes = append(g.Telescopes, c.Telescopes[i].Code)
			}
		}
		return g
	}
	for i := range c.Sources {
		s := &c.Sources[i]
		every := inRange(t, 0.04, 1e5)
		c.CadenceTargets = append(c.CadenceTargets, CadenceTarget{goal(s, "L"), every,
			every * rapid.SampledFrom([]float64{0, 0.25, 0.3, 0.5}).Draw(t, "early"),
			rapid.SampledFrom([]float64{0, 0.5, 1e9}).Draw(t, "toa")})
		c.BandPairGoals = append(c.BandPairGoals, BandPairGoal{goal(s, "U", "L"),
			min(1e5, every*12*rapid.Float64Range(0, 1).Draw(t, "within")), every})
		if len(c.Telescopes) > 1 {
			c.OverlapGoals = append(c.OverlapGoals, OverlapGoal{goal(s, "L"), len(c.Telescopes), positive(t, 1e6),
				every})
		}
		if s.Binary != nil {
			from := rapid.Float64Range(0, 0.999).Draw(t, "from")
			c.PhaseGoals = append(c.PhaseGoals, PhaseGoal{goal(s, "L"),
				rapid.SampledFrom([]PhaseReference{RefPeriastron, RefNode, RefConjunction}).Draw(t, "reference"),
				[]PhaseWindow{{from, from + rapid.Float64Range(0.001, 1).Draw(t, "width"),
					rapid.IntRange(1, 9).Draw(t, "need")}}, positive(t, 1e6),
				rapid.IntRange(1, 1e6).Draw(t, "per horizon")})
		}
	}
}

// anyBlocks adds blocks one after another, with history and pins.
func anyBlocks(t *rapid.T, c *Campaign) {
	next := c.Start
	for i := range rapid.IntRange(0, 4).Draw(t, "blocks") {
		tel := &c.Telescopes[i%len(c.Telescopes)]
		b := Block{ID: fmt.Sprintf("B%d", i), Telescope: tel.Code, Receivers: []string{tel.Receivers[0].Code}}
		b.Start = next.Add(anyLength(t, MaxBlock))
		b.End = b.Start.Add(anyLength(t, MaxBlock))
		if rapid.Bool().Draw(t, "lost") {
			b.Lost = []Span{{b.Start, b.Start.Add(b.Duration()/2 + time.Millisecond).Truncate(time.Millisecond)}}
			b.Label = anyText(t)
		}
		next = b.End
		c.Blocks = append(c.Blocks, b)
		s := &c.Sources[i%len(c.Sources)]
		grid := time.Duration(c.GridMin) * time.Minute
		if p := (Pin{b.ID, s.Name, b.Receivers[0], b.Start.Add(grid).Truncate(grid),
			c.GridMin}); !p.End().After(b.End) {
			c.Pins = append(c.Pins, p)
		}
		c.History = append(c.History, HistoryScan{s.Name, tel.Code, b.Receivers[0],
			b.Start.Add(-anyLength(t, MaxBlock)), positive(t, 20160), rapid.Bool().Draw(t, "counted")})
	}
}

// anyPlan draws a plan of any content.
func anyPlan(t *rapid.T) *Plan {
	p := &Plan{Campaign: anyText(t), From: anyInstant(t), Score: anyFinite(t), Possible: anyFinite(t),
		Bound: anyFinite(t)}
	p.To = p.From.Add(anyLength(t, 56*24*time.Hour))
	p.Certificate = Certificate{Prices: map[string]float64{}, Bound: anyFinite(t)}
	for i := range rapid.IntRange(0, 4).Draw(t, "scans") {
		s := Scan{Block: anyText(t), Telescope: anyText(t), Source: anyText(t), Receiver: anyText(t),
			Start: anyInstant(t), Minutes: rapid.IntRange(1, 20160).Draw(t, "minutes"),
			Pinned: rapid.Bool().Draw(t, "pinned"), TOAUs: positive(t, 1e6)}
		if i%2 == 0 {
			az := anyFinite(t)
			s.MotorAzDeg = &az
			s.Earns = []Earning{{anyText(t), anyText(t) + "#1", anyFinite(t)}, {anyText(t), anyText(t) + "@0", 0}}
		}
		p.Scans = append(p.Scans, s)
		p.Unmet = append(p.Unmet, Unmet{anyText(t), anyText(t), anyFinite(t),
			[]Reason{{"never-up", anyText(t) + "\n" + anyText(t), i}}})
		p.Certificate.Prices[anyText(t)] = anyFinite(t)
	}
	return p
}

// anyFinite is any float64 but NaN, the infinities and -0.
func anyFinite(t *rapid.T) float64 {
	v := rapid.Float64().Draw(t, "float")
	if v == 0 || math.IsNaN(v) || math.IsInf(v, 0) {
		return 0
	}
	return v
}
