package edit

import (
	"math"
	"reflect"
	"testing"
	"time"

	"cadencewright/scheduler"
	"cadencewright/scheduler/feasible"
)

// The changed plan keeps what still holds: the certificate and the reasons of
// what stays unmet; what becomes unmet has no reasons yet.
func TestWhatAPlanKeeps(t *testing.T) {
	c := invented()
	s := started(t, c, at(high, 20, 20), at(other, 80, 20))
	s.plan.Bound, s.plan.Certificate = 12, scheduler.Certificate{Prices: map[string]float64{"high#1": 1}, Bound: 12}
	s.plan.Unmet = []scheduler.Unmet{{Goal: "south", Unit: "south#1", Weight: 3, Reasons: []scheduler.Reason{{Code: "low", Text: "Never up."}}}}
	plan, _, err := s.Apply(Drop(0))
	if err != nil {
		t.Fatal(err)
	}
	if plan.Bound != 12 || !reflect.DeepEqual(plan.Certificate, s.plan.Certificate) || plan.Campaign != c.Name || plan.Possible != s.p.Units.Possible {
		t.Errorf("%+v", plan)
	}
	want := []scheduler.Unmet{{Goal: "high", Unit: "high#1", Weight: 3}, s.plan.Unmet[0]}
	if !reflect.DeepEqual(plan.Unmet, want) {
		t.Errorf("unmet %+v, want %+v", plan.Unmet, want)
	}
	if back, _, err := s.Apply(); err != nil || len(back.Unmet) != 1 {
		t.Errorf("without a change unmet are %+v, %v", back.Unmet, err)
	}
}

// What a scan earns, by hand: 3 at once, 0.6 less over the interval of 9 days.
func TestValuesByHand(t *testing.T) {
	s := started(t, invented(), at(other, 80, 20))
	o, err := s.Try(Add("b1", high, "L", after(20), 20))
	if err != nil || !o.Legal() {
		t.Fatal(o, err)
	}
	worth := func(minute float64) float64 { return 3 * (1 - 0.6*minute/(9*1440)) }
	if !near(o.Before, worth(80)) || !near(o.Score, worth(80)+worth(20)) {
		t.Errorf("before %.6f, after %.6f", o.Before, o.Score)
	}
	if len(o.Units) != 1 || o.Units[0].Unit != "high#1" || o.Units[0].Goal != "high" || o.Units[0].Before != 0 || !near(o.Units[0].After, worth(20)) {
		t.Errorf("units %+v", o.Units)
	}
	if len(o.Scans) != 1 || len(o.Scans[0].Earns) != 1 || !near(o.Scans[0].Earns[0].Value, worth(20)) || o.Scans[0].TOAUs <= 0 || o.Scans[0].MotorAzDeg == nil {
		t.Errorf("scans %+v", o.Scans)
	}
	o, err = s.Try(Move(0, after(260)))
	if err != nil || !o.Legal() || !near(o.Score, worth(260)) || !near(o.Units[0].Before, worth(80)) || !near(o.Units[0].After, worth(260)) {
		t.Errorf("moved: %+v, %v", o, err)
	}
}

// Twice the time gathers about twice the information: the predicted uncertainty
// falls by the root of two.
func TestLongerIsMorePrecise(t *testing.T) {
	s := started(t, invented(), at(high, 60, 20))
	short, err := s.Try(Resize(0, 20))
	if err != nil {
		t.Fatal(err)
	}
	long, err := s.Try(Resize(0, 40))
	if err != nil {
		t.Fatal(err)
	}
	if ratio := short.Scans[0].TOAUs / long.Scans[0].TOAUs; math.Abs(ratio-math.Sqrt2) > 0.02 {
		t.Errorf("%.4f us and %.4f us", short.Scans[0].TOAUs, long.Scans[0].TOAUs)
	}
}

// Shares of what several scans earn together add up, and stand with each.
func TestSharesOfAnOverlap(t *testing.T) {
	c := wanted()
	c.CadenceTargets, c.BandPairGoals, c.PhaseGoals = nil, nil, nil
	s := started(t, c)
	o, err := s.Try(Add("b1", high, "L", after(30), 20), Add("b2", high, "W", after(35), 20))
	if err != nil || !o.Legal() {
		t.Fatal(o, err)
	}
	// The common time begins at 35 min, and lasts for 15 min as is wanted.
	want := 1.3 * 3 * (1 - 0.6*35/(0.15*1440))
	if !near(o.Score, want) || len(o.Scans) != 2 {
		t.Fatalf("score %.6f, by hand %.6f", o.Score, want)
	}
	for _, x := range o.Scans {
		if len(x.Earns) != 1 || x.Earns[0].Unit != "two#1" || !near(x.Earns[0].Value, want/2) {
			t.Errorf("%+v", x.Earns)
		}
	}
	if o, err = s.Try(Add("b1", high, "L", after(30), 20), Add("b2", high, "L", after(40), 20)); err != nil || o.Score != 0 {
		t.Errorf("together for 10 min earns %.6f, %v", o.Score, err)
	}
	if o, err = s.Try(Add("b1", high, "L", after(30), 20), Add("b2", high, "S", after(30), 20)); err != nil || o.Score != 0 {
		t.Errorf("without a band in common earns %.6f, %v", o.Score, err)
	}
}

