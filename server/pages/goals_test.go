package pages

import (
	"math"
	"os"
	"strings"
	"testing"
	"time"

	"cadencewright/scheduler"
	"cadencewright/scheduler/units"
	"cadencewright/testdata"
	"cadencewright/web/view"
)

func demoCampaign(t *testing.T) *scheduler.Campaign {
	t.Helper()
	data, err := os.ReadFile(testdata.Path("campaigns", "demo.json"))
	if err != nil {
		t.Fatal(err)
	}
	c, err := scheduler.ReadCampaign(data)
	if err != nil {
		t.Fatal(err)
	}
	return c
}

func fourWeeks(t *testing.T, c *scheduler.Campaign, now time.Time) *units.Set {
	t.Helper()
	set, err := units.Build(c, scheduler.Horizon{From: now, To: now.AddDate(0, 0, 28)})
	if err != nil {
		t.Fatal(err)
	}
	return set
}

// How a goal of every seven days stands, by when it was last satisfied.
func TestSinceLast(t *testing.T) {
	c := demoCampaign(t)
	g := c.CadenceTargets[0]
	g.EveryD, g.EarlyD, g.Telescopes, g.TOAUs = 7, 1.75, nil, 0
	tel := &c.Telescopes[0]
	var rx *scheduler.Receiver
	for i := range c.Telescopes {
		for j := range c.Telescopes[i].Receivers {
			for _, b := range c.Telescopes[i].Receivers[j].Bands {
				if b == g.Bands[0] && rx == nil {
					tel, rx = &c.Telescopes[i], &c.Telescopes[i].Receivers[j]
				}
			}
		}
	}
	c.CadenceTargets = []scheduler.CadenceTarget{g}
	now := c.Blocks[0].Start.UTC()
	soon := scheduler.WeekStart(now).AddDate(0, 0, 7)
	left := soon.Sub(now).Hours() / 24 // days of the week to come
	for _, x := range []struct {
		daysAgo  float64 // 0: never
		state    view.GoalState
		standing string
		dueIn    float64 // days
	}{
		{0, view.GoalLate, "never had", 0},
		{6.9, view.GoalDue, "last 6.9 days ago", 0.1},
		{7 - left + 0.01, view.GoalDue, "", left - 0.01},
		{7 - left, view.GoalMet, "", left}, // due when the week is over
		{9, view.GoalLate, "last 9.0 days ago, late by 2 d", -2},
		{40.5, view.GoalLate, "last 40.5 days ago, late by 33.5 d", -33.5}, // urgency ends at two intervals, lateness does not
	} {
		c.History = nil
		if x.daysAgo > 0 {
			at := now.Add(-time.Duration(x.daysAgo * 24 * float64(time.Hour)))
			c.History = []scheduler.HistoryScan{{Source: g.Source, Telescope: tel.Code, Receiver: rx.Code, Start: at, Minutes: 30, Counted: true}}
		}
		var row *view.GoalRow
		rows := goalRows(c, c.SourceByName(g.Source), fourWeeks(t, c, now), now, soon)
		for i := range rows {
			if rows[i].ID == g.ID {
				row = &rows[i]
			}
		}
		if row == nil {
			t.Fatalf("goal %s has no row", g.ID)
		}
		if row.State != x.state || x.standing != "" && row.Standing != x.standing {
			t.Errorf("had %g days ago: %s, %q, want %s, %q", x.daysAgo, row.State, row.Standing, x.state, x.standing)
		}
		if d := row.Due.Sub(now).Hours() / 24; math.Abs(d-x.dueIn) > 0.001 {
			t.Errorf("had %g days ago: due in %.3f days, want %g", x.daysAgo, d, x.dueIn)
		}
	}
}

// Every goal of the demo campaign says how it stands, and phase goals count
// orbits: each counted covering scan is one fewer to go.
func TestEveryGoalStands(t *testing.T) {
	c := demoCampaign(t)
	now := c.Blocks[0].Start.UTC()
	soon := scheduler.WeekStart(now).AddDate(0, 0, 7)
	set := fourWeeks(t, c, now)
	rows, phases, had := 0, 0, 0
	for i := range c.Sources {
		for _, r := range goalRows(c, &c.Sources[i], set, now, soon) {
			rows++
			if r.State == "" || r.Standing == "" || r.Wants == "" || r.Kind == "" {
				t.Errorf("%s of %s: %+v", r.ID, c.Sources[i].Name, r)
			}
			late, due := !r.Due.After(now), r.Due.Before(soon)
			switch r.Kind {
			case "phase":
				phases++
				if !strings.HasPrefix(r.Standing, "0 of") {
					had++
				}
				want := view.GoalOpen
				switch {
				case complete(r.Standing):
					want = view.GoalMet
				case !r.Due.IsZero() && due:
					want = view.GoalDue
				}
				if r.State != want || r.Due.IsZero() != (strings.Contains(r.Standing, "no passage") || complete(r.Standing)) {
					t.Errorf("%s: %s, %q, due %v", r.ID, r.State, r.Standing, r.Due)
				}
			default:
				if (r.State == view.GoalLate) != late || (r.State == view.GoalDue) != (due && !late) || r.Due.IsZero() {
					t.Errorf("%s: %s, %q, due %v", r.ID, r.State, r.Standing, r.Due)
				}
			}
		}
	}
	n := len(c.CadenceTargets) + len(c.PhaseGoals) + len(c.OverlapGoals) + len(c.BandPairGoals)
	if rows != n || phases != len(c.PhaseGoals) {
		t.Errorf("%d rows of which %d phase goals, want %d and %d", rows, phases, n, len(c.PhaseGoals))
	}
	if had == 0 {
		t.Error("no phase goal of the demo campaign has an orbit yet, which its history should give")
	}
}

// complete tells whether all of the wanted orbits were had.
func complete(standing string) bool {
	f := strings.Fields(standing)
	return len(f) > 2 && f[0] == f[2]
}
