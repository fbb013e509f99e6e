package solve

import (
	"fmt"
	"math"
	"slices"
	"time"

	"cadencewright/scheduler"
	"cadencewright/scheduler/feasible"
	"cadencewright/scheduler/units"
)

// Replan says what a plan that is under way asks of the next one: section 7 of
// the planning model.
type Replan struct {
	// From is the plan under way, for the same campaign and horizon.
	From *scheduler.Plan
	// At is now: scans that began before it stay as they are, and no other one
	// begins before it. A scan that began before but needs time that the
	// campaign calls lost did not take place and is left out.
	At time.Time
	// Stability is what a later scan that stays unchanged adds to what is
	// maximised, not to the score; 0: DefaultStability, below 0: nothing.
	Stability float64
	// Forgive leaves out a scan that has begun where the campaign no longer
	// allows it, instead of refusing to plan.
	Forgive bool
}

// DefaultStability is the worth of a later scan that stays unchanged.
const DefaultStability = 0.05

func (r *Replan) stability() float64 {
	switch {
	case r.Stability < 0:
		return 0
	case r.Stability == 0:
		return DefaultStability
	}
	return r.Stability
}

// closeBefore closes the time before at to new scans.
func (t *table) closeBefore(at time.Time) {
	min := units.Minutes(at)
	for bi := range t.p.Blocks {
		b := &t.p.Blocks[bi]
		first := int(math.Ceil((min - units.MS - float64(b.FirstMin)) / float64(t.p.GridMin)))
		if first <= 0 {
			continue
		}
		t.first[bi] = first
		t.open[bi] = make([][]feasible.Length, len(b.Places))
		for pi := range b.Places {
			for _, l := range b.Places[pi].Lengths {
				l.Runs = since(l.Runs, first)
				t.open[bi][pi] = append(t.open[bi][pi], l)
			}
		}
	}
}

// since are runs without their starts before first.
func since(runs []feasible.Run, first int) []feasible.Run {
	var list []feasible.Run
	for _, r := range runs {
		if r.From = max(r.From, first); r.From < r.To {
			list = append(list, r)
		}
	}
	return list
}

// lengthsOf are a place's scan lengths with the starts still open.
func (t *table) lengthsOf(bi, place int) []feasible.Length {
	if t.open[bi] != nil {
		return t.open[bi][place]
	}
	return t.p.Blocks[bi].Places[place].Lengths
}

// takeUp makes the plan under way the state: what has begun for good, and what
// comes later where there is still room for it. Each scan that is taken up and
// may still go gets its bonus for staying.
func (s *state) takeUp(r *Replan) error {
	t := s.t
	s.bonus = map[scanKey]float64{}
	var past, later []*scan
	for i := range r.From.Scans {
		in := &r.From.Scans[i]
		x, err := t.standing(in, r.At)
		if err != nil && r.Forgive {
			continue
		}
		if err != nil {
			return fmt.Errorf("scan %d of the plan under way, %s in block %s at %s: %w", i, in.Source, in.Block, in.Start.Format(time.RFC3339), err)
		}
		switch {
		case x == nil || s.has(x):
		case x.fixed:
			past = append(past, x)
		default:
			later = append(later, x)
		}
	}
	s.open()
	for _, x := range append(past, later...) {
		if !s.room(x) {
			if x.fixed && !r.Forgive {
				return fmt.Errorf("%s in block %s began before %s and leaves no room to a pin or to another scan that began", t.p.Campaign.Sources[x.source].Name,
					t.p.Campaign.Blocks[t.p.Blocks[x.block].Index].ID, r.At.Format(time.RFC3339))
			}
			continue
		}
		s.add(x)
		if !x.fixed {
			s.bonus[x.key()] = r.stability()
			s.stays = append(s.stays, *x)
		}
	}
	s.weigh()
	s.accept()
	return nil
}

// restore puts a later scan of the plan under way back as it was, in place of
// the source's scan of that block if it has one.
func (a *annealer) restore() int {
	x := &a.s.stays[a.rng.IntN(len(a.s.stays))]
	if a.s.has(x) {
		return -1
	}
	y := a.s.fresh()
	*y = *x
	for _, z := range a.s.source[y.source] {
		if z.block == y.block && !z.fixed && (z.startMin < y.endMin && y.startMin < z.endMin || a.rng.IntN(2) == 0) {
			a.s.remove(z)
			break
		}
	}
	budget := a.gain1(y) - a.floor
	if budget <= 0 || !a.s.insert(y, a.rng, a.oust, &budget) {
		a.s.recycle(y)
		return -1
	}
	return 6
}

// standing is a scan of the plan under way as the solver has it. It is nil for
// one that cannot take place any more: a later one that the campaign does not
// allow now, or one that began in time that was lost.
func (t *table) standing(in *scheduler.Scan, at time.Time) (*scan, error) {
	begun := in.Start.Before(at)
	bi := slices.IndexFunc(t.p.Blocks, func(b feasible.Block) bool { return t.p.Campaign.Blocks[b.Index].ID == in.Block })
	if bi < 0 {
		return nil, gone(begun, "this block is not in the campaign's horizon")
	}
	b := &t.p.Blocks[bi]
	c := t.p.Campaign
	if lost(&c.Blocks[b.Index], in) {
		return nil, nil
	}
	source := slices.IndexFunc(c.Sources, func(s scheduler.Source) bool { return s.Name == in.Source })
	rx := slices.IndexFunc(b.Receivers, func(r int) bool { return c.Telescopes[b.Telescope].Receivers[r].Code == in.Receiver })
	if source < 0 || rx < 0 {
		return nil, gone(begun, "the campaign has no such source, or its block no such receiver")
	}
	place := b.PlaceIndex(source)
	start, whole := math.Modf((units.Minutes(in.Start) - float64(b.FirstMin)) / float64(t.p.GridMin))
	if place < 0 || whole != 0 || in.Minutes%t.p.GridMin != 0 || !b.Places[place].Allows(in.Minutes/t.p.GridMin, int(start)) {
		return nil, gone(begun, "the campaign does not allow it any more")
	}
	x := t.scan(bi, place, rx, int(start), in.Minutes/t.p.GridMin, 0, -1)
	x.fixed = begun
	lo, hi := t.turns(x)
	turn := lo
	if in.MotorAzDeg != nil {
		turn = int(math.Round((*in.MotorAzDeg - x.from1) / 360))
	}
	t.orient(x, min(max(turn, lo), hi))
	return x, nil
}

// gone is an error for a scan that has begun; a later one may go without.
func gone(begun bool, why string) error {
	if !begun {
		return nil
	}
	return scheduler.Errorf(scheduler.ErrInvalid, "it has begun and must stay, but %s", why)
}

// lost tells whether a scan needs time that its block has lost.
func lost(b *scheduler.Block, in *scheduler.Scan) bool {
	for _, l := range b.Lost {
		if in.Start.Before(l.End) && l.Start.Before(in.End()) {
			return true
		}
	}
	return false
}

// has tells whether the plan holds the same scan already, as a pin does.
func (s *state) has(x *scan) bool {
	return slices.ContainsFunc(s.blocks[x.block], func(y *scan) bool { return y.key() == x.key() })
}

// room tells whether there is room for a scan as the plan stands, in the turn
// that it has.
func (s *state) room(x *scan) bool {
	list, i := s.blocks[x.block], s.slot(x)
	if i > 0 && list[i-1].start+list[i-1].steps+s.t.gap(list[i-1], x) > x.start {
		return false
	}
	return i == len(list) || x.start+x.steps+s.t.gap(x, list[i]) <= list[i].start
}
