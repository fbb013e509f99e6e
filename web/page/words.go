package page

import (
	"fmt"
	"net/url"
	"strconv"
	"strings"
	"time"

	"cadencewright/web/view"
)

// id is a number of the database in an address.
func id(n int64) string { return strconv.FormatInt(n, 10) }

// weekPath is the page of a week.
func weekPath(week string) string { return "/weeks/" + url.PathEscape(week) }

// weekAction is a form's address under a week.
func weekAction(week, action string) string { return weekPath(week) + "/" + action }

func sourcePath(name string) string    { return "/sources/" + url.PathEscape(name) }
func telescopePath(code string) string { return "/telescopes/" + url.PathEscape(code) }

// nightPath is the run sheet of a night.
func nightPath(code, night string) string {
	return telescopePath(code) + "/nights/" + url.PathEscape(night)
}

// planPath is a week with one of its plans.
func planPath(week string, plan int64) string { return weekPath(week) + "?plan=" + id(plan) }

// planName names a plan in a sentence.
func planName(p view.Plan) string {
	if p.State == view.Draft {
		return "Draft " + id(p.ID)
	}
	return "Revision " + strconv.Itoa(p.Revision)
}

// planStory says where a plan stands, in a sentence.
func planStory(p view.Plan) string {
	switch p.State {
	case view.Draft:
		return "made " + view.Moment(p.MadeAt) + " UTC" + by(p.MadeBy) + ", not issued: telescopes do not see it"
	case view.Superseded:
		s := "issued " + view.Moment(p.IssuedAt) + " UTC" + by(p.IssuedBy)
		if p.SupersededBy > 0 {
			s += ", superseded by revision " + strconv.Itoa(p.SupersededBy)
		}
		return s
	}
	return "issued " + view.Moment(p.IssuedAt) + " UTC" + by(p.IssuedBy) + ": telescopes observe it"
}

func by(name string) string {
	if name == "" {
		return ""
	}
	return " by " + name
}

// verdict says what score, bound and gap mean for this plan.
func verdict(p view.Plan) string {
	if p.Possible <= 0 {
		return "Nothing is due in this week, so there is nothing to earn."
	}
	s := "It earns " + view.Percent(p.Score/p.Possible) + " of the weight of all that is due. "
	more := view.Figure(p.Bound - p.Score)
	switch gap := p.Gap(); {
	case gap < 5e-4:
		s += "It is the best possible plan for these blocks, or nearer to it than 0.05 %."
	case gap < 0.02:
		s += "It is near the best possible: another plan could gain " + more + " at the very most."
	default:
		s += "Another plan could gain " + more + " at the very most; often the bound is too high and the best plan nearer."
	}
	return s
}

// needMark is a sign for a need's state, so that colour is never alone.
func needMark(s view.NeedState) string {
	switch s {
	case view.NeedMet:
		return "●"
	case view.NeedPartly:
		return "◐"
	case view.NeedUnmet:
		return "○"
	}
	return "·"
}

// needWord says a need's state.
func needWord(s view.NeedState) string {
	switch s {
	case view.NeedMet:
		return "met"
	case view.NeedPartly:
		return "partly met"
	case view.NeedUnmet:
		return "unmet"
	}
	return "no plan yet"
}

// day is the blocks of a week that start on one UTC day.
type day struct {
	At     time.Time
	Blocks []view.BlockRow
	Scans  int
}

// byDay groups blocks by the UTC day they start on, in the order they come.
func byDay(blocks []view.BlockRow) []day {
	var days []day
	for _, b := range blocks {
		at := b.Start.UTC().Truncate(24 * time.Hour)
		if n := len(days); n == 0 || !days[n-1].At.Equal(at) {
			days = append(days, day{At: at})
		}
		d := &days[len(days)-1]
		d.Blocks = append(d.Blocks, b)
		d.Scans += len(b.Scans)
	}
	return days
}

