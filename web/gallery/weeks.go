package gallery

import (
	"io"
	"math"
	"slices"
	"time"

	"cadencewright/web/page"
	"cadencewright/web/view"
)

func weekSheets() []Sheet {
	full := fullWeek()
	return []Sheet{
		{"week", of(page.Week, demoWeek(view.Draft))},
		{"week-issued", of(page.Week, demoWeek(view.Issued))},
		{"week-planning", of(page.Week, planningWeek())},
		{"week-no-plan", of(page.Week, emptyWeek(true))},
		{"week-no-blocks", of(page.Week, emptyWeek(false))},
		{"week-no-campaign", of(page.Week, noCampaignWeek())},
		{"week-full", of(page.Week, full)},
		{"job", func(w io.Writer) error { return page.JobFragment(w, planningWeek().Job) }},
		{"scan", of(page.Scan, scanCard(false))},
		{"scan-done", of(page.Scan, scanCard(true))},
	}
}

func baseWeek() view.Week {
	return view.Week{
		Page: base("/weeks/" + week), Week: week, From: monday, To: monday.AddDate(0, 0, 7),
		Prev: "2027-W02", Next: "2027-W04", MayPlan: true, Sources: slices.Sorted(slices.Values(names)),
	}
}

// demoWeek is a usual week: five telescopes, nine blocks.
func demoWeek(state view.PlanState) view.Week {
	w := baseWeek()
	w.Source = names[0]
	for i, b := range []struct {
		site         int
		start, hours float64
		scans        int
	}{
		{0, 20, 6, 6}, {3, 27.5, 3, 4}, {1, 38, 5, 6}, {2, 60, 8, 9}, {0, 68, 4, 5}, {4, 76, 2, 3},
		{1, 98, 5, 6}, {3, 124, 10, 8}, {2, 140, 4, 5},
	} {
		start := monday.Add(time.Duration(b.start * float64(time.Hour)))
		w.Blocks = append(w.Blocks, blockRow(i, sites[b.site], start, b.hours, b.scans, w.Source))
	}
	w.Telescopes = stripOf(w.Blocks)
	w.Needs, w.NeedsTotal, w.NeedsMet = needs(24), 24, 13
	w.Plan = planOf(state)
	if state == view.Draft {
		issued := planOf(view.Issued)
		issued.ID = 41
		w.InUse = issued
		w.Others = []view.Plan{*issued}
	}
	return w
}

func planOf(state view.PlanState) *view.Plan {
	p := &view.Plan{
		ID: 42, Version: 3, State: state, MadeAt: now.Add(-25 * time.Minute), MadeBy: "Imre Oduya",
		Score: 71.84, Possible: 96.4, Bound: 73.1, Scans: 52, Minutes: 1985, Free: 604,
		Status: "effort spent",
	}
	if state != view.Draft {
		p.Revision, p.IssuedAt, p.IssuedBy = 2, now.Add(-20*time.Minute), "Imre Oduya"
	}
	return p
}

// needs makes n units that are due, in all states.
func needs(n int) []view.Need {
	kinds := []string{"cadence", "cadence", "phase", "overlap", "band pair"}
	whats := []string{
		"every 7 days, last scan 9.2 days ago", "every 14 days, last scan 12.8 days ago", "window 0.18 to 0.32, 2 orbits of 5 had",
		"two telescopes at once for 30 min, every 28 days", "L and S within 12 h, every 14 days",
	}
	reasons := [][]string{
		{"The Sun stands 3.1° away all week; 20° is the least allowed."},
		{"It is never up in a block that has the S receiver."},
		{"Best reachable TOA uncertainty is 1.8 µs in 90 min, 1.0 µs is wanted.", "25 more minutes at Kesterfontein on Thursday would do."},
		{"It lost out to SIM J1744+0721 and SIM J1909-2851, which weigh more."},
	}
	var out []view.Need
	for i := range n {
		need := view.Need{
			Goal: "g" + view.Fixed(float64(i), 0), Kind: kinds[i%5], What: whats[i%5], Source: names[(i*5)%len(names)],
			Bands: [][]string{{"L"}, {"S"}, {"L", "S"}}[i%3], Weight: 7.5 * math.Pow(0.93, float64(i%30)),
			Due: monday.Add(time.Duration(i*7%160) * time.Hour),
		}
		need.Unit = need.Goal + "#1"
		switch i % 5 {
		case 1:
			need.State, need.Reasons = view.NeedUnmet, reasons[i%4]
		case 3:
			need.State, need.Value, need.Reasons = view.NeedPartly, need.Weight*0.6, reasons[2][:1]
		default:
			need.State, need.Value = view.NeedMet, need.Weight
		}
		if need.Value > 0 {
			s := sites[i%5]
			need.Scans = []view.NeedScan{{
				ID: int64(1000 + i), Telescope: s.code, Receiver: s.receivers[0],
				Start: monday.Add(time.Duration(i*7%160) * time.Hour), Minutes: 30, Value: need.Value, State: "planned",
			}}
		}
		out = append(out, need)
	}
	return out
}

