package verify

import "slices"

// A run is the grid instants lo, lo+1, …, hi, both included. Grid instants are
// counted from 1970-01-01 in steps of the campaign's grid.
type run struct{ lo, hi int64 }

// runs is a set of grid instants: runs in ascending order, each separated from
// the next by at least one instant that is not in the set.
type runs []run

// unite is the set of all instants of the given runs, which it reorders.
func unite(list []run) runs {
	slices.SortFunc(list, func(a, b run) int {
		if a.lo != b.lo {
			return cmp64(a.lo, b.lo)
		}
		return cmp64(a.hi, b.hi)
	})
	out := list[:0]
	for _, r := range list {
		if r.hi < r.lo {
			continue
		}
		if n := len(out); n > 0 && r.lo <= out[n-1].hi+1 {
			out[n-1].hi = max(out[n-1].hi, r.hi)
			continue
		}
		out = append(out, r)
	}
	return runs(out)
}

func cmp64(a, b int64) int {
	switch {
	case a < b:
		return -1
	case a > b:
		return 1
	}
	return 0
}

// after is the index of the first run that ends at x or later.
func (s runs) after(x int64) int {
	i, _ := slices.BinarySearchFunc(s, x, func(r run, x int64) int { return cmp64(r.hi, x) })
	return i
}

// within are the instants in [lo, hi].
func (s runs) within(lo, hi int64) runs {
	var out runs
	for i := s.after(lo); i < len(s) && s[i].lo <= hi; i++ {
		out = append(out, run{max(s[i].lo, lo), min(s[i].hi, hi)})
	}
	return out
}

// atOrAfter is the first instant that is x or later.
func (s runs) atOrAfter(x int64) (int64, bool) {
	i := s.after(x)
	if i == len(s) {
		return 0, false
	}
	return max(s[i].lo, x), true
}

// atOrBefore is the last instant that is x or earlier.
func (s runs) atOrBefore(x int64) (int64, bool) {
	i := s.after(x)
	if i < len(s) && s[i].lo <= x {
		return x, true
	}
	if i == 0 {
		return 0, false
	}
	return s[i-1].hi, true
}

// meets reports whether any instant lies in [lo, hi].
func (s runs) meets(lo, hi int64) bool {
	x, ok := s.atOrAfter(lo)
	return ok && x <= hi
}

// atLeast is the instants that lie in at least n of the sets.
func atLeast(sets []runs, n int) runs {
	type edge struct {
		at   int64
		step int
	}
	var edges []edge
	for _, s := range sets {
		for _, r := range s {
			edges = append(edges, edge{r.lo, 1}, edge{r.hi + 1, -1})
		}
	}
	slices.SortFunc(edges, func(a, b edge) int { return cmp64(a.at, b.at) })
	var out []run
	count, from := 0, int64(0)
	for i := 0; i < len(edges); {
		at, was := edges[i].at, count
		for ; i < len(edges) && edges[i].at == at; i++ {
			count += edges[i].step
		}
		switch {
		case was < n && count >= n:
			from = at
		case was >= n && count < n:
			out = append(out, run{from, at - 1})
		}
	}
	return unite(out)
}
