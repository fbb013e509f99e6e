package page

import (
	"strings"
	"testing"
	"time"

	"cadencewright/web/view"
)

var at = time.Date(2027, time.January, 18, 20, 5, 0, 0, time.UTC)

func TestPlanStory(t *testing.T) {
	for _, c := range []struct {
		plan        view.Plan
		name, story string
	}{
		{view.Plan{ID: 42, State: view.Draft, MadeAt: at, MadeBy: "Imre Oduya"}, "Draft 42", "made Mon 18 Jan 20:05 UTC by Imre Oduya, not issued: telescopes do not see it"},
		{view.Plan{ID: 42, State: view.Draft, MadeAt: at}, "Draft 42", "made Mon 18 Jan 20:05 UTC, not issued: telescopes do not see it"},
		{view.Plan{ID: 7, State: view.Issued, Revision: 2, IssuedAt: at, IssuedBy: "Imre Oduya"}, "Revision 2", "issued Mon 18 Jan 20:05 UTC by Imre Oduya: telescopes observe it"},
		{view.Plan{ID: 7, State: view.Superseded, Revision: 2, IssuedAt: at, SupersededBy: 3}, "Revision 2", "issued Mon 18 Jan 20:05 UTC, superseded by revision 3"},
	} {
		if got := planName(c.plan); got != c.name {
			t.Errorf("name %q, want %q", got, c.name)
		}
		if got := planStory(c.plan); got != c.story {
			t.Errorf("story %q, want %q", got, c.story)
		}
	}
}

// TestVerdict: what the page says of a plan must be no more than what the
// bound proves.
func TestVerdict(t *testing.T) {
	for _, c := range []struct {
		name                   string
		score, bound, possible float64
		want                   string
	}{
		{"nothing due", 0, 0, 0, "Nothing is due in this week, so there is nothing to earn."},
		{"best", 80, 80, 100, "It earns 80 % of the weight of all that is due. It is the best possible plan for these blocks, or nearer to it than 0.05 %."},
		{"near", 80, 81, 100, "It earns 80 % of the weight of all that is due. It is near the best possible: another plan could gain 1 at the very most."},
		{"far", 50, 80, 100, "It earns 50 % of the weight of all that is due. Another plan could gain 30 at the very most; often the bound is too high and the best plan nearer."},
	} {
		if got := verdict(view.Plan{Score: c.score, Bound: c.bound, Possible: c.possible}); got != c.want {
			t.Errorf("%s: %q, want %q", c.name, got, c.want)
		}
	}
}

func TestJobWords(t *testing.T) {
	for _, c := range []struct {
		job           view.Job
		line, figures string
	}{
		{view.Job{State: view.JobQueued}, "Planning waits for its turn.", "No plan found yet."},
		{view.Job{State: view.JobRunning, Done: 0.374, Score: 50}, "Planning: 37 % of the effort done.", "Best score so far 50."},
		{view.Job{State: view.JobRunning, Stopping: true, Score: 75, Bound: 100}, "Stopping; the best plan so far is kept.", "Best score so far 75, bound 100, gap 25 %."},
		{view.Job{State: view.JobDone, Score: 100, Bound: 100}, "Planning has ended; a new draft is there.", "Best score so far 100, bound 100."},
		{view.Job{State: view.JobStopped, Score: 9}, "Planning was stopped; the best plan found until then is kept as a draft.", "Best score so far 9."},
		{view.Job{State: view.JobStopped}, "Planning was stopped before there was a plan.", "No plan found yet."},
		{view.Job{State: view.JobFailed, Problem: "the database is away"}, "Planning failed: the database is away", "No plan found yet."},
	} {
		if got := jobLine(&c.job); got != c.line {
			t.Errorf("%s: %q, want %q", c.job.State, got, c.line)
		}
		if got := jobFigures(&c.job); got != c.figures {
			t.Errorf("%s: %q, want %q", c.job.State, got, c.figures)
		}
	}
}

// TestEveryStateHasItsOwnWordAndSign: two states that look alike could not be
// told apart without colour.
func TestEveryStateHasItsOwnWordAndSign(t *testing.T) {
	seen := map[string]view.NeedState{}
	for _, s := range []view.NeedState{view.NeedMet, view.NeedPartly, view.NeedUnmet, view.NeedOpen} {
		for _, text := range []string{needMark(s), needWord(s)} {
			if other, ok := seen[text]; ok {
				t.Errorf("needs %s and %s both show %q", s, other, text)
			}
			seen[text] = s
		}
	}
	words := map[string]view.SourceState{}
	for _, s := range []view.SourceState{view.SourceFine, view.SourceDue, view.SourceLate, view.SourcePlanned, view.SourceIdle} {
		if other, ok := words[sourceWord(s)]; ok {
			t.Errorf("sources %s and %s both show %q", s, other, sourceWord(s))
		}
		words[sourceWord(s)] = s
	}
	goals := map[string]view.GoalState{}
	for _, s := range []view.GoalState{view.GoalMet, view.GoalDue, view.GoalLate, view.GoalOpen} {
		if other, ok := goals[goalWord(s)]; ok {
			t.Errorf("goals %s and %s both show %q", s, other, goalWord(s))
		}
		goals[goalWord(s)] = s
	}
}

