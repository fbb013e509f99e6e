package explain

import (
	"math"
	"testing"

	"cadencewright/scheduler"
	"cadencewright/scheduler/feasible"
)

// crowded is a block with three scans that earn different things, and a
// question whose options can take the place of any of them.
func crowded(t *testing.T) (*question, []reach) {
	t.Helper()
	c := lone()
	wantScan(c)
	c.CadenceTargets = append(c.CadenceTargets,
		scheduler.CadenceTarget{Goal: scheduler.Goal{ID: "oth", Source: other, Bands: []string{"L"}, Priority: 1}, EveryD: 2, EarlyD: 0.5})
	if err := c.Validate(); err != nil {
		t.Fatal(err)
	}
	p, err := feasible.Build(c, scheduler.Horizon{From: c.Start, To: c.End})
	if err != nil {
		t.Fatal(err)
	}
	plan := &scheduler.Plan{Scans: []scheduler.Scan{
		observed(other, "b1", 0.25, 40, earning("oth#1", 2)),
		observed(other, "b1", 1, 40, earning("oth#2", 1), earning("oth#3", 0.5)),
		observed(other, "b1", 1.75, 40),
	}}
	q := newExplainer(p, plan).question(p.Units.ByName("cad#1"))
	return q, q.reaches(q.allBands(), math.Inf(-1), math.Inf(1))
}

// optionAt is the option that starts some hours into the campaign.
func optionAt(t *testing.T, q *question, list []reach, hours float64, minutes int) *option {
	t.Helper()
	var found *option
	for i := range list {
		q.each(&list[i], func(o *option) {
			if o.steps*q.GridMin == minutes && math.Abs(o.startMin-q.Units.From-60*hours) < 0.1 {
				copied := *o
				found = &copied
			}
		})
	}
	if found == nil {
		t.Fatalf("no option of %d min at %g h", minutes, hours)
	}
	return found
}

func TestWhatAnOptionCosts(t *testing.T) {
	q, list := crowded(t)
	for _, x := range []struct {
		hours   float64
		minutes int
		number  int
		loss    float64
	}{
		{0.25, 20, 1, 2}, {0.75, 20, 2, 3.5}, {1.25, 20, 1, 1.5}, {1.5, 20, 2, 1.5}, {1.75, 40, 1, 0}, {1, 40, 1, 1.5}, {4, 40, 0, 0},
	} {
		displaced, possible := q.cost(optionAt(t, q, list, x.hours, x.minutes))
		if !possible || len(displaced) != x.number || math.Abs(q.loss(displaced)-x.loss) > 1e-12 {
			t.Errorf("%d min at %g h: displaces %d that earn %g, want %d and %g", x.minutes, x.hours, len(displaced), q.loss(displaced), x.number, x.loss)
		}
	}
}

func TestTheBestChoice(t *testing.T) {
	q, list := crowded(t)
	c := q.newChoice()
	for _, x := range []struct {
		gain  float64
		hours float64
		net   float64 // of the best so far
	}{
		{3, 0.25, 1}, {3, 0.75, 1}, {2.4, 1.25, 1}, {3, 1.25, 1.5}, {1.4, 4, 1.5}, {1.5, 1.75, 1.5}, {1.5, 4, 1.5}, {2, 5, 2}, {0.1, 4.5, 2},
	} {
		c.consider(x.gain, optionAt(t, q, list, x.hours, 20))
		if math.Abs(c.net-x.net) > 1e-12 {
			t.Errorf("after %g at %g h: %g, want %g", x.gain, x.hours, c.net, x.net)
		}
	}
	if c.possible != 9 || len(c.options) != 1 || len(c.displaced) != 0 || c.gain != 2 {
		t.Errorf("%+v", c)
	}
}

