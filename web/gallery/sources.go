package gallery

import (
	"fmt"
	"math"
	"time"

	"cadencewright/web/page"
	"cadencewright/web/view"
)

func sourceSheets() []Sheet {
	full := sources(12)
	for len(full.Rows) < 200 {
		r := full.Rows[len(full.Rows)%12]
		r.Name = fmt.Sprintf("SIM J%02d%02d+%04d", len(full.Rows)%24, len(full.Rows)%60, len(full.Rows))
		full.Rows = append(full.Rows, r)
	}
	full.Total = len(full.Rows)
	none := sources(0)
	none.Query, none.Total = "J9999", 12
	single := source(5)
	single.Orbit, single.Goals, single.State, single.Last = nil, nil, view.SourceIdle, time.Time{}
	single.Cadence.Bands = nil
	return []Sheet{
		{"sources", of(page.Sources, sources(12))},
		{"sources-none", of(page.Sources, none)},
		{"sources-full", of(page.Sources, full)},
		{"source", of(page.Source, source(5))},
		{"source-idle", of(page.Source, single)},
		{"source-full", of(page.Source, source(10))},
	}
}

func sources(n int) view.Sources {
	v := view.Sources{Page: base("/sources"), Total: n}
	states := []view.SourceState{view.SourceLate, view.SourcePlanned, view.SourceDue, view.SourceFine, view.SourceFine, view.SourceIdle}
	for i := range n {
		r := view.SourceRow{
			Name: names[i%len(names)], PeriodMs: 1.6 + float64(i)*1.317, DMPcCm3: 3.1 + float64(i*17%60), State: states[i%6],
			Last: now.Add(-time.Duration(3+i*31%200) * time.Hour), LastAt: sites[i%5].code + " L", Goals: 1 + i%4,
			NextDue: now.Add(time.Duration(i*23%150-40) * time.Hour),
		}
		if i%3 == 0 {
			r.PbD = 0.4 + 12.7*float64(i)
		}
		if r.State == view.SourceIdle {
			r.Goals, r.Last, r.LastAt, r.NextDue = 0, time.Time{}, "", time.Time{}
		}
		v.Rows = append(v.Rows, r)
	}
	return v
}

// source is the page of a source seen from some of the sites.
func source(telescopes int) view.Source {
	v := view.Source{
		Page: base("/sources/" + names[0]), Name: names[0], RA: "04:12:38.2041", Dec: "+18:33:07.118", RADeg: 63.159, DecDeg: 18.552,
		PMRAMasYr: 4.1, PMDecMasYr: -17.3, PeriodMs: 3.1627, DMPcCm3: 28.41, FluxMJy: 1.7, FluxFreqMHz: 1400, SpectralIdx: -1.6,
		WidthUs: 110, JitterUs1h: 0.04, SunMinDeg: 10, ScanMinutes: []int{20, 30, 40, 60}, State: view.SourcePlanned,
		Last: now.Add(-200 * time.Hour), Week: week, From: monday, To: monday.AddDate(0, 0, 7),
	}
	for i, s := range sites[:telescopes] {
		pts := track(v.From, v.To, 15*time.Minute, 0, s)
		p := view.SkyPanel{
			Telescope: s.code, Name: s.name, Points: pts, LimitDeg: s.minEl, MaxDeg: 88, Up: above(pts, s.minEl), SunMinDeg: 10, SunDeg: 118,
			Verdict: fmt.Sprintf("up %.1f h a day, best %.1f°", 9.4-float64(i)*0.3, 62.0-float64(i)*2.1),
			Blocks:  []view.Span{{Start: monday.Add(time.Duration(20+i*9) * time.Hour), End: monday.Add(time.Duration(26+i*9) * time.Hour)}},
			Scans:   []view.Span{{Start: monday.Add(time.Duration(22+i*9) * time.Hour), End: monday.Add(time.Duration(23+i*9) * time.Hour)}},
		}
		if i == 3 {
			p.NearSun = []view.Span{{Start: monday.Add(110 * time.Hour), End: monday.Add(168 * time.Hour)}}
		}
		v.Sky = append(v.Sky, p)
	}
	v.Orbit, v.Cadence = orbitOf(), cadence()
	v.Goals = []view.GoalRow{
		{ID: "c-12", Kind: "cadence", Bands: []string{"L"}, Priority: 1.5, Wants: "one scan every 7 days, TOA uncertainty 0.5 µs", State: view.GoalLate, Standing: "last 9.2 days ago, late by 2.2 d", Due: now.Add(-53 * time.Hour)},
		{ID: "c-13", Kind: "cadence", Bands: []string{"S"}, Telescopes: []string{"ALD", "TARN"}, Priority: 1, Wants: "one scan every 14 days", State: view.GoalMet, Standing: "last 6.1 days ago", Due: now.Add(190 * time.Hour)},
		{ID: "p-2", Kind: "phase", Bands: []string{"L", "S"}, Priority: 2, Wants: "phase 0.18 to 0.32 from periastron in 5 orbits, 30 min each", State: view.GoalDue, Standing: "2 of 5 orbits had", Due: now.Add(30 * time.Hour)},
		{ID: "b-4", Kind: "band pair", Bands: []string{"L", "S"}, Priority: 0.8, Wants: "L and S within 12 h, every 28 days", State: view.GoalMet, Standing: "last 3.4 days ago", Due: now.Add(590 * time.Hour)},
	}
	return v
}

