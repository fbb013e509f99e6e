package main

import (
	"bytes"
	"encoding/json"
	"fmt"
	"strings"
	"testing"

	"cadencewright/scheduler"
	"cadencewright/scheduler/verify"
)

// badReport is a report with n broken rules and a note.
func badReport(n int) *verify.Report {
	r := &verify.Report{Score: 12.5, Possible: 40, Bound: 25, Units: map[string]int{"a#1": 1, "b#1": 0}}
	for i := range n {
		r.Violations = append(r.Violations, verify.Violation{Kind: verify.KindLow, Scan: i, Block: "B1", Text: "too low", Value: 3, Allowed: 5, Measure: "deg"})
	}
	r.Notes = append(r.Notes, verify.Violation{Kind: verify.KindUnmet, Scan: -1, Unit: "b#1", Text: "is not listed"})
	return r
}

func TestReportText(t *testing.T) {
	got := reportText(badReport(2), false)
	want := "scan 0: too low\nscan 1: too low\nnote: unit b#1: is not listed\n" +
		"score 12.500000 possible 40.000000 bound 25.000000 gap 50.00 % units earned 1 of 2 violations 2\n"
	if got != want {
		t.Errorf("got\n%swant\n%s", got, want)
	}
	if got := reportText(badReport(0), true); strings.Contains(got, "bound") || !strings.HasSuffix(got, "violations 0\n") {
		t.Errorf("without the bound: got %q", got)
	}
	long := reportText(badReport(mostLines+7), false)
	if strings.Count(long, "too low") != mostLines || !strings.Contains(long, "\nand 7 more; --json lists them all\n") ||
		!strings.Contains(long, fmt.Sprintf("violations %d\n", mostLines+7)) {
		t.Errorf("a long list is not cut: %d lines", strings.Count(long, "\n"))
	}
}

func TestReportJSON(t *testing.T) {
	var b bytes.Buffer
	if err := writeJSON(&b, reportJSON(badReport(mostLines+7), false)); err != nil {
		t.Fatal(err)
	}
	var got struct {
		OK         bool
		Score, Gap float64
		Bound      *float64
		Violations []violationJSON
		Notes      []violationJSON
	}
	if err := json.Unmarshal(b.Bytes(), &got); err != nil {
		t.Fatal(err)
	}
	if got.OK || got.Score != 12.5 || got.Gap != 0.5 || *got.Bound != 25 || len(got.Violations) != mostLines+7 || len(got.Notes) != 1 {
		t.Errorf("got %+v", got)
	}
	v, n := got.Violations[3], got.Notes[0]
	if v.Rule != "low" || *v.Scan != 3 || v.Block != "B1" || *v.Value != 3 || *v.Allowed != 5 || v.Measure != "deg" {
		t.Errorf("violation: got %+v", v)
	}
	if n.Scan != nil || n.Value != nil || n.Unit != "b#1" {
		t.Errorf("note: got %+v", n)
	}
	b.Reset()
	if err := writeJSON(&b, reportJSON(badReport(0), true)); err != nil || strings.Contains(b.String(), "bound") || !strings.Contains(b.String(), `"violations": []`) {
		t.Errorf("without the bound: got %v, %s", err, b.String())
	}
}

// TestUnsoundPlansAreNotWritten gives the last gate before writing a plan
// that breaks rules.
func TestUnsoundPlansAreNotWritten(t *testing.T) {
	c := everyField(t)
	h := scheduler.DefaultHorizon(c)
	p := &scheduler.Plan{Campaign: c.Name, From: h.From, To: h.To} // the campaign's pin is missing
	err := soundPlan(c, p)
	if err == nil || !strings.Contains(err.Error(), "fault of the program; nothing was written") || !strings.Contains(err.Error(), "pin") {
		t.Errorf("got %v", err)
	}
}

func TestPlanFlags(t *testing.T) {
	good := planQuestion{effort: 100, seconds: 10, workers: 2}
	if err := good.check(); err != nil {
		t.Errorf("got %v", err)
	}
	for name, change := range map[string]func(q *planQuestion){
		"--effort":  func(q *planQuestion) { q.effort = -1 },
		"--seconds": func(q *planQuestion) { q.seconds = -1 },
		"--workers": func(q *planQuestion) { q.workers = 5000 },
	} {
		q := good
		change(&q)
		if err := q.check(); !isUsage(err) || !strings.Contains(err.Error(), name) {
			t.Errorf("%s: got %v", name, err)
		}
	}
}
