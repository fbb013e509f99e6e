package units_test

import (
	"math"
	"testing"
	"time"

	"cadencewright/scheduler"
	"cadencewright/scheduler/units"
)

var monday = time.Date(2027, 1, 18, 0, 0, 0, 0, time.UTC)

func day(d float64) time.Time { return monday.Add(time.Duration(d * 24 * float64(time.Hour))) }

func horizon(days float64) scheduler.Horizon {
	return scheduler.Horizon{From: monday, To: day(days)}
}

// had is a counted scan of the history, in days from the horizon's start.
type had struct {
	tel, rx string
	day     float64
	minutes float64
}

// campaign has one source, two telescopes and the given history.
func campaign(past ...had) *scheduler.Campaign {
	rx := func(code string, bands ...string) scheduler.Receiver {
		return scheduler.Receiver{Code: code, Bands: bands, FreqMHz: 1400, BandwidthMHz: 400, NPol: 2, TrecK: 20, TatmK: 2, GainKPerJy: 1, Digitisation: 1}
	}
	c := &scheduler.Campaign{Name: "one", Start: day(-100), End: day(100), GridMin: 5}
	for _, code := range []string{"A", "B"} {
		c.Telescopes = append(c.Telescopes, scheduler.Telescope{Code: code, Name: code, Mount: scheduler.MountEquatorial,
			Receivers: []scheduler.Receiver{rx("L", "L"), rx("S", "S"), rx("W", "L", "S")}})
	}
	c.Sources = []scheduler.Source{{Name: "SIM J0601+3011", RADeg: 90, DecDeg: 30, PosEpochMJD: 58000, PeriodS: 0.005, FluxMJy: 2,
		FluxFreqMHz: 1400, WidthS: 0.0005, ScanMinutes: []int{20}}}
	for _, h := range past {
		c.History = append(c.History, scheduler.HistoryScan{Source: c.Sources[0].Name, Telescope: h.tel, Receiver: h.rx,
			Start: day(h.day), Minutes: h.minutes, Counted: true})
	}
	return c
}

func goal(bands ...string) scheduler.Goal {
	return scheduler.Goal{ID: "g", Source: "SIM J0601+3011", Bands: bands, Priority: 2}
}

func build(t *testing.T, c *scheduler.Campaign, days float64) *units.Set {
	t.Helper()
	s, err := units.Build(c, horizon(days))
	if err != nil {
		t.Fatal(err)
	}
	return s
}

// Section 5 by hand: priority 2, every 4 days, a week.
func TestDueWindowsAndUrgency(t *testing.T) {
	for _, c := range []struct {
		name    string
		last    []had
		dueDays []float64
		weights []float64
		first   float64 // when it was due first after history, in days
	}{
		{"no history: due at once, three times as urgent", nil, []float64{0, 4}, []float64{6, 2}, 0},
		{"not due yet", []had{{"A", "L", -1, 20}}, []float64{3}, []float64{2}, 3},
		{"due exactly at the start", []had{{"A", "L", -4, 20}}, []float64{0, 4}, []float64{2, 2}, 0},
		{"overdue by two days of four", []had{{"A", "L", -6, 20}}, []float64{0, 4}, []float64{3, 2}, -2},
		{"overdue beyond measure", []had{{"A", "L", -90, 20}}, []float64{0, 4}, []float64{6, 2}, -86},
		{"the last one counts", []had{{"A", "L", -1, 20}, {"B", "W", -6, 20}}, []float64{3}, []float64{2}, 3},
		{"another band does not", []had{{"A", "S", -1, 20}, {"A", "L", -6, 20}}, []float64{0, 4}, []float64{3, 2}, -2},
		{"nor does a scan within the horizon", []had{{"A", "L", 0, 20}, {"A", "L", -6, 20}}, []float64{0, 4}, []float64{3, 2}, -2},
	} {
		t.Run(c.name, func(t *testing.T) {
			camp := campaign(c.last...)
			camp.CadenceTargets = []scheduler.CadenceTarget{{Goal: goal("L"), EveryD: 4, EarlyD: 1}}
			s := build(t, camp, 7)
			if len(s.Units) != len(c.dueDays) {
				t.Fatalf("%d units, want %d", len(s.Units), len(c.dueDays))
			}
			if g := s.Goals[0]; g.Had != (len(c.last) > 0) || g.Had && math.Abs((g.Last+g.EveryMin-s.From)/1440-c.first) > 1e-9 {
				t.Errorf("last had %v on day %g, want it an interval before day %g", g.Had, (g.Last-s.From)/1440, c.first)
			}
			sum := 0.0
			for i, u := range s.Units {
				if due := (u.Due - s.From) / 1440; math.Abs(due-c.dueDays[i]) > 1e-9 || math.Abs(u.Weight-c.weights[i]) > 1e-9 {
					t.Errorf("unit %s is due on day %g and weighs %g, want %g and %g", u.Name, due, u.Weight, c.dueDays[i], c.weights[i])
				}
				if s.ByName(u.Name) != i || u.K != i+1 || u.Cap != 1 {
					t.Errorf("unit %d: name %s, K %d, cap %d", i, u.Name, u.K, u.Cap)
				}
				sum += u.Weight
			}
			if math.Abs(s.Possible-sum) > 1e-12 {
				t.Errorf("possible %g, want %g", s.Possible, sum)
			}
		})
	}
}

