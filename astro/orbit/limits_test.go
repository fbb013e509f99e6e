package orbit

import (
	"errors"
	"math"
	"strings"
	"testing"
	"time"

	"cadencewright/astro"
	"cadencewright/astro/timescale"
)

// ordinary is a valid orbit.
func ordinary() KeplerParams {
	return KeplerParams{PbD: 1.5, A1Ls: 2, Ecc: 0.1, OmDeg: 30, T0MJD: 60000, M2Msun: 0.3, Sini: 0.9}
}

func mustKepler(t *testing.T, p KeplerParams) Elements {
	t.Helper()
	e, err := Kepler(p)
	if err != nil {
		t.Fatal(err)
	}
	return e
}

func TestElementsOutOfRange(t *testing.T) {
	nan, inf := math.NaN(), math.Inf(1)
	tests := []struct {
		names  string
		change func(p *KeplerParams)
	}{
		{"orbital period", func(p *KeplerParams) { p.PbD = 0 }},
		{"orbital period", func(p *KeplerParams) { p.PbD = -3 }},
		{"orbital period", func(p *KeplerParams) { p.PbD = inf }},
		{"semi-major axis", func(p *KeplerParams) { p.A1Ls = -1 }},
		{"eccentricity", func(p *KeplerParams) { p.Ecc = 1 }},
		{"eccentricity", func(p *KeplerParams) { p.Ecc = -0.1 }},
		{"eccentricity", func(p *KeplerParams) { p.Ecc = nan }},
		{"longitude of periastron", func(p *KeplerParams) { p.OmDeg = inf }},
		{"epoch", func(p *KeplerParams) { p.T0MJD = nan }},
		{"advance", func(p *KeplerParams) { p.OmdotDegYr = -inf }},
		{"change of the orbital period", func(p *KeplerParams) { p.Pbdot = nan }},
		{"companion mass", func(p *KeplerParams) { p.M2Msun = -0.2 }},
		{"inclination", func(p *KeplerParams) { p.Sini = 1.01 }},
	}
	for _, tt := range tests {
		p := ordinary()
		tt.change(&p)
		_, err := Kepler(p)
		var rangeErr *astro.RangeError
		if !errors.As(err, &rangeErr) || !strings.Contains(err.Error(), tt.names) {
			t.Errorf("%+v: got %v, want an error that names the %s", p, err, tt.names)
		}
	}
	if _, err := ELL1(ELL1Params{PbD: 1, TascMJD: 60000, Eps1: 0.8, Eps2: 0.8}); err == nil {
		t.Error("eps1, eps2 of an eccentricity above 1: want an error")
	}
}

func TestELL1IsTheKeplerOrbitOfItsParameters(t *testing.T) {
	l, err := ELL1(ELL1Params{PbD: 1.2, A1Ls: 1, TascMJD: 60000.25, Eps1: -3e-5, Eps2: 4e-5})
	if err != nil {
		t.Fatal(err)
	}
	om := math.Atan2(-3e-5, 4e-5)
	if math.Abs(l.Ecc-5e-5) > 1e-19 || math.Abs(l.Om.Rad()-om) > 1e-15 || math.Abs(l.T0MJD-(60000.25+1.2*om/turn)) > 1e-11 {
		t.Errorf("e %v, omega %v, T0 %v", l.Ecc, l.Om, l.T0MJD)
	}
	k := mustKepler(t, KeplerParams{PbD: 1.2, A1Ls: 1, Ecc: l.Ecc, OmDeg: l.Om.Deg(), T0MJD: l.T0MJD})
	for day := range 20 {
		at := timescale.NewMJD(61000+day, 0.1*float64(day))
		for _, ref := range []Reference{Periastron, Node, Conjunction} {
			if d := l.TurnsAt(ref, at) - k.TurnsAt(ref, at); math.Abs(d) > 1e-9 {
				t.Errorf("%s: %v turns apart", ref, d)
			}
		}
		// The expansion drops -3/2 x eps1 and terms in e².
		if d := l.RoemerDelayS(at) - k.RoemerDelayS(at) - 1.5*l.Eps1; math.Abs(d) > 5e-9 {
			t.Errorf("Roemer delays %v s apart", d)
		}
	}
}

func TestReferenceNames(t *testing.T) {
	for _, r := range []Reference{Periastron, Node, Conjunction} {
		if got, err := ParseReference(r.String()); err != nil || got != r {
			t.Errorf("%v: got %v, %v", r, got, err)
		}
	}
	if _, err := ParseReference("apastron"); err == nil || !strings.Contains(err.Error(), `"apastron"`) {
		t.Errorf("got %v, want an error that names it", err)
	}
}

