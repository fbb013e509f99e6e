package explain

import (
	"math"
	"strings"
	"testing"
	"time"

	"cadencewright/scheduler"
	"cadencewright/scheduler/feasible"
)

// What is suggested is the least that does: a little less of it leaves no room.
func TestALittleLessWouldNotDo(t *testing.T) {
	tried := map[Kind]int{}
	for _, name := range []string{"small-1", "medium-1", "medium-2"} {
		p := problemOf(t, name)
		plan := atBest(t, p, planOf(t, name))
		for _, u := range unmet(p, plan, 0) {
			kind := p.Units.Goals[p.Units.Units[p.Units.ByName(u.Unit)].Goal].Kind
			if kind != scheduler.KindCadence && kind != scheduler.KindPhase {
				continue // the search for scans together takes samples
			}
			list, err := Suggest(p, plan, u.Unit)
			if err != nil {
				t.Fatal(err)
			}
			for i := range list {
				for _, less := range lesser(p.Campaign, &list[i]) {
					tried[list[i].Kind]++
					if roomIn(t, less.Campaign(p.Campaign), plan, u.Unit) {
						t.Errorf("%s %s: less would do: %s", name, u.Unit, list[i].Text)
					}
				}
			}
		}
	}
	if tried[LongerBlock] < 5 || tried[LowerLimit] < 1 {
		t.Errorf("tried only %v", tried)
	}
}

// lesser are suggestions of a little less.
func lesser(c *scheduler.Campaign, s *Suggestion) []Suggestion {
	less := *s
	switch s.Kind {
	case LongerBlock:
		if b := c.BlockByID(s.Block); s.Start.Before(b.Start) {
			less.Start = s.Start.Add(time.Minute)
		} else {
			less.End = s.End.Add(-time.Minute)
		}
		return []Suggestion{less}
	case LowerLimit:
		less.ElevationDeg += 0.11
		return []Suggestion{less}
	}
	return nil
}

// roomIn reports whether a unit could be met in a campaign without displacing
// anything that earns.
func roomIn(t *testing.T, c *scheduler.Campaign, plan *scheduler.Plan, unit string) bool {
	t.Helper()
	p, err := feasible.Build(c, scheduler.Horizon{From: plan.From, To: plan.To})
	if err != nil {
		t.Fatal(err)
	}
	q := newExplainer(p, plan).question(p.Units.ByName(unit))
	q.look()
	return q.best != nil && len(q.best.options) > 0 && idle(q.best.displaced)
}

