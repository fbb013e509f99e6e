package explain

import (
	"slices"

	"cadencewright/scheduler"
	"cadencewright/scheduler/edit"
	"cadencewright/scheduler/feasible"
)

// A change is found in two steps. First a campaign is made in which there is
// more than enough of something (time, lengths, sky), and the place in it that
// needs least of that is found in the same way as reasons are. Then that least
// is changed in a campaign as it is, the scans are added, and only what then
// breaks no rule and earns from the unit is suggested.

// adviser makes suggestions for the unmet units of one plan.
type adviser struct {
	*explainer
	session *edit.Session   // on the plan as it is; nil where it cannot be read
	whole   *scheduler.Plan // the plan without scans that do not belong to the problem
}

func (e *explainer) newAdviser() *adviser {
	plan := *e.plan
	plan.From, plan.To = e.Horizon.From, e.Horizon.To
	plan.Scans = slices.DeleteFunc(slices.Clone(plan.Scans), func(x scheduler.Scan) bool { return !e.belongs(&x) })
	a := &adviser{explainer: e, whole: &plan}
	if s, err := edit.New(e.Problem, &plan); err == nil {
		a.session = s
	}
	return a
}

// belongs reports whether a scan's time and names are of the horizon's blocks.
func (e *explainer) belongs(x *scheduler.Scan) bool {
	b := e.index.Block(x.Block)
	return b != nil && e.inHorizon(b) && e.index.Receiver(b.Telescope, x.Receiver) != nil && e.index.Source(x.Source) != nil &&
		x.Minutes > 0 && x.Start.Before(b.End) && x.End().After(b.Start) && (x.Telescope == "" || x.Telescope == b.Telescope)
}

// suggest lists up to most suggestions for a unit that has been looked at;
// deep: also changes of the campaign.
func (a *adviser) suggest(q *question, most int, deep bool) []Suggestion {
	var list []Suggestion
	if a.session == nil || most < 1 {
		return nil
	}
	s, ok := a.inPlan(q)
	if ok {
		list = append(list, s)
		if s.Kind == Insert || s.Gain > 0 {
			return list // nothing else is as cheap
		}
	}
	// From here on the campaign is to change, which costs people something.
	if !deep || q.hopeless() {
		return list
	}
	for _, k := range kinds {
		if len(list) == most {
			break
		}
		if !q.helps(k) {
			continue
		}
		if s, ok := a.inCampaign(q, k); ok {
			list = append(list, s)
		}
	}
	return list
}

// hopeless reports whether no change of blocks, limits or lengths can meet the
// unit: the orbit is elsewhere.
func (q *question) hopeless() bool {
	return slices.ContainsFunc(q.findings, func(f finding) bool { return f.code == NoPassage })
}

// helps reports whether a kind of change of the campaign can help at all with
// what was found.
func (q *question) helps(k Kind) bool {
	any := func(codes ...scheduler.ReasonCode) bool {
		return slices.ContainsFunc(q.findings, func(f finding) bool { return slices.Contains(codes, f.code) })
	}
	switch k {
	case Receiver:
		return any(NoReceiver)
	case ScanLength:
		return any(TooShort, NoTime, CableWrap, Precision, Phase, NoOverlap, NoPair, OffMount, Displaced)
	case LowerLimit:
		return any(TooLow, TooShort, NoTime, Precision, Phase, NoOverlap, NoPair)
	case LongerBlock, NewBlock:
		return true
	}
	return false
}

// meets tries changes: they meet a unit where it earns more and no rule is
// broken that was not broken before.
func meets(session *edit.Session, unit string, changes []edit.Change) (*edit.Outcome, bool) {
	if len(changes) == 0 {
		return nil, false
	}
	o, err := session.Try(changes...)
	if err != nil || o.Brings() > 0 {
		return nil, false
	}
	return o, slices.ContainsFunc(o.Units, func(d edit.Difference) bool { return d.Unit == unit && d.After > d.Before })
}

// added are the scans of a choice that the plan does not have yet.
func (q *question) added(c *choice) []scheduler.Scan {
	var list []scheduler.Scan
	for i := range c.options {
		if o := &c.options[i]; o.had == nil {
			b := &q.Blocks[o.block]
			t := q.telescope(b)
			list = append(list, scheduler.Scan{Block: q.Campaign.Blocks[b.Index].ID, Telescope: t.Code, Source: q.source.Name,
				Receiver: t.Receivers[b.Receivers[o.receiver]].Code, Start: instant(o.startMin), Minutes: o.steps * q.GridMin})
		}
	}
	return list
}

// fresh are the scans to add, in words.
func (c *choice) fresh() string {
	var names []string
	for i := range c.options {
		if c.options[i].had == nil {
			names = append(names, c.q.titled(&c.options[i]))
		}
	}
	return both(names)
}

