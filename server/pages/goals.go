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
// what can be earned from now on, soon the end of the week.
func goalRows(c *scheduler.Campaign, src *scheduler.Source, set *units.Set, now, soon time.Time) []view.GoalRow {
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
			orbitsHad(&row, set, u, c.PhaseGoals[at].Windows, soon)
		default:
			sinceLast(&row, u, now, soon)
		}
		rows = append(rows, row)
	})
	return rows
}

// dueAt is when a goal with due windows is due next, or was due and has not
// been satisfied since: an interval after the scan that satisfied it last. A
// goal that never was satisfied is due now.
func dueAt(g *units.Goal, now time.Time) time.Time {
	if !g.Had {
		return now
	}
	return units.Instant(g.Last + g.EveryMin)
}

// sinceLast says how long ago a goal with due windows was last satisfied, and
// when it is or was due.
func sinceLast(row *view.GoalRow, g *units.Goal, now, soon time.Time) {
	row.Due = dueAt(g, now)
	if !g.Had {
		row.State, row.Standing = view.GoalLate, "never had"
		return
	}
	row.Standing = "last " + view.Days(units.Instant(g.Last), now)
	switch {
	case row.Due.Before(now):
		row.State = view.GoalLate
		row.Standing += ", late by " + days(math.Round(now.Sub(row.Due).Hours()/24*10)/10)
	case row.Due.Before(soon):
		row.State = view.GoalDue
	default:
		row.State = view.GoalMet
	}
}

// orbitsHad says how many of the wanted orbits a phase goal has, and when the
// next of its windows that still wants one is passed.
func orbitsHad(row *view.GoalRow, set *units.Set, g *units.Goal, windows []scheduler.PhaseWindow, soon time.Time) {
	need, remaining := 0, 0
	for _, w := range windows {
		need += w.Need
	}
	for _, ui := range g.Units {
		u := &set.Units[ui]
		remaining += orbitsLeft(g, u, windows[u.K].Need)
		if len(u.Passages) > 0 {
			at := units.Instant(max(u.Passages[0].Enter, set.From)) // one may be under way
			if row.Due.IsZero() || at.Before(row.Due) {
				row.Due = at
			}
		}
	}
	row.Standing = fmt.Sprintf("%d of %d orbits had", need-remaining, need)
	switch {
	case remaining == 0:
		row.State = view.GoalMet
	case row.Due.IsZero():
		row.State = view.GoalOpen
		row.Standing += ", no passage within four weeks"
	case row.Due.Before(soon):
		row.State = view.GoalDue
	default:
		row.State = view.GoalOpen
	}
}

// orbitsLeft is how many of the orbits that a window needs are still wanted: a
// unit is worth the priority times what remains over what is needed.
func orbitsLeft(g *units.Goal, u *units.Unit, need int) int {
	return int(math.Round(u.Value / g.Priority * float64(need)))
}
