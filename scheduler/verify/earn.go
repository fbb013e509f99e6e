package verify

import (
	"math/bits"

	"cadencewright/scheduler"
)

// The plan says which scans earn from which unit; the check does not look for a
// better distribution. It asks whether those scans can, by the rules of the
// unit's kind, and what that is worth. Where they cannot, the unit earns
// nothing (a cadence unit: what its first scan is worth; a phase window: what
// those of its scans are worth that have an orbit).

// taker is a scan that says it earns from a unit.
type taker struct {
	scan  *scan
	value float64
}

// checkEarnings works out what the earnings that the plan lists are really
// worth, unit by unit, and sets the score.
func (k *checker) checkEarnings() {
	takers := make([][]taker, len(k.units))
	for _, s := range k.scans {
		k.readEarnings(s, takers)
	}
	when := make([]msec, len(k.units))
	for i, list := range takers {
		if len(list) > 0 {
			k.report.Score += k.checkUnit(k.units[i], list, &when[i])
		}
	}
	for _, g := range k.groups {
		k.checkSpacing(g, takers, when)
	}
	k.countUnits(takers)
}

// readEarnings sorts a scan's earnings into their units and checks what a scan
// by itself may earn.
func (k *checker) readEarnings(s *scan, takers [][]taker) {
	from := map[*group]string{}
	for _, e := range s.listed.Earns {
		u := k.byName[e.Unit]
		if u == nil || u.goal.ID != e.Goal {
			k.badEarning(s, e.Unit, KindEarning, "earns from %q of goal %q, and there is no such unit", e.Unit, e.Goal)
			continue
		}
		if other, twice := from[u.group]; twice {
			k.badEarning(s, u.name, KindOneWindow, "earns from %s and from %s; only one of them is allowed", other, u.name)
		}
		from[u.group] = u.name
		if u.goal.source != s.source || u.goal.labels(s.receiver) == 0 {
			k.badEarning(s, u.name, KindEarning, "cannot take part in %s, which wants %s in %v at an allowed telescope", u.name, u.goal.Source, u.goal.Bands)
			continue
		}
		if s.info <= 0 {
			k.badEarning(s, u.name, KindEarning, "earns from %s, and the pulsar is not detectable", u.name)
		}
		takers[u.index] = append(takers[u.index], taker{s, e.Value})
	}
}

// checkUnit is what a unit's scans really earn; when is the instant that its
// timeliness counts from.
func (k *checker) checkUnit(u *unit, list []taker, when *msec) float64 {
	claimed := 0.0
	for _, t := range list {
		claimed += t.value
	}
	value, ok := 0.0, false
	switch u.goal.kind {
	case scheduler.KindCadence:
		value, ok = k.earnCadence(u, list, claimed, when)
	case scheduler.KindPhase:
		value, ok = k.earnPhase(u, list)
	case scheduler.KindOverlap:
		value, ok = k.earnOverlap(u, list, when)
	case scheduler.KindBandPair:
		value, ok = k.earnPair(u, list, when)
	}
	if ok && !k.same(claimed, value) {
		k.badUnit(u, KindUnitValue, figures{claimed, value, "score"}, "the plan says %.6f, worked out again %.6f", claimed, value)
	}
	return value
}

// earnCadence is one scan's weight × timeliness × quality.
func (k *checker) earnCadence(u *unit, list []taker, claimed float64, when *msec) (float64, bool) {
	s := list[0].scan
	*when = s.start
	worth := u.weight * u.timeliness(s.start)
	value := worth * quality(s.info, u.goal.toaUs)
	if raw := rawQuality(s.info, u.goal.toaUs); u.goal.toaUs > 0 && value == 0 && raw > 0.499 && k.same(claimed, worth*raw) {
		value = claimed // at the very edge of what counts, either side is right
	}
	if len(list) != 1 {
		k.badUnit(u, KindUnitRule, figures{float64(len(list)), 1, "scans"}, "earned by %d scans; one is allowed", len(list))
		return value, false
	}
	return value, true
}