func TestByDay(t *testing.T) {
	block := func(h int, scans int) view.BlockRow {
		start := at.Truncate(24 * time.Hour).Add(time.Duration(h) * time.Hour)
		return view.BlockRow{Span: view.Span{Start: start, End: start.Add(8 * time.Hour)}, Scans: make([]view.Scan, scans)}
	}
	days := byDay([]view.BlockRow{block(0, 1), block(23, 2), block(24, 4), block(72, 0)})
	if len(days) != 3 {
		t.Fatalf("%d days, want 3", len(days))
	}
	for i, want := range []struct{ blocks, scans int }{{2, 3}, {1, 4}, {1, 0}} {
		if len(days[i].Blocks) != want.blocks || days[i].Scans != want.scans {
			t.Errorf("day %d has %d blocks and %d scans, want %d and %d", i, len(days[i].Blocks), days[i].Scans, want.blocks, want.scans)
		}
	}
	if byDay(nil) != nil {
		t.Error("days without blocks")
	}
}

func TestPaths(t *testing.T) {
	for _, c := range []struct{ got, want string }{
		{weekAction("2027-W03", "plan"), "/weeks/2027-W03/plan"},
		{planPath("2027-W03", 42), "/weeks/2027-W03?plan=42"},
		{sourcePath("SIM J0412+1833"), "/sources/SIM%20J0412+1833"},
		{sourcePath("a/b?c"), "/sources/a%2Fb%3Fc"},
		{nightPath("ALD", "2027-01-18"), "/telescopes/ALD/nights/2027-01-18"},
		{query("SIM J0412+1833"), "SIM+J0412%2B1833"},
	} {
		if c.got != c.want {
			t.Errorf("path %q, want %q", c.got, c.want)
		}
	}
}

func TestSheetWords(t *testing.T) {
	drive := -12.5
	for _, c := range []struct{ name, got, want string }{
		{"pointing", pointing(view.Pointing{AzDeg: 41.2, ElDeg: 51.34, HAH: -1.72}), "az 41.2°, el 51.3°, HA −1.72 h"},
		{"with drive", pointing(view.Pointing{MotorAzDeg: &drive, Turn: -1}), "az 0.0°, el 0.0°, HA 0.00 h, drive −12.5° (turn −1)"},
		{"first scan", slew(view.SheetScan{Begins: true}), "from anywhere: first of the block, or after lost time"},
		{"same place", slew(view.SheetScan{}), "0 s from the scan before"},
		{"slew", slew(view.SheetScan{SlewS: 81.6}), "81.6 s from the scan before"},
		{"no plan", sheetPlan(view.RunSheet{}), "none issued"},
		{"plan", sheetPlan(view.RunSheet{PlanWeek: "2027-W03", PlanRevision: 2, IssuedAt: at, IssuedBy: "Imre Oduya"}), "week 2027-W03, revision 2, issued Mon 18 Jan 20:05 UTC by Imre Oduya"},
		{"not detectable", snr(0), "not detectable"},
		{"detectable", snr(84.21), "84.2"},
		{"no lengths", minutes(nil), view.None},
		{"lengths", minutes([]int{20, 30}), "20, 30"},
		{"any telescope", all(nil), "any"},
		{"some", all([]string{"ALD", "TARN"}), "ALD, TARN"},
		{"no zone", zoneName(nil), "UTC"},
	} {
		if c.got != c.want {
			t.Errorf("%s: %q, want %q", c.name, c.got, c.want)
		}
	}
}

func TestNeedWords(t *testing.T) {
	for _, c := range []struct {
		week view.Week
		want string
	}{
		{view.Week{NeedsTotal: 3}, "3 units"},
		{view.Week{NeedsTotal: 3, NeedsMet: 1, Plan: &view.Plan{}}, "1 of 3 met"},
	} {
		if got := needCount(c.week); got != c.want {
			t.Errorf("count %q, want %q", got, c.want)
		}
	}
	if got := noNeeds(view.Week{}); got != "Nothing is due in this week." {
		t.Errorf("empty list says %q", got)
	}
	for _, w := range []view.Week{{Query: "x", NeedsTotal: 9}, {Show: "met", NeedsTotal: 9}} {
		if got := noNeeds(w); !strings.Contains(got, "all 9 units") {
			t.Errorf("a search without matches says %q, and not how to see all", got)
		}
	}
}
