package explain

import (
	"reflect"
	"testing"
	"time"

	"cadencewright/scheduler"
	"cadencewright/scheduler/feasible"
	"cadencewright/scheduler/solve"

	"pgregory.net/rapid"
)

// The same problem and plan give the same reasons, word by word.
func TestSameReasonsAgain(t *testing.T) {
	p := problemOf(t, "hard-1")
	plan := planOf(t, "hard-1")
	want := Unmet(p, plan)
	for range 3 {
		if got := Unmet(p, plan); !reflect.DeepEqual(got, want) {
			t.Fatal("other reasons the second time")
		}
	}
}

// Explaining changes neither the problem nor the plan.
func TestExplainingChangesNothing(t *testing.T) {
	p := problemOf(t, "small-2")
	plan := planOf(t, "small-2")
	before, err := scheduler.WritePlan(plan)
	if err != nil {
		t.Fatal(err)
	}
	Unmet(p, plan)
	after, err := scheduler.WritePlan(plan)
	if err != nil {
		t.Fatal(err)
	}
	if string(before) != string(after) {
		t.Error("the plan is another")
	}
}

// Scans that do not belong to the problem, or make no sense, count for nothing
// and bring nothing down.
func TestScansThatDoNotBelong(t *testing.T) {
	good := lone()
	wantScan(good)
	want := explained(t, good, "cad#1")
	bad := observed(asked, "b1", 1, 20, earning("cad#9", 1), earning("nothing", 1))
	for _, x := range []struct {
		name   string
		change func(*scheduler.Scan)
	}{
		{"another block", func(s *scheduler.Scan) { s.Block = "b9" }},
		{"another source", func(s *scheduler.Scan) { s.Source = "SIM J0000+0000" }},
		{"no length", func(s *scheduler.Scan) { s.Minutes = 0 }},
		{"backwards", func(s *scheduler.Scan) { s.Minutes = -20 }},
		{"in the year 1800", func(s *scheduler.Scan) { s.Start = s.Start.AddDate(-227, 0, 0) }},
	} {
		t.Run(x.name, func(t *testing.T) {
			s := bad
			x.change(&s)
			if got := explained(t, good, "cad#1", s); !reflect.DeepEqual(got, want) {
				t.Errorf("%v, want %v", got, want)
			}
		})
	}
}

// A scan takes its time whatever it is: with a receiver that the block does not
// have, of a source that nothing is wanted of, off the grid.
func TestAnyScanTakesItsTime(t *testing.T) {
	for _, x := range []struct {
		name   string
		change func(*scheduler.Scan)
	}{
		{"as it is", func(*scheduler.Scan) {}},
		{"with another receiver", func(s *scheduler.Scan) { s.Receiver = "none" }},
		{"off the grid", func(s *scheduler.Scan) { s.Start = s.Start.Add(77e9) }},
	} {
		t.Run(x.name, func(t *testing.T) {
			c := lone()
			wantScan(c)
			c.Blocks[0].End = after(1.2)
			s := observed(other, "b1", 0.4, 40)
			x.change(&s)
			says(t, explained(t, c, "cad#1", s)[0], Displaced, 1, "in place of SIM J0842+4404")
		})
	}
}

// A unit that is earned as often as it can be is not listed; one that is earned
// too seldom is.
func TestWhatIsUnmet(t *testing.T) {
	c := lone()
	wantScan(c)
	wantPhase(t, c, 0.3, after(4), 0.5).PerHorizon = 2
	p, err := feasible.Build(c, scheduler.Horizon{From: c.Start, To: c.End})
	if err != nil {
		t.Fatal(err)
	}
	for _, x := range []struct {
		earns []scheduler.Earning
		want  []string
	}{
		{nil, []string{"cad#1", "cad#2", "orb@0"}},
		{[]scheduler.Earning{earning("cad#1", 3)}, []string{"cad#2", "orb@0"}},
		{[]scheduler.Earning{earning("cad#2", 1), earning("orb@0", 1)}, []string{"cad#1", "orb@0"}},
		{[]scheduler.Earning{earning("orb@0", 1), earning("orb@0", 1)}, []string{"cad#1", "cad#2"}},
	} {
		var got []string
		for _, u := range Unmet(p, &scheduler.Plan{Scans: []scheduler.Scan{observed(asked, "b1", 1, 20, x.earns...)}}) {
			got = append(got, u.Unit)
			if u.Goal == "" || u.Weight <= 0 {
				t.Errorf("%+v", u)
			}
		}
		if !reflect.DeepEqual(got, x.want) {
			t.Errorf("earning %v: unmet are %v, want %v", x.earns, got, x.want)
		}
	}
}