// Of choices that are worth the same, the one that moves least is told.
func TestEqualChoices(t *testing.T) {
	q, list := crowded(t)
	c := q.newChoice()
	c.consider(1, optionAt(t, q, list, 1.75, 20)) // displaces a scan that earns nothing
	c.consider(1, optionAt(t, q, list, 4, 20))    // displaces none
	c.consider(1, optionAt(t, q, list, 1.75, 40))
	if len(c.displaced) != 0 {
		t.Errorf("displaces %d", len(c.displaced))
	}
	q.standing()
	had := &option{block: 0, steps: 4, startMin: q.planned[0][2].startMin, endMin: q.planned[0][2].endMin, had: q.planned[0][2]}
	c.consider(1, had)
	if c.options[0].had == nil {
		t.Error("a scan that stands already was not preferred")
	}
	// A scan cannot stay and go.
	before := c.net
	c.consider(9, had, optionAt(t, q, list, 1.75, 20))
	if c.net != before {
		t.Error("a scan was kept that has to make room")
	}
}

func TestPinsAreNotDisplaced(t *testing.T) {
	q, list := crowded(t)
	q.planned[0][1].scan.Pinned = true
	c := q.newChoice()
	c.consider(5, optionAt(t, q, list, 1.25, 20))
	if c.possible != 1 || c.pinned != 1 || len(c.options) != 0 {
		t.Errorf("%+v", c)
	}
	c.consider(5, optionAt(t, q, list, 0.25, 20))
	if len(c.options) != 1 {
		t.Error("the scan beside the pin cannot be displaced")
	}
}

// The list of scans names three, or four, and counts the others.
func TestListOfScans(t *testing.T) {
	q, _ := crowded(t)
	row := q.planned[0]
	for _, x := range []struct {
		scans []*planned
		want  string
	}{
		{row[:1], "SIM J0842+4404 at 00:15 (earns 2.00)"},
		{row[:2], "SIM J0842+4404 at 00:15 (earns 2.00) and SIM J0842+4404 at 01:00 (earns 1.50)"},
		{append(append(row[:3:3], row[2]), row[2]), "SIM J0842+4404 at 00:15 (earns 2.00), SIM J0842+4404 at 01:00 (earns 1.50), SIM J0842+4404 at 01:45 (earns 0.00) and 2 others"},
	} {
		if got := q.listed(x.scans); got != x.want {
			t.Errorf("%q, want %q", got, x.want)
		}
	}
}

// What a start must keep from neighbouring windows: half the interval, in the
// order of the windows.
func TestSpaced(t *testing.T) {
	q, _ := crowded(t)
	q = q.question(q.Units.ByName("oth#3")) // every two days; #1 and #2 are earned on the first night
	from := q.Units.From
	q.earners[q.ui] = nil
	for _, x := range []struct {
		days float64
		want bool
	}{{0, false}, {1, false}, {1.04, false}, {1.0417, true}, {5, true}} {
		if got := q.spaced(from + 1440*x.days); got != x.want {
			t.Errorf("%g d after the start: %v", x.days, got)
		}
	}
	first := q.question(q.Units.ByName("oth#1"))
	first.earners[first.ui] = nil
	if first.spaced(from + 1440*2) {
		t.Error("the first window is earned after the second")
	}
}

func BenchmarkUnmetLarge(b *testing.B) {
	p := problemOf(b, "large-1")
	plan := emptyPlan(p)
	for b.Loop() {
		if list := Unmet(p, plan); len(list) != len(p.Units.Units) || len(list[0].Reasons) == 0 {
			b.Fatalf("%d units explained", len(list))
		}
	}
}

// A plan after little search, with changes of the campaign looked for.
func BenchmarkUnmetPlanned(b *testing.B) {
	for _, name := range []string{"medium-2", "hard-1", "large-1", "demo"} {
		p, plan := problemOf(b, name), planOf(b, name)
		b.Run(name, func(b *testing.B) {
			n := 0
			for b.Loop() {
				n = len(Unmet(p, plan))
			}
			b.ReportMetric(float64(n), "unmet")
		})
	}
}
