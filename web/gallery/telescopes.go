package gallery

import (
	"fmt"
	"time"

	"cadencewright/web/page"
	"cadencewright/web/view"
)

func telescopeSheets() []Sheet {
	bare := telescope(2)
	bare.Horizon, bare.Blocks, bare.Recent, bare.Hours = nil, nil, nil, view.Hours{}
	old := runSheet(1)
	old.Superseded = &view.SheetSuperseded{At: now.Add(-30 * time.Minute), ByRevision: 3}
	none := runSheet(0)
	none.PlanRevision = 0
	return []Sheet{
		{"telescopes", of(page.Telescopes, telescopes(5))},
		{"telescopes-none", of(page.Telescopes, telescopes(0))},
		{"telescopes-full", of(page.Telescopes, telescopes(10))},
		{"telescope", of(page.Telescope, telescope(0))},
		{"telescope-bare", of(page.Telescope, bare)},
		{"run-sheet", of(page.RunSheet, runSheet(2))},
		{"run-sheet-superseded", of(page.RunSheet, old)},
		{"run-sheet-none", of(page.RunSheet, none)},
		{"run-sheet-full", of(page.RunSheet, runSheet(6))},
	}
}

func telescopes(n int) view.Telescopes {
	v := view.Telescopes{Page: base("/telescopes"), Week: week}
	for i, s := range sites[:n] {
		v.Rows = append(v.Rows, view.TelescopeRow{
			Code: s.code, Name: s.name, LongitudeDeg: s.lon, LatitudeDeg: s.lat, Mount: s.mount, Receivers: s.receivers,
			WeekBlocks: 1 + i%3, WeekHours: 4 + float64(i)*1.5, UsedHours: 3.2 + float64(i), Next: now.Add(time.Duration(5+i*11) * time.Hour),
		})
	}
	return v
}

func telescope(n int) view.Telescope {
	s := sites[n]
	v := view.Telescope{
		Page: base("/telescopes/" + s.code), Code: s.code, Name: s.name, LongitudeDeg: s.lon, LatitudeDeg: s.lat, HeightM: 214, Zone: s.zone,
		Mount: s.mount, ElevationMinDeg: s.minEl, ElevationMaxDeg: 87, SunMinDeg: 12,
		Horizon: []view.HorizonPoint{{AzDeg: 20, ElDeg: 9}, {AzDeg: 65, ElDeg: 14}, {AzDeg: 90, ElDeg: 11}, {AzDeg: 180, ElDeg: 4}, {AzDeg: 250, ElDeg: 6}, {AzDeg: 280, ElDeg: 21}, {AzDeg: 300, ElDeg: 8}},
		Limits:  []view.Fact{{Name: "Azimuth drive", Value: "−180° to 360°"}, {Name: "Azimuth rate", Value: "0.5 °/s"}, {Name: "Elevation rate", Value: "0.3 °/s"}},
		Overheads: []view.Fact{
			{Name: "Set-up of a block", Value: "300 s"}, {Name: "Calibration", Value: "60 s"}, {Name: "Receiver change", Value: "120 s"}, {Name: "Settling", Value: "10 s"},
		},
		Hours: view.Hours{Given: 214.5, Observed: 148.2, Planned: 17.5, Lost: 21.4, Free: 27.4},
	}
	for i, rx := range s.receivers {
		v.Receivers = append(v.Receivers, view.ReceiverRow{
			Code: rx, Bands: []string{rx}, FreqMHz: 1400 + 900*float64(i), BandwidthMHz: 400, NPol: 2, TrecK: 21 + float64(i)*4,
			GainKPerJy: 1.1, Digitisation: 1.05, WorstRFI: 0.18,
		})
	}
	for i := range 9 {
		start := monday.Add(time.Duration(20+53*i) * time.Hour)
		b := view.TelescopeBlock{
			ID: fmt.Sprintf("%s-%d", s.code, i), Week: week, Span: view.Span{Start: start, End: start.Add(6 * time.Hour)}, Receivers: s.receivers,
		}
		if i < 3 {
			b.Scans, b.UsedMin, b.Night = 6, 271, start.Format(time.DateOnly)
			v.Recent = append(v.Recent, view.NightLink{Night: b.Night, Scans: 6})
		}
		v.Blocks = append(v.Blocks, b)
	}
	return v
}

