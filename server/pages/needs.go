package pages

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"cadencewright/scheduler"
	"cadencewright/scheduler/units"
	"cadencewright/web/view"
)

// needs fills the list of what is due: each unit of the week, what the plan
// shown gives it, and why not.
func needs(v *view.Week, c *scheduler.Campaign, set *units.Set, shown *shownPlan) {
	earned := map[string][]view.NeedScan{}
	value := map[string]float64{}
	for i := range shown.scans {
		x := &shown.scans[i]
		for _, e := range x.Earns {
			earned[e.Unit] = append(earned[e.Unit], view.NeedScan{ID: x.ID, Telescope: x.Telescope, Receiver: x.Receiver, Start: x.Start, Minutes: x.Minutes, Value: e.Value, State: x.State})
			value[e.Unit] += e.Value
		}
	}
	why := map[string][]scheduler.Reason{}
	if shown.plan != nil {
		for _, u := range shown.plan.Unmet {
			why[u.Unit] = u.Reasons
		}
	}
	ix := scheduler.NewIndex(c)
	for i := range set.Units {
		u := &set.Units[i]
		g := &set.Goals[u.Goal]
		n := view.Need{Goal: g.ID, Unit: u.Name, Kind: kindWords(g.Kind), Source: c.Sources[g.Source].Name, Bands: ix.Goal(g.ID).Bands,
			Weight: u.Weight, Value: value[u.Name], Scans: earned[u.Name], What: what(c, set, g, u)}
		if u.Passages == nil && g.Kind != scheduler.KindPhase {
			n.Due = units.Instant(u.Due)
		}
		for _, r := range why[u.Name] {
			n.Reasons = append(n.Reasons, typeset(r.Text))
		}
		n.State = standing(shown, &n, u, len(why[u.Name]) > 0 || unmet(shown.plan, u.Name))
		v.NeedsTotal++
		if n.State == view.NeedMet {
			v.NeedsMet++
		}
		if wanted(v, &n) {
			v.Needs = append(v.Needs, n)
		}
	}
	slices.SortStableFunc(v.Needs, func(a, b view.Need) int {
		switch {
		case a.Weight > b.Weight:
			return -1
		case a.Weight < b.Weight:
			return 1
		}
		return strings.Compare(a.Unit, b.Unit)
	})
}

func unmet(p *scheduler.Plan, unit string) bool {
	if p == nil {
		return false
	}
	for _, u := range p.Unmet {
		if u.Unit == unit {
			return true
		}
	}
	return false
}

// standing is how a unit does in the plan shown: met where it earns nearly all
// it can.
func standing(shown *shownPlan, n *view.Need, u *units.Unit, isUnmet bool) view.NeedState {
	switch {
	case shown.plan == nil:
		return view.NeedOpen
	case n.Value <= 0:
		return view.NeedUnmet
	case isUnmet || n.Value < 0.5*u.Weight:
		return view.NeedPartly
	}
	return view.NeedMet
}

// wanted tells whether the search and the filter let a need through.
func wanted(v *view.Week, n *view.Need) bool {
	switch v.Show {
	case "unmet":
		if n.State == view.NeedMet {
			return false
		}
	case "met":
		if n.State != view.NeedMet {
			return false
		}
	}
	return v.Query == "" || holds(n.Source+" "+n.Goal+" "+n.Kind+" "+strings.Join(n.Bands, " "), v.Query)
}

func kindWords(k scheduler.GoalKind) string {
	if k == scheduler.KindBandPair {
		return "band pair"
	}
	return string(k)
}

// what says in words what a unit asks for.
func what(c *scheduler.Campaign, set *units.Set, g *units.Goal, u *units.Unit) string {
	switch g.Kind {
	case scheduler.KindCadence:
		s := "every " + days(g.EveryMin/1440)
		if g.TOAUs > 0 {
			s += fmt.Sprintf(", to %.3g µs", g.TOAUs)
		}
		return s + urgency(set, g, u)
	case scheduler.KindOverlap:
		return fmt.Sprintf("%d telescopes at once for %g min, every %s", g.Count, g.OverlapMin, days(g.EveryMin/1440)) + urgency(set, g, u)
	case scheduler.KindBandPair:
		return fmt.Sprintf("both bands within %g h, every %s", g.WithinMin/60, days(g.EveryMin/1440)) + urgency(set, g, u)
	}
	for i := range c.PhaseGoals {
		if p := &c.PhaseGoals[i]; p.ID == g.ID {
			w := p.Windows[u.K]
			return fmt.Sprintf("phase %.3f to %.3f from %s, %g min or the whole passage; %d of %d orbits wanted here", w.From, w.To, p.Reference, p.DwellMin, u.N, w.Need)
		}
	}
	return "a window of orbital phase"
}

func days(d float64) string {
	if d == math.Trunc(d) {
		return fmt.Sprintf("%d d", int(d))
	}
	return fmt.Sprintf("%.3g d", d)
}

// urgency says how late a first window is, which makes it weigh more.
func urgency(set *units.Set, g *units.Goal, u *units.Unit) string {
	switch late := set.From - g.Last - g.EveryMin; {
	case u.K != 1:
		return ""
	case !g.Had:
		return "; never had"
	case late > g.EveryMin/1000:
		return "; overdue by " + days(math.Round(late/144)/10)
	}
	return ""
}