func TestPassagesErrors(t *testing.T) {
	star := astro.Star{RA: 1, Dec: 0.3, PosEpochMJD: 51544.5}
	e := mustKepler(t, ordinary())
	t0 := time.Date(2027, 1, 1, 0, 0, 0, 0, time.UTC)
	t1 := t0.AddDate(0, 0, 7)
	windows := [][2]float64{{-0.1, 0.5}, {1, 1.2}, {0.5, 0.5}, {0.5, 0.4}, {0.5, 1.6}, {math.NaN(), 1}, {0, math.NaN()}}
	for _, w := range windows {
		if _, err := e.Passages(Node, star, w[0], w[1], t0, t1); err == nil || !strings.Contains(err.Error(), "phase window") {
			t.Errorf("window %v: got %v", w, err)
		}
	}
	for _, p := range [][2]time.Time{{timescale.First.Add(-1), t1}, {t0, timescale.Last}} {
		if _, err := e.Passages(Node, star, 0, 0.5, p[0], p[1]); err == nil {
			t.Errorf("%v: want an error", p)
		}
	}
	if list, err := e.Passages(Node, star, 0, 0.5, t1, t0); err != nil || len(list) != 0 {
		t.Errorf("a stretch that ends before it begins: got %v, %v", list, err)
	}
	extreme := map[string]func(p *KeplerParams){
		"the node races": func(p *KeplerParams) { p.PbD, p.OmdotDegYr, p.Ecc = 100, -3600, 0.9 },
		"period is gone": func(p *KeplerParams) { p.Pbdot, p.T0MJD = 1e-3, 50000 },
	}
	for name, change := range extreme {
		p := ordinary()
		change(&p)
		e := mustKepler(t, p)
		if _, err := e.Passages(Node, star, 0, 0.5, t0, t1); err == nil || !strings.Contains(err.Error(), "usual pace") {
			t.Errorf("%s: got %v", name, err)
		}
	}
	fast := Elements{PbD: 1e-9, T0MJD: 60000}
	if _, err := fast.Passages(Periastron, star, 0, 0.5, t0, t1); err == nil || !strings.Contains(err.Error(), "number of orbits") {
		t.Errorf("a period of 0.1 ms: got %v", err)
	}
	if _, err := (Elements{}).Passages(Periastron, star, 0, 0.5, t0, t1); err == nil {
		t.Error("elements that are all 0: want an error")
	}
}

func TestPassagesOfOrbitsLongerThanTime(t *testing.T) {
	star := astro.Star{RA: 1, Dec: 0.3, PosEpochMJD: 51544.5}
	p := ordinary()
	p.PbD = 1e6
	e := mustKepler(t, p)
	t0 := time.Date(2027, 1, 1, 0, 0, 0, 0, time.UTC)
	list, err := e.Passages(Periastron, star, 0.0, 0.9, t0, t0.AddDate(0, 0, 7))
	if err != nil || len(list) != 1 || list[0].Orbit != 0 {
		t.Fatalf("got %+v, %v; want the one passage that lasts", list, err)
	}
	if got := list[0]; got.Enter.Year() != 2023 || !got.Leave.Equal(lastInstant) {
		t.Errorf("from %s to %s; want T0 in 2023 and the end of the time scales", got.Enter, got.Leave)
	}
	if _, err := e.Next(Periastron, star, t0); err == nil || !strings.Contains(err.Error(), "2100") {
		t.Errorf("the next periastron is in 2000 years: got %v", err)
	}
}

func TestClockFollowsTheCarefulRouteEverywhere(t *testing.T) {
	star := astro.Star{RA: 2, Dec: -0.8, PosEpochMJD: 55000, PMRAMasYr: 140, PMDecMasYr: -70}
	t0 := time.Date(2016, 12, 30, 0, 0, 0, 0, time.UTC) // over a leap second
	earth, err := NewEarth(t0, t0.AddDate(0, 0, 60))
	if err != nil {
		t.Fatal(err)
	}
	clock := earth.Clock(star)
	worst := 0.0
	for h := -100 * 24; h < 160*24; h += 5 {
		at := t0.Add(time.Duration(h) * time.Hour)
		quick, err := clock.TDB(at)
		if err != nil {
			t.Fatal(err)
		}
		careful, err := BarycentricTDB(star, at)
		if err != nil {
			t.Fatal(err)
		}
		worst = max(worst, math.Abs(apartS(quick, careful)))
	}
	if worst > 5e-6 {
		t.Errorf("the table is %v s off", worst)
	}
	t.Logf("largest difference %.2g s", worst)
	if _, err := clock.TDB(timescale.Last); err == nil {
		t.Error("2100: want an error")
	}
}
