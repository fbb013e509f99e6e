package verify

import (
	"slices"
	"testing"

	"cadencewright/scheduler"
)

// corruption is one thing wrong with an otherwise good plan, and the rules
// that a check must find broken: those and no others.
type corruption struct {
	name   string
	as     bool // leave the plan as the change makes it; otherwise restate it
	change func(testing.TB, *scheduler.Campaign, *scheduler.Plan)
	want   []Kind
}

// corruptions are those of all tables, under one name each.
func corruptions() []corruption {
	return slices.Concat(scanCorruptions, skyCorruptions, timeCorruptions, worthCorruptions, totalCorruptions)
}

func TestEachCorruptionIsFound(t *testing.T) {
	for _, x := range corruptions() {
		t.Run(x.name, func(t *testing.T) {
			t.Parallel()
			c := tiny(t)
			p := greedyPlan(t, c, week(c))
			x.change(t, c, p)
			if !x.as {
				restate(t, c, p)
			}
			report, err := Check(c, p, Options{})
			if err != nil {
				t.Fatal(err)
			}
			var got []Kind
			for _, v := range report.Violations {
				got = append(got, v.Kind)
				if v.Text == "" {
					t.Errorf("%s: no text", v.Kind)
				}
				if v.Measure != "" && v.Value == v.Allowed {
					t.Errorf("%s: the value %g and what is allowed are the same", v.Kind, v.Value)
				}
			}
			slices.Sort(got)
			want := slices.Clone(x.want)
			slices.Sort(want)
			if !slices.Equal(got, want) {
				t.Errorf("violations %v, want %v\n%v", got, want, report.Violations)
			}
			if len(want) == 0 && !report.OK() || len(want) > 0 && report.OK() {
				t.Errorf("OK() is %v", report.OK())
			}
		})
	}
}

// A plan without any corruption must pass, or the test above proves nothing.
func TestGoodPlanIsGood(t *testing.T) {
	for _, name := range []string{"tiny", "small-1", "small-2", "medium-1", "medium-2", "hard-1", "large-1"} {
		t.Run(name, func(t *testing.T) {
			t.Parallel()
			c := tiny(t)
			if name != "tiny" {
				c = campaign(t, name)
			}
			p := greedyPlan(t, c, week(c))
			report, err := Check(c, p, Options{Relative: 1e-9})
			if err != nil {
				t.Fatal(err)
			}
			for _, v := range append(report.Violations, report.Notes...) {
				t.Error(v)
			}
			if report.Score <= 0 || report.Score > report.Possible || report.Bound < report.Score {
				t.Errorf("score %g, possible %g, bound %g", report.Score, report.Possible, report.Bound)
			}
		})
	}
}

// firstIn is the first scan of a block.
func firstIn(t testing.TB, p *scheduler.Plan, block string) *scheduler.Scan {
	t.Helper()
	for i := range p.Scans {
		if p.Scans[i].Block == block {
			return &p.Scans[i]
		}
	}
	t.Fatalf("the plan has no scan in block %s", block)
	return nil
}

