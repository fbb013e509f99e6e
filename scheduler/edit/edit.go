// Package edit answers what a change by hand does to a plan: the new score,
// what each unit then earns, every rule that is broken with its figures, and
// where in its block the changed scan could stand.
//
// A Session is made once from a problem and a plan. Try weighs a change against
// it without planning anew: only the blocks and the sources that the change
// touches are worked out again, which takes well below two milliseconds also in
// a campaign of six telescopes and ninety sources. Nothing else of the plan
// moves, except that the azimuth drives of the touched blocks may take other
// whole turns where the change needs it.
//
// The rules are sections 2 to 5 of the planning model, taken strictly, so that
// a plan without violations here passes a re-check, which allows tolerances.
// Units earn the most that the scans can give them.
package edit

import (
	"fmt"
	"slices"
	"time"

	"cadencewright/astro/sky"
	"cadencewright/scheduler"
	"cadencewright/scheduler/feasible"
	"cadencewright/scheduler/units"
)

// Session is a plan to try changes on. It keeps what it has worked out, so it
// is for one goroutine at a time; its answers do not depend on what was tried
// before.
type Session struct {
	p      *feasible.Problem
	plan   *scheduler.Plan
	scans  []*scan // in the plan's order
	pins   []pin   // of the horizon's blocks
	blocks []row   // by index into Problem.Blocks
	source [][]*scan
	awards [][]award // by source
	score  float64

	goals   [][]int // by source: indices into Units.Goals, of those with units
	zones   []*time.Location
	masks   []sky.Mask
	windows []*sky.Window  // by block, over its grid; made when first needed
	blockAt map[string]int // id → index into Problem.Blocks
	sources map[string]int // name → index into Campaign.Sources
}

// row is one block's scans in order of start, with the whole turns of the
// azimuth drive that they are observed at.
type row struct {
	scans  []*scan
	turns  []int
	faults []Violation // of the plan as it is; not set in a draft
}

// New prepares a plan for trying changes. The plan may break rules; it must be
// of the problem's horizon, and every scan must name a block of it, its
// telescope, one of the telescope's receivers and a source of the campaign.
// What the plan says it earns is worked out again.
func New(p *feasible.Problem, plan *scheduler.Plan) (*Session, error) {
	if !plan.From.Equal(p.Horizon.From) || !plan.To.Equal(p.Horizon.To) {
		return nil, scheduler.Errorf(scheduler.ErrInvalid, "the plan is for %s to %s, the problem for %s to %s",
			instantText(plan.From), instantText(plan.To), instantText(p.Horizon.From), instantText(p.Horizon.To))
	}
	c := p.Campaign
	s := &Session{p: p, plan: plan, blocks: make([]row, len(p.Blocks)), source: make([][]*scan, len(c.Sources)),
		awards: make([][]award, len(c.Sources)), goals: make([][]int, len(c.Sources)), windows: make([]*sky.Window, len(p.Blocks)),
		blockAt: map[string]int{}, sources: map[string]int{}}
	for i := range p.Blocks {
		s.blockAt[c.Blocks[p.Blocks[i].Index].ID] = i
	}
	for i := range c.Sources {
		s.sources[c.Sources[i].Name] = i
	}
	for i := range c.Telescopes {
		zone, err := c.Telescopes[i].Location()
		if err != nil {
			return nil, fmt.Errorf("telescope %s: %w", c.Telescopes[i].Code, err)
		}
		s.zones, s.masks = append(s.zones, zone), append(s.masks, c.Telescopes[i].Mask())
	}
	for gi := range p.Units.Goals {
		if g := &p.Units.Goals[gi]; len(g.Units) > 0 {
			s.goals[g.Source] = append(s.goals[g.Source], gi)
		}
	}
	s.pins = s.pinsOf(c.Pins)
	for i := range plan.Scans {
		x, err := s.read(&plan.Scans[i])
		if err != nil {
			return nil, fmt.Errorf("scan %d: %w", i, err)
		}
		x.index = i
		s.scans = append(s.scans, x)
	}
	s.arrange()
	return s, nil
}

