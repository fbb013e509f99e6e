package edit

import (
	"reflect"
	"strings"
	"testing"

	"pgregory.net/rapid"

	"cadencewright/scheduler"
)

// A session can only be made on a plan that belongs to the problem; the error
// says what does not.
func TestPlansThatDoNotBelong(t *testing.T) {
	p := started(t, invented()).p
	for _, x := range []struct {
		name   string
		says   string
		change func(*scheduler.Plan)
	}{
		{"another horizon", "the problem for 2027-01-18 00:00:00 UTC", func(p *scheduler.Plan) { p.To = p.To.AddDate(0, 0, 1) }},
		{"no block", `scan 0: block "b7"`, func(p *scheduler.Plan) { p.Scans[0].Block = "b7" }},
		{"another telescope", `telescope "TWO" is not that of block b1, which is ONE`, func(p *scheduler.Plan) { p.Scans[0].Telescope = "TWO" }},
		{"no source", `source "X"`, func(p *scheduler.Plan) { p.Scans[0].Source = "X" }},
		{"no receiver", `receiver "X" is not one of telescope ONE`, func(p *scheduler.Plan) { p.Scans[0].Receiver = "X" }},
		{"no length", "length -5 min", func(p *scheduler.Plan) { p.Scans[0].Minutes = -5 }},
		{"far away", "more than a day outside block b1", func(p *scheduler.Plan) { p.Scans[0].Start = p.Scans[0].Start.AddDate(0, 0, 3) }},
	} {
		plan := &scheduler.Plan{Campaign: "invented", From: p.Horizon.From, To: p.Horizon.To, Scans: []scheduler.Scan{at(high, 20, 20)}}
		x.change(plan)
		if _, err := New(p, plan); err == nil || scheduler.KindOf(err) != scheduler.ErrInvalid || !strings.Contains(err.Error(), x.says) {
			t.Errorf("%s: error %v, want one that says %q", x.name, err, x.says)
		}
	}
}

// What is tried leaves no trace: the next answer is as if it were the first.
func TestTryingLeavesNoTrace(t *testing.T) {
	used := sessionOf(t, "medium-2")
	before, _, err := used.Apply()
	if err != nil {
		t.Fatal(err)
	}
	rapid.Check(t, func(t *rapid.T) {
		c := drawChange(t, used)
		fresh, err := New(used.p, used.plan)
		if err != nil {
			t.Fatal(err)
		}
		want, wantErr := fresh.Try(c)
		for range 2 {
			got, err := used.Try(c)
			if (err == nil) != (wantErr == nil) || !reflect.DeepEqual(got, want) {
				t.Fatalf("%+v: %+v, %v, from a new session %+v, %v", c, got, err, want, wantErr)
			}
		}
	})
	after, _, err := used.Apply()
	if err != nil || !reflect.DeepEqual(after, before) {
		t.Errorf("the plan is another after some were tried: %v", err)
	}
}

// Changes made together do what they do one after the other.
func TestTogetherOrOneByOne(t *testing.T) {
	for _, name := range []string{"small-1", "medium-1", "demo"} {
		t.Run(name, func(t *testing.T) {
			t.Parallel()
			s := sessionOf(t, name)
			rapid.Check(t, func(t *rapid.T) {
				i := rapid.IntRange(0, len(s.plan.Scans)-1).Draw(t, "dropped")
				add := drawAdd(t, s)
				both, _, err := s.Apply(Drop(i), add)
				if err != nil {
					t.Skip(err)
				}
				first, _, err := s.Apply(add)
				if err != nil {
					t.Fatal(err)
				}
				next, err := New(s.p, first)
				if err != nil {
					t.Fatal(err)
				}
				x := s.plan.Scans[i]
				for j := range first.Scans {
					y := first.Scans[j]
					if y.Block != x.Block || y.Source != x.Source || y.Receiver != x.Receiver || !y.Start.Equal(x.Start) || y.Minutes != x.Minutes {
						continue
					}
					second, _, err := next.Apply(Drop(j))
					if err != nil {
						t.Fatal(err)
					}
					if !near(second.Score, both.Score) || len(second.Scans) != len(both.Scans) || len(second.Unmet) != len(both.Unmet) {
						t.Errorf("together %.9f with %d scans, one by one %.9f with %d", both.Score, len(both.Scans), second.Score, len(second.Scans))
					}
					return
				}
				t.Fatal("the scan is gone")
			})
		})
	}
}

// What is dropped and added again is the plan it was.
func TestThereAndBack(t *testing.T) {
	for _, name := range []string{"small-2", "medium-2", "hard-1"} {
		s := sessionOf(t, name)
		for i, x := range s.plan.Scans {
			o, err := s.Try(Drop(i), Add(x.Block, x.Source, x.Receiver, x.Start, x.Minutes))
			if err != nil {
				t.Fatal(err)
			}
			if !near(o.Score, o.Before) || len(o.Units) > 0 || !o.Legal() && !x.Pinned {
				t.Errorf("%s scan %d: score %.9f, was %.9f, %v", name, i, o.Score, o.Before, o.Violations)
			}
			if o, err = s.Try(Move(i, x.Start), Resize((i+1)%len(s.plan.Scans), s.plan.Scans[(i+1)%len(s.plan.Scans)].Minutes)); err != nil || !near(o.Score, o.Before) || !o.Legal() {
				t.Errorf("%s scan %d: altered to what it is: %v, %v", name, i, o, err)
			}
		}
	}
}

// A pin is one until it is unpinned, and may then go.
func TestPinAndUnpin(t *testing.T) {
	c := invented()
	c.Sources[0].ScanMinutes = []int{20, 30}
	s := started(t, c, at(high, 20, 30), at(other, 80, 20))
	o, err := s.Try(Pin(0))
	if err != nil || !o.Legal() || o.Score != o.Before || len(o.Scans) != 1 || !o.Scans[0].Pinned {
		t.Fatalf("%+v, %v", o, err)
	}
	plan, pins, err := s.Apply(Pin(0))
	want := []scheduler.Pin{{Block: "b1", Source: high, Receiver: "L", Start: after(20), Minutes: 30}}
	if err != nil || !reflect.DeepEqual(pins, want) || !plan.Scans[0].Pinned || plan.Scans[1].Pinned {
		t.Fatalf("%v, %v, %v", pins, plan.Scans, err)
	}
	c.Pins = pins
	held := started(t, c, plan.Scans...)
	for _, bad := range []Change{Drop(0), Move(0, after(120)), Resize(0, 20)} {
		if o, err := held.Try(bad); err != nil || o.Brings() != 1 || o.Violations[0].Rule != RulePin || o.Violations[0].Scan.Source != high || !o.Violations[0].Scan.Pinned {
			t.Errorf("%+v: %+v, %v", bad, o, err)
		}
	}
	if _, err := held.Try(Pin(0)); err == nil || !strings.Contains(err.Error(), "pinned already") {
		t.Errorf("pinned twice: %v", err)
	}
	if _, pins, err = held.Apply(Unpin(0)); err != nil || len(pins) != 0 {
		t.Errorf("pins %v, %v", pins, err)
	}
	if o, err := held.Try(Drop(1)); err != nil || !o.Legal() {
		t.Errorf("what is not pinned may go: %v, %v", o, err)
	}
}
