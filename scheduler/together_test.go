package scheduler

import (
	"reflect"
	"strings"
	"testing"
	"time"
)

// One mistake gives one problem: rules that look at several values keep silent
// where one of them is wrong in itself.
func TestOneMistakeGivesOneProblem(t *testing.T) {
	document := readTestFile(t, "every-field.json")
	for _, x := range []struct {
		at    string
		value any
		want  string // "" where it is at
	}{
		{"/campaign/start", "soon", ""},
		{"/campaign/end", 5, ""},
		{"/campaign/grid_min", 7, ""}, // lengths and pins do not fit a grid of 7
		{"/telescopes/0/elevation_min_deg", 95, ""},
		{"/telescopes/0/elevation_max_deg", "high", ""},
		{"/telescopes/0/mount", "none", ""}, // whose drives would all be foreign
		{"/telescopes/0/receivers/0/freq_mhz", -1400, ""},
		{"/telescopes/0/receivers/0/bandwidth_mhz", 1e7, ""},
		{"/telescopes/0/receivers/0/code", unset, ""}, // blocks and history name it
		{"/telescopes/0/receivers", "L1", ""},
		{"/sources/0/period_s", 0, ""},
		{"/sources/0/width_s", -1, ""},
		{"/sources/0/binary", 3, ""}, // a phase goal needs it
		{"/sources", map[string]any{}, ""},
		{"/telescopes", "three", ""},
		{"/blocks", nil, ""},
		{"/cadence_targets/0/every_d", "weekly", ""},
		{"/cadence_targets/0/early_d", -1, ""},
		{"/band_pair_goals/0/every_d", -14, ""},
		{"/band_pair_goals/0/within_h", 1e6, ""},
		{"/overlap_goals/0/telescopes", []any{}, ""},
		{"/phase_goals/0/windows/0/from", 2, ""},
		{"/blocks/0/start", "2027-01-04", ""},
		{"/blocks/0/end", true, ""},
		{"/blocks/0/receivers", []any{}, ""},
		{"/blocks/0/lost/0/0", 9, ""},
		{"/pins/0/minutes", 0, ""},
		{"/pins/0/start", "22:00", ""},
	} {
		_, err := ReadCampaign(edited(t, document, x.at, x.value))
		if x.want == "" {
			x.want = x.at
		}
		if err == nil {
			t.Errorf("%s = %v is accepted", x.at, x.value)
		} else if got := pointers(problemsOf(t, err)); !reflect.DeepEqual(got, []string{x.want}) {
			t.Errorf("%s = %v: problems at %v\n%v", x.at, x.value, got, err)
		}
	}
}

// Several mistakes between values are all told.
func TestRulesBetweenValuesAreAllTold(t *testing.T) {
	c := everyField(t)
	c.End = c.Start
	c.Telescopes[0].ElevationMinDeg = 88
	c.Sources[1].WidthS = 1
	c.Sources[2].ScanMinutes = []int{12, 30, 33}
	c.CadenceTargets[0].EarlyD = 3.6
	c.CadenceTargets[1].ID = "p1"
	c.PhaseGoals[0].Windows[1].To = 0.4
	c.OverlapGoals[0].Telescopes = []string{"ALT"}
	c.BandPairGoals[0].Bands = []string{"U", "L", "S"}
	c.Blocks[1].Telescope = "ALT"
	c.History[0].Receiver = "U1"
	c.Pins[0].Start = c.Pins[0].Start.Add(-7 * time.Hour)
	want := []string{
		"/campaign/end", "/telescopes/0/elevation_max_deg", "/sources/1/width_s", "/sources/2/scan_minutes/0",
		"/sources/2/scan_minutes/2",
		"/phase_goals/0/id", "/cadence_targets/0/early_d", "/phase_goals/0/windows/1/to", "/overlap_goals/0/count",
		"/band_pair_goals/0/bands",
		"/blocks/1/start", "/history/0/receiver", "/pins/0/start",
	}
	if got := pointers(problemsOf(t, c.Validate())); !reflect.DeepEqual(got, want) {
		t.Errorf("problems at\n %v, want\n %v", got, want)
	}
}

