package main

import (
	"bytes"
	"encoding/json"
	"flag"
	"io"
	"strings"
	"testing"
	"time"

	"cadencewright/scheduler"
	"cadencewright/scheduler/edit"
	"cadencewright/scheduler/explain"
)

// someOutcome is a change that breaks one rule and leaves another broken.
func someOutcome() *edit.Outcome {
	at := time.Date(2027, 1, 18, 4, 30, 0, 0, time.UTC)
	return &edit.Outcome{Before: 10, Score: 9.25, Units: []edit.Difference{{Goal: "c1", Unit: "c1#1", Before: 1, After: 0.25}},
		Violations: []edit.Violation{{Rule: edit.RuleLow, New: true, Text: "too low", Value: 3, Allowed: 8, Measure: "deg"},
			{Rule: edit.RuleReceiver, Text: "no such receiver"}},
		Scans: []scheduler.Scan{{Block: "B1", Telescope: "ALT", Source: "SIM J0412+1833", Receiver: "L1", Start: at, Minutes: 30}},
		Slide: []edit.Range{{First: at, Last: at}}, Starts: []edit.Range{{First: at, Last: at}, {First: at.Add(time.Hour), Last: at.Add(2 * time.Hour)}}}
}

func TestOutcomeText(t *testing.T) {
	want := "breaks a rule: too low\nbroken before: no such receiver\nc1#1 earns 0.250, before 1.000\n" +
		"could start between its neighbours at 2027-01-18 04:30 UTC\ncould start in its block at 2027-01-18 04:30 UTC\n" +
		"could start in its block from 2027-01-18 05:30 to 2027-01-18 06:30 UTC\n" +
		"score 9.250000 before 10.000000 difference -0.750000 violations 2\n"
	if got := outcomeText(someOutcome()); got != want {
		t.Errorf("got\n%swant\n%s", got, want)
	}
	o := someOutcome()
	o.Slide, o.Starts = nil, nil
	if got := outcomeText(o); !strings.Contains(got, "could start nowhere in its block\n") {
		t.Errorf("got %s", got)
	}
}

func TestOutcomeJSON(t *testing.T) {
	var b bytes.Buffer
	if err := writeJSON(&b, outcomeJSON(someOutcome())); err != nil {
		t.Fatal(err)
	}
	var got struct {
		OK            bool
		Before, Score float64
		Units         []struct{ Before, After float64 }
		Violations    []struct {
			Rule           string
			New            bool
			Value, Allowed *float64
		}
		Scans         []scanJSON
		Slide, Starts [][2]time.Time
	}
	if err := json.Unmarshal(b.Bytes(), &got); err != nil {
		t.Fatal(err)
	}
	if got.OK || got.Score != 9.25 || got.Before != 10 || len(got.Units) != 1 || got.Units[0].After != 0.25 || len(got.Scans) != 1 ||
		got.Scans[0].Minutes != 30 || len(got.Slide) != 1 || len(got.Starts) != 2 || !got.Starts[1][1].Equal(got.Starts[1][0].Add(time.Hour)) {
		t.Errorf("got %+v", got)
	}
	if v := got.Violations; len(v) != 2 || v[0].Rule != "low" || !v[0].New || *v[0].Value != 3 || *v[0].Allowed != 8 || v[1].New || v[1].Value != nil {
		t.Errorf("violations: got %+v", v)
	}
}

// Each flag makes its change, in the order given.
func TestTryFlags(t *testing.T) {
	at := time.Date(2027, 1, 20, 6, 30, 0, 0, time.UTC)
	q := &tryQuestion{}
	flags := flag.NewFlagSet("try", flag.ContinueOnError)
	flags.SetOutput(io.Discard)
	q.declare(flags)
	err := flags.Parse([]string{"--drop", "3", "--add", "B1, SIM J0412+1833,L1,2027-01-20T06:30Z,40", "--move", "1,2027-01-20T06:30Z",
		"--resize", "2,60", "--receiver", "4,S1", "--unpin", "5", "--drop", "6"})
	if err != nil {
		t.Fatal(err)
	}
	want := []edit.Change{edit.Drop(3), edit.Add("B1", "SIM J0412+1833", "L1", at, 40), edit.Move(1, at), edit.Resize(2, 60), edit.Tune(4, "S1"),
		edit.Unpin(5), edit.Drop(6)}
	if len(q.changes) != len(want) || !q.pins {
		t.Fatalf("got %+v", q)
	}
	for i := range want {
		if q.changes[i] != want[i] {
			t.Errorf("change %d: got %+v, want %+v", i, q.changes[i], want[i])
		}
	}
	for _, bad := range [][]string{{"--add", "B1,X"}, {"--add", "B1,X,L1,now and then,40"}, {"--add", "B1,X,L1,2027-01-20,x"}, {"--move", "x,2027-01-20"},
		{"--resize", "1,-5"}, {"--resize", "x,5"}, {"--receiver", "-1,L1"}, {"--pin", "1,2"}, {"--drop", "1.5"}} {
		flags := flag.NewFlagSet("try", flag.ContinueOnError)
		flags.SetOutput(io.Discard)
		(&tryQuestion{}).declare(flags)
		if err := flags.Parse(bad); err == nil {
			t.Errorf("%v: no error", bad)
		}
	}
}

// A limit of 0 degrees is written, the zeros of other kinds are not; what is
// moved has both its starts.
func TestSuggestionJSON(t *testing.T) {
	var b bytes.Buffer
	list := []explanation{{unmet: scheduler.Unmet{Goal: "c1", Unit: "c1#1", Weight: 2}, could: []explain.Suggestion{
		{Kind: explain.LowerLimit, Telescope: "ALT", ElevationDeg: 0}, {Kind: explain.ScanLength, Source: "SIM J0412+1833", ScanMinutes: 15},
		{Kind: explain.MakeRoom, Move: []explain.Moved{{Scan: someOutcome().Scans[0], Start: someOutcome().Starts[1].Last}}}}}}
	if err := writeJSON(&b, explanationsJSON(list)); err != nil {
		t.Fatal(err)
	}
	got := b.String()
	if strings.Count(got, `"elevation_min_deg": 0`) != 1 || strings.Count(got, "scan_minutes") != 1 || strings.Contains(got, "lst_h") || strings.Count(got, `"start"`) != 2 ||
		!strings.Contains(got, `"start": "2027-01-18T06:30:00Z"`) ||
		!strings.Contains(got, `"reasons": []`) {
		t.Errorf("got %s", got)
	}
}
