package edit

import (
	"math"
	"strings"
	"testing"
	"time"

	"cadencewright/scheduler"
)

// Every rule, each by the one change that breaks it, with its figures.
func TestWhatAChangeBreaks(t *testing.T) {
	add := func(source string, minute float64, minutes int) Change {
		return Add("b1", source, "L", after(minute), minutes)
	}
	for _, x := range []struct {
		name    string
		adapt   func(*scheduler.Campaign)
		change  Change
		rule    Rule
		value   float64
		allowed float64
		within  float64 // of value and allowed
		says    []string
	}{
		{"off the grid", nil, add(high, 22, 20), RuleGrid, 20, 5, 0, []string{"off the grid of 5 min"}},
		{"length", nil, add(high, 20, 30), RuleLength, 30, 20, 0, []string{"30 min is not one of", "[20 40]"}},
		{"receiver", nil, Add("b1", high, "S", after(20), 20), RuleReceiver, 0, 0, 0, []string{"only [L]"}},
		{"too low", nil, add(south, 20, 20), RuleLow, -3, 15, 12, []string{"the limit there is 15.00 deg"}},
		{"behind the horizon", func(c *scheduler.Campaign) {
			c.Telescopes[0].Horizon = []scheduler.HorizonPoint{{AzimuthDeg: 0, ElevationDeg: 88.5}}
		}, add(high, 20, 20), RuleLow, 80, 88.5, 10, []string{"the limit there is 88.50 deg"}},
		{"too high", func(c *scheduler.Campaign) { c.Telescopes[0].ElevationMaxDeg = 30 }, add(high, 20, 20), RuleHigh, 75, 30, 15,
			[]string{"the highest allowed is 30.00 deg"}},
		{"Sun", func(c *scheduler.Campaign) { c.Sources[0].SunMinDeg = 175 }, add(high, 20, 20), RuleSun, 149.6, 175, 0.1, []string{"149.6", "175.00 deg"}},
		{"hour angle", func(c *scheduler.Campaign) {
			tel := &c.Telescopes[0]
			tel.Mount, tel.AzimuthRangeDeg, tel.RateAzDegS, tel.RateElDegS = scheduler.MountEquatorial, [2]float64{}, 0, 0
			tel.HourAngleRangeH, tel.RateHADegS, tel.RateDecDegS = [2]float64{-5, 0}, 0.5, 0.5
		}, add(high, 100, 40), RuleHourAngle, 30, 0, 15, []string{"the range ends at 0.00 deg"}},
		{"meridian", func(c *scheduler.Campaign) {
			tel := &c.Telescopes[0]
			tel.Mount, tel.AzimuthRangeDeg, tel.RateAzDegS, tel.TrackHalfMin = scheduler.MountTransit, [2]float64{}, 0, 5
		}, add(high, 100, 20), RuleMeridian, 39.7, 1.984, 0.1, []string{"the mount follows to 1.98 deg"}}, // 5 min / 4 / cos(50.95 deg)
		{"motor", func(c *scheduler.Campaign) { c.Telescopes[0].AzimuthRangeDeg = [2]float64{20, 60} }, add(high, 20, 20), RuleMotor, -78.7, 20, 0.1,
			[]string{"its range is 20 to 60 deg"}},
		{"before the block", nil, add(high, -10, 20), RuleBlockStart, -600, 660, 0, []string{"600 s before its block", "660 s of setup"}},
		{"setup", nil, add(high, 5, 20), RuleSetup, 300, 660, 0, []string{"300 s after its block", "660 s"}},
		{"after the block", nil, add(high, 345, 20), RuleBlockEnd, 300, 0, 0, []string{"300 s after its block"}},
		{"lost time", nil, add(high, 170, 20), RuleLost, 600, 0, 0, []string{"600 s of the lost part", "03:00 UTC to 2027-01-18 04:00 UTC"}},
		{"after lost time", nil, add(high, 245, 20), RuleSetup, 300, 660, 0, []string{"300 s after the lost part"}},
		{"overlap", nil, add(high, 70, 20), RuleOverlap, -600, 130, 60, []string{"600 s before the end of " + other}},
		{"room", nil, add(high, 80, 20), RuleRoom, 0, 130, 60, []string{"0 s after the end of " + other, "to slew and settle", "are missing"}},
		{"too near a pin", func(c *scheduler.Campaign) {
			c.Pins = []scheduler.Pin{{Block: "b1", Source: other, Receiver: "L", Start: after(60), Minutes: 20}}
		}, add(high, 40, 20), RuleRoom, 0, 0, 0, []string{other + " with L", "; " + other + " is pinned"}},
		{"a pin moved", func(c *scheduler.Campaign) {
			c.Pins = []scheduler.Pin{{Block: "b1", Source: other, Receiver: "L", Start: after(60), Minutes: 20}}
		}, Move(0, after(100)), RulePin, 0, 1, 0, []string{"The pin of " + other, "0 times, not once"}},
		{"an unwanted length once unpinned", func(c *scheduler.Campaign) {
			c.Pins = []scheduler.Pin{{Block: "b1", Source: other, Receiver: "L", Start: after(60), Minutes: 20}}
			c.Sources[1].ScanMinutes = []int{40}
		}, Unpin(0), RuleLength, 20, 40, 0, []string{"20 min is not one of"}},
	} {
		t.Run(x.name, func(t *testing.T) {
			c := invented()
			if x.adapt != nil {
				x.adapt(c)
			}
			there := at(other, 60, 20)
			s := started(t, c, there)
			o, err := s.Try(x.change)
			if err != nil {
				t.Fatal(err)
			}
			var found []Violation
			for _, v := range o.Violations {
				if v.New {
					found = append(found, v)
				}
			}
			if len(found) != 1 || o.Brings() != 1 || o.Legal() {
				t.Fatalf("breaks %v", found)
			}
			v := found[0]
			if v.Rule != x.rule || math.Abs(v.Value-x.value) > x.within || x.rule != RuleRoom && x.rule != RuleOverlap && math.Abs(v.Allowed-x.allowed) > 0.01 {
				t.Errorf("%s, %.3f against %.3f %s: %s", v.Rule, v.Value, v.Allowed, v.Measure, v.Text)
			}
			for _, part := range x.says {
				if !strings.Contains(v.Text, part) {
					t.Errorf("the text does not say %q: %s", part, v.Text)
				}
			}
		})
	}
}

