// Package compare says what a new plan changes in an earlier one for the same
// blocks: which scans stay, move, go and come, and which units are lost and
// regained.
package compare

import (
	"cmp"
	"slices"
	"time"

	"cadencewright/scheduler"
)

// Report is what changed between two plans.
type Report struct {
	Begun   int          // scans that began before the instant and stand in both
	Kept    []PlannedRef // later scans that stand in both as they were
	Moved   []Move       // of a source within its block: another start, length or receiver
	Dropped []PlannedRef // scans of the earlier plan that are gone
	Added   []PlannedRef // scans that are new
	Units   []UnitChange // in order of their names
	// Score is the new plan's less the earlier one's.
	Score float64
}

// PlannedRef names a scan of a plan.
type PlannedRef struct {
	Block, Telescope, Source, Receiver string
	Start                              time.Time
	Minutes                            int
}

// Move is a scan that was changed.
type Move struct{ Before, After PlannedRef }

// UnitChange is a unit that earns another value than it did.
type UnitChange struct {
	Goal, Unit    string
	Before, After float64 // value earned, 0 where unmet
}

// Later is how many scans of the earlier plan had not begun.
func (r *Report) Later() int { return len(r.Kept) + len(r.Moved) + len(r.Dropped) }

// Lost reports whether the unit earned before and does not now.
func (u UnitChange) Lost() bool { return u.Before > 0 && u.After <= 0 }

// Gained reports whether the unit earns now and did not before.
func (u UnitChange) Gained() bool { return u.Before <= 0 && u.After > 0 }

// Plans compares two plans at an instant; scans that began before it and stand
// in both are only counted.
func Plans(before, after *scheduler.Plan, at time.Time) *Report {
	r := &Report{Score: after.Score - before.Score}
	taken := make([]bool, len(after.Scans))
	var left []PlannedRef
	for i := range before.Scans {
		x := ref(&before.Scans[i])
		j := match(after.Scans, taken, func(y PlannedRef) bool { return x.same(y) })
		switch {
		case j < 0:
			left = append(left, x)
		case x.Start.Before(at):
			r.Begun++
		default:
			r.Kept = append(r.Kept, x)
		}
	}
	for _, x := range left {
		j := match(after.Scans, taken, func(y PlannedRef) bool { return x.Block == y.Block && x.Source == y.Source })
		if j < 0 {
			r.Dropped = append(r.Dropped, x)
			continue
		}
		r.Moved = append(r.Moved, Move{x, ref(&after.Scans[j])})
	}
	for i := range after.Scans {
		if !taken[i] {
			r.Added = append(r.Added, ref(&after.Scans[i]))
		}
	}
	r.Units = unitChanges(before, after)
	return r
}

// match finds and takes the first scan not yet taken that fits; -1 if none does.
func match(scans []scheduler.Scan, taken []bool, fits func(PlannedRef) bool) int {
	for i := range scans {
		if !taken[i] && fits(ref(&scans[i])) {
			taken[i] = true
			return i
		}
	}
	return -1
}

func ref(s *scheduler.Scan) PlannedRef {
	return PlannedRef{s.Block, s.Telescope, s.Source, s.Receiver, s.Start.UTC(), s.Minutes}
}

func (p PlannedRef) same(o PlannedRef) bool {
	return p.Block == o.Block && p.Source == o.Source && p.Receiver == o.Receiver && p.Start.Equal(o.Start) && p.Minutes == o.Minutes
}

// leastChange is the difference of a unit's value below which nothing is told:
// sums of shares differ in their last digits.
const leastChange = 1e-6

func unitChanges(before, after *scheduler.Plan) []UnitChange {
	units := map[string]*UnitChange{}
	add := func(p *scheduler.Plan, to func(*UnitChange) *float64) {
		for i := range p.Scans {
			for _, e := range p.Scans[i].Earns {
				u := units[e.Unit]
				if u == nil {
					u = &UnitChange{Goal: e.Goal, Unit: e.Unit}
					units[e.Unit] = u
				}
				*to(u) += e.Value
			}
		}
	}
	add(before, func(u *UnitChange) *float64 { return &u.Before })
	add(after, func(u *UnitChange) *float64 { return &u.After })
	var list []UnitChange
	for _, u := range units {
		if d := u.After - u.Before; d > leastChange || d < -leastChange {
			list = append(list, *u)
		}
	}
	slices.SortFunc(list, func(a, b UnitChange) int { return cmp.Compare(a.Unit, b.Unit) })
	return list
}
