package verify

import (
	"math"
	"strings"
	"testing"
	"time"

	"cadencewright/scheduler"
)

// The figures and places of a violation are those of the corruption, so that a
// page can show them beside the scan.
func TestFiguresOfViolations(t *testing.T) {
	for _, x := range []struct {
		name    string
		change  func(*testing.T, *scheduler.Campaign, *scheduler.Plan)
		kind    Kind
		block   string
		unit    string
		value   float64
		allowed float64
		measure string
	}{
		{"elevation", func(t *testing.T, c *scheduler.Campaign, p *scheduler.Plan) {
			onlyScanIn(t, c, p, "e1")
			c.Telescopes[1].ElevationMinDeg = 85
		}, KindLow, "e1", "", math.NaN(), 85, "deg"},
		{"setup", func(_ *testing.T, c *scheduler.Campaign, p *scheduler.Plan) {
			onlyBlock(c, p, "t2")
			c.Blocks[5].Start = p.Scans[0].Start.Add(-5 * time.Minute)
		}, KindSetup, "t2", "", 300, 660, "s"},
		{"end of the block", func(_ *testing.T, c *scheduler.Campaign, p *scheduler.Plan) {
			onlyBlock(c, p, "t2")
			c.Blocks[5].End = p.Scans[0].End().Add(-7 * time.Minute)
		}, KindBlockEnd, "t2", "", 420, 0, "s"},
		{"uncertainty", func(t *testing.T, _ *scheduler.Campaign, p *scheduler.Plan) {
			earner(t, p, "cad-J1104#2").TOAUs = 7
		}, KindTOA, "t2", "", 7, 0.91295521, "us"},
		{"pin", func(t *testing.T, _ *scheduler.Campaign, p *scheduler.Plan) {
			pinned(t, p).Source = "SIM J0000+0000"
		}, KindPin, "a1", "", 0, 1, "times"},
		{"value", func(t *testing.T, _ *scheduler.Campaign, p *scheduler.Plan) {
			earner(t, p, "cad-J1104#2").Earns[0].Value = 2
		}, KindUnitValue, "", "cad-J1104#2", 2, 0.97666667, "score"},
		{"overlap", func(t *testing.T, c *scheduler.Campaign, p *scheduler.Plan) {
			earners(t, p, "both#2")
			c.OverlapGoals[0].OverlapMin = 33
		}, KindUnitRule, "", "both#2", 20, 33, "min"},
		{"pair", func(t *testing.T, c *scheduler.Campaign, p *scheduler.Plan) {
			earners(t, p, "pair#2")
			c.BandPairGoals[0].WithinH = 0.25
		}, KindUnitRule, "", "pair#2", 0.5, 0.25, "h"},
		{"score", func(_ *testing.T, _ *scheduler.Campaign, p *scheduler.Plan) { p.Score = 99 }, KindScore, "", "", 99, 33.36356722, "score"},
		{"certificate", func(_ *testing.T, _ *scheduler.Campaign, p *scheduler.Plan) { p.Certificate.Bound = 99 }, KindCertBound, "", "", 99, 146.31138659, "score"},
	} {
		t.Run(x.name, func(t *testing.T) {
			c := tiny(t)
			p := greedyPlan(t, c, week(c))
			x.change(t, c, p)
			report, err := Check(c, p, Options{})
			if err != nil {
				t.Fatal(err)
			}
			for _, v := range report.Violations {
				if v.Kind != x.kind || x.unit != "" && v.Unit != x.unit {
					continue
				}
				if v.Block != x.block || v.Unit != x.unit || v.Measure != x.measure || math.Abs(v.Allowed-x.allowed) > 1e-6 ||
					!math.IsNaN(x.value) && math.Abs(v.Value-x.value) > 1e-6 {
					t.Errorf("%+v", v)
				}
				if v.Scan >= 0 && p.Scans[v.Scan].Block != v.Block {
					t.Errorf("scan %d is in block %s, the violation in %s", v.Scan, p.Scans[v.Scan].Block, v.Block)
				}
				return
			}
			t.Errorf("no %s among %v", x.kind, report.Violations)
		})
	}
}

// In words a violation begins with its place.
func TestViolationInWords(t *testing.T) {
	for _, x := range []struct {
		v    Violation
		want string
	}{
		{Violation{Scan: 3, Unit: "u#1", Text: "text"}, "scan 3: text"},
		{Violation{Scan: -1, Unit: "u#1", Text: "text"}, "unit u#1: text"},
		{Violation{Scan: -1, Text: "text"}, "text"},
	} {
		if got := x.v.String(); got != x.want {
			t.Errorf("%q, want %q", got, x.want)
		}
	}
}

// Violations by scans name the scan so that a person finds it.
func TestScansAreNamed(t *testing.T) {
	c := tiny(t)
	p := greedyPlan(t, c, week(c))
	earner(t, p, "cad-J1104#2").TOAUs = 7
	report, err := Check(c, p, Options{SkipBound: true})
	if err != nil {
		t.Fatal(err)
	}
	const want = "SIM J1104+2601 with L in block t2 at 2027-01-24 00:40 UTC: predicted uncertainty 7 us, worked out again 0.91"
	if len(report.Violations) != 1 || !strings.HasPrefix(report.Violations[0].Text, want) {
		t.Errorf("%v", report.Violations)
	}
}

// A whole plan may stand on the limits, but not beyond what is allowed there:
// a check that is told to allow nothing finds what rounding leaves.
func TestLimitsCanBeStrict(t *testing.T) {
	c := tiny(t)
	p := greedyPlan(t, c, week(c))
	s := onlyScanIn(t, c, p, "e1")
	c.Telescopes[1].ElevationMinDeg = -most(t, c, s, below) + 0.004
	restate(t, c, p)
	for _, x := range []struct {
		limitDeg float64
		found    int
	}{{0, 0}, {0.01, 0}, {0.005, 0}, {0.003, 1}} {
		r, err := Check(c, p, Options{LimitDeg: x.limitDeg})
		if err != nil {
			t.Fatal(err)
		}
		if len(r.Violations) != x.found {
			t.Errorf("allowed %g deg: %v", x.limitDeg, r.Violations)
		}
	}
}