// Scans that were not counted, and telescopes that may not serve, are no history.
func TestHistoryThatServesNothing(t *testing.T) {
	for name, change := range map[string]func(*scheduler.Campaign){
		"not counted":       func(c *scheduler.Campaign) { c.History[0].Counted = false },
		"another telescope": func(c *scheduler.Campaign) { c.CadenceTargets[0].Telescopes = []string{"B"} },
		"not detectable":    func(c *scheduler.Campaign) { c.Sources[0].WidthS = 0.0046 },
	} {
		camp := campaign(had{"A", "L", -1, 20})
		camp.CadenceTargets = []scheduler.CadenceTarget{{Goal: goal("L"), EveryD: 4, EarlyD: 1}}
		change(camp)
		if s := build(t, camp, 3); s.Units[0].Weight != 6 {
			t.Errorf("%s: weight %g, want 6 as with no history", name, s.Units[0].Weight)
		}
	}
}

// v falls by half over the early part and by six tenths over the interval.
func TestTimeliness(t *testing.T) {
	u := units.Unit{Due: 1000, Early: 100, Every: 400}
	for at, want := range map[float64]float64{1000: 1, 950: 0.75, 900: 0.5, 899: 0, 1200: 0.7, 1399: 1 - 0.6*399/400, 1400: 0, 2000: 0} {
		if v := u.Timeliness(at); math.Abs(v-want) > 1e-12 {
			t.Errorf("v(%g) = %g, want %g", at, v, want)
		}
	}
	if lo, hi := u.Window(); u.Timeliness(lo-0.001) != 0 || u.Timeliness(hi+0.001) != 0 {
		t.Error("timeliness outside the window is not 0")
	}
	for _, c := range [][3]float64{{0, 2000, 1}, {900, 950, 0.75}, {1200, 1300, 0.7}, {0, 800, 0}} {
		if v := u.BestTimeliness(c[0], c[1]); math.Abs(v-c[2]) > 1e-12 {
			t.Errorf("best v on [%g, %g] = %g, want %g", c[0], c[1], v, c[2])
		}
	}
}

func TestQuality(t *testing.T) {
	for _, c := range [][3]float64{ // information in 1/s², wanted in us, quality
		{1e12, 1, 1}, {4e12, 1, 1}, {0.75e12, 1, 0.75}, {0.5e12, 1, 0.5}, {0.49e12, 1, 0}, {1, 0, 1}, {0, 0, 0}, {0, 1, 0},
	} {
		if q := units.Quality(c[0], c[1]); math.Abs(q-c[2]) > 1e-12 {
			t.Errorf("quality of %g at %g us is %g, want %g", c[0], c[1], q, c[2])
		}
	}
}

