package almanac

import (
	"errors"
	"math"
	"slices"
	"testing"
	"time"

	"cadencewright/scheduler"
	"cadencewright/testdata"
)

// TestOrbitTable goes from the model's parameters to the states of the table
// of phases, to the tolerances that testdata/reference states.
func TestOrbitTable(t *testing.T) {
	sources := map[string]*scheduler.Source{}
	for _, r := range testdata.Table(t, "binaries") {
		sources[r.Str("name")] = &scheduler.Source{Name: r.Str("name"), RADeg: r.Num("ra_deg"), DecDeg: r.Num("dec_deg"), PosEpochMJD: 51544.5,
			Binary: &scheduler.Binary{Model: scheduler.BinaryModel(r.Str("model")), PbD: r.Num("pb_d"), A1Ls: r.Num("a1_ls"), Ecc: r.Num("ecc"),
				OmDeg: r.Num("om_deg"), T0MJD: r.Num("t0_mjd"), OmdotDegYr: r.Num("omdot_deg_yr"), TascMJD: r.Num("tasc_mjd"),
				Eps1: r.Num("eps1"), Eps2: r.Num("eps2"), Pbdot: r.Num("pbdot"), M2Msun: r.Num("m2_msun"), Sini: r.Num("sini")}}
	}
	phase := testdata.Watch(t, "phases", "cycles")
	conj := testdata.Watch(t, "next conjunction", "s")
	for _, r := range testdata.Table(t, "binary_phase") {
		src, at := sources[r.Str("source")], r.Time("utc")
		o, err := NewOrbit(src, at, at)
		if err != nil {
			t.Fatal(err)
		}
		s, err := o.At(at)
		if err != nil {
			t.Fatal(err)
		}
		allowed := 0.1/86400/o.PeriodD() + 2e-9
		for col, got := range map[string]float64{"phase_periastron": s.FromPeriastron, "phase_node": s.FromNode,
			"phase_conjunction": s.FromConjunction} {
			phase.Error(r, math.Abs(math.Remainder(got-r.Num(col), 1)), allowed)
		}
		next, err := o.Next(at, 1)
		if err != nil {
			t.Fatal(err)
		}
		i := slices.IndexFunc(next, func(e OrbitEvent) bool { return e.Point == scheduler.RefConjunction })
		conj.Error(r, math.Abs(next[i].At.Sub(r.Time("next_conjunction_utc")).Seconds()), 0.2)
	}
}

func TestOrbitOfASinglePulsar(t *testing.T) {
	_, err := NewOrbit(&scheduler.Source{Name: "SIM J1902+0307"}, time.Time{}, time.Time{})
	if !errors.Is(err, scheduler.ErrInvalid) || err.Error() != "source SIM J1902+0307 is not a binary" {
		t.Errorf("got %v", err)
	}
}

func TestEventsNextAndSeriesAgree(t *testing.T) {
	c := campaign(t, "every-field")
	for i := range c.Sources {
		src := &c.Sources[i]
		if src.Binary == nil {
			continue
		}
		from := c.Start
		to := from.AddDate(0, 0, 30)
		o, err := NewOrbit(src, from, to)
		if err != nil {
			t.Fatal(err)
		}
		events, err := o.Events(from, to)
		if err != nil {
			t.Fatal(err)
		}
		next, err := o.Next(from, 2)
		if err != nil {
			t.Fatal(err)
		}
		if len(next) != 6 || !slices.IsSortedFunc(next, func(a, b OrbitEvent) int { return a.At.Compare(b.At) }) {
			t.Fatalf("%s: next %+v", src.Name, next)
		}
		for _, ev := range next {
			if !slices.ContainsFunc(events, func(e OrbitEvent) bool {
				return e.Point == ev.Point && e.Orbit == ev.Orbit && e.At.Sub(ev.At).Abs() < time.Millisecond
			}) {
				t.Errorf("%s: %+v is not among the events", src.Name, ev)
			}
		}
		for _, ev := range events {
			s, err := o.At(ev.At)
			if err != nil {
				t.Fatal(err)
			}
			got := map[scheduler.PhaseReference]float64{scheduler.RefPeriastron: s.FromPeriastron, scheduler.RefNode: s.FromNode,
				scheduler.RefConjunction: s.FromConjunction}[ev.Point]
			if math.Abs(math.Remainder(got, 1)) > 1e-7 {
				t.Errorf("%s: at the %s the phase is %v", src.Name, ev.Point, got)
			}
		}
		series, err := o.Series(from, to, 6*time.Hour)
		if err != nil || len(series) != 121 {
			t.Fatalf("%s: %d states, %v", src.Name, len(series), err)
		}
		for k := 1; k < len(series); k++ {
			a, b := series[k-1], series[k]
			moved := float64(b.OrbitNumber-a.OrbitNumber) + b.FromPeriastron - a.FromPeriastron
			if want := 0.25 / o.PeriodD(); math.Abs(moved-want) > 1e-3*want {
				t.Fatalf("%s: six hours moved it by %v orbits, want %v", src.Name, moved, want)
			}
		}
	}
}

