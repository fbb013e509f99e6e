package main

import (
	"fmt"
	"strings"
	"time"

	"cadencewright/scheduler"
	"cadencewright/scheduler/compare"
	"cadencewright/scheduler/solve"
)

// start says what is planned: a horizon from nothing, or the rest of a plan
// that is under way.
func (q *planQuestion) start(std stdio, c *scheduler.Campaign) (*solve.Replan, scheduler.Horizon, error) {
	if q.at == "" {
		h, err := q.horizon.horizon(c)
		return nil, h, err
	}
	var none scheduler.Horizon
	if q.horizon.from == "" || q.horizon.week != "" || q.horizon.to != "" {
		return nil, none, usagef("--at goes with --from and the file of a plan, and without --week and --to: the stretch of time is the plan's")
	}
	at, err := parseInstant("at", q.at, time.Time{})
	if err != nil {
		return nil, none, err
	}
	p, err := readPlan(std, q.horizon.from)
	if err != nil {
		return nil, none, err
	}
	// Names of campaigns are not unique, but another name is a mistake.
	if p.Campaign != c.Name {
		return nil, none, inputError{fmt.Errorf("plan %s was made for campaign %q, this one is %q", q.horizon.from, p.Campaign, c.Name)}
	}
	stability := q.stability
	if stability == 0 {
		stability = -1 // the solver takes 0 for its default
	}
	return &solve.Replan{From: p, At: at, Stability: stability}, scheduler.Horizon{From: p.From, To: p.To}, nil
}

// mostChanges is how many changed scans are listed for people.
const mostChanges = 40

// changesText says what a new plan changes in the one under way.
func changesText(r *compare.Report) string {
	var b strings.Builder
	fmt.Fprintf(&b, "%d scans had begun; of %d later ones %d stay, %d move, %d go, and %d come; score %+.3f\n",
		r.Begun, r.Later(), len(r.Kept), len(r.Moved), len(r.Dropped), len(r.Added), r.Score)
	n := 0
	line := func(format string, args ...any) {
		if n++; n <= mostChanges {
			fmt.Fprintf(&b, format, args...)
		}
	}
	for _, m := range r.Moved {
		line("  moves: %s: was %s with %s for %d min, now %s with %s for %d min\n", place(m.Before), clock(m.Before), m.Before.Receiver, m.Before.Minutes,
			clock(m.After), m.After.Receiver, m.After.Minutes)
	}
	for _, s := range r.Dropped {
		line("  goes:  %s, %s with %s for %d min\n", place(s), clock(s), s.Receiver, s.Minutes)
	}
	for _, s := range r.Added {
		line("  comes: %s, %s with %s for %d min\n", place(s), clock(s), s.Receiver, s.Minutes)
	}
	if n > mostChanges {
		fmt.Fprintf(&b, "  and %d more\n", n-mostChanges)
	}
	var lost, gained []string
	for _, u := range r.Units {
		switch {
		case u.Lost():
			lost = append(lost, u.Unit)
		case u.Gained():
			gained = append(gained, u.Unit)
		}
	}
	fmt.Fprintf(&b, "units lost: %s\nunits gained: %s\n", listed(lost), listed(gained))
	return b.String()
}

func place(s compare.PlannedRef) string { return s.Source + " in block " + s.Block }

func clock(s compare.PlannedRef) string { return s.Start.Format(minuteLayout) }

// listed is a list of names in one line, or a word for none.
func listed(names []string) string {
	if len(names) == 0 {
		return "none"
	}
	if len(names) > mostChanges {
		return strings.Join(names[:mostChanges], ", ") + fmt.Sprintf(" and %d more", len(names)-mostChanges)
	}
	return strings.Join(names, ", ")
}
