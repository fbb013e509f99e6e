package explain

import (
	"time"

	"cadencewright/astro/orbit"
	"cadencewright/scheduler"
	"cadencewright/scheduler/units"
)

// noPassage notes that the orbit is elsewhere for all of the horizon, and when
// it comes to the window next.
func (q *question) noPassage() {
	then := ""
	if next, ok := q.nextPassage(); ok {
		then = sentence("; the next passage is from %s to %s", clock(next.Enter), clock(next.Leave))
	}
	q.foundWhole(NoPassage, "The orbit of %.4g d does not pass %s in this horizon in an orbit that is still wanted%s.",
		q.source.Binary.PbD, q.window(), then)
}

// nextPassage is the first passage after the horizon, within two orbits.
func (q *question) nextPassage() (units.Passage, bool) {
	goal := q.phaseGoal()
	if goal == nil || q.unit.K >= len(goal.Windows) {
		return units.Passage{}, false
	}
	elements, err := q.source.Binary.Elements()
	if err != nil {
		return units.Passage{}, false
	}
	w, from := goal.Windows[q.unit.K], q.Horizon.To
	// In two orbits it passes at least once whole.
	to := from.Add(time.Duration(2 * q.source.Binary.PbD * 24 * float64(time.Hour)))
	if limit := scheduler.EndInstant.Add(-48 * time.Hour); to.After(limit) {
		to = limit
	}
	list, err := elements.Passages(goal.Reference.Point(), q.source.Star(), w.From, w.To, from, to)
	if err != nil {
		return units.Passage{}, false
	}
	for _, p := range list {
		if !p.Enter.Before(from) {
			return passageOf(p), true
		}
	}
	return units.Passage{}, false
}

func passageOf(p orbit.Passage) units.Passage {
	return units.Passage{Orbit: p.Orbit, Enter: units.Minutes(p.Enter), Leave: units.Minutes(p.Leave)}
}

// phaseGoal is the goal as the campaign has it.
func (q *question) phaseGoal() *scheduler.PhaseGoal {
	for i := range q.Campaign.PhaseGoals {
		if q.Campaign.PhaseGoals[i].ID == q.goal.ID {
			return &q.Campaign.PhaseGoals[i]
		}
	}
	return nil
}

// window is the phase window in words.
func (q *question) window() string {
	goal := q.phaseGoal()
	if goal == nil || q.unit.K >= len(goal.Windows) {
		return "the window"
	}
	w := goal.Windows[q.unit.K]
	return sentence("phase %.3g to %.3g from %s", w.From, w.To, goal.Reference)
}
