package explain

import (
	"math"
	"slices"

	"cadencewright/scheduler/feasible"
)

// stretch is a time in which one telescope can observe the source in some
// bands, in minutes.
type stretch struct {
	telescope int
	block     int
	bands     uint32
	lo, hi    float64
}

// Scans together have too many combinations to try them all, so it goes in two
// steps: at which instants could enough telescopes be under way at once, which
// is exact, and then, at some of those instants, which scan of each telescope
// would cost least.

// overlap explains a unit that wants the source on several telescopes at once.
func (q *question) overlap() {
	lo, hi := q.unit.Window()
	longest := float64(q.source.ScanMinutes[len(q.source.ScanMinutes)-1])
	list := q.reaches(q.allBands(), lo-longest, hi)
	if longest < q.goal.OverlapMin && len(list) > 0 {
		q.foundWhole(NoOverlap, "The longest allowed scan takes %g min; the telescopes must observe together for %g min.", longest, q.goal.OverlapMin)
		return
	}
	at, most, close := q.commonStarts(list, lo, hi)
	switch {
	case len(at) > 0:
		q.placeTogether(list, at)
	case close:
		q.tooClose(true)
	case len(list) > 0:
		q.apart(list, most)
	}
}

// commonStarts are the grid instants in [lo, hi], in minutes, from which enough
// telescopes could be under way together in one band, and the most telescopes
// that could be. close says that there are such instants, but all too near to
// a neighbouring window's.
func (q *question) commonStarts(list []reach, lo, hi float64) (at []float64, most int, close bool) {
	count := q.telescopesAt(q.covers(list), lo, hi)
	first := int(math.Ceil(lo / float64(q.GridMin)))
	for k, n := range count {
		most = max(most, n)
		switch t := float64((first + k) * q.GridMin); {
		case n < q.goal.Count || q.unit.Timeliness(t) == 0:
		case !q.spaced(t):
			close = true
		default:
			at = append(at, t)
		}
	}
	return at, most, close
}

// covers are the times from which some scan of a telescope could be under way
// for the wanted time; the scans of the plan count, too.
func (q *question) covers(list []reach) []stretch {
	covers := q.stretches(list)
	for _, o := range q.standing() {
		covers = append(covers, stretch{telescope: q.Blocks[o.block].Telescope, block: o.block, bands: o.bands, lo: o.startMin, hi: o.endMin})
	}
	for i := range covers {
		covers[i].hi -= q.goal.OverlapMin
	}
	return covers
}

// telescopesAt is on how many telescopes at once, in the band with most, the
// covers lie at every grid instant in [lo, hi]; instants after the last cover
// are left out.
func (q *question) telescopesAt(covers []stretch, lo, hi float64) []int {
	grid := float64(q.GridMin)
	last := lo
	for _, c := range covers {
		last = max(last, c.hi)
	}
	first := int(math.Ceil(lo / grid))
	n := max(0, int(math.Floor(min(hi, last)/grid))-first+1)
	top, seen, here := make([]int, n), make([]int, n), make([]bool, n)
	for bit := uint32(1); bit <= q.allBands(); bit <<= 1 {
		clear(seen)
		for t := range q.Campaign.Telescopes { // a telescope counts once, however many scans it could make
			clear(here)
			for _, c := range covers {
				if c.telescope != t || c.bands&bit == 0 {
					continue
				}
				from, to := int(math.Ceil(c.lo/grid))-first, int(math.Floor(c.hi/grid))-first
				for k := max(0, from); k <= min(to, n-1); k++ {
					here[k] = true
				}
			}
			for k := range here {
				if here[k] {
					seen[k]++
				}
			}
		}
		for k := range top {
			top[k] = max(top[k], seen[k])
		}
	}
	return top
}

// placeTogether weighs the common times at which the unit could be served.
func (q *question) placeTogether(list []reach, at []float64) {
	const samples = 48 // instants looked at, spread over all that would do
	best, close := q.newChoice(), false
	blocks := map[int]bool{}
	for i := 0; i < len(at); i += 1 + len(at)/samples {
		for bit := uint32(1); bit <= q.allBands(); bit <<= 1 {
			chosen := q.cheapest(list, at[i], bit)
			if len(chosen) < q.goal.Count {
				continue
			}
			chosen = chosen[:q.goal.Count]
			start := math.Inf(-1) // of the common time: it may be before the instant asked for
			for _, o := range chosen {
				blocks[o.block] = true
				start = max(start, o.startMin)
			}
			gain := q.unit.Weight * q.unit.Timeliness(start)
			if gain > 0 && q.spaced(start) {
				best.consider(gain, chosen...)
			}
			close = close || !q.spaced(start)
		}
	}
	best.blocks = len(blocks)
	switch {
	case best.possible > 0:
		best.tell()
	case close:
		q.tooClose(true)
	default:
		q.foundWhole(Displaced, "Enough telescopes could observe it together, but pinned scans stand in the way at every common start.")
	}
}

