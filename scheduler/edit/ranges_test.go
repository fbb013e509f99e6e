package edit

import (
	"slices"
	"testing"
	"time"

	"pgregory.net/rapid"
)

// Where a scan could start is just where moving it breaks no rule of time, room
// or the sky.
func TestStartsAreThoseThatBreakNothing(t *testing.T) {
	for _, name := range []string{"small-1", "medium-1", "medium-2", "hard-1", "demo"} {
		t.Run(name, func(t *testing.T) {
			t.Parallel()
			s := sessionOf(t, name)
			rapid.Check(t, func(t *rapid.T) {
				i := rapid.IntRange(0, len(s.scans)-1).Draw(t, "scan")
				steps := rapid.SampledFrom(s.p.Campaign.Sources[s.scans[i].source].ScanMinutes).Draw(t, "minutes")
				o, err := s.Try(Resize(i, steps))
				if err != nil {
					t.Fatal(err)
				}
				b := &s.p.Blocks[s.scans[i].block]
				at := time.Unix(int64(b.FirstMin)*60, 0).UTC().Add(time.Duration(rapid.IntRange(-3, b.Steps+3).Draw(t, "step")*s.p.GridMin) * time.Minute)
				moved, err := s.Try(Change{Op: OpAlter, Scan: i, Start: at, Minutes: steps})
				if err != nil {
					t.Fatal(err)
				}
				stands := !slices.ContainsFunc(moved.Violations, func(v Violation) bool { return v.New && v.Rule != RulePin && v.Rule != RuleLength })
				if in := holds(o.Starts, at); in != stands {
					t.Errorf("scan %d for %d min at %s: among the starts %v, and moving it breaks %v", i, steps, at, in, moved.Violations)
				}
				if !slices.Equal(moved.Starts, o.Starts) {
					t.Errorf("scan %d: starts %v, and %v from %s", i, o.Starts, moved.Starts, at)
				}
				if stands != holds(moved.Slide, at) {
					t.Errorf("scan %d at %s stands: %v, and could slide over %v", i, at, stands, moved.Slide)
				}
				for _, r := range o.Slide {
					if !slices.Contains(o.Starts, r) {
						t.Errorf("slides over %v, which is not among the starts %v", r, o.Starts)
					}
				}
			})
		})
	}
}

func holds(list []Range, at time.Time) bool {
	return slices.ContainsFunc(list, func(r Range) bool { return !at.Before(r.First) && !at.After(r.Last) })
}

// Nobody passes a neighbour by sliding.
func TestSlidingEndsAtTheNeighbours(t *testing.T) {
	s := sessionOf(t, "medium-1")
	seen := 0
	for bi := range s.blocks {
		r := &s.blocks[bi]
		for k, x := range r.scans {
			o, err := s.Try(Move(x.index, s.listed(x).Start))
			if err != nil {
				t.Fatal(err)
			}
			if len(o.Slide) == 0 || !holds(o.Slide, s.listed(x).Start) {
				t.Errorf("scan %d cannot stay where it is: %v", x.index, o.Slide)
				continue
			}
			first, last := o.Slide[0].First, o.Slide[len(o.Slide)-1].Last
			if k > 0 && first.Before(s.plan.Scans[r.scans[k-1].index].End()) {
				t.Errorf("scan %d slides to %s, before the end of the one before it", x.index, first)
			}
			if k+1 < len(r.scans) && last.Add(time.Duration(x.minutes)*time.Minute).After(s.plan.Scans[r.scans[k+1].index].Start) {
				t.Errorf("scan %d slides to %s, into the one after it", x.index, last)
			}
			seen++
		}
	}
	if seen < 10 {
		t.Errorf("only %d scans", seen)
	}
}
