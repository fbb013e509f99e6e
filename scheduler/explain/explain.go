// Package explain says why a unit of a plan is unmet, in words and figures
// that a person can act on.
//
// It goes through all blocks of the horizon and finds for each how far it gets
// on the way to a scan that would serve the unit: a receiver of a wanted band,
// a pulse that can be seen, the time in which it counts, the sky, free time,
// precision or phase, a partner. Blocks that fail alike make one reason, told
// by the one that comes nearest. Where scans are possible, the reason is what
// stands in their place, and what that earns.
//
// A reason is about the plan and the campaign as they are. It needs the
// planner's own view of the horizon (package feasible), so that it speaks of
// the same candidates.
package explain

import (
	"cmp"
	"slices"

	"cadencewright/scheduler"
	"cadencewright/scheduler/feasible"
	"cadencewright/scheduler/units"
)

// The causes, from the furthest from a scan to the nearest. Reasons of a unit
// come in the opposite order: what is nearest to being met first.
const (
	Suggested     scheduler.ReasonCode = "suggestion"     // no cause, but a change that would meet it; comes last
	NoBlock       scheduler.ReasonCode = "no_block"       // no telescope that may serve it has a block
	NoReceiver    scheduler.ReasonCode = "no_receiver"    // blocks have no receiver of a wanted band
	NotDetectable scheduler.ReasonCode = "not_detectable" // the pulse is too broad to be seen
	OutsideWindow scheduler.ReasonCode = "outside_window" // blocks are not in the time in which it counts
	TooLow        scheduler.ReasonCode = "too_low"        // never above the elevation limit or the horizon
	TooHigh       scheduler.ReasonCode = "too_high"       // only above the highest elevation
	NearSun       scheduler.ReasonCode = "near_sun"
	OffMount      scheduler.ReasonCode = "off_mount" // outside the hour angle range or the transit track
	TooShort      scheduler.ReasonCode = "too_short" // up for less than the shortest scan
	NoTime        scheduler.ReasonCode = "no_time"   // setup, lost parts and pins leave less than that while it is up
	CableWrap     scheduler.ReasonCode = "cable_wrap"
	Precision     scheduler.ReasonCode = "precision"  // the wanted uncertainty is out of reach
	NoPassage     scheduler.ReasonCode = "no_passage" // the orbit does not pass the window in the horizon
	Phase         scheduler.ReasonCode = "phase"      // no block meets a passage
	NoOverlap     scheduler.ReasonCode = "no_overlap" // too few telescopes at once
	NoPair        scheduler.ReasonCode = "no_pair"    // the two bands are too far apart in time
	TooClose      scheduler.ReasonCode = "too_close"  // less than half an interval from a neighbouring window's scan
	Displaced     scheduler.ReasonCode = "displaced"  // other scans stand in its place
	Fits          scheduler.ReasonCode = "fits"       // there is room: the plan can be bettered
)

// stages is the order of the causes.
var stages = func() map[scheduler.ReasonCode]int {
	order := map[scheduler.ReasonCode]int{}
	for i, code := range []scheduler.ReasonCode{Suggested, NoBlock, NoReceiver, NotDetectable, OutsideWindow, TooLow, TooHigh, NearSun, OffMount,
		TooShort, NoTime, CableWrap, Precision, NoPassage, Phase, NoOverlap, NoPair, TooClose, Displaced, Fits} {
		order[code] = i
	}
	return order
}()

// Unmet lists the units that the plan earns fewer times than it could, in the
// order of the problem's units, each with its reasons and then up to three
// changes that would meet it. Scans and earnings of the plan that do not belong
// to the problem count for nothing. Where very many units are unmet, changes of
// the campaign are looked for only for those that weigh most; Suggest has them
// for each.
func Unmet(p *feasible.Problem, plan *scheduler.Plan) []scheduler.Unmet {
	return unmet(p, plan, mostReasons)
}

// unmet is Unmet with up to most suggestions for each unit.
func unmet(p *feasible.Problem, plan *scheduler.Plan, most int) []scheduler.Unmet {
	e := newExplainer(p, plan)
	a := &adviser{explainer: e}
	if most > 0 {
		a = e.newAdviser()
	}
	deep := e.weightiest(e.explored())
	var list []scheduler.Unmet
	for ui := range p.Units.Units {
		u := &p.Units.Units[ui]
		if e.times(ui) >= u.N {
			continue
		}
		q := e.question(ui)
		q.look()
		reasons := q.summary()
		for _, s := range a.suggest(q, most, deep[ui]) {
			if s.Kind != Insert { // the reason says so already
				reasons = append(reasons, scheduler.Reason{Code: Suggested, Text: s.Text})
			}
		}
		list = append(list, scheduler.Unmet{Goal: p.Units.Goals[u.Goal].ID, Unit: u.Name, Weight: u.Weight, Reasons: reasons})
	}
	return list
}