// What is allowed at the very edge of a rule between values.
func TestRulesBetweenValuesAtTheirEdges(t *testing.T) {
	for _, x := range []struct {
		what   string
		change func(*Campaign)
		bad    string // place of the problem; "" for none
	}{
		{"early_d of half", func(c *Campaign) { c.CadenceTargets[0].EarlyD = 3.5 }, ""},
		{"within_h of half", func(c *Campaign) { c.BandPairGoals[0].WithinH = 168 }, ""},
		{"window of a whole turn", func(c *Campaign) { c.PhaseGoals[0].Windows[0].To = 1.9 }, ""},
		{"window past a whole turn", func(c *Campaign) { c.PhaseGoals[0].Windows[0].To = 1.901 },
			"/phase_goals/0/windows/0/to"},
		{"band of twice the centre", func(c *Campaign) { c.Telescopes[0].Receivers[0].BandwidthMHz = 2800 }, ""},
		{"block of 14 days", func(c *Campaign) { c.Blocks[2].End = c.Blocks[2].Start.Add(MaxBlock) }, ""},
		{"block a millisecond longer",
			func(c *Campaign) { c.Blocks[2].End = c.Blocks[2].Start.Add(MaxBlock + time.Millisecond) },
			"/blocks/2/end"},
		{"campaign of five years", func(c *Campaign) { c.End = c.Start.AddDate(5, 0, 0) }, ""},
		{"pin that fills its block", func(c *Campaign) { c.Pins[0].Start, c.Pins[0].Minutes = c.Blocks[0].Start, 570 },
			""},
		{"lost part that fills its block", func(c *Campaign) {
			c.Blocks[0].Lost[0] = Span{c.Blocks[0].Start,
				c.Blocks[0].End}
		}, ""},
		{"all telescopes at once", func(c *Campaign) { c.OverlapGoals[0].Telescopes, c.OverlapGoals[0].Count = nil, 3 },
			""},
		{"more than all telescopes", func(c *Campaign) {
			c.OverlapGoals[0].Telescopes, c.OverlapGoals[0].Count = nil,
				4
		}, "/overlap_goals/0/count"},
		{"no goals, blocks, history, pins", func(c *Campaign) {
			*c = Campaign{Name: c.Name, Start: c.Start, End: c.End, GridMin: 5, Telescopes: c.Telescopes,
				Sources: c.Sources}
		}, ""},
		{"nothing at all", func(c *Campaign) { *c = Campaign{Name: c.Name, Start: c.Start, End: c.End, GridMin: 1} },
			""},
		{"not even a grid", func(c *Campaign) { *c = Campaign{Name: c.Name, Start: c.Start, End: c.End} },
			"/campaign/grid_min"},
		{"block before the campaign", func(c *Campaign) { c.Blocks[2].Start = c.Start.Add(-time.Hour) }, ""},
		{"an altaz drive without acceleration", func(c *Campaign) { c.Telescopes[0].AccelAzDegS2 = 0 }, ""},
		{"an altaz drive without a rate", func(c *Campaign) { c.Telescopes[0].RateAzDegS = 0 },
			"/telescopes/0/rate_az_deg_s"},
		{"an altaz drive without a range", func(c *Campaign) { c.Telescopes[0].AzimuthRangeDeg = [2]float64{} },
			"/telescopes/0/azimuth_range_deg"},
		{"early_d of 0", func(c *Campaign) { c.CadenceTargets[0].EarlyD = 0 }, ""},
	} {
		c := everyField(t)
		x.change(c)
		var got []string
		if err := c.Validate(); err != nil {
			got = pointers(problemsOf(t, err))
		}
		if x.bad == "" && got != nil || x.bad != "" && !reflect.DeepEqual(got, []string{x.bad}) {
			t.Errorf("%s: problems at %v, want %q\n%v", x.what, got, x.bad, c.Validate())
		}
		if x.bad == "" { // and the file says the same
			data, err := WriteCampaign(c)
			if err != nil {
				t.Errorf("%s: %v", x.what, err)
			} else if back, err := ReadCampaign(data); err != nil || !back.Equal(c) {
				t.Errorf("%s: another campaign after writing, %v", x.what, err)
			}
		}
	}
}

// An absent early_d follows every_d; a written one that happens to be its
// default is left out again.
func TestEarlyDefaultsToAQuarter(t *testing.T) {
	c := everyField(t)
	for _, x := range []struct {
		early   float64
		written bool
	}{{3.5, false}, {0, true}, {7, true}} {
		c.CadenceTargets[1].EarlyD = x.early
		data, err := WriteCampaign(c)
		if err != nil {
			t.Fatal(err)
		}
		line := string(data[strings.Index(string(data), `"id": "c2"`):])
		line = line[:strings.IndexByte(line, '\n')]
		if got := strings.Contains(line, "early_d"); got != x.written {
			t.Errorf("early_d %v of 14 d: %s", x.early, line)
		}
	}
}
