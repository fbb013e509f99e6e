package edit

import (
	"math"
	"slices"
	"testing"

	"pgregory.net/rapid"

	"cadencewright/scheduler"
	"cadencewright/scheduler/verify"
)

// The planner's own plans break no rule here, and earn what they say.
func TestThePlannersPlansStand(t *testing.T) {
	for _, name := range campaignNames {
		t.Run(name, func(t *testing.T) {
			t.Parallel()
			s, plan := sessionOf(t, name), planOf(t, name)
			for _, v := range s.Violations() {
				t.Error(v.Text)
			}
			if !near(s.Score(), plan.Score) {
				t.Errorf("score %.9f, the planner says %.9f", s.Score(), plan.Score)
			}
			same, pins, err := s.Apply()
			if err != nil {
				t.Fatal(err)
			}
			if len(same.Scans) != len(plan.Scans) || len(same.Unmet) != len(plan.Unmet) || !slices.Equal(pins, problemOf(t, name).Campaign.Pins) {
				t.Errorf("%d scans, %d unmet, %d pins without any change", len(same.Scans), len(same.Unmet), len(pins))
			}
			for i := range same.Scans {
				a, b := &same.Scans[i], &plan.Scans[i]
				if a.Block != b.Block || a.Source != b.Source || !a.Start.Equal(b.Start) || a.Pinned != b.Pinned || math.Abs(a.TOAUs-b.TOAUs) > 1e-6*b.TOAUs ||
					(a.MotorAzDeg == nil) != (b.MotorAzDeg == nil) || a.MotorAzDeg != nil && math.Abs(*a.MotorAzDeg-*b.MotorAzDeg) > 1e-6 {
					t.Errorf("scan %d is %+v, was %+v", i, *a, *b)
				}
			}
		})
	}
}

// Whatever is done to a plan, the independent check finds the score that was
// said, and breaks a rule where one was said to be broken and nowhere else.
func TestTryAgreesWithTheCheck(t *testing.T) {
	for _, name := range []string{"small-1", "small-2", "medium-1", "medium-2", "hard-1", "demo"} {
		t.Run(name, func(t *testing.T) {
			t.Parallel()
			s := sessionOf(t, name)
			rapid.Check(t, func(t *rapid.T) {
				var changes []Change
				for range rapid.IntRange(1, 3).Draw(t, "changes") {
					if c := drawChange(t, s); !slices.ContainsFunc(changes, func(o Change) bool { return o.Op != OpAdd && c.Op != OpAdd && o.Scan == c.Scan }) {
						changes = append(changes, c)
					}
				}
				checkAgainst(t, s, changes)
			})
		})
	}
}

// checkAgainst compares what is said of changes with the independent check of
// the plan that they make.
func checkAgainst(t *rapid.T, s *Session, changes []Change) {
	o, err := s.Try(changes...)
	if err != nil {
		if scheduler.KindOf(err) != scheduler.ErrInvalid {
			t.Fatalf("%v: %v", changes, err)
		}
		t.Skip(err)
	}
	plan, pins, err := s.Apply(changes...)
	if err != nil {
		t.Fatal(err)
	}
	c := *s.p.Campaign
	c.Pins = pins
	report, err := verify.Check(&c, plan, verify.Options{SkipBound: true, LimitDeg: 2e-4, TimeS: 0.01, Relative: 1e-6})
	if err != nil {
		t.Skip(err) // the pins make no campaign
	}
	if !near(o.Score, report.Score) || !near(o.Score, plan.Score) {
		t.Errorf("%v: score %.9f, in the plan %.9f, checked %.9f", changes, o.Score, plan.Score, report.Score)
	}
	if !near(o.Before, s.Score()) || !near(o.Score-o.Before, sumOf(o.Units)) {
		t.Errorf("%v: score %.9f after %.9f, and the units differ by %.9f", changes, o.Score, o.Before, sumOf(o.Units))
	}
	for _, n := range report.Notes {
		t.Errorf("%v: %s", changes, n)
	}
	if o.Legal() {
		for _, v := range report.Violations {
			t.Errorf("%v: not said: %s", changes, v)
		}
		return
	}
	said := map[verify.Kind]bool{}
	for _, v := range report.Violations {
		said[v.Kind] = true
	}
	if slices.ContainsFunc(o.Violations, func(v Violation) bool { return v.Rule == RuleGrid }) {
		if !said[verify.KindGrid] {
			t.Errorf("%v: the check finds nothing off the grid", changes)
		}
		return // the check says no more of such a scan
	}
	for _, v := range o.Violations {
		if !said[kinds[v.Rule]] && !marginal(v) {
			t.Errorf("%v: the check finds nothing like %s: %s", changes, v.Rule, v.Text)
		}
	}
	for _, v := range report.Violations {
		if !slices.ContainsFunc(o.Violations, func(w Violation) bool { return kinds[w.Rule] == v.Kind }) {
			t.Errorf("%v: not said: %s", changes, v)
		}
	}
}

// kinds are the check's names of rules.
var kinds = map[Rule]verify.Kind{RuleGrid: verify.KindGrid, RuleLength: verify.KindLength, RuleReceiver: verify.KindReceiver, RuleLow: verify.KindLow,
	RuleHigh: verify.KindHigh, RuleSun: verify.KindSun, RuleHourAngle: verify.KindHourAngle, RuleMeridian: verify.KindMeridian,
	RuleMotor: verify.KindMotor, RuleBlockStart: verify.KindSetup, RuleSetup: verify.KindSetup, RuleBlockEnd: verify.KindBlockEnd,
	RuleLost: verify.KindLost, RuleOverlap: verify.KindRoom, RuleRoom: verify.KindRoom, RulePin: verify.KindPin}

// marginal reports whether a violation is within what the check allows here.
func marginal(v Violation) bool {
	switch v.Measure {
	case "deg":
		return math.Abs(v.Value-v.Allowed) < 3e-4
	case "s":
		return math.Abs(v.Value-v.Allowed) < 0.02
	}
	return false
}

func sumOf(list []Difference) float64 {
	sum := 0.0
	for _, d := range list {
		sum += d.After - d.Before
	}
	return sum
}

func near(a, b float64) bool { return math.Abs(a-b) <= 1e-6*math.Max(1, math.Abs(a)) }
