package explain

import (
	"math"
	"regexp"
	"strconv"
	"testing"
	"time"

	"cadencewright/scheduler"
	"cadencewright/scheduler/almanac"
	"cadencewright/scheduler/feasible"
	"cadencewright/scheduler/verify"
)

// withReason calls f for every reason of a kind, of all units of some campaigns
// under an empty plan.
func withReason(t *testing.T, code scheduler.ReasonCode, f func(p *feasible.Problem, g *scheduler.Goal, u scheduler.Unmet, text string)) {
	t.Helper()
	n := 0
	for _, name := range []string{"small-1", "small-2", "medium-1", "medium-2", "hard-1"} {
		p := problemOf(t, name)
		for _, u := range unmet(p, &scheduler.Plan{}, 0) {
			for _, r := range u.Reasons {
				if r.Code == code {
					n++
					f(p, p.Campaign.GoalByID(u.Goal), u, r.Text)
				}
			}
		}
	}
	if n == 0 {
		t.Fatalf("no reason %s in any campaign", code)
	}
}

// figure is a number that a text gives.
func figure(t *testing.T, text, pattern string) (float64, []string) {
	t.Helper()
	m := regexp.MustCompile(pattern).FindStringSubmatch(text)
	if m == nil {
		t.Fatalf("no %q in: %s", pattern, text)
	}
	x, err := strconv.ParseFloat(m[1], 64)
	if err != nil {
		t.Fatal(err)
	}
	return x, m
}

// trackIn samples a goal's source over a block, at its grid instants.
func trackIn(t *testing.T, c *scheduler.Campaign, source, id string) []almanac.Sample {
	t.Helper()
	b := c.BlockByID(id)
	grid := time.Duration(c.GridMin) * time.Minute
	from := b.Start.Add(grid - time.Millisecond).Truncate(grid)
	list, err := almanac.Track(c.TelescopeByCode(b.Telescope), c.SourceByName(source), c.DUT1S, from, b.End.Truncate(grid), grid)
	if err != nil {
		t.Fatal(err)
	}
	return list
}

// The elevation that a reason names is the highest in its block, and below the
// limit it names.
func TestElevationsInReasons(t *testing.T) {
	withReason(t, TooLow, func(p *feasible.Problem, g *scheduler.Goal, u scheduler.Unmet, text string) {
		el, m := figure(t, text, `(-?[\d.]+) deg at the highest \(block (\S+) of (\S+)\), and the limit there is ([\d.]+) deg`)
		top := math.Inf(-1)
		for _, s := range trackIn(t, p.Campaign, g.Source, m[2]) {
			if s.Down == 0 {
				t.Errorf("%s: up at %s", u.Unit, s.At)
			}
			top = max(top, s.ElDeg)
		}
		if math.Abs(top-el) > 0.051 {
			t.Errorf("%s: %.3f deg is the highest, the reason says: %s", u.Unit, top, text)
		}
		if limit, _ := strconv.ParseFloat(m[4], 64); el > limit {
			t.Errorf("%s: %s", u.Unit, text)
		}
		if p.Campaign.BlockByID(m[2]).Telescope != m[3] {
			t.Errorf("%s: block %s is not at %s", u.Unit, m[2], m[3])
		}
	})
}

// The Sun is as near as a reason says.
func TestSunInReasons(t *testing.T) {
	withReason(t, NearSun, func(p *feasible.Problem, g *scheduler.Goal, u scheduler.Unmet, text string) {
		sun, m := figure(t, text, `: ([\d.]+) deg away \(block (\S+) of \S+\), and ([\d.]+) deg are wanted`)
		nearest := math.Inf(1)
		for _, s := range trackIn(t, p.Campaign, g.Source, m[2]) {
			nearest = min(nearest, s.SunDeg)
		}
		if math.Abs(nearest-sun) > 0.051 {
			t.Errorf("%s: %.3f deg is the least, the reason says: %s", u.Unit, nearest, text)
		}
	})
}