// scanCorruptions: one scan by itself.
var scanCorruptions = []corruption{
	{name: "nothing", change: func(testing.TB, *scheduler.Campaign, *scheduler.Plan) {}},
	{name: "block that is not there", change: func(t testing.TB, _ *scheduler.Campaign, p *scheduler.Plan) {
		earner(t, p, "cad-J0655#1").Block = "b9"
	}, want: []Kind{KindReference}},
	{name: "block outside the horizon", change: func(t testing.TB, c *scheduler.Campaign, _ *scheduler.Plan) {
		c.Blocks[5].Start, c.Blocks[5].End = after(240), after(246)
	}, want: []Kind{KindReference}},
	{name: "source that is not there", change: func(t testing.TB, _ *scheduler.Campaign, p *scheduler.Plan) {
		earner(t, p, "cad-J0655#1").Source = "SIM J0000+0000"
	}, want: []Kind{KindReference}},
	{name: "telescope of another block", change: func(t testing.TB, _ *scheduler.Campaign, p *scheduler.Plan) {
		earner(t, p, "cad-J0655#1").Telescope = "EQU"
	}, want: []Kind{KindReference}},
	{name: "receiver that is not there", change: func(t testing.TB, _ *scheduler.Campaign, p *scheduler.Plan) {
		earner(t, p, "cad-J0655#1").Receiver = "X"
	}, want: []Kind{KindReference}},
	{name: "receiver that the block does not have", change: func(t testing.TB, c *scheduler.Campaign, p *scheduler.Plan) {
		c.Blocks[5].Receivers = []string{"K"} // t2, whose scan is with L
		c.Telescopes[2].Receivers = append(c.Telescopes[2].Receivers, receiverNamed("K", 6000, "K"))
	}, want: []Kind{KindReceiver}},
	{name: "start off the grid", change: func(t testing.TB, _ *scheduler.Campaign, p *scheduler.Plan) {
		s := earner(t, p, "cad-J1104#2")
		s.Start = s.Start.Add(60e9)
	}, want: []Kind{KindGrid}},
	{name: "length off the grid", change: func(t testing.TB, _ *scheduler.Campaign, p *scheduler.Plan) {
		earner(t, p, "cad-J1104#2").Minutes = 18
	}, want: []Kind{KindGrid}},
	{name: "no length", change: func(t testing.TB, _ *scheduler.Campaign, p *scheduler.Plan) {
		earner(t, p, "cad-J1104#2").Minutes = 0
	}, want: []Kind{KindGrid}},
	{name: "length that the source does not allow", change: func(t testing.TB, _ *scheduler.Campaign, p *scheduler.Plan) {
		earner(t, p, "cad-J1104#2").Minutes = 25
	}, want: []Kind{KindLength}},
	{name: "far outside its block", change: func(t testing.TB, _ *scheduler.Campaign, p *scheduler.Plan) {
		s := earner(t, p, "cad-J1104#2")
		s.Start = s.Start.AddDate(0, 0, 30)
	}, want: []Kind{KindBlockEnd}},
	{name: "pin not marked", change: func(t testing.TB, _ *scheduler.Campaign, p *scheduler.Plan) {
		pinned(t, p).Pinned = false
	}, want: []Kind{KindPinMark}},
	{name: "marked as a pin", change: func(t testing.TB, _ *scheduler.Campaign, p *scheduler.Plan) {
		earner(t, p, "cad-J1104#2").Pinned = true
	}, want: []Kind{KindPinMark}},
	{name: "pin left out", change: func(t testing.TB, _ *scheduler.Campaign, p *scheduler.Plan) {
		s := pinned(t, p)
		p.Scans = slices.DeleteFunc(p.Scans, func(x scheduler.Scan) bool { return x.Pinned && x.Start.Equal(s.Start) })
	}, want: []Kind{KindPin}},
	{name: "pin with another receiver", change: func(t testing.TB, _ *scheduler.Campaign, p *scheduler.Plan) {
		s := pinned(t, p)
		s.Receiver, s.Pinned, s.Minutes = "L", false, 20
	}, want: []Kind{KindPin}},
	{name: "pin twice", change: func(t testing.TB, _ *scheduler.Campaign, p *scheduler.Plan) {
		p.Scans = append(p.Scans, *pinned(t, p))
	}, want: []Kind{KindPin, KindRoom}},
	{name: "uncertainty wrong by a hundredth", as: true, change: func(t testing.TB, _ *scheduler.Campaign, p *scheduler.Plan) {
		earner(t, p, "cad-J1104#2").TOAUs *= 1.01
	}, want: []Kind{KindTOA}},
	{name: "uncertainty wrong by too little to matter", as: true, change: func(t testing.TB, _ *scheduler.Campaign, p *scheduler.Plan) {
		earner(t, p, "cad-J1104#2").TOAUs *= 1.0005
	}},
	{name: "uncertainty missing", as: true, change: func(t testing.TB, _ *scheduler.Campaign, p *scheduler.Plan) {
		earner(t, p, "cad-J1104#2").TOAUs = 0
	}, want: []Kind{KindTOA}},
}

// totalCorruptions: the plan as a whole and its certificate.
var totalCorruptions = []corruption{
	{name: "score too high", as: true, change: func(_ testing.TB, _ *scheduler.Campaign, p *scheduler.Plan) { p.Score *= 1.002 }, want: []Kind{KindScore}},
	{name: "score within the tolerance", as: true, change: func(_ testing.TB, _ *scheduler.Campaign, p *scheduler.Plan) { p.Score *= 1.0009 }},
	{name: "possible too high", as: true, change: func(_ testing.TB, _ *scheduler.Campaign, p *scheduler.Plan) { p.Possible++ }, want: []Kind{KindPossible}},
	{name: "price below nothing", change: func(_ testing.TB, _ *scheduler.Campaign, p *scheduler.Plan) {
		p.Certificate.Prices["pair#3"] = -0.01
	}, want: []Kind{KindPrice}},
	{name: "price of no unit", as: true, change: func(_ testing.TB, _ *scheduler.Campaign, p *scheduler.Plan) {
		p.Certificate.Prices["pair#9"] = 0.01
	}, want: []Kind{KindPrice}},
	{name: "price left out", as: true, change: func(_ testing.TB, _ *scheduler.Campaign, p *scheduler.Plan) {
		delete(p.Certificate.Prices, "cad-J1205#1")
	}, want: []Kind{KindCertBound, KindPlanBound}},
	{name: "certificate's bound wrong", as: true, change: func(_ testing.TB, _ *scheduler.Campaign, p *scheduler.Plan) {
		p.Certificate.Bound *= 0.99
	}, want: []Kind{KindCertBound}},
	{name: "plan's bound wrong", as: true, change: func(_ testing.TB, _ *scheduler.Campaign, p *scheduler.Plan) {
		p.Bound *= 0.99
	}, want: []Kind{KindPlanBound}},
	{name: "no certificate", as: true, change: func(_ testing.TB, _ *scheduler.Campaign, p *scheduler.Plan) {
		p.Certificate = scheduler.Certificate{}
		p.Bound = 0
	}, want: []Kind{KindCertBound, KindPlanBound}},
}