func planningWeek() view.Week {
	w := demoWeek(view.Issued)
	w.Job = &view.Job{
		ID: 7, Week: week, State: view.JobRunning, Done: 0.37, Score: 69.2, Bound: 74.6, AskedBy: "Imre Oduya",
		Started: now.Add(-4 * time.Second), MayStop: true,
	}
	return w
}

func emptyWeek(blocks bool) view.Week {
	w := demoWeek(view.Draft)
	w.Plan, w.InUse, w.Others, w.Source = nil, nil, nil, ""
	w.NeedsMet = 0
	for i := range w.Needs {
		w.Needs[i].State, w.Needs[i].Scans, w.Needs[i].Reasons = view.NeedOpen, nil, nil
	}
	for i := range w.Blocks {
		b := &w.Blocks[i]
		b.Scans, b.Curve, b.Allowed, b.FreeMin = nil, nil, nil, b.Minutes()
	}
	if !blocks {
		w.Blocks = nil
	}
	w.Telescopes = stripOf(w.Blocks)
	return w
}

func noCampaignWeek() view.Week {
	w := view.Week{Page: base("/weeks/" + week), Week: week, From: monday, To: monday.AddDate(0, 0, 7), MayPlan: true}
	w.Campaign = ""
	w.Messages = []view.Message{{Kind: view.Note, Text: "You have signed in for the first time; Help says how a week goes."}}
	return w
}

// fullWeek is more than a week should be: 10 telescopes, 60 blocks, 500 scans.
func fullWeek() view.Week {
	w := baseWeek()
	w.Source = names[0]
	for i := range 60 {
		s := sites[(i*3)%len(sites)]
		start := monday.Add(time.Duration(i*162/60)*time.Hour + time.Duration(i%4)*15*time.Minute)
		scans := 8
		if i%3 == 0 {
			scans = 9
		}
		w.Blocks = append(w.Blocks, blockRow(i, s, start, []float64{4, 6, 3, 12, 5}[i%5], scans, w.Source))
	}
	w.Telescopes = stripOf(w.Blocks)
	w.Needs, w.NeedsTotal, w.NeedsMet = needs(180), 180, 108
	w.Plan = planOf(view.Draft)
	w.Plan.Scans, w.Plan.Minutes, w.Plan.Free, w.Plan.Score, w.Plan.Possible, w.Plan.Bound = 500, 15480, 2310, 412.4, 590, 455
	w.Plan.Stale = "Two blocks were added after this draft was made. Plan again to use them."
	w.Messages = []view.Message{{Kind: view.Good, Text: "The draft is ready."}, {Kind: view.Wrong, Text: "Revision 1 was issued by Hanne Solberg while you were looking at draft 40; nothing was overwritten."}}
	for i := range 9 {
		p := *planOf(view.Superseded)
		p.ID, p.Revision, p.SupersededBy = int64(30+i), i+1, i+2
		w.Others = append(w.Others, p)
	}
	return w
}

func scanCard(done bool) view.ScanCard {
	s := sites[1]
	start := monday.Add(38 * time.Hour)
	turn := 214.6
	v := view.ScanCard{
		Page: base("/weeks/" + week + "/scans/1042"), Week: week, Plan: *planOf(view.Issued),
		Scan: scan(48, s, start.Add(95*time.Minute), 42), Telescope: s.code, Name: s.name, Block: "KEST-2", Zone: s.zone,
		LSTStartH: 0.9, LSTEndH: 1.6, FreqMHz: 1284, BandMHz: 700, CalS: 60, SNR: 84.2, WantedUs: 0.5,
		First: view.Place{AzDeg: 318.4, ElDeg: elevation(start.Add(95*time.Minute), 3, s), SunDeg: 76.2}, Last: view.Place{AzDeg: 307.1, ElDeg: elevation(start.Add(137*time.Minute), 3, s), SunDeg: 76.2},
		MotorDeg: &turn, Track: track(start, start.Add(5*time.Hour), 10*time.Minute, 3, s),
		BlockSpan: view.Span{Start: start, End: start.Add(5 * time.Hour)}, LimitDeg: s.minEl,
		Phase: "0.214 to 0.229 from periastron",
		Earns: []view.Earning{{Goal: "c-12", Unit: "c-12#1", What: "every 7 days in L", Value: 3.1}, {Goal: "p-2", Unit: "p-2#0@118", What: "window 0.18 to 0.32, orbit 118", Value: 1.2}},
		Prev:  1041, Next: 1043,
	}
	v.Allowed = above(v.Track, s.minEl)
	if done {
		v.Scan.State = "partial"
		v.Outcome = &view.Outcome{
			State: "partial", At: start.Add(140 * time.Minute), By: "the key of Kesterfontein", Start: start.Add(97 * time.Minute), Minutes: 31,
			Cause: "wind", SNR: 61.3, TOAUs: 0.71, Note: "Stowed for gusts over 50 km/h; data until then are good.",
		}
	}
	return v
}
