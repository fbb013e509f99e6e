package explain

import (
	"fmt"
	"math"
	"slices"
	"time"

	"cadencewright/scheduler"
	"cadencewright/scheduler/feasible"
	"cadencewright/scheduler/units"
)

// world is the plan in a campaign in which there is more than enough of one
// thing. Its toll makes the least use of it the best choice.
type world struct {
	*explainer
	base   *explainer
	kind   Kind
	q      *question       // as asked in the real campaign
	spares map[string]bool // ids of the blocks that do not exist
}

// heavy makes a unit of toll (a minute, a degree or an hour) outweigh anything
// that a unit can be worth.
const heavy = 1e9

// How much more than enough is.
const (
	mostLonger  = 180.0 // minutes at either end of a block
	mostLower   = 20.0  // degrees
	mostSpareD  = 8.0   // days of time in which a block could be, at each telescope
	shortestMin = 5     // of scan lengths that are tried
)

// world makes the campaign for one kind of change; nil where there is nothing
// to make.
func (a *adviser) world(q *question, k Kind) *world {
	if k == ScanLength {
		return a.lengths(q)
	}
	c := q.reduced(func(*scheduler.Block) bool { return true })
	w := &world{base: a.explainer, kind: k, q: q, spares: map[string]bool{}}
	switch k {
	case LowerLimit:
		// Horizons stay: hills are not lowered.
		c.Telescopes = slices.Clone(c.Telescopes)
		for i := range c.Telescopes {
			t := &c.Telescopes[i]
			t.ElevationMinDeg = math.Max(0, t.ElevationMinDeg-mostLower)
		}
	case Receiver:
		q.equip(c)
	case LongerBlock:
		q.lengthen(c)
	case NewBlock:
		q.spare(c, w.spares)
		if len(w.spares) == 0 {
			return nil
		}
	}
	return w.on(c)
}

// lengths is the world with more scan lengths: first some far apart, then all
// up to the one of them that is needed.
func (a *adviser) lengths(q *question) *world {
	had := q.source.ScanMinutes
	longest := had[len(had)-1]
	w := a.allowing(q, steps(shortestMin, 3*longest, max(1, longest/4), q.GridMin))
	if w == nil {
		return nil
	}
	// Many lengths at once would make many options; few far apart tell which way
	// to look.
	found := w.question(w.Units.ByName(q.unit.Name))
	found.look()
	if found.best == nil {
		return nil
	}
	for i := range found.best.options {
		if o := &found.best.options[i]; o.toll > 0 {
			m := o.steps * q.GridMin
			to := nearestLength(had, m)
			return a.allowing(q, append(steps(min(m, to), max(m, to), max(1, (max(m, to)-min(m, to))/8), q.GridMin), m))
		}
	}
	return nil
}

// steps are numbers of minutes between two, about every some minutes, on the
// grid.
func steps(from, to, every, gridMin int) []int {
	up := func(m int) int { return (m + gridMin - 1) / gridMin * gridMin }
	var list []int
	for m := up(from); m <= to; m += up(every) {
		list = append(list, m)
	}
	return list
}

func nearestLength(list []int, minutes int) int {
	return slices.MinFunc(list, func(a, b int) int { return distance(a, minutes) - distance(b, minutes) })
}

func distance(a, b int) int { return max(a-b, b-a) }

// allowing is the world in which the question's source has more scan lengths.
func (a *adviser) allowing(q *question, more []int) *world {
	c := q.reduced(func(*scheduler.Block) bool { return true })
	c.Sources = slices.Clone(c.Sources)
	for i := range c.Sources {
		if s := &c.Sources[i]; s.Name == q.source.Name {
			s.ScanMinutes = slices.Concat(s.ScanMinutes, more)
			slices.Sort(s.ScanMinutes)
			s.ScanMinutes = slices.Compact(s.ScanMinutes)
		}
	}
	return (&world{base: a.explainer, kind: ScanLength, q: q}).on(c)
}

// on puts the world's plan on a campaign: the scans stand where they stand in
// the real one. The blocks of that one must be the campaign's first.
func (w *world) on(c *scheduler.Campaign) *world {
	p, err := feasible.Build(c, w.base.Horizon)
	if err != nil {
		return nil
	}
	e := &explainer{Problem: p, plan: w.base.plan, index: scheduler.NewIndex(c), planned: make([][]*planned, len(p.Blocks)),
		earners: make([][]*planned, len(p.Units.Units)), total: make([]float64, len(p.Units.Units)), toll: w.toll}
	// Where the plan's scans stand and what they earn has been worked out, and no
	// change of a world moves them.
	copy(e.planned, w.base.planned)
	for ui := range p.Units.Units {
		if i := w.base.Units.ByName(p.Units.Units[ui].Name); i >= 0 {
			e.earners[ui], e.total[ui] = w.base.earners[i], w.base.total[i]
		}
	}
	for i := range p.Blocks {
		at := map[int]*feasible.Reject{}
		for j := range p.Blocks[i].Rejects {
			at[p.Blocks[i].Rejects[j].Source] = &p.Blocks[i].Rejects[j]
		}
		e.rejects = append(e.rejects, at)
	}
	w.explainer = e
	if p.Units.ByName(w.q.unit.Name) < 0 {
		return nil
	}
	return w
}