// mostReasons are the suggestions for one unit in a plan.
const mostReasons = 3

// explored is for how many units changes of the campaign are looked for. Each
// costs in proportion to the grid instants of all blocks: of some thirty
// thousand, which is a week of six telescopes, 10 to 20 ms.
func (e *explainer) explored() int {
	const least, most, instants = 5, 60, 2_000_000
	n := 1
	for i := range e.Blocks {
		n += e.Blocks[i].Steps
	}
	return min(max(instants/n, least), most)
}

// weightiest are the unmet units that weigh most.
func (e *explainer) weightiest(most int) map[int]bool {
	var list []int
	for ui := range e.Units.Units {
		if e.times(ui) < e.Units.Units[ui].N {
			list = append(list, ui)
		}
	}
	slices.SortStableFunc(list, func(a, b int) int { return cmp.Compare(e.Units.Units[b].Weight, e.Units.Units[a].Weight) })
	chosen := map[int]bool{}
	for _, ui := range list[:min(most, len(list))] {
		chosen[ui] = true
	}
	return chosen
}

// explainer is a problem and a plan for it, put on the problem's blocks and
// units. It does not change while it explains.
type explainer struct {
	*feasible.Problem
	index   *scheduler.Index
	planned [][]*planned               // by block, in time order
	earners [][]*planned               // by unit
	total   []float64                  // by unit: what the plan earns from it
	rejects []map[int]*feasible.Reject // by block: source → why it is not up
	plan    *scheduler.Plan

	// toll, where the problem is of a campaign that is otherwise than the real
	// one, says what an option owes to that: it is taken off what it gains. Nil:
	// nothing is otherwise.
	toll func(o *option) float64
}

// times is how often a unit is earned.
func (e *explainer) times(ui int) int {
	n := len(e.earners[ui])
	if e.Units.Goals[e.Units.Units[ui].Goal].Kind == scheduler.KindPhase {
		return n
	}
	return min(n, 1) // several scans may share it
}

// finding is one cause at one block, or of the unit as a whole. Its text is made
// only for the finding that speaks for all of its code, when their number is
// known: a campaign has thousands of findings and some hundred reasons.
type finding struct {
	code  scheduler.ReasonCode
	about string                 // band that it is about, for goals that want two
	near  float64                // the larger, the nearer to being met
	text  func(count int) string // of all findings with this code together
	whole bool                   // about the unit as a whole, not about a block
}

// look finds all there is to say about the unit.
func (q *question) look() {
	switch q.goal.Kind {
	case scheduler.KindCadence:
		q.cadence()
	case scheduler.KindPhase:
		q.phase()
	case scheduler.KindOverlap:
		q.overlap()
	case scheduler.KindBandPair:
		q.pair()
	}
}

// question is one unit to be explained, and what was found.
type question struct {
	*explainer
	unit     *units.Unit
	ui       int             // its place in Units.Units
	goal     *units.Goal     // in the planner's form: indices and minutes
	wants    *scheduler.Goal // as the campaign has it: names
	source   *scheduler.Source
	about    string // of what is found from here on
	findings []finding
	best     *choice // where it could be served at the least cost
}

func (e *explainer) question(ui int) *question {
	u := &e.Units.Units[ui]
	g := &e.Units.Goals[u.Goal]
	return &question{explainer: e, unit: u, ui: ui, goal: g, wants: e.index.Goal(g.ID), source: &e.Campaign.Sources[g.Source]}
}

// found notes a finding.
func (q *question) found(code scheduler.ReasonCode, near float64, text func(count int) string) {
	q.findings = append(q.findings, finding{code: code, about: q.about, near: near, text: text})
}

// foundWhole notes a finding that is not about any one block.
func (q *question) foundWhole(code scheduler.ReasonCode, format string, args ...any) {
	text := sentence(format, args...)
	q.findings = append(q.findings, finding{code: code, text: func(int) string { return text }, whole: true})
}

// summary makes one reason of all findings with the same code.
func (q *question) summary() []scheduler.Reason {
	type kind struct {
		code  scheduler.ReasonCode
		about string
	}
	best, count := map[kind]finding{}, map[kind]int{}
	var kinds []kind
	for _, f := range q.findings {
		k := kind{f.code, f.about}
		if !f.whole {
			count[k]++
		}
		b, seen := best[k]
		if !seen {
			kinds = append(kinds, k)
		}
		if !seen || f.near > b.near {
			best[k] = f
		}
	}
	slices.SortStableFunc(kinds, func(a, b kind) int { return stages[b.code] - stages[a.code] })
	var list []scheduler.Reason
	for _, k := range kinds {
		list = append(list, scheduler.Reason{Code: k.code, Text: k.about + best[k].text(count[k]), Count: count[k]})
	}
	return list
}