// Both bands near each other, or one receiver that has both.
func TestPairsByHand(t *testing.T) {
	c := wanted()
	c.CadenceTargets, c.OverlapGoals, c.PhaseGoals = nil, nil, nil
	s := started(t, c)
	worth := func(minute float64) float64 { return 1.3 * 3 * (1 - 0.6*minute/(0.12*1440)) }
	for _, x := range []struct {
		name string
		adds []Change
		want float64
	}{
		{"at two telescopes", []Change{Add("b1", high, "L", after(20), 20), Add("b2", high, "S", after(80), 20)}, worth(80)},
		{"too far apart", []Change{Add("b1", high, "L", after(20), 20), Add("b2", high, "S", after(85), 20)}, 0},
		{"one band twice", []Change{Add("b1", high, "L", after(20), 20), Add("b2", high, "L", after(30), 20)}, 0},
		{"both at once", []Change{Add("b3", high, "W", after(20), 20)}, worth(20)},
	} {
		o, err := s.Try(x.adds...)
		if err != nil || !near(o.Score, x.want) {
			t.Errorf("%s: earns %.6f, by hand %.6f, %v", x.name, o.Score, x.want, err)
		}
	}
}

// Scans stand in the plan by block start, then block, then start, whatever the
// order they were added in.
func TestOrderOfScans(t *testing.T) {
	s := started(t, wanted())
	plan, _, err := s.Apply(Add("b2", high, "L", after(200), 20), Add("b1", high, "L", after(100), 20), Add("b1", high, "L", after(20), 20), Add("b3", high, "L", after(60), 20))
	if err != nil {
		t.Fatal(err)
	}
	var got []string
	for _, x := range plan.Scans {
		got = append(got, x.Block+x.Start.Format(" 15:04"))
	}
	if want := []string{"b1 00:20", "b1 01:40", "b2 03:20", "b3 01:00"}; !reflect.DeepEqual(got, want) {
		t.Errorf("%v, want %v", got, want)
	}
}

// A scan may go to another telescope's block.
func TestMovingToAnotherTelescope(t *testing.T) {
	s := started(t, wanted(), at(high, 20, 20))
	plan, _, err := s.Apply(MoveTo(0, "b3", "W", after(40)))
	if err != nil {
		t.Fatal(err)
	}
	x := plan.Scans[0]
	if len(plan.Scans) != 1 || x.Block != "b3" || x.Telescope != "THREE" || x.Receiver != "W" || !x.Start.Equal(after(40)) || x.Minutes != 20 {
		t.Errorf("%+v", plan.Scans)
	}
}

// Pins of other weeks stay the campaign's.
func TestPinsOfOtherWeeks(t *testing.T) {
	c := invented()
	c.End = after(14 * 1440)
	next := c.Blocks[0]
	next.ID, next.Start, next.End, next.Lost = "b2", after(8*1440), after(8*1440+300), nil
	c.Blocks = append(c.Blocks, next)
	c.Pins = []scheduler.Pin{{Block: "b2", Source: other, Receiver: "L", Start: after(8*1440 + 60), Minutes: 20},
		{Block: "b1", Source: other, Receiver: "L", Start: after(60), Minutes: 20}}
	h := scheduler.Horizon{From: c.Start, To: after(7 * 1440)}
	p, err := feasible.Build(c, h)
	if err != nil {
		t.Fatal(err)
	}
	s, err := New(p, &scheduler.Plan{Campaign: c.Name, From: h.From, To: h.To, Scans: []scheduler.Scan{at(other, 60, 20)}})
	if err != nil {
		t.Fatal(err)
	}
	_, pins, err := s.Apply(Unpin(0))
	if err != nil || !reflect.DeepEqual(pins, c.Pins[:1]) {
		t.Errorf("%+v, %v", pins, err)
	}
}

// Starts by hand: 660 s of setup and calibration end at 15 min on the grid, the
// hour from 180 min is lost, and the block ends at 360 min.
func TestStartsByHand(t *testing.T) {
	s := started(t, invented())
	o, err := s.Try(Add("b1", high, "L", after(20), 20))
	if err != nil {
		t.Fatal(err)
	}
	want := []Range{{after(15), after(160)}, {after(255), after(340)}}
	if !reflect.DeepEqual(o.Starts, want) || !reflect.DeepEqual(o.Slide, want) {
		t.Errorf("starts %v, slides over %v, want %v", o.Starts, o.Slide, want)
	}
	// Between two others there is less, and on either side of them as well.
	s = started(t, invented(), at(other, 30, 20), at(other, 140, 20))
	if o, err = s.Try(Add("b1", high, "L", after(80), 20)); err != nil || len(o.Slide) != 1 {
		t.Fatal(o, err)
	}
	if r := o.Slide[0]; r.First.Before(after(55)) || r.First.After(after(60)) || r.Last.After(after(115)) || r.Last.Before(after(110)) {
		t.Errorf("slides over %v", o.Slide)
	}
	if len(o.Starts) != 2 || o.Starts[1] != (Range{after(255), after(340)}) {
		t.Errorf("starts %v", o.Starts)
	}
	// Off the grid there is no telling.
	if o, err = s.Try(Add("b1", high, "L", after(80).Add(time.Minute), 20)); err != nil || o.Slide != nil || o.Starts != nil {
		t.Errorf("off the grid: %v, %v, %v", o.Slide, o.Starts, err)
	}
}