// The room that is needed is slew, receiver change and calibration, worked out
// here by hand from where the telescope points.
func TestRoomByHand(t *testing.T) {
	c := invented()
	c.Blocks[0].Receivers = []string{"L", "S"}
	s := started(t, c, at(other, 60, 20))
	o, err := s.Try(Add("b1", high, "S", after(80), 20))
	if err != nil || len(o.Violations) != 1 {
		t.Fatal(err, o)
	}
	v := o.Violations[0]
	a, z := s.scans[0], mustRead(t, s, Add("b1", high, "S", after(80), 20))
	travel := math.Max(math.Abs(a.to1-z.from1), math.Abs(a.to2-z.from2)) / 0.5
	if want := travel + 20 + 60 + 120; math.Abs(v.Allowed-want) > 1e-6 || v.Value != 0 || v.Other == nil || v.Other.Source != other {
		t.Errorf("needs %.3f s, by hand %.3f s: %+v", v.Allowed, want, v)
	}
}

func mustRead(t *testing.T, s *Session, c Change) *scan {
	t.Helper()
	x, err := s.read(&scheduler.Scan{Block: c.Block, Source: c.Source, Receiver: c.Receiver, Start: c.Start, Minutes: c.Minutes})
	if err != nil {
		t.Fatal(err)
	}
	return x
}

// What stood broken before is told apart from what a change breaks.
func TestOldFaultsAreNotNew(t *testing.T) {
	s := started(t, invented(), at(other, 5, 20), at(high, 60, 20))
	if list := s.Violations(); len(list) != 1 || list[0].Rule != RuleSetup || list[0].New {
		t.Fatalf("%v", list)
	}
	o, err := s.Try(Resize(1, 30))
	if err != nil {
		t.Fatal(err)
	}
	if o.Brings() != 1 || len(o.Violations) != 2 || !o.Violations[0].New || o.Violations[0].Rule != RuleLength || o.Violations[1].New {
		t.Errorf("%v", o.Violations)
	}
	if o, err = s.Try(Move(0, after(100))); err != nil || !o.Legal() {
		t.Errorf("moved to where it may stand: %v, %v", o, err)
	}
}

// Changes that make no sense are refused, by what is wrong with them.
func TestChangesThatMakeNoSense(t *testing.T) {
	s := started(t, invented(), at(high, 60, 20))
	for _, x := range []struct {
		says    string
		changes []Change
	}{
		{"the plan has 1 scans", []Change{Drop(1)}},
		{"the plan has 1 scans", []Change{Drop(-1)}},
		{"changed twice", []Change{Drop(0), Move(0, after(80))}},
		{"not one of the horizon's blocks", []Change{Add("b9", high, "L", after(100), 20)}},
		{"not in the campaign", []Change{Add("b1", "SIM J0000+0000", "L", after(100), 20)}},
		{"not one of telescope ONE", []Change{Add("b1", high, "X", after(100), 20)}},
		{"a scan takes from 1 min", []Change{Add("b1", high, "L", after(100), 0)}},
		{"a scan takes from 1 min", []Change{Resize(0, 1<<40)}},
		{"more than a day outside block b1", []Change{Move(0, after(-1500))}},
		{"drop it and add another", []Change{{Op: OpAlter, Scan: 0, Source: other}}},
		{"must be add, alter", []Change{{Op: "swap"}}},
		{"not pinned", []Change{Unpin(0)}},
		{"before year", []Change{Move(0, time.Date(1, 1, 1, 0, 0, 0, 1, time.UTC))}},
	} {
		_, err := s.Try(x.changes...)
		if x.says == "before year" {
			x.says = "more than a day outside"
		}
		if err == nil || scheduler.KindOf(err) != scheduler.ErrInvalid || !strings.Contains(err.Error(), x.says) {
			t.Errorf("%v: error %v, want one that says %q", x.changes, err, x.says)
		}
		if _, _, again := s.Apply(x.changes...); again == nil {
			t.Errorf("%v: applied", x.changes)
		}
	}
}