// arrange sorts the plan's scans into blocks and sources and works out what
// they earn and break.
func (s *Session) arrange() {
	for _, x := range s.scans {
		s.blocks[x.block].scans = append(s.blocks[x.block].scans, x)
		s.source[x.source] = append(s.source[x.source], x)
	}
	for bi := range s.blocks {
		r := &s.blocks[bi]
		slices.SortStableFunc(r.scans, inTime)
		s.turn(r)
	}
	for si := range s.source {
		slices.SortStableFunc(s.source[si], inTime)
		s.awards[si] = s.earn(si, s.source[si])
		s.score += worth(s.awards[si])
	}
	for bi := range s.blocks {
		r := &s.blocks[bi]
		r.faults = s.faultsOf(bi, r, s.pins)
	}
}

// inTime orders scans by start, then by block.
func inTime(a, b *scan) int {
	switch {
	case a.startMin < b.startMin:
		return -1
	case a.startMin > b.startMin:
		return 1
	}
	return a.block - b.block
}

// Score is what the plan's scans earn at best.
func (s *Session) Score() float64 { return s.score }

// Violations are the rules that the plan breaks as it is.
func (s *Session) Violations() []Violation {
	var list []Violation
	for bi := range s.blocks {
		list = append(list, s.blocks[bi].faults...)
	}
	return list
}

// Outcome is what a change does.
type Outcome struct {
	Before, Score float64 // of the plan, and of it as changed, whether allowed or not
	Units         []Difference
	// Violations are all rules that the changed plan breaks: those that the
	// change brings first, then those that stood before.
	Violations []Violation
	Scans      []scheduler.Scan // the scans added or altered, as they would stand in the plan

	// Where the last scan added or altered could start in its block without
	// breaking a rule of time, room or the sky, the rest of the plan being as
	// changed: Slide between the scans next to it, Starts in all of the block.
	// That the length or the receiver is not allowed is not looked at here, nor
	// that it is pinned.
	Slide, Starts []Range
}

// Legal reports whether the changed plan breaks no rule.
func (o *Outcome) Legal() bool { return len(o.Violations) == 0 }

// Brings is how many rules are broken by the change itself.
func (o *Outcome) Brings() int {
	n := 0
	for i := range o.Violations {
		if o.Violations[i].New {
			n++
		}
	}
	return n
}

// Difference is what one unit earns before and after.
type Difference struct {
	Goal, Unit    string
	Before, After float64
}

// Range is starts that are all possible: every grid instant from First to
// Last, both included.
type Range struct{ First, Last time.Time }

// Try says what changes, all made together, would do to the plan. The error is
// set where they do not make sense: an index or a name that does not exist, a
// scan changed twice, a length that is none.
func (s *Session) Try(changes ...Change) (*Outcome, error) {
	d, err := s.draft(changes)
	if err != nil {
		return nil, err
	}
	o := &Outcome{Before: s.score, Score: s.score}
	for _, si := range d.touchedSources {
		was, now := s.awards[si], d.awards[si]
		o.Score += worth(now) - worth(was)
		o.Units = append(o.Units, s.differences(si, was, now)...)
	}
	o.Violations = d.faults
	for _, x := range d.made {
		o.Scans = append(o.Scans, s.out(d, x))
	}
	if n := len(d.made); n > 0 {
		o.Slide, o.Starts, err = s.ranges(d, d.made[n-1])
	}
	return o, err
}

// differences compares what a source's units earn.
func (s *Session) differences(source int, was, now []award) []Difference {
	var list []Difference
	for _, ui := range s.p.Units.BySource[source] {
		before, after := earned(was, ui), earned(now, ui)
		if before != after {
			u := &s.p.Units.Units[ui]
			list = append(list, Difference{s.p.Units.Goals[u.Goal].ID, u.Name, before, after})
		}
	}
	return list
}

func earned(list []award, unit int) float64 {
	sum := 0.0
	for i := range list {
		if list[i].unit == unit {
			sum += list[i].value
		}
	}
	return sum
}

func worth(list []award) float64 {
	sum := 0.0
	for i := range list {
		sum += list[i].value
	}
	return sum
}

func instantText(t time.Time) string { return t.UTC().Format("2006-01-02 15:04:05") + " UTC" }

// clock is an instant in minutes in words.
func clock(minutes float64) string {
	t := units.Instant(minutes)
	if t.Second() == 0 && t.Nanosecond() == 0 {
		return t.Format("2006-01-02 15:04") + " UTC"
	}
	return instantText(t)
}