// earnPhase matches scans with passages, one orbit to each.
func (k *checker) earnPhase(u *unit, list []taker) (float64, bool) {
	slack := lengthOf(k.options.TimeS, second)
	reach := make([][]int, len(list))
	// A scan of a short orbit may cover several passages, so which scan stands
	// for which orbit is a matching.
	for i, t := range list {
		for j, p := range u.passages {
			if p.coveredBy(t.scan.start, t.scan.end, u.goal.dwell, slack) {
				reach[i] = append(reach[i], j)
			}
		}
	}
	n := matched(reach, len(u.passages))
	value := u.value * float64(min(n, u.times))
	switch {
	case n < len(list):
		k.badUnit(u, KindUnitRule, figures{float64(n), float64(len(list)), "scans"},
			"earned by %d scans, of which %d cover the window in an orbit of their own", len(list), n)
		return value, false
	case n > u.times:
		k.badUnit(u, KindUnitRule, figures{float64(n), float64(u.times), "scans"}, "earned %d times; %d are wanted", n, u.times)
		return value, false
	}
	return value, true
}

// matched is the most scans that can have an orbit of their own: augmenting
// paths in the bipartite graph of scans and passages.
func matched(reach [][]int, passages int) int {
	owner := make([]int, passages)
	for j := range owner {
		owner[j] = -1
	}
	var visited []bool
	var place func(i int) bool
	place = func(i int) bool {
		for _, j := range reach[i] {
			if visited[j] {
				continue
			}
			visited[j] = true
			if owner[j] < 0 || place(owner[j]) {
				owner[j] = i
				return true
			}
		}
		return false
	}
	n := 0
	for i := range reach {
		visited = make([]bool, passages)
		if place(i) {
			n++
		}
	}
	return n
}

// earnOverlap checks that enough telescopes are under way together.
func (k *checker) earnOverlap(u *unit, list []taker, when *msec) (float64, bool) {
	g := u.goal
	common := g.allBands() // of all scans: they must share one
	start, end := list[0].scan.start, list[0].scan.end
	telescopes := map[*telescope]bool{}
	for _, t := range list {
		start, end = max(start, t.scan.start), min(end, t.scan.end)
		common &= g.labels(t.scan.receiver)
		telescopes[t.scan.block.telescope] = true
	}
	*when = start
	switch {
	case len(list) != g.count || len(telescopes) != g.count:
		k.badUnit(u, KindUnitRule, figures{float64(len(telescopes)), float64(g.count), "telescopes"},
			"%d scans on %d telescopes; one on each of %d is wanted", len(list), len(telescopes), g.count)
		return 0, false
	case common == 0:
		k.badUnit(u, KindUnitRule, none, "the scans have no band of %v in common", g.Bands)
		return 0, false
	case end-start < g.overlap:
		k.badUnit(u, KindUnitRule, figures{max(0, end-start).minutes(), g.overlap.minutes(), "min"},
			"the scans are under way together for %.1f min; %g min are wanted", max(0, end-start).minutes(), g.overlap.minutes())
		return 0, false
	}
	return u.weight * u.timeliness(start), true
}

// earnPair checks that both bands are observed near in time.
func (k *checker) earnPair(u *unit, list []taker, when *msec) (float64, bool) {
	g := u.goal
	first, last := list[0].scan.start, list[0].scan.start
	var bands uint32 // of any scan: they must make up both
	for _, t := range list {
		first, last = min(first, t.scan.start), max(last, t.scan.start)
		bands |= g.labels(t.scan.receiver)
	}
	*when = last
	switch {
	case len(list) > 2:
		k.badUnit(u, KindUnitRule, figures{float64(len(list)), 2, "scans"}, "earned by %d scans; two are wanted", len(list))
		return 0, false
	case bands != g.allBands():
		k.badUnit(u, KindUnitRule, figures{float64(bits.OnesCount32(bands)), 2, "bands"},
			"observed only in %v; both of %v are wanted", g.bandNames(bands), g.Bands)
		return 0, false
	case last-first > g.within:
		k.badUnit(u, KindUnitRule, figures{(last - first).hours(), g.within.hours(), "h"},
			"the scans start %.2f h apart; at most %g h are allowed", (last - first).hours(), g.within.hours())
		return 0, false
	}
	return u.weight * u.timeliness(last), true
}

// checkSpacing checks that the windows of one goal are earned in their order,
// and neighbours at least half an interval apart.
func (k *checker) checkSpacing(g *group, takers [][]taker, when []msec) {
	var before *unit
	for _, u := range g.units {
		if len(takers[u.index]) == 0 {
			continue
		}
		if before != nil {
			apart := when[u.index] - when[before.index]
			if least := (g.goal.every + 1) / 2; apart < least {
				k.badUnit(u, KindSpacing, figures{apart.days(), least.days(), "d"},
					"earned %.3f d after %s; half of the interval, %.3f d, is needed", apart.days(), before.name, least.days())
			}
		}
		before = u
	}
}