func orbitOf() *view.Orbit {
	o := &view.Orbit{
		Reference: "periastron", PbD: 12.327, Ecc: 0.31, A1Ls: 18.42, M2Msun: 0.28, Sini: 0.9974,
		Windows: []view.PhaseWindow{
			{Goal: "p-2", From: 0.18, To: 0.32, Need: 5, Had: 2, Planned: 1}, {Goal: "p-2", From: 0.62, To: 0.7, Need: 2, Had: 2},
			{Goal: "p-2", From: 0.94, To: 1.05, Need: 3},
		},
		ConjunctionPhase: 0.243, PeriastronPhase: 0,
		Next: []view.PhaseEvent{
			{What: "superior conjunction", Span: view.Span{Start: now.Add(31 * time.Hour)}},
			{What: "window 0.18 to 0.32", Span: view.Span{Start: now.Add(12 * time.Hour), End: now.Add(53 * time.Hour)}},
			{What: "periastron", Span: view.Span{Start: now.Add(255 * time.Hour)}},
		},
	}
	for i := range 14 {
		phase := math.Mod(float64(i)*0.237+0.02, 1)
		o.Marks = append(o.Marks, view.PhaseMark{From: phase, To: phase + 0.003, At: now.Add(-time.Duration(80*(14-i)) * time.Hour)})
	}
	o.Marks = append(o.Marks, view.PhaseMark{From: 0.214, To: 0.229, At: monday.Add(40 * time.Hour), Planned: true})
	return o
}

func cadence() view.Cadence {
	c := view.Cadence{From: monday.AddDate(0, 0, -70), To: monday.AddDate(0, 0, 14), Now: now}
	for i, b := range []string{"P", "L", "S"} {
		band := view.CadenceBand{Band: b, EveryD: []float64{0, 7, 14}[i]}
		every := []float64{31, 7.4, 15.2}[i]
		for d, k := every*0.4, 0; d < 77; d, k = d+every, k+1 {
			at := c.From.Add(time.Duration(d * 24 * float64(time.Hour)))
			kind := view.ScanCounted
			switch {
			case at.After(now):
				kind = view.ScanPlanned
			case k%5 == 3:
				kind = view.ScanFailed
			}
			band.Marks = append(band.Marks, view.CadenceMark{At: at, Telescope: sites[k%5].code, Kind: kind})
		}
		c.Bands = append(c.Bands, band)
	}
	return c
}
