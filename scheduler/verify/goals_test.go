package verify

import (
	"math"
	"testing"
	"time"

	"cadencewright/scheduler"

	"pgregory.net/rapid"
)

// unitsOf derives the units of a campaign's own horizon.
func unitsOf(t testing.TB, c *scheduler.Campaign) *model {
	t.Helper()
	if err := c.Validate(); err != nil {
		t.Fatal(err)
	}
	m, err := newModel(c, week(c))
	if err != nil {
		t.Fatal(err)
	}
	return m
}

// Due windows and their urgency by the days since the last counted scan; the
// target wants one every 5 days, and the horizon is 10 days long.
func TestDueWindows(t *testing.T) {
	for _, x := range []struct {
		name    string
		sinceD  float64 // 0: never
		due     []float64
		weights []float64
	}{
		{"never", 0, []float64{0, 5}, []float64{3, 1}},
		{"overdue by half an interval", 7.5, []float64{0, 5}, []float64{1.5, 1}},
		{"overdue by one interval", 10, []float64{0, 5}, []float64{2, 1}},
		{"overdue by three intervals", 20, []float64{0, 5}, []float64{3, 1}},
		{"due right now", 5, []float64{0, 5}, []float64{1, 1}},
		{"due in two days", 3, []float64{2, 7}, []float64{1, 1}},
		{"just done", 0.001, []float64{4.999, 9.999}, []float64{1, 1}},
	} {
		t.Run(x.name, func(t *testing.T) {
			c := tiny(t)
			c.History, c.CadenceTargets = nil, c.CadenceTargets[:1]
			c.CadenceTargets[0].Priority = 2
			if x.sinceD > 0 {
				c.History = []scheduler.HistoryScan{{Source: c.Sources[0].Name, Telescope: "ALT", Receiver: "L",
					Start: after(-24 * x.sinceD), Minutes: 20, Counted: true}}
			}
			m := unitsOf(t, c)
			for k, want := range x.due {
				u := m.byName["cad-J0601#"+string(rune('1'+k))]
				if u == nil {
					t.Fatalf("no unit %d", k+1)
				}
				if got := (u.due - m.from).days(); math.Abs(got-want) > 1e-8 || math.Abs(u.weight-2*x.weights[k]) > 1e-9 {
					t.Errorf("window %d due after %g d with weight %g, want %g and %g", k+1, got, u.weight, want, 2*x.weights[k])
				}
			}
			if m.byName["cad-J0601#3"] != nil {
				t.Error("a third window")
			}
		})
	}
}

// What does not count must change nothing: the windows stay those of never.
func TestHistoryThatDoesNotCount(t *testing.T) {
	good := scheduler.HistoryScan{Source: "SIM J0601+3011", Telescope: "ALT", Receiver: "L", Start: after(-48), Minutes: 20, Counted: true}
	for _, x := range []struct {
		name   string
		change func(*scheduler.Campaign, *scheduler.HistoryScan)
		counts bool
	}{
		{"as it is", func(*scheduler.Campaign, *scheduler.HistoryScan) {}, true},
		{"not counted", func(_ *scheduler.Campaign, h *scheduler.HistoryScan) { h.Counted = false }, false},
		{"in the horizon", func(_ *scheduler.Campaign, h *scheduler.HistoryScan) { h.Start = monday }, false},
		{"just before the horizon", func(_ *scheduler.Campaign, h *scheduler.HistoryScan) { h.Start = monday.Add(-time.Millisecond) }, true},
		{"another band", func(_ *scheduler.Campaign, h *scheduler.HistoryScan) { h.Receiver = "S" }, false},
		{"wide band", func(_ *scheduler.Campaign, h *scheduler.HistoryScan) { h.Receiver = "W" }, true},
		{"another source", func(c *scheduler.Campaign, h *scheduler.HistoryScan) { h.Source = c.Sources[1].Name }, false},
		{"telescope not allowed", func(c *scheduler.Campaign, _ *scheduler.HistoryScan) {
			c.CadenceTargets[0].Telescopes = []string{"EQU"}
		}, false},
		{"not detectable", func(c *scheduler.Campaign, _ *scheduler.HistoryScan) { c.Sources[0].WidthS = 0.0046 }, false},
	} {
		t.Run(x.name, func(t *testing.T) {
			c := tiny(t)
			h := good
			x.change(c, &h)
			c.History = []scheduler.HistoryScan{h}
			if got := unitsOf(t, c).byName["cad-J0601#1"].weight != 3; got != x.counts {
				t.Errorf("counts: %v, want %v", got, x.counts)
			}
		})
	}
}

// lastOf is when a goal of the tiny campaign was last satisfied, in hours from
// its start; NaN: never.
func lastOf(t *testing.T, c *scheduler.Campaign, goal string) float64 {
	t.Helper()
	m := unitsOf(t, c)
	for _, g := range m.groups {
		if g.goal.ID == goal {
			if last, ok := g.goal.lastSatisfied(); ok {
				return (last - m.from).hours()
			}
			return math.NaN()
		}
	}
	t.Fatalf("no goal %s", goal)
	return 0
}

type had struct {
	tel, rx        string
	hours, minutes float64
}

