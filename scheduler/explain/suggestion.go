package explain

import (
	"fmt"
	"slices"
	"time"

	"cadencewright/scheduler"
	"cadencewright/scheduler/edit"
	"cadencewright/scheduler/feasible"
)

// Kind says what is to be changed for a unit to be met.
type Kind string

// The kinds of change, from the smallest to the largest.
const (
	Insert      Kind = "insert"       // add scans: there is room for them
	MakeRoom    Kind = "make_room"    // move or drop scans of the plan and add others
	Receiver    Kind = "receiver"     // a receiver more in a block
	ScanLength  Kind = "scan_length"  // allow the source another scan length
	LowerLimit  Kind = "lower_limit"  // a lower elevation limit at a telescope
	LongerBlock Kind = "longer_block" // minutes more at an end of a block
	NewBlock    Kind = "new_block"    // a block more
)

// Suggestion is a change of the plan, or of the campaign and the plan, that
// meets a unit once more than the plan does. It has been tried: the plan that
// it makes breaks no rule that the plan did not break, and earns from the unit.
type Suggestion struct {
	Kind Kind
	Unit string
	Text string  // one sentence or two
	Gain float64 // what the plan's score rises by; may be below 0 for MakeRoom

	Add  []scheduler.Scan // to the plan
	Drop []scheduler.Scan // from the plan
	Move []Moved          // within the plan

	// What is otherwise in the campaign; empty where nothing is.
	Source       string    // ScanLength
	ScanMinutes  int       // ScanLength: a length to allow
	Telescope    string    // Receiver, LowerLimit, LongerBlock, NewBlock
	ElevationDeg float64   // LowerLimit: the new least elevation
	Block        string    // Receiver, LongerBlock; NewBlock: a name that is free
	Receivers    []string  // Receiver: to allow as well; NewBlock
	Start, End   time.Time // LongerBlock, NewBlock: of the block as it would be

	MoreMinutes float64 // LongerBlock: minutes more
	Hours       float64 // NewBlock: its length
	// NewBlock: the local sidereal times that such a block must lie between, in
	// hours, the second less than the first where midnight lies between them.
	// The same for all of a day: both 0 and 24.
	LSTHours [2]float64
}

// Moved is a scan of the plan that is to start at another time in its block.
type Moved struct {
	Scan  scheduler.Scan // as it is
	Start time.Time      // as it would be
}

// Campaign is a copy of a campaign with what the suggestion changes in it; the
// campaign itself where that is nothing.
func (s *Suggestion) Campaign(c *scheduler.Campaign) *scheduler.Campaign {
	out := *c
	switch s.Kind {
	// Lists are cloned down to what changes: the campaign belongs to others.
	case ScanLength:
		out.Sources = slices.Clone(c.Sources)
		for i := range out.Sources {
			if src := &out.Sources[i]; src.Name == s.Source && !slices.Contains(src.ScanMinutes, s.ScanMinutes) {
				src.ScanMinutes = append(slices.Clone(src.ScanMinutes), s.ScanMinutes)
				slices.Sort(src.ScanMinutes)
			}
		}
	case Receiver:
		out.Blocks = slices.Clone(c.Blocks)
		for i := range out.Blocks {
			if b := &out.Blocks[i]; b.ID == s.Block {
				b.Receivers = slices.Concat(b.Receivers, s.Receivers)
			}
		}
	case LowerLimit:
		out.Telescopes = slices.Clone(c.Telescopes)
		for i := range out.Telescopes {
			if t := &out.Telescopes[i]; t.Code == s.Telescope {
				t.ElevationMinDeg = s.ElevationDeg
			}
		}
	case LongerBlock:
		out.Blocks = slices.Clone(c.Blocks)
		for i := range out.Blocks {
			if b := &out.Blocks[i]; b.ID == s.Block {
				b.Start, b.End = s.Start, s.End
			}
		}
	case NewBlock:
		out.Blocks = append(slices.Clone(c.Blocks), scheduler.Block{ID: s.Block, Telescope: s.Telescope, Start: s.Start, End: s.End,
			Receivers: s.Receivers})
	default:
		return c
	}
	return &out
}