func runSheet(blocks int) view.RunSheet {
	s := sites[1]
	from := time.Date(2027, time.January, 19, 12, 0, 0, 0, s.zone).UTC()
	v := view.RunSheet{
		Page: base("/telescopes/" + s.code + "/nights/2027-01-19"), Campaign: "North and south 2027",
		Telescope: view.SheetTelescope{
			Code: s.code, Name: s.name, LongitudeDeg: s.lon, LatitudeDeg: s.lat, HeightM: 1080, Timezone: "Africa/Johannesburg", Mount: s.mount,
			ElevationMinDeg: s.minEl, ElevationMaxDeg: 88, SunMinDeg: 12,
		},
		Night: "2027-01-19", From: from, To: from.Add(24 * time.Hour), Zone: s.zone, PlanWeek: week, PlanRevision: 2, IssuedAt: now.Add(-90 * time.Minute), IssuedBy: "Imre Oduya",
		Cautions: []string{
			"This sheet commands nothing: the operator on duty, local safety rules, interlocks, wind and snow limits come first.",
			"Never point near the Sun below the local limit of 12°.",
		},
		CSV: "/telescopes/KEST/nights/2027-01-19.csv", PrevNight: "2027-01-18", NextNight: "2027-01-20",
	}
	n := 0
	for i := range blocks {
		start := from.Add(time.Duration(4+3*i) * time.Hour)
		b := view.SheetBlock{ID: fmt.Sprintf("KEST-%d", i+2), Span: view.Span{Start: start, End: start.Add(150 * time.Minute)}, Receivers: s.receivers}
		if i == 1 {
			b.Label = "shared with VLBI"
			b.Lost = []view.Span{{Start: b.End.Add(-20 * time.Minute), End: b.End}}
		}
		for k := range 4 {
			n++
			b.Scans = append(b.Scans, sheetScan(n, s, start.Add(time.Duration(8+34*k)*time.Minute)))
		}
		v.Blocks = append(v.Blocks, b)
	}
	return v
}

func sheetScan(n int, s site, at time.Time) view.SheetScan {
	drive := 200 + 11*float64(n)
	out := view.SheetScan{
		Number: n, ID: fmt.Sprint(1000 + n), State: "planned", Span: view.Span{Start: at, End: at.Add(28 * time.Minute)}, Minutes: 28,
		LSTStartH: float64(n) * 0.57, Source: names[n%len(names)], RAJ2000: "04:12:38.20", DecJ2000: "+18:33:07.1", Receiver: "L",
		FreqMHz: 1284, BandwidthMHz: 700, CalS: 60, First: view.Pointing{AzDeg: 41.2, ElDeg: 51.3, HAH: -1.72, MotorAzDeg: &drive, Turn: n % 2},
		Last: view.Pointing{AzDeg: 28.9, ElDeg: 57.8, HAH: -1.24, MotorAzDeg: &drive, Turn: n % 2}, LowestElDeg: 51.3, LeastSunDeg: 76.2,
		SlewS: float64((n+3)%4) * 41, Begins: n%4 == 1, SNR: 84.2, TOAUs: 0.31, For: []string{"c-12", "p-2"}, Pinned: n%5 == 0,
	}
	if n%7 == 3 {
		out.For, out.Extra = nil, true
	}
	if n%3 == 0 {
		out.Phase = &view.SheetPhase{Reference: "periastron", From: 0.214, To: 0.229}
		out.Notes = []string{"Conjunction at 21:40 UTC: do not start late."}
	}
	return out
}
