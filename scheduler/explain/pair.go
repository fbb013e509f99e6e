package explain

import "math"

// offered is an option with what it would cost.
type offered struct {
	option
	loss float64
}

// Pairs are tried from samples of each band's options: of every run of starts
// the two ends, which decide how near in time two bands come, and some between,
// which decide what would have to make room.

// pair explains a unit that wants both bands near each other in time.
func (q *question) pair() {
	lo, hi := q.unit.Window()
	best := q.newChoice()
	used := map[int]bool{}
	var sides [2][]offered // by band
	var counts [2]int      // blocks with any option
	for i := range sides {
		bit := uint32(1) << i
		q.about = q.wants.Bands[i] + ": "
		list := q.reaches(bit, lo-q.goal.WithinMin, hi)
		counts[i] = len(byBlock(list))
		sides[i] = q.offers(list, bit)
	}
	q.about = ""
	if len(sides[0]) == 0 || len(sides[1]) == 0 {
		q.oneBand(counts)
		return
	}
	close := q.pairUp(sides, lo, hi, best, used)
	best.blocks = len(used)
	switch {
	case best.possible > 0:
		best.tell()
	case close:
		q.tooClose(true)
	default:
		q.farApart(sides, lo, hi)
	}
}

// offers are options in one band: of each run of starts the first, the last and
// some between, and the scans that stand in the plan.
func (q *question) offers(list []reach, bit uint32) []offered {
	const samples = 24
	var out []offered
	add := func(o option) {
		if displaced, ok := q.cost(&o); ok {
			out = append(out, offered{o, q.loss(displaced) + o.toll})
		}
	}
	for _, r := range list {
		b := &q.Blocks[r.block]
		o := option{block: r.block, receiver: r.receiver, place: r.place, bands: q.bandsOf(b, b.Receivers[r.receiver])}
		for i := range r.place.Lengths {
			l := &r.place.Lengths[i]
			for _, run := range l.Runs {
				step := max(1, (run.To-run.From)/samples)
				for start := run.From; start < run.To; start += step {
					if last := run.To - 1; start+step > last && start < last {
						step = last - start
					}
					o.start, o.steps = start, l.Steps
					o.startMin, o.endMin = b.Minute(start, q.GridMin), b.Minute(start+l.Steps, q.GridMin)
					if o.startMin >= r.lo && o.startMin <= r.hi {
						add(o)
					}
				}
			}
		}
	}
	for _, o := range q.standing() {
		if o.bands&bit != 0 {
			add(o)
		}
	}
	return out
}

// pairUp weighs all pairs, and scans that have both bands. close says that some
// would do but for the neighbouring windows.
func (q *question) pairUp(sides [2][]offered, lo, hi float64, best *choice, used map[int]bool) (close bool) {
	weigh := func(at float64, loss float64, options ...*option) {
		gain := q.unit.Weight * q.unit.Timeliness(at)
		if gain == 0 {
			return
		}
		if !q.spaced(at) {
			close = true
			return
		}
		stands := false
		for _, o := range options {
			used[o.block] = true
			stands = stands || o.had != nil
		}
		if best.possible++; gain-loss > best.net || stands && gain-loss == best.net {
			best.possible--
			best.consider(gain, options...)
		}
	}
	for i := range sides[0] {
		a := &sides[0][i]
		if a.bands == q.allBands() {
			weigh(a.startMin, a.loss, &a.option)
		}
		for j := range sides[1] {
			b := &sides[1][j]
			later := max(a.startMin, b.startMin)
			if math.Abs(a.startMin-b.startMin) <= q.goal.WithinMin && later >= lo && later <= hi && q.compatible(&a.option, &b.option) {
				weigh(later, a.loss+b.loss, &a.option, &b.option)
			}
		}
	}
	return close
}

// compatible reports whether two options of one source can both stand. Those
// in one block need room between them like any two scans, at the turns of the
// azimuth drive that each would take by itself.
func (q *question) compatible(a, b *option) bool {
	if a.block != b.block || a.had != nil || b.had != nil {
		return true // cost has seen to the scans of the plan
	}
	if a.startMin > b.startMin {
		a, b = b, a
	}
	_, from := poses(a.place, a.start, a.steps, a.turnsDeg)
	to, _ := poses(b.place, b.start, b.steps, b.turnsDeg)
	return roomFor(&q.Blocks[a.block], from, to, a.receiver != b.receiver, (b.startMin-a.endMin)*60)
}

// oneBand notes that one of the two bands cannot be observed at all, or only
// where pins stand.
func (q *question) oneBand(counts [2]int) {
	if counts[0] > 0 && counts[1] > 0 {
		q.foundWhole(Displaced, "Both bands could be observed, but pinned scans stand in the way at every possible start of one of them.")
	}
	for i := range counts {
		if counts[i] > 0 && counts[1-i] == 0 {
			q.foundWhole(NoPair, "%s can be observed in %s, %s in none.", q.wants.Bands[i], blocks(counts[i]), q.wants.Bands[1-i])
		}
	}
}

// farApart notes how near to each other the two bands can be observed, or where
// only one of two scans has room.
func (q *question) farApart(sides [2][]offered, lo, hi float64) {
	nearest, a, b := math.Inf(1), &option{}, &option{}
	for i := range sides[0] {
		for j := range sides[1] {
			x, y := &sides[0][i].option, &sides[1][j].option
			apart, later := math.Abs(x.startMin-y.startMin), max(x.startMin, y.startMin)
			if !q.compatible(x, y) {
				if apart <= q.goal.WithinMin && later >= lo && later <= hi {
					q.foundWhole(NoPair, "%s and %s can be observed near each other only in %s, which has no time for both.",
						q.wants.Bands[0], q.wants.Bands[1], block(q, &q.Blocks[x.block]))
					return
				}
				continue
			}
			if apart < nearest {
				nearest, a, b = apart, x, y
			}
		}
	}
	if nearest <= q.goal.WithinMin || math.IsInf(nearest, 1) {
		q.foundWhole(NoPair, "Both bands can be observed near each other only outside the time in which it counts.")
		return
	}
	q.foundWhole(NoPair, "The nearest starts in the two bands are %s apart (%s: %s; %s: %s); %s are allowed.", span(nearest),
		q.wants.Bands[0], q.titled(a), q.wants.Bands[1], q.titled(b), span(q.goal.WithinMin))
}