// No plan of any scans whatever may bring the explainer down, and every unmet
// unit of it has its reasons.
func TestAnyPlan(t *testing.T) {
	p := problemOf(t, "small-1")
	c := p.Campaign
	rapid.Check(t, func(t *rapid.T) {
		plan := &scheduler.Plan{}
		for range rapid.IntRange(0, 30).Draw(t, "scans") {
			b := rapid.SampledFrom(c.Blocks).Draw(t, "block")
			s := rapid.SampledFrom(c.Sources).Draw(t, "source")
			scan := scheduler.Scan{Block: b.ID, Telescope: b.Telescope, Source: s.Name, Receiver: rapid.SampledFrom(b.Receivers).Draw(t, "receiver"),
				Start:   b.Start.Add(time.Duration(rapid.IntRange(-60, 900).Draw(t, "start minutes")) * time.Minute),
				Minutes: rapid.SampledFrom([]int{1, 10, 30, 60, 600}).Draw(t, "minutes"), Pinned: rapid.Bool().Draw(t, "pinned")}
			for range rapid.IntRange(0, 3).Draw(t, "earnings") {
				u := rapid.SampledFrom(p.Units.Units).Draw(t, "unit")
				scan.Earns = append(scan.Earns, scheduler.Earning{Goal: p.Units.Goals[u.Goal].ID, Unit: u.Name, Value: rapid.Float64Range(-1, 5).Draw(t, "value")})
			}
			plan.Scans = append(plan.Scans, scan)
		}
		for _, u := range Unmet(p, plan) {
			if len(u.Reasons) == 0 {
				t.Errorf("%s has no reason", u.Unit)
			}
		}
	})
}

// A horizon without a block leaves one cause for every unit.
func TestHorizonWithoutBlocks(t *testing.T) {
	c := problemOf(t, "medium-1").Campaign
	p, err := feasible.Build(c, scheduler.Horizon{From: c.End.AddDate(0, 0, 7), To: c.End.AddDate(0, 0, 14)})
	if err != nil {
		t.Fatal(err)
	}
	list := Unmet(p, emptyPlan(p))
	if len(list) != len(p.Units.Units) || len(list) == 0 {
		t.Fatalf("%d of %d units", len(list), len(p.Units.Units))
	}
	for _, u := range list {
		for _, r := range u.Reasons {
			if r.Code != NoBlock && r.Code != NoPassage || r.Count != 0 {
				t.Errorf("%s: %+v", u.Unit, r)
			}
		}
		if len(u.Reasons) != 1 {
			t.Errorf("%s: %d reasons", u.Unit, len(u.Reasons))
		}
	}
}

// Part of a campaign is explained by its own blocks alone.
func TestTwoDaysOfAWeek(t *testing.T) {
	c := problemOf(t, "medium-2").Campaign
	h := scheduler.Horizon{From: c.Start.AddDate(0, 0, 2), To: c.Start.AddDate(0, 0, 4)}
	p, err := feasible.Build(c, h)
	if err != nil {
		t.Fatal(err)
	}
	r, err := solve.Solve(p, solve.Options{Seed: 1, Effort: 10})
	if err != nil {
		t.Fatal(err)
	}
	list := Unmet(p, r.Plan)
	if len(list) != len(r.Plan.Unmet) || len(list) == 0 {
		t.Fatalf("%d units explained, %d unmet", len(list), len(r.Plan.Unmet))
	}
	for i, u := range list {
		if u.Unit != r.Plan.Unmet[i].Unit || len(u.Reasons) == 0 {
			t.Errorf("%s: %v", u.Unit, u.Reasons)
		}
		for _, reason := range u.Reasons {
			if reason.Count > len(p.Blocks) {
				t.Errorf("%s: %d blocks of %d: %s", u.Unit, reason.Count, len(p.Blocks), reason.Text)
			}
		}
	}
}