// The last overlap is the last start of a common time of two telescopes in one
// band; no such time: urgency 3.
func TestLastOverlap(t *testing.T) {
	const min = 1.0 / 1440
	for _, c := range []struct {
		name string
		past []had
		due  float64 // days
	}{
		{"together", []had{{"A", "L", -1, 30}, {"B", "L", -1, 30}}, 3},
		{"common time from the later start", []had{{"A", "L", -1, 60}, {"B", "W", -1 + 30*min, 60}}, 3 + 30*min},
		{"too short in common", []had{{"A", "L", -1, 30}, {"B", "L", -1 + 20*min, 30}}, 0},
		{"no common band", []had{{"A", "L", -1, 30}, {"B", "S", -1, 30}}, 0},
		{"one telescope", []had{{"A", "L", -1, 30}, {"A", "W", -1, 30}}, 0},
	} {
		camp := campaign(c.past...)
		camp.OverlapGoals = []scheduler.OverlapGoal{{Goal: goal("L", "S"), Count: 2, OverlapMin: 20, EveryD: 4}}
		u := build(t, camp, 4).Units[0]
		if due := (u.Due - units.Minutes(monday)) / 1440; math.Abs(due-c.due) > 1e-6 || u.Cap != 2 || u.Early != 1440 {
			t.Errorf("%s: due on day %g, want %g; cap %d, early %g min", c.name, due, c.due, u.Cap, u.Early)
		}
	}
}

// A pair counts at its later start; a receiver with both bands pairs alone.
func TestLastPair(t *testing.T) {
	for _, c := range []struct {
		name string
		past []had
		due  float64
	}{
		{"two hours apart", []had{{"A", "L", -1, 30}, {"B", "S", -1 + 2.0/24, 30}}, 3 + 2.0/24},
		{"at the limit", []had{{"A", "L", -1, 30}, {"A", "S", -1 + 6.0/24, 30}}, 3.25},
		{"too far apart", []had{{"A", "L", -1, 30}, {"A", "S", -1 + 7.0/24, 30}}, 0},
		{"both bands at once", []had{{"A", "W", -1, 30}}, 3},
		{"at one time", []had{{"A", "S", -1, 30}, {"B", "L", -1, 30}}, 3},
		{"one band twice", []had{{"A", "L", -1, 30}, {"B", "L", -1, 30}}, 0},
	} {
		camp := campaign(c.past...)
		camp.BandPairGoals = []scheduler.BandPairGoal{{Goal: goal("L", "S"), WithinH: 6, EveryD: 4}}
		u := build(t, camp, 4).Units[0]
		if due := (u.Due - units.Minutes(monday)) / 1440; math.Abs(due-c.due) > 1e-6 || u.Cap != 2 {
			t.Errorf("%s: due on day %g, want %g; cap %d", c.name, due, c.due, u.Cap)
		}
	}
}

func TestBuildRefuses(t *testing.T) {
	for name, change := range map[string]func(*scheduler.Campaign){
		"source of a goal":      func(c *scheduler.Campaign) { c.CadenceTargets[0].Source = "nobody" },
		"telescope of a goal":   func(c *scheduler.Campaign) { c.CadenceTargets[0].Telescopes = []string{"Z"} },
		"source of history":     func(c *scheduler.Campaign) { c.History[0].Source = "nobody" },
		"telescope of history":  func(c *scheduler.Campaign) { c.History[0].Telescope = "Z" },
		"receiver of history":   func(c *scheduler.Campaign) { c.History[0].Receiver = "Z" },
		"windows without end":   func(c *scheduler.Campaign) { c.CadenceTargets[0].EveryD = 1e-5 },
		"phases without binary": func(c *scheduler.Campaign) { c.PhaseGoals = []scheduler.PhaseGoal{{Goal: goal("L")}} },
	} {
		camp := campaign(had{"A", "L", -1, 20})
		camp.CadenceTargets = []scheduler.CadenceTarget{{Goal: goal("L"), EveryD: 4, EarlyD: 1}}
		change(camp)
		if _, err := units.Build(camp, horizon(7)); err == nil {
			t.Errorf("%s: no error", name)
		}
	}
	if _, err := units.Build(campaign(), horizon(0)); err == nil {
		t.Error("an empty horizon: no error")
	}
}