func TestGoalPassages(t *testing.T) {
	c := campaign(t, "every-field")
	g := &c.PhaseGoals[0]
	o, err := NewOrbit(c.SourceByName(g.Source), c.Start, c.End)
	if err != nil {
		t.Fatal(err)
	}
	list, err := o.Passages(g, c.Start, c.End)
	if err != nil {
		t.Fatal(err)
	}
	// 28 days of an orbit of 8.5 days: three or four of each window.
	count := map[int]int{}
	for _, p := range list {
		count[p.Window]++
		w := g.Windows[p.Window]
		if got, want := p.Leave.Sub(p.Enter).Hours()/24, (w.To-w.From)*o.PeriodD(); math.Abs(got-want) > 0.001*want {
			t.Errorf("%+v lasts %v days, want %v", p, got, want)
		}
		for _, x := range []struct {
			at   time.Time
			edge float64
		}{{p.Enter, w.From}, {p.Leave, w.To}} {
			s, err := o.At(x.at)
			if err != nil {
				t.Fatal(err)
			}
			if math.Abs(math.Remainder(s.FromConjunction-x.edge, 1)) > 1e-8 {
				t.Errorf("%+v: phase %v at an edge of %v", p, s.FromConjunction, x.edge)
			}
		}
	}
	if len(count) != 2 || count[0] < 3 || count[0] > 5 || count[1] < 3 || count[1] > 5 {
		t.Errorf("passages by window: %v", count)
	}
}

func TestNextEndsWithTheTimeScales(t *testing.T) {
	src := &scheduler.Source{Name: "SIM J0000+0000", PosEpochMJD: 51544.5,
		Binary: &scheduler.Binary{Model: scheduler.BinaryKepler, PbD: 10000, A1Ls: 1, Ecc: 0.2, T0MJD: 60000}}
	at := time.Date(2090, 1, 1, 0, 0, 0, 0, time.UTC)
	o, err := NewOrbit(src, at, at)
	if err != nil {
		t.Fatal(err)
	}
	if list, err := o.Next(at, 3); err != nil || len(list) > 3 {
		t.Errorf("got %v, %v; want the few passages before 2100", list, err)
	}
	if _, err := o.Next(time.Date(2101, 1, 1, 0, 0, 0, 0, time.UTC), 1); err == nil {
		t.Error("2101: want an error")
	}
}

func TestACircleHasNoPeriastron(t *testing.T) {
	src := &scheduler.Source{Name: "SIM J0000+0000", PosEpochMJD: 51544.5,
		Binary: &scheduler.Binary{Model: scheduler.BinaryELL1, PbD: 1.5, A1Ls: 1, TascMJD: 60000}}
	at := time.Date(2027, 1, 1, 0, 0, 0, 0, time.UTC)
	o, err := NewOrbit(src, at, at.AddDate(0, 0, 3))
	if err != nil {
		t.Fatal(err)
	}
	next, err := o.Next(at, 1)
	if err != nil || len(next) != 2 {
		t.Errorf("next: got %v, %v; want a node and a conjunction", next, err)
	}
	events, err := o.Events(at, at.AddDate(0, 0, 3))
	if err != nil || len(events) != 4 || slices.ContainsFunc(events, func(e OrbitEvent) bool { return e.Point == scheduler.RefPeriastron }) {
		t.Errorf("three days: got %v, %v", events, err)
	}
}
