package explain

import (
	"cadencewright/scheduler"
	"cadencewright/scheduler/feasible"
)

// reaches finds where scans in some of the goal's bands can start within
// [lo, hi], and notes for every block that has none how far it gets.
func (q *question) reaches(bands uint32, lo, hi float64) []reach {
	var list []reach
	blocks := 0
	for bi := range q.Blocks {
		b := &q.Blocks[bi]
		if !q.wants.AllowsTelescope(q.telescope(b).Code) {
			continue
		}
		blocks++
		list = append(list, q.inBlock(bi, bands, lo, hi)...)
	}
	if blocks == 0 {
		q.foundWhole(NoBlock, "No telescope that may serve it (%s) has a block in this horizon.", q.allowed())
	}
	return list
}

// The order of the questions is that in which a person would ask them, from
// what cannot be changed this week to what nearly fits. A block is counted
// under the first that it fails.

// inBlock is what one block offers; where that is nothing, it notes why.
func (q *question) inBlock(bi int, bands uint32, lo, hi float64) []reach {
	b := &q.Blocks[bi]
	var usable, unseen []int // positions of receivers
	for j, ri := range b.Receivers {
		switch {
		case q.bandsOf(b, ri)&bands == 0:
		case q.sees(b, ri):
			usable = append(usable, j)
		default:
			unseen = append(unseen, j)
		}
	}
	switch {
	case len(usable) == 0 && len(unseen) == 0:
		q.noReceiver(b, bands)
	case len(usable) == 0:
		q.notDetectable(b, b.Receivers[unseen[0]])
	case b.Minute(b.Steps, q.GridMin) < lo || b.Minute(0, q.GridMin) > hi:
		q.outsideWindow(b, lo, hi)
	default:
		pl := b.PlaceOf(q.goal.Source)
		if pl == nil || len(pl.Lengths) == 0 {
			q.notUp(bi)
			return nil
		}
		if !q.startsIn(b, pl, lo, hi) {
			q.outsideWindow(b, lo, hi)
			return nil
		}
		var list []reach
		for _, j := range usable {
			list = append(list, reach{bi, j, pl, q.bandsOf(b, b.Receivers[j]) & bands, lo, hi})
		}
		return list
	}
	return nil
}

func (q *question) noReceiver(b *feasible.Block, bands uint32) {
	q.found(NoReceiver, 0, func(n int) string {
		return sentence("%s no receiver for %s.", blocksHave(n), q.bandNames(bands))
	})
}

func (q *question) notDetectable(b *feasible.Block, ri int) {
	t := q.telescope(b)
	r := &t.Receivers[ri]
	radio := feasible.Radiometer(q.source, r)
	q.found(NotDetectable, -radio.WidthS(), func(n int) string {
		return sentence("The pulse is too broad to be seen in %s: %.3g ms with %s of %s at %.0f MHz; the period is %.3g ms, and nine tenths of it are the limit.",
			blocks(n), 1e3*radio.WidthS(), r.Code, t.Code, r.FreqMHz, 1e3*q.source.PeriodS)
	})
}

// outsideWindow is told by the block that is nearest in time.
func (q *question) outsideWindow(b *feasible.Block, lo, hi float64) {
	start, end := b.Minute(0, q.GridMin), b.Minute(b.Steps, q.GridMin)
	missed, how := start-hi, "late" // not above 0: the block reaches into the time
	if end < hi {
		missed, how = lo-end, "early"
	}
	q.found(OutsideWindow, -missed, func(n int) string {
		where := sentence("%s lies outside the time in which it counts", block(q, b))
		if n > 1 {
			where = sentence("%s lie outside the time in which it counts", blocks(n))
		}
		text := sentence("%s, %s to %s", where, clock(lo), clock(hi))
		switch {
		case missed <= 0:
			return text + sentence("; %s lies only partly in it, and the source cannot be observed then.", block(q, b))
		case n > 1:
			return text + sentence("; the nearest, %s, is %s too %s.", block(q, b), span(missed), how)
		}
		return text + sentence("; it is %s too %s.", span(missed), how)
	})
}

// notUp says why no scan is possible in a block at all.
func (q *question) notUp(bi int) {
	if q.toll != nil {
		return // asked what would be possible, not why something is not
	}
	b := &q.Blocks[bi]
	r, t := q.rejects[bi][q.goal.Source], q.telescope(b)
	// The planner's counts are by the first limit that an instant fails, in the
	// order elevation, Sun, mount: the last of them that any instant has got to
	// is the one that stands in the way.
	switch {
	case r == nil || r.Samples == 0:
		q.tooShort(b, 0)
	case r.Up > 0 && r.Longest*q.GridMin < q.shortest():
		q.tooShort(b, r.Longest*q.GridMin)
	case r.Up > 0:
		q.noTime(bi)
	case r.OffMount > 0:
		q.found(OffMount, float64(r.OffMount), func(n int) string {
			return sentence("In %s it is high enough only where the mount cannot follow: %s reaches %s.", blocks(n), t.Code, mountReach(t))
		})
	case r.NearSun > 0:
		least := max(t.SunMinDeg, q.source.SunMinDeg)
		q.found(NearSun, r.SunDeg-least, func(n int) string {
			return sentence("Too near the Sun in %s: %.1f deg away (%s), and %g deg are wanted.", blocks(n), r.SunDeg, block(q, b), least)
		})
	case r.TooHigh > 0:
		q.found(TooHigh, -r.MaxElDeg, func(n int) string {
			return sentence("In %s it stands too high wherever it is above the horizon: %.1f deg (%s), and %g deg is the highest allowed.",
				blocks(n), r.MaxElDeg, block(q, b), t.ElevationMaxDeg)
		})
	default:
		q.found(TooLow, r.MaxElDeg-r.NeedElDeg, func(n int) string {
			return sentence("Never up in %s: %.1f deg at the highest (%s), and the limit there is %.1f deg.", blocks(n), r.MaxElDeg, block(q, b), r.NeedElDeg)
		})
	}
}

// tooShort: the source is up, or the block goes on, for less than a scan.
func (q *question) tooShort(b *feasible.Block, upMin int) {
	long := b.Steps * q.GridMin
	if long < q.shortest() {
		q.found(TooShort, float64(long), func(n int) string {
			return sentence("Too short: %s, %d min in %s; the shortest allowed scan takes %d min.", blocks(n), long, block(q, b), q.shortest())
		})
		return
	}
	q.found(TooShort, float64(upMin), func(n int) string {
		return sentence("Up for too short a time in %s: %d min at a stretch (%s); the shortest allowed scan takes %d min.",
			blocks(n), upMin, block(q, b), q.shortest())
	})
}

// shortest is the shortest allowed scan of the source in minutes.
func (q *question) shortest() int { return q.source.ScanMinutes[0] }

func (q *question) telescope(b *feasible.Block) *scheduler.Telescope {
	return &q.Campaign.Telescopes[b.Telescope]
}