// The scan that a reason calls the most precise is allowed, and as precise as
// it says: by the independent check of plans.
func TestPrecisionInReasons(t *testing.T) {
	withReason(t, Precision, func(p *feasible.Problem, g *scheduler.Goal, u scheduler.Unmet, text string) {
		us, m := figure(t, text, `: ([\d.e+]+) us at best \((\S+) with (\S+) in block (\S+) from (.{16}) UTC for (\d+) min\)`)
		start, err := time.Parse("2006-01-02 15:04", m[5])
		if err != nil {
			t.Fatal(err)
		}
		minutes, _ := strconv.Atoi(m[6])
		az := 0.0
		plan := &scheduler.Plan{Campaign: p.Campaign.Name, From: p.Horizon.From, To: p.Horizon.To, Scans: []scheduler.Scan{{
			Block: m[4], Telescope: m[2], Source: g.Source, Receiver: m[3], Start: start, Minutes: minutes, TOAUs: us, MotorAzDeg: &az}}}
		report, err := verify.Check(p.Campaign, plan, verify.Options{SkipBound: true, Relative: 6e-3}) // three digits are given
		if err != nil {
			t.Fatal(err)
		}
		for _, v := range report.Violations {
			switch v.Kind {
			case verify.KindPin, verify.KindPossible, verify.KindMotorAz, verify.KindMotor: // of an empty plan, and of no turn chosen
			default:
				t.Errorf("%s: %s", u.Unit, v)
			}
		}
		if want := p.Units.Goals[p.Units.Units[p.Units.ByName(u.Unit)].Goal].TOAUs; us < want*math.Sqrt2*0.99 {
			t.Errorf("%s: %g us is enough for %g us", u.Unit, us, want)
		}
	})
}

// The passages that reasons name begin and end at the window's phases.
func TestPassagesInReasons(t *testing.T) {
	for _, code := range []scheduler.ReasonCode{Phase, NoPassage} {
		withReason(t, code, func(p *feasible.Problem, g *scheduler.Goal, u scheduler.Unmet, text string) {
			m := regexp.MustCompile(`passage (?:is )?from (.{16}) UTC to (.{16}) UTC`).FindStringSubmatch(text)
			if m == nil {
				t.Fatalf("%s names no passage: %s", u.Unit, text)
			}
			unit := &p.Units.Units[p.Units.ByName(u.Unit)]
			q := newExplainer(p, &scheduler.Plan{}).question(p.Units.ByName(u.Unit))
			w := q.phaseGoal().Windows[unit.K]
			source := p.Campaign.SourceByName(g.Source)
			e, err := source.Binary.Elements()
			if err != nil {
				t.Fatal(err)
			}
			for i, phase := range []float64{w.From, w.To} {
				at, err := time.Parse("2006-01-02 15:04", m[1+i])
				if err != nil {
					t.Fatal(err)
				}
				n, err := e.Turns(q.phaseGoal().Reference.Point(), source.Star(), at)
				if err != nil {
					t.Fatal(err)
				}
				if off := math.Remainder(n-phase, 1); math.Abs(off)*source.Binary.PbD*1440 > 0.6 {
					t.Errorf("%s: phase %g off at %s: %s", u.Unit, off, m[1+i], text)
				}
			}
		})
	}
}

// Each scan that would have to go must be in the way by itself.
func TestDisplacedScansAreInTheWay(t *testing.T) {
	p := problemOf(t, "medium-1")
	plan := planOf(t, "medium-1")
	e := newExplainer(p, plan)
	tried := 0
	for ui := range p.Units.Units {
		q := e.question(ui)
		for _, reach := range q.reaches(q.allBands(), math.Inf(-1), math.Inf(1)) {
			n := 0
			q.each(&reach, func(o *option) {
				if n++; n%17 != 0 {
					return
				}
				displaced, possible := q.cost(o)
				if !possible {
					return
				}
				for _, x := range displaced {
					tried++
					if !inTheWay(t, q, o, x) {
						t.Errorf("%s: %s is not in the way of %s", q.unit.Name, x.scan.Source, q.titled(o))
					}
				}
			})
		}
		if tried > 400 {
			return
		}
	}
	t.Errorf("only %d tried", tried)
}

// inTheWay asks the independent check whether a scan of the plan and an option
// leave each other too little room.
func inTheWay(t *testing.T, q *question, o *option, x *planned) bool {
	t.Helper()
	plan := &scheduler.Plan{Campaign: q.Campaign.Name, From: q.Horizon.From, To: q.Horizon.To,
		Scans: []scheduler.Scan{*x.scan, q.scanOf(o, scheduler.Earning{})}}
	report, err := verify.Check(q.Campaign, plan, verify.Options{SkipBound: true, TimeS: 1e-3})
	if err != nil {
		t.Fatal(err)
	}
	for _, v := range report.Violations {
		if v.Kind == verify.KindRoom {
			return true
		}
	}
	return false
}