// jobLine says how a job stands.
func jobLine(j *view.Job) string {
	switch j.State {
	case view.JobQueued:
		return "Planning waits for its turn."
	case view.JobRunning:
		if j.Stopping {
			return "Stopping; the best plan so far is kept."
		}
		return "Planning: " + strconv.Itoa(int(100*j.Done+0.5)) + " % of the effort done."
	case view.JobDone:
		return "Planning has ended; a new draft is there."
	case view.JobStopped:
		if j.Score <= 0 {
			return "Planning was stopped before there was a plan."
		}
		return "Planning was stopped; the best plan found until then is kept as a draft."
	}
	return "Planning failed: " + j.Problem
}

// jobFigures says what a job has found.
func jobFigures(j *view.Job) string {
	if j.Score <= 0 && j.Bound <= 0 {
		return "No plan found yet."
	}
	s := "Best score so far " + view.Figure(j.Score)
	if j.Bound > 0 {
		s += ", bound " + view.Figure(j.Bound)
		if j.Bound > j.Score {
			s += ", gap " + view.Percent((j.Bound-j.Score)/j.Bound)
		}
	}
	return s + "."
}

// sourceWord says a source's state.
func sourceWord(s view.SourceState) string {
	switch s {
	case view.SourceDue:
		return "due this week"
	case view.SourceLate:
		return "overdue"
	case view.SourcePlanned:
		return "due, planned"
	case view.SourceIdle:
		return "no goal"
	}
	return "fine"
}

// goalWord says a goal's state.
func goalWord(s view.GoalState) string {
	switch s {
	case view.GoalDue:
		return "due this week"
	case view.GoalLate:
		return "overdue"
	case view.GoalOpen:
		return "open"
	}
	return "met"
}

// lines joins what a run sheet says of a pointing.
func pointing(p view.Pointing) string {
	s := "az " + view.Degrees(p.AzDeg) + ", el " + view.Degrees(p.ElDeg) + ", HA " + view.Fixed(p.HAH, 2) + " h"
	if p.MotorAzDeg != nil {
		s += fmt.Sprintf(", drive %s (turn %d)", view.Degrees(*p.MotorAzDeg), p.Turn)
	}
	return strings.ReplaceAll(s, "-", "−")
}

// snr is a predicted signal-to-noise ratio.
func snr(x float64) string {
	if x <= 0 {
		return "not detectable"
	}
	return view.Figure(x)
}

// zoneName names a zone; UTC where there is none.
func zoneName(z *time.Location) string {
	if z == nil {
		return "UTC"
	}
	return z.String()
}

// all says which telescopes a goal may use.
func all(codes []string) string {
	if len(codes) == 0 {
		return "any"
	}
	return strings.Join(codes, ", ")
}

// needCount says how much of what is due is met.
func needCount(v view.Week) string {
	if v.Plan == nil {
		return view.Plural(v.NeedsTotal, "unit")
	}
	return strconv.Itoa(v.NeedsMet) + " of " + strconv.Itoa(v.NeedsTotal) + " met"
}

// noNeeds says why the list is empty.
func noNeeds(v view.Week) string {
	if v.Query != "" || v.Show != "" {
		return "Nothing that is due matches. Empty the search to see all " + view.Plural(v.NeedsTotal, "unit") + "."
	}
	return "Nothing is due in this week."
}

// query escapes a value for the query of an address.
func query(s string) string { return url.QueryEscape(s) }

// minutes joins lengths.
func minutes(ms []int) string {
	if len(ms) == 0 {
		return view.None
	}
	words := make([]string, len(ms))
	for i, m := range ms {
		words[i] = strconv.Itoa(m)
	}
	return strings.Join(words, ", ")
}

// slew says how long the drives need to come to a scan.
func slew(s view.SheetScan) string {
	if s.Begins {
		return "from anywhere: first of the block, or after lost time"
	}
	return view.Figure(s.SlewS) + " s from the scan before"
}

// sheetPlan names the plan of a run sheet.
func sheetPlan(v view.RunSheet) string {
	if v.PlanRevision == 0 {
		return "none issued"
	}
	return "week " + v.PlanWeek + ", revision " + strconv.Itoa(v.PlanRevision) + ", issued " + view.Moment(v.IssuedAt) + " UTC" + by(v.IssuedBy)
}

// sunLimit is a source's own limit; the telescopes have theirs besides.
func sunLimit(deg float64) string {
	if deg <= 0 {
		return "as the telescope says"
	}
	return view.Degrees(deg)
}