// Apply makes the suggestion: the campaign as it would be, and the plan with
// what is dropped and added. The plan must be the one that the suggestion was
// made for. Its certificate stays as it was, which is not that of another
// campaign.
func (s *Suggestion) Apply(c *scheduler.Campaign, plan *scheduler.Plan) (*scheduler.Campaign, *scheduler.Plan, error) {
	changed := s.Campaign(c)
	if err := changed.Validate(); err != nil {
		return nil, nil, err
	}
	p, err := feasible.Build(changed, scheduler.Horizon{From: plan.From, To: plan.To})
	if err != nil {
		return nil, nil, err
	}
	session, err := edit.New(p, plan)
	if err != nil {
		return nil, nil, err
	}
	changes, err := s.changes(plan)
	if err != nil {
		return nil, nil, err
	}
	after, _, err := session.Apply(changes...)
	return changed, after, err
}

// changes are what the suggestion does to a plan.
func (s *Suggestion) changes(plan *scheduler.Plan) ([]edit.Change, error) {
	var list []edit.Change
	for i := range s.Drop {
		at, err := find(plan, &s.Drop[i])
		if err != nil {
			return nil, err
		}
		list = append(list, edit.Drop(at))
	}
	for i := range s.Move {
		at, err := find(plan, &s.Move[i].Scan)
		if err != nil {
			return nil, err
		}
		list = append(list, edit.Move(at, s.Move[i].Start))
	}
	for _, x := range s.Add {
		list = append(list, edit.Add(x.Block, x.Source, x.Receiver, x.Start, x.Minutes))
	}
	return list, nil
}

// find is where a scan stands in a plan's list.
func find(plan *scheduler.Plan, s *scheduler.Scan) (int, error) {
	at := slices.IndexFunc(plan.Scans, func(x scheduler.Scan) bool { return sameScan(&x, s) })
	if at < 0 {
		return 0, scheduler.Errorf(scheduler.ErrInvalid, "the plan has no scan of %s in block %s at %s to move or drop",
			s.Source, s.Block, s.Start.Format(time.RFC3339))
	}
	return at, nil
}

func sameScan(a, b *scheduler.Scan) bool {
	return a.Block == b.Block && a.Source == b.Source && a.Receiver == b.Receiver && a.Start.Equal(b.Start) && a.Minutes == b.Minutes
}

// Suggest lists changes that would each meet a unit once more than the plan
// does, the smallest first: at most one of each kind. None where there is
// nothing to be done, as where an orbit does not pass the window, or where the
// plan has earned the unit as often as it can be.
func Suggest(p *feasible.Problem, plan *scheduler.Plan, unit string) ([]Suggestion, error) {
	ui := p.Units.ByName(unit)
	if ui < 0 {
		return nil, scheduler.Errorf(scheduler.ErrNotFound, "unit %q: the horizon has no such unit", unit)
	}
	e := newExplainer(p, plan)
	if e.times(ui) >= p.Units.Units[ui].N {
		return nil, nil
	}
	q := e.question(ui)
	q.look()
	return e.newAdviser().suggest(q, len(kinds), true), nil
}

// kinds are all kinds, the smallest change first.
var kinds = []Kind{Insert, MakeRoom, Receiver, ScanLength, LowerLimit, LongerBlock, NewBlock}

// signed is a change of the score in words.
func signed(gain float64) string {
	switch {
	case gain > 0.005:
		return fmt.Sprintf("the plan's score would rise by %.2f", gain)
	case gain < -0.005:
		return fmt.Sprintf("the plan's score would fall by %.2f", -gain)
	}
	return "the plan's score would stay as it is"
}
