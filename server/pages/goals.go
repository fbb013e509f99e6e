package pages

import (
	"fmt"
	"math"
	"time"

	"cadencewright/scheduler"
	"cadencewright/scheduler/units"
	"cadencewright/web/view"
)

// goalRows are the goals that name a source, and how each stands now. set is
// what can be earned from now on.
func goalRows(c *scheduler.Campaign, src *scheduler.Source, set *units.Set, now time.Time) []view.GoalRow {
	byID := map[string]*units.Goal{}
	for i := range set.Goals {
		byID[set.Goals[i].ID] = &set.Goals[i]
	}
	var rows []view.GoalRow
	c.EachGoal(func(kind scheduler.GoalKind, at int, g *scheduler.Goal) {
		if g.Source != src.Name {
			return
		}
		row := view.GoalRow{ID: g.ID, Kind: kindWords(kind), Bands: g.Bands, Telescopes: g.Telescopes, Priority: g.Priority, Wants: goalWords(c, g.ID)}
		switch u := byID[g.ID]; {
		case u == nil:
		case kind == scheduler.KindPhase:
			row.Standing, row.Due = orbitsHad(set, u, c.PhaseGoals[at].Windows)
		default:
			row.Standing, row.Due = sinceLast(set, u, now)
		}
		rows = append(rows, row)
	})
	return rows
}

// sinceLast says how long ago a goal with due windows was last satisfied, and
// when it is due. Of what was overdue by two intervals or more the urgency does
// not tell how long ago.
func sinceLast(set *units.Set, g *units.Goal, now time.Time) (string, time.Time) {
	every := g.EveryMin / (24 * 60)
	if len(g.Units) == 0 {
		return "had; not due within four weeks", time.Time{}
	}
	u := &set.Units[g.Units[0]]
	due := units.Instant(u.Due)
	switch urgency := u.Weight / g.Priority; {
	case urgency > 3-1e-9:
		return fmt.Sprintf("never had, or overdue by %.3g days or more", 2*every), due
	case urgency > 1+1e-9:
		late := (urgency - 1) * every
		return fmt.Sprintf("%.1f days since the last: overdue by %.1f", every+late, late), due
	}
	// Due in time: the last one was an interval before.
	return fmt.Sprintf("%.1f days since the last", max(0, every-due.Sub(now).Hours()/24)), due
}

// orbitsHad says how many of the wanted orbits a phase goal has, and when the
// next of its windows that still wants one is passed.
func orbitsHad(set *units.Set, g *units.Goal, windows []scheduler.PhaseWindow) (string, time.Time) {
	need, remaining := 0, 0
	for _, w := range windows {
		need += w.Need
	}
	var next time.Time
	for _, ui := range g.Units {
		u := &set.Units[ui]
		// A unit's value is the priority times what remains over what is needed.
		remaining += int(math.Round(u.Value / g.Priority * float64(windows[u.K].Need)))
		if len(u.Passages) > 0 {
			if at := units.Instant(u.Passages[0].Enter); next.IsZero() || at.Before(next) {
				next = at
			}
		}
	}
	text := fmt.Sprintf("%d of %d orbits had", need-remaining, need)
	if remaining > 0 && next.IsZero() {
		text += ", no passage within four weeks"
	}
	return text, next
}