// equip lets every block use all receivers that can serve the goal; those that
// it has come first, as they are.
func (q *question) equip(c *scheduler.Campaign) {
	for ti := range q.Campaign.Telescopes {
		codes := q.serving(ti)
		for i := range c.Blocks {
			b := &c.Blocks[i]
			if b.Telescope != q.Campaign.Telescopes[ti].Code {
				continue
			}
			b.Receivers = slices.Clone(b.Receivers)
			for _, code := range codes {
				if !slices.Contains(b.Receivers, code) {
					b.Receivers = append(b.Receivers, code)
				}
			}
		}
	}
}

// lengthen gives every block more time at both ends, as far as its telescope
// has no other block there and it still starts in the horizon.
func (q *question) lengthen(c *scheduler.Campaign) {
	more := time.Duration(mostLonger) * time.Minute
	for i := range c.Blocks {
		b := &c.Blocks[i]
		from, to := later(b.Start.Add(-more), later(q.Horizon.From, c.Start)), b.End.Add(more)
		if c.End.Before(to) {
			to = c.End
		}
		for j := range q.Campaign.Blocks {
			o := &q.Campaign.Blocks[j]
			if o.Telescope != b.Telescope || o.ID == b.ID {
				continue
			}
			if !o.End.After(b.Start) {
				from = later(from, o.End)
			}
			if !o.Start.Before(b.End) && o.Start.Before(to) {
				to = o.Start
			}
		}
		if from.Before(b.Start) {
			b.Start = from
		}
		if to.After(b.End) {
			b.End = to
		}
	}
}

func later(a, b time.Time) time.Time {
	if a.After(b) {
		return a
	}
	return b
}

// spare adds blocks that do not exist, in all free time of the telescopes that
// could serve the unit while it counts.
func (q *question) spare(c *scheduler.Campaign, names map[string]bool) {
	for ti := range q.Campaign.Telescopes {
		t := &q.Campaign.Telescopes[ti]
		receivers := q.serving(ti)
		if len(receivers) == 0 {
			continue
		}
		// A horizon of many weeks has more free time than needs to be looked at.
		left := mostSpareD * 1440
		for _, span := range q.free(t) {
			from, to := gridUp(span[0], q.GridMin), math.Min(span[1], span[0]+left)
			if to-from < float64(q.shortest()) {
				continue
			}
			left -= to - from
			id := freeID(c, fmt.Sprintf("%s-free-%d", t.Code, len(names)+1))
			names[id] = true
			c.Blocks = append(c.Blocks, scheduler.Block{ID: id, Telescope: t.Code, Start: instant(from), End: instant(to), Receivers: receivers})
		}
	}
}

// serving are the codes of a telescope's receivers that can serve the goal.
func (q *question) serving(ti int) []string {
	t := &q.Campaign.Telescopes[ti]
	var codes []string
	for ri := range t.Receivers {
		if q.wants.AllowsTelescope(t.Code) && len(q.wants.BandsOf(&t.Receivers[ri])) > 0 && q.Units.Detectable(q.goal.Source, ti, ri) {
			codes = append(codes, t.Receivers[ri].Code)
		}
	}
	return codes
}

// free are the stretches, in minutes, in which a telescope has no block and
// scans for the unit would count.
func (q *question) free(t *scheduler.Telescope) [][2]float64 {
	// A scan may begin before what counts, and its block before that.
	longest := float64(q.source.ScanMinutes[len(q.source.ScanMinutes)-1])
	ready := (t.SetupS + t.CalS) / 60
	lo, hi := math.Max(q.Units.From, units.Minutes(q.Campaign.Start)), math.Min(q.Units.To, units.Minutes(q.Campaign.End))
	var list [][2]float64
	for _, s := range q.counting() {
		from, to := math.Max(lo, s[0]-longest-ready), math.Min(hi, s[1]+longest)
		if n := len(list); n > 0 && from <= list[n-1][1] {
			list[n-1][1] = math.Max(list[n-1][1], to)
		} else if from < to {
			list = append(list, [2]float64{from, to})
		}
	}
	for i := range q.Campaign.Blocks {
		b := &q.Campaign.Blocks[i]
		if b.Telescope != t.Code {
			continue
		}
		start, end := units.Minutes(b.Start), units.Minutes(b.End)
		var cut [][2]float64
		for _, s := range list {
			if start > s[0] {
				cut = append(cut, [2]float64{s[0], math.Min(s[1], start)})
			}
			if end < s[1] {
				cut = append(cut, [2]float64{math.Max(s[0], end), s[1]})
			}
		}
		list = cut
	}
	return list
}

// counting are the stretches in which scans for the unit count, in order.
func (q *question) counting() [][2]float64 {
	if len(q.unit.Passages) == 0 {
		from, to := q.unit.Window()
		return [][2]float64{{from - q.goal.WithinMin, to}}
	}
	var list [][2]float64
	for _, p := range q.openPassages() {
		list = append(list, [2]float64{p.Enter, p.Leave})
	}
	return list
}

func gridUp(minutes float64, gridMin int) float64 {
	g := float64(gridMin)
	return math.Ceil(minutes/g-1e-9) * g
}

// freeID is a block id that the campaign does not have.
func freeID(c *scheduler.Campaign, id string) string {
	for c.BlockByID(id) != nil {
		id += "+"
	}
	return id
}

func instant(minutes float64) time.Time { return units.Instant(minutes) }