// cheapest is for every telescope the option that is under way in a band from
// an instant for the wanted time and costs least; the cheapest first.
func (q *question) cheapest(list []reach, at float64, bit uint32) []*option {
	type priced struct {
		option *option
		loss   float64
	}
	byTelescope := map[int]priced{}
	offer := func(o option) {
		if o.bands&bit == 0 || o.startMin > at || o.endMin < at+q.goal.OverlapMin {
			return
		}
		displaced, ok := q.cost(&o)
		if !ok {
			return
		}
		t, loss := q.Blocks[o.block].Telescope, q.loss(displaced)+o.toll
		if p, seen := byTelescope[t]; !seen || loss < p.loss {
			byTelescope[t] = priced{&o, loss}
		}
	}
	for _, o := range q.standing() {
		offer(o)
	}
	for i := range list {
		r := list[i]
		r.lo, r.hi = at-float64(q.source.ScanMinutes[len(q.source.ScanMinutes)-1]), at
		q.each(&r, func(o *option) { offer(*o) })
	}
	telescopes := make([]int, 0, len(byTelescope))
	for t := range byTelescope {
		telescopes = append(telescopes, t)
	}
	slices.SortFunc(telescopes, func(a, b int) int {
		if x, y := byTelescope[a].loss, byTelescope[b].loss; x != y {
			if x < y {
				return -1
			}
			return 1
		}
		return a - b
	})
	chosen := make([]*option, len(telescopes))
	for i, t := range telescopes {
		chosen[i] = byTelescope[t].option
	}
	return chosen
}

// apart notes that too few telescopes can observe at once, and how near two
// come to it.
func (q *question) apart(list []reach, most int) {
	stretches := q.stretches(list)
	var codes []string
	for i := range stretches {
		if code := q.Campaign.Telescopes[stretches[i].telescope].Code; !slices.Contains(codes, code) {
			codes = append(codes, code)
		}
	}
	best, a, b := math.Inf(-1), stretch{}, stretch{}
	for i, x := range stretches {
		for _, y := range stretches[i+1:] {
			if common := min(x.hi, y.hi) - max(x.lo, y.lo); x.telescope != y.telescope && x.bands&y.bands != 0 && common > best {
				best, a, b = common, x, y
			}
		}
	}
	if a.lo > b.lo {
		a, b = b, a
	}
	count := q.goal.Count
	switch {
	case len(codes) < count:
		q.foundWhole(NoOverlap, "Only %s can observe it in the time in which it counts; %d telescopes at once are wanted.", both(codes), count)
	case best == math.Inf(-1):
		q.foundWhole(NoOverlap, "%s can observe it, but no two of them in the same band.", both(codes))
	case best <= 0:
		q.foundWhole(NoOverlap, "Never on two telescopes at once: the nearest are %s until %s and %s from %s, %s later; %d at once are wanted.",
			block(q, &q.Blocks[a.block]), clock(a.hi), block(q, &q.Blocks[b.block]), clock(b.lo), span(-best), count)
	case count == 2:
		q.foundWhole(NoOverlap, "On two telescopes at once for %s at most (%s and %s, from %s); %g min are wanted.", span(best),
			block(q, &q.Blocks[a.block]), block(q, &q.Blocks[b.block]), clock(max(a.lo, b.lo)), q.goal.OverlapMin)
	default:
		q.foundWhole(NoOverlap, "At most %d telescopes can observe it together in one band for %g min; %d are wanted.", most, q.goal.OverlapMin, count)
	}
}

// stretches are the times in which scans of the reaches lie.
func (q *question) stretches(list []reach) []stretch {
	var out []stretch
	for _, r := range list {
		b := &q.Blocks[r.block]
		for i := range r.place.Lengths {
			for _, run := range r.place.Lengths[i].Runs {
				out = append(out, q.stretchOf(b, r, run, r.place.Lengths[i].Steps))
			}
		}
	}
	return out
}

func (q *question) stretchOf(b *feasible.Block, r reach, run feasible.Run, steps int) stretch {
	return stretch{telescope: b.Telescope, block: r.block, bands: r.bands,
		lo: b.Minute(run.From, q.GridMin), hi: b.Minute(run.To-1+steps, q.GridMin)}
}