func TestLastOverlap(t *testing.T) {
	for _, x := range []struct {
		name    string
		history []had
		want    float64
	}{
		{"none", nil, math.NaN()},
		{"one telescope", []had{{"ALT", "L", -50, 60}, {"ALT", "L", -49.9, 60}}, math.NaN()},
		{"long enough", []had{{"ALT", "L", -50, 60}, {"EQU", "L", -49.5, 15}}, -49.5},
		{"too short", []had{{"ALT", "L", -50, 60}, {"EQU", "L", -49.5, 14}}, math.NaN()},
		{"the first ends too early", []had{{"ALT", "L", -50, 44}, {"EQU", "L", -49.5, 60}}, math.NaN()},
		{"the same start", []had{{"ALT", "L", -50, 20}, {"EQU", "L", -50, 20}}, -50},
		{"other bands", []had{{"ALT", "L", -50, 60}, {"EQU", "S", -50, 60}}, math.NaN()},
		{"a wide receiver", []had{{"ALT", "W", -50, 60}, {"EQU", "S", -50, 60}}, -50},
		{"no band in common", []had{{"ALT", "W", -50, 60}, {"EQU", "P", -50, 60}}, math.NaN()},
		{"the newest counts", []had{{"ALT", "L", -50, 60}, {"EQU", "L", -50, 60}, {"ALT", "S", -30, 60}, {"EQU", "S", -30, 60}, {"ALT", "L", -10, 60}}, -30},
		{"a short one between", []had{{"ALT", "L", -50, 600}, {"TRN", "L", -49, 5}, {"EQU", "L", -45, 30}}, -45},
	} {
		t.Run(x.name, func(t *testing.T) {
			c := tiny(t)
			setHistory(c, 4, x.history)
			if got := lastOf(t, c, "both"); !(math.Abs(got-x.want) < 1e-6 || math.IsNaN(got) && math.IsNaN(x.want)) {
				t.Errorf("last satisfied at %g h, want %g", got, x.want)
			}
		})
	}
}

func TestLastPair(t *testing.T) {
	for _, x := range []struct {
		name    string
		history []had
		want    float64
	}{
		{"none", nil, math.NaN()},
		{"one band", []had{{"ALT", "L", -50, 30}, {"EQU", "L", -49, 30}}, math.NaN()},
		{"both", []had{{"ALT", "L", -50, 30}, {"EQU", "S", -44, 30}}, -44},
		{"too far apart", []had{{"ALT", "L", -50, 30}, {"EQU", "S", -43.9, 30}}, math.NaN()},
		{"one wide receiver", []had{{"ALT", "W", -50, 30}}, -50},
		{"together", []had{{"EQU", "S", -50, 30}, {"ALT", "L", -50, 30}}, -50},
		{"the newest that pairs", []had{{"ALT", "L", -50, 30}, {"EQU", "S", -49, 30}, {"ALT", "L", -46, 30}, {"ALT", "L", -30, 30}}, -46},
	} {
		t.Run(x.name, func(t *testing.T) {
			c := tiny(t)
			setHistory(c, 6, x.history)
			if got := lastOf(t, c, "pair"); !(math.Abs(got-x.want) < 1e-6 || math.IsNaN(got) && math.IsNaN(x.want)) {
				t.Errorf("last satisfied at %g h, want %g", got, x.want)
			}
		})
	}
}

func setHistory(c *scheduler.Campaign, source int, list []had) {
	c.History = nil
	for _, h := range list {
		c.History = append(c.History, scheduler.HistoryScan{Source: c.Sources[source].Name, Telescope: h.tel, Receiver: h.rx,
			Start: after(h.hours), Minutes: h.minutes, Counted: true})
	}
}

func TestTimeliness(t *testing.T) {
	u := &unit{goal: &goal{every: 8 * day, early: 2 * day}, due: 100 * day}
	for _, x := range []struct {
		t    msec
		want float64
	}{
		{100 * day, 1}, {99 * day, 0.75}, {98 * day, 0.5}, {98*day - 1, 0}, {90 * day, 0},
		{104 * day, 0.7}, {108*day - 1, 0.4}, {108 * day, 0}, {200 * day, 0},
	} {
		if got := u.timeliness(x.t); math.Abs(got-x.want) > 1e-8 {
			t.Errorf("after %g d: %g, want %g", (x.t - u.due).days(), got, x.want)
		}
	}
	u.goal.early = 0
	if u.timeliness(u.due-1) != 0 || u.timeliness(u.due) != 1 {
		t.Error("nothing early is allowed, and something is")
	}
}

func TestQuality(t *testing.T) {
	for _, x := range []struct{ info, toaUs, want float64 }{
		{1e12, 1, 1}, {2e12, 1, 1}, {0.5e12, 1, 0.5}, {0.4999e12, 1, 0}, {0.7e12, 1, 0.7}, {0.25e12, 2, 1}, {0, 1, 0}, {0, 0, 0}, {1, 0, 1},
	} {
		if got := quality(x.info, x.toaUs); math.Abs(got-x.want) > 1e-12 {
			t.Errorf("%g s^-2 against %g us: %g, want %g", x.info, x.toaUs, got, x.want)
		}
	}
}

// bestIn must find what looking at every instant finds.
func TestBestTimelinessInASet(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		grid := 5 * minute
		u := &unit{goal: &goal{every: msec(rapid.Int64Range(1, 200).Draw(t, "every")) * minute, early: msec(rapid.Int64Range(0, 90).Draw(t, "early")) * minute},
			due: msec(rapid.Int64Range(-20, 520).Draw(t, "due")) * minute}
		set := drawRuns(t)
		lo := rapid.Int64Range(-10, 110).Draw(t, "lo")
		hi := lo + rapid.Int64Range(0, 60).Draw(t, "span")
		want := 0.0
		for x := lo; x <= hi; x++ {
			if set.meets(x, x) {
				want = max(want, u.timeliness(msec(x)*grid))
			}
		}
		if got := u.bestIn(set, lo, hi, grid); got != want {
			t.Fatalf("%g, want %g", got, want)
		}
	})
}