// inCampaign is the least change of one kind of the campaign that meets the
// unit without displacing anything that earns.
func (a *adviser) inCampaign(q *question, k Kind) (Suggestion, bool) {
	w := a.world(q, k)
	if w == nil {
		return Suggestion{}, false
	}
	found := w.question(w.Units.ByName(q.unit.Name))
	found.look()
	if found.best == nil || len(found.best.options) == 0 || !idle(found.best.displaced) {
		return Suggestion{}, false
	}
	s, ok := w.least(found)
	if !ok {
		return s, false
	}
	s.Kind, s.Unit = k, q.unit.Name
	s.Add = append(s.Add, found.added(found.best)...)
	for _, x := range found.best.displaced {
		s.Drop = append(s.Drop, *x.scan)
	}
	if s.Kind == NewBlock { // the block has another name now than in the search
		for i := range s.Add {
			if s.Add[i].Block == w.spare(found.best) {
				s.Add[i].Block = s.Block
			}
		}
	}
	gain, ok := a.confirm(q, &s)
	if !ok {
		return s, false
	}
	s.Gain = gain
	s.Text = w.text(found, &s)
	return s, true
}

// confirm tries a suggestion on the campaign with its change, cut down to the
// source of the unit and to the telescopes and blocks that matter.
func (a *adviser) confirm(q *question, s *Suggestion) (gain float64, ok bool) {
	// All blocks of the telescopes that are touched, so that blocks that overlap
	// are found, and those with the source's scans, which decide what is earned.
	keep := map[string]bool{s.Telescope: true}
	for _, x := range s.Add {
		keep[x.Telescope] = true
	}
	holds := map[string]bool{}
	for i := range a.whole.Scans {
		if x := &a.whole.Scans[i]; x.Source == q.source.Name {
			holds[x.Block] = true
		}
	}
	c := q.reduced(func(b *scheduler.Block) bool { return keep[b.Telescope] || holds[b.ID] })
	// A campaign that its reader would refuse is nothing to suggest.
	changed := s.Campaign(c)
	if changed.Validate() != nil {
		return 0, false
	}
	p, err := feasible.Build(changed, a.Horizon)
	if err != nil {
		return 0, false
	}
	plan := *a.whole
	plan.Scans = slices.DeleteFunc(slices.Clone(plan.Scans), func(x scheduler.Scan) bool {
		return !slices.ContainsFunc(changed.Blocks, func(b scheduler.Block) bool { return b.ID == x.Block })
	})
	session, err := edit.New(p, &plan)
	if err != nil {
		return 0, false
	}
	changes, err := s.changes(&plan)
	if err != nil {
		return 0, false
	}
	o, met := meets(session, s.Unit, changes)
	if !met {
		return 0, false
	}
	return o.Score - o.Before, true
}

// reduced is the campaign with the goals and the history of the question's
// source alone, and with those of its blocks that are kept.
func (q *question) reduced(keep func(*scheduler.Block) bool) *scheduler.Campaign {
	// Sources stay: scans of others take their time in the blocks.
	c := *q.Campaign
	mine := q.source.Name
	other := func(g *scheduler.Goal) bool { return g.Source != mine }
	c.CadenceTargets = slices.DeleteFunc(slices.Clone(c.CadenceTargets), func(g scheduler.CadenceTarget) bool { return other(&g.Goal) })
	c.PhaseGoals = slices.DeleteFunc(slices.Clone(c.PhaseGoals), func(g scheduler.PhaseGoal) bool { return other(&g.Goal) })
	c.OverlapGoals = slices.DeleteFunc(slices.Clone(c.OverlapGoals), func(g scheduler.OverlapGoal) bool { return other(&g.Goal) })
	c.BandPairGoals = slices.DeleteFunc(slices.Clone(c.BandPairGoals), func(g scheduler.BandPairGoal) bool { return other(&g.Goal) })
	c.History, c.Blocks, c.Pins = nil, nil, nil
	for i := range q.Campaign.History {
		if h := &q.Campaign.History[i]; h.Source == mine {
			c.History = append(c.History, *h)
		}
	}
	kept := map[string]bool{}
	for i := range q.Campaign.Blocks {
		if b := &q.Campaign.Blocks[i]; q.inHorizon(b) && keep(b) {
			c.Blocks, kept[b.ID] = append(c.Blocks, *b), true
		}
	}
	for _, p := range q.Campaign.Pins {
		if kept[p.Block] {
			c.Pins = append(c.Pins, p)
		}
	}
	return &c
}

func (e *explainer) inHorizon(b *scheduler.Block) bool {
	return !b.Start.Before(e.Horizon.From) && b.Start.Before(e.Horizon.To)
}
