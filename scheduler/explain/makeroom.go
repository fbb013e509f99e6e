package explain

import (
	"fmt"
	"time"

	"cadencewright/scheduler"
	"cadencewright/scheduler/edit"
)

// inPlan is the plan's change that meets the unit at the least cost, where the
// search for reasons has found one.
func (a *adviser) inPlan(q *question) (Suggestion, bool) {
	if q.best == nil || len(q.best.options) == 0 {
		return Suggestion{}, false
	}
	s := Suggestion{Kind: Insert, Unit: q.unit.Name, Add: q.added(q.best)}
	for _, x := range q.best.displaced {
		s.Kind = MakeRoom
		s.Drop = append(s.Drop, *x.scan)
	}
	// The search for reasons counts what scans earn as the plan lists it; what is
	// really gained and lost comes from trying it.
	o, met := a.tried(&s)
	if !met {
		return s, false
	}
	s.Gain = o.Score - o.Before
	if s.Kind == Insert {
		s.Text = sentence("To meet it, add %s: %s.", q.best.fresh(), signed(s.Gain))
		return s, true
	}
	a.keep(&s)
	s.Text = sentence("To meet it, %s, and add %s: %s.", a.madeRoom(q, &s), q.best.fresh(), signed(s.Gain))
	return s, true
}

// tried is what a suggestion does to the plan, and whether it meets its unit.
func (a *adviser) tried(s *Suggestion) (*edit.Outcome, bool) {
	changes, err := s.changes(a.whole)
	if err != nil {
		return nil, false
	}
	return meets(a.session, s.Unit, changes)
}

// keep moves scans that were to be dropped, where they have room elsewhere in
// their blocks and the plan is then worth more.
func (a *adviser) keep(s *Suggestion) {
	// One after the other: where one goes decides what room the next has.
	for i := 0; i < len(s.Drop); {
		if better, ok := a.moved(s, i); ok {
			*s = better
		} else {
			i++
		}
	}
}

// moved is the suggestion with the i-th scan moved instead of dropped, to the
// end of a range of possible starts that is best: the least move is to one.
func (a *adviser) moved(s *Suggestion, i int) (Suggestion, bool) {
	x := s.Drop[i]
	attempt := func(start time.Time) (Suggestion, bool) {
		t := *s
		t.Drop = append(append([]scheduler.Scan(nil), s.Drop[:i]...), s.Drop[i+1:]...)
		t.Move = append(append([]Moved(nil), s.Move...), Moved{x, start})
		o, met := a.tried(&t)
		if met {
			t.Gain = o.Score - o.Before
		}
		return t, met
	}
	best, found := *s, false
	for _, r := range a.startsOf(s, x) {
		for _, start := range []time.Time{r.First, r.Last} {
			if t, met := attempt(start); met && t.Gain > best.Gain+1e-9 {
				best, found = t, true
			}
		}
	}
	return best, found
}

// startsOf are the starts that a scan to be dropped could have with all else
// that is suggested.
func (a *adviser) startsOf(s *Suggestion, x scheduler.Scan) []edit.Range {
	changes, err := s.changes(a.whole)
	if err != nil {
		return nil
	}
	// As the last scan made, it is the one whose starts are told.
	changes = append(changes, edit.Add(x.Block, x.Source, x.Receiver, x.Start, x.Minutes))
	o, err := a.session.Try(changes...)
	if err != nil {
		return nil
	}
	return o.Starts
}

// madeRoom says what is moved and dropped.
func (a *adviser) madeRoom(q *question, s *Suggestion) string {
	var parts []string
	for _, m := range s.Move {
		parts = append(parts, fmt.Sprintf("move %s from %s to %s", m.Scan.Source, m.Scan.Start.Format("15:04"), m.Start.Format("15:04 UTC")))
	}
	var dropped []*planned
	for _, x := range q.best.displaced {
		for i := range s.Drop {
			if sameScan(x.scan, &s.Drop[i]) {
				dropped = append(dropped, x)
			}
		}
	}
	if len(dropped) > 0 {
		parts = append(parts, "drop "+q.listed(dropped))
	}
	return both(parts)
}