// Every kind of suggestion, each where its figures follow by hand.
func TestWhatIsSuggested(t *testing.T) {
	for _, x := range []struct {
		name   string
		change func(*scheduler.Campaign, *scheduler.CadenceTarget)
		scans  []scheduler.Scan
		kind   Kind
		holds  func(*Suggestion) bool
		says   []string
	}{
		// 15 min after it is due, a scan earns 3 (1 - 0.6 · 15 min / 5 d).
		// The scan needs 660 s of setup and calibration, which ends at 15 min on
		// the grid, and 20 min.
		{"longer block", func(c *scheduler.Campaign, _ *scheduler.CadenceTarget) { c.Blocks[0].End = after(0.25) }, nil, LongerBlock,
			func(s *Suggestion) bool { return s.Block == "b1" && s.MoreMinutes == 20 && s.End.Equal(after(35./60)) },
			[]string{"give block b1 of ONE 20 min more, until 2027-01-18 00:35 UTC", "rise by 3.00"}},
		{"new block", func(_ *scheduler.Campaign, g *scheduler.CadenceTarget) { g.Telescopes = []string{"TWO"} }, nil, NewBlock,
			func(s *Suggestion) bool {
				return s.Telescope == "TWO" && s.Start.Equal(after(4./60)) && s.End.Equal(after(35./60)) && math.Abs(s.Hours-31./60) < 1e-9 && s.LSTHours == [2]float64{0, 24}
			}, []string{"a block of 0.5 h at TWO with L at any time of day"}},
		{"receiver", func(c *scheduler.Campaign, g *scheduler.CadenceTarget) {
			g.Bands = []string{"S"}
			g.Telescopes = []string{"ONE"}
		}, nil, Receiver,
			func(s *Suggestion) bool {
				return s.Block == "b1" && len(s.Receivers) == 1 && strings.Contains("S W", s.Receivers[0])
			}, []string{"let block b1 of ONE use"}},
		{"shorter scan", func(c *scheduler.Campaign, g *scheduler.CadenceTarget) {
			c.Blocks[0].End = after(0.5)
		}, nil, ScanLength, func(s *Suggestion) bool { return s.ScanMinutes == 15 && s.Source == asked }, []string{"scans of 15 min (now 20 and 40 min)"}},
		{"lower limit", func(c *scheduler.Campaign, g *scheduler.CadenceTarget) {
			c.Sources[0].DecDeg = -30
			g.Telescopes = []string{"ONE"}
		}, nil, LowerLimit, func(s *Suggestion) bool { return s.ElevationDeg > 5 && s.ElevationDeg < 9.4 }, []string{"let ONE go down to", "(now 15 deg)"}},
		{"make room", func(c *scheduler.Campaign, _ *scheduler.CadenceTarget) { c.Blocks[0].End = after(1.2) },
			[]scheduler.Scan{observed(other, "b1", 0.5, 40)}, MakeRoom,
			func(s *Suggestion) bool {
				return len(s.Drop) == 1 && s.Drop[0].Source == other && math.Abs(s.Gain-2.99625) < 1e-9
			},
			[]string{"drop " + other + " at 00:30", "rise by 3.00"}},
		// 20 min in the middle leave room for 40 min on neither side.
		{"move", func(c *scheduler.Campaign, _ *scheduler.CadenceTarget) {
			c.Blocks[0].End = after(1.5)
			c.Sources[0].ScanMinutes = []int{40}
			c.CadenceTargets = append(c.CadenceTargets, scheduler.CadenceTarget{Goal: scheduler.Goal{ID: "oth", Source: other, Bands: []string{"L"}, Priority: 1}, EveryD: 9, EarlyD: 2})
		}, []scheduler.Scan{observed(other, "b1", 35./60, 20, earning("oth#1", 3))}, MakeRoom,
			func(s *Suggestion) bool {
				return len(s.Drop) == 0 && len(s.Move) == 1 && s.Move[0].Scan.Source == other && !s.Move[0].Start.Equal(after(35./60)) && s.Gain > 2.9
			}, []string{"move " + other + " from 00:35 to 0", "rise by "}},
		{"insert", func(*scheduler.Campaign, *scheduler.CadenceTarget) {}, nil, Insert,
			func(s *Suggestion) bool {
				return math.Abs(s.Gain-2.99625) < 1e-9 && len(s.Add) == 1 && s.Add[0].Minutes == 20
			}, []string{"add ONE with L in block b1"}},
	} {
		t.Run(x.name, func(t *testing.T) {
			c := lone()
			x.change(c, wantScan(c))
			p, err := feasible.Build(c, scheduler.Horizon{From: c.Start, To: c.End})
			if err != nil {
				t.Fatal(err)
			}
			list, err := Suggest(p, &scheduler.Plan{Campaign: c.Name, From: c.Start, To: c.End, Scans: x.scans}, "cad#1")
			if err != nil {
				t.Fatal(err)
			}
			for i := range list {
				if s := &list[i]; s.Kind == x.kind {
					if !x.holds(s) {
						t.Errorf("%+v", *s)
					}
					for _, part := range x.says {
						if !strings.Contains(s.Text, part) {
							t.Errorf("the text does not say %q: %s", part, s.Text)
						}
					}
					return
				}
			}
			t.Errorf("no %s among %v", x.kind, list)
		})
	}
}

// Where the orbit does not pass, or there is no such unit, nothing is suggested.
func TestNothingToSuggest(t *testing.T) {
	p := problemOf(t, "demo")
	plan := planOf(t, "demo")
	if _, err := Suggest(p, plan, "none#1"); scheduler.KindOf(err) != scheduler.ErrNotFound {
		t.Errorf("error %v", err)
	}
	seen := 0
	for _, u := range unmet(p, plan, 0) {
		if u.Reasons[0].Code != NoPassage {
			continue
		}
		seen++
		if list, err := Suggest(p, plan, u.Unit); err != nil || len(list) > 0 {
			t.Errorf("%s: %v, %v", u.Unit, list, err)
		}
	}
	if seen == 0 {
		t.Error("every orbit passes")
	}
	for ui := range p.Units.Units {
		u := &p.Units.Units[ui]
		if newExplainer(p, plan).times(ui) >= u.N {
			if list, err := Suggest(p, plan, u.Name); err != nil || len(list) > 0 {
				t.Errorf("%s is earned: %v, %v", u.Name, list, err)
			}
			break
		}
	}
}

// A unit gets three suggestions at most in a plan, after its causes.
func TestFewSuggestionsInAPlan(t *testing.T) {
	for _, name := range []string{"medium-2", "demo"} {
		most := 0
		for _, u := range Unmet(problemOf(t, name), planOf(t, name)) {
			n := 0
			for i, r := range u.Reasons {
				if r.Code == Suggested {
					n++
				} else if i > 0 && u.Reasons[i-1].Code == Suggested {
					t.Errorf("%s: a cause after a suggestion", u.Unit)
				}
			}
			if n > 3 {
				t.Errorf("%s: %d suggestions", u.Unit, n)
			}
			most = max(most, n)
		}
		if most == 0 {
			t.Errorf("%s: none", name)
		}
	}
}
