package verify

import (
	"fmt"
	"maps"
	"slices"

	"cadencewright/scheduler"
)

// countUnits says how often each unit is earned, and notes where the plan's
// list of unmet units does not fit that.
func (k *checker) countUnits(takers [][]taker) {
	listed := map[string]int{}
	for _, u := range k.plan.Unmet {
		listed[u.Unit]++
		own := k.byName[u.Unit]
		switch {
		case own == nil || own.goal.ID != u.Goal:
			k.note(u.Unit, "is listed as unmet, and goal %q has no such unit", u.Goal)
		case !k.same(u.Weight, own.weight):
			k.note(u.Unit, "is listed as unmet with weight %.6f, worked out again %.6f", u.Weight, own.weight)
		}
	}
	k.report.Units = make(map[string]int, len(k.units))
	for i, u := range k.units {
		n := len(takers[i])
		if u.goal.kind != scheduler.KindPhase {
			n = min(n, 1) // however many scans share it
		}
		k.report.Units[u.name] = n
		switch {
		case n < u.times && listed[u.name] == 0:
			k.note(u.name, "is earned %d of %d times and is not listed as unmet", n, u.times)
		case n >= u.times && listed[u.name] > 0:
			k.note(u.name, "is listed as unmet and is earned %d of %d times", n, u.times)
		case listed[u.name] > 1:
			k.note(u.name, "is listed as unmet %d times", listed[u.name])
		}
	}
}

// note adds a note about the list of unmet units.
func (k *checker) note(unit, format string, args ...any) {
	k.report.Notes = append(k.report.Notes, Violation{Kind: KindUnmet, Scan: -1, Unit: unit, Text: fmt.Sprintf(format, args...)})
}

// checkTotals checks the plan's score and what could have been earned.
func (k *checker) checkTotals() {
	if !k.same(k.plan.Score, k.report.Score) {
		k.badPlan(KindScore, figures{k.plan.Score, k.report.Score, "score"},
			"the plan's score is %.6f, worked out again %.6f", k.plan.Score, k.report.Score)
	}
	if !k.same(k.plan.Possible, k.report.Possible) {
		k.badPlan(KindPossible, figures{k.plan.Possible, k.report.Possible, "score"},
			"the plan says that %.6f is possible, worked out again %.6f", k.plan.Possible, k.report.Possible)
	}
}

// checkCertificate checks the prices and the bounds that rest on them.
func (k *checker) checkCertificate() error {
	prices := k.readPrices()
	if k.options.SkipBound {
		return nil
	}
	bound, err := k.bound(prices, k.options)
	if err != nil {
		return err
	}
	k.report.Bound = bound
	if own := k.plan.Certificate.Bound; !k.same(own, bound) {
		k.badPlan(KindCertBound, figures{own, bound, "score"}, "the certificate's bound is %.6f, worked out again from its prices %.6f", own, bound)
	}
	if !k.same(k.plan.Bound, bound) {
		k.badPlan(KindPlanBound, figures{k.plan.Bound, bound, "score"}, "the plan's bound is %.6f, worked out again from the certificate's prices %.6f", k.plan.Bound, bound)
	}
	if k.report.Score > bound*(1+k.options.Relative) {
		k.badPlan(KindUnderScore, figures{bound, k.report.Score, "score"}, "the bound %.6f is below the score %.6f", bound, k.report.Score)
	}
	return nil
}

// readPrices gives the price of every unit by its index. A price that is none
// counts as 0, with which every bound is still a bound.
func (k *checker) readPrices() []float64 {
	prices := make([]float64, len(k.units))
	for _, name := range slices.Sorted(maps.Keys(k.plan.Certificate.Prices)) {
		p := k.plan.Certificate.Prices[name]
		u := k.byName[name]
		switch {
		case u == nil:
			k.badPlan(KindPrice, none, "the certificate has a price of %q, and there is no such unit", name)
		case !(p >= 0) || p > maxPrice:
			k.badUnit(u, KindPrice, figures{p, 0, "score"}, "the certificate's price is %g; it must be 0 or more and finite", p)
		default:
			prices[u.index] = p
		}
	}
	return prices
}

// maxPrice keeps sums of prices finite.
const maxPrice = 1e300
