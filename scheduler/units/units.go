// Package units lists what can be earned over a horizon: every goal's units
// with their due windows, urgency and weight, or their passages through a
// window of orbital phase, given the history before the horizon.
//
// It is section 5 of the planning model, "what a plan is worth", and nothing
// else: it knows no sky and no blocks. Instants are minutes since
// 1970-01-01T00:00Z and are compared to a millisecond.
package units

import (
	"fmt"
	"math"
	"time"

	"cadencewright/scheduler"
)

// MS is a millisecond in minutes: the resolution at which instants compare.
const MS = 1e-3 / 60

// Kind is one of the four kinds of goal.
type Kind = scheduler.GoalKind

// Goal is one goal in the form that planning uses: names resolved to indices,
// times in minutes.
type Goal struct {
	ID         string
	Kind       Kind
	Source     int // index into Campaign.Sources
	Priority   float64
	TOAUs      float64 // wanted; 0: none stated (cadence)
	Count      int     // telescopes at once (overlap)
	OverlapMin float64 // (overlap)
	WithinMin  float64 // (pair)
	DwellMin   float64 // (phase)
	EveryMin   float64 // (all but phase)
	EarlyMin   float64 // (all but phase)
	Units      []int   // its units, indices into Set.Units
	// Last is the minute at which the scan began that satisfied the goal last
	// before the horizon; Had is false where none ever did. (all but phase)
	Last float64
	Had  bool

	bands BandSet
	all   bool   // every telescope may serve
	tels  []bool // else: by index into Campaign.Telescopes
}

// Unit is something that can be satisfied once, or for a phase window N times
// in different orbits.
type Unit struct {
	Name   string
	Goal   int // index into Set.Goals
	Group  int // units of one group are options of each other for one scan
	K      int // 1, 2, … for due windows; the window's index from 0 for phase
	N      int // how often it can be earned
	Cap    int // of its price in the bound: 1, N, Count or 2
	Weight float64
	Value  float64 // of earning it once at its best: Weight, or Weight/N for phase

	Due, Every, Early float64 // minutes; not for phase
	Passages          []Passage
}

// Passage is one passage of a phase window that has not been counted yet, in
// minutes.
type Passage struct {
	Orbit        int
	Enter, Leave float64
}

// Set is all units of a horizon.
type Set struct {
	From, To float64 // the horizon, minutes
	Goals    []Goal  // cadence, phase, overlap, pair: in the campaign's order
	Units    []Unit  // in the order of their goals
	Groups   int
	Possible float64
	// BySource lists the units of each source, in order.
	BySource [][]int

	receivers [][]receiver // by telescope, then receiver
	seen      map[seenKey]bool
	index     map[string]int
}

// ByName is the index of a unit, or -1.
func (s *Set) ByName(name string) int {
	if i, ok := s.index[name]; ok {
		return i
	}
	return -1
}

// Minutes is an instant in minutes since 1970.
func Minutes(t time.Time) float64 { return float64(t.UnixMilli()) / 60000 }

// Instant is the instant of minutes since 1970, to the millisecond.
func Instant(minutes float64) time.Time {
	return time.UnixMilli(int64(math.Round(minutes * 60000))).UTC()
}

// Timeliness is v(t) for a due window: 1 at its due instant, falling to one
// half over the early part and by six tenths over the interval after it.
func (u *Unit) Timeliness(t float64) float64 {
	d := t - u.Due
	if d < 0 {
		if d < -u.Early-MS {
			return 0
		}
		return 1 + 0.5*d/math.Max(u.Early, MS)
	}
	if d >= u.Every-MS {
		return 0
	}
	return 1 - 0.6*d/u.Every
}

// Window is the stretch of time outside which Timeliness is 0.
func (u *Unit) Window() (from, to float64) { return u.Due - u.Early - MS, u.Due + u.Every - MS }

// BestTimeliness is the largest Timeliness on [lo, hi].
func (u *Unit) BestTimeliness(lo, hi float64) float64 {
	return u.Timeliness(math.Min(math.Max(u.Due, lo), hi))
}

// Quality is what a scan's information (1/s²) is worth against the wanted TOA
// uncertainty: 1 where none is stated and the pulsar is detected at all, and 0
// below one half.
func Quality(info, toaUs float64) float64 {
	if toaUs == 0 {
		if info > 0 {
			return 1
		}
		return 0
	}
	s := toaUs * 1e-6
	q := math.Min(1, info*s*s)
	if q < 0.5 {
		return 0
	}
	return q
}

// Covers tells whether a scan [start, end) spends long enough in a passage: the
// dwell time, or all of a passage that is shorter.
func (p Passage) Covers(start, end, dwellMin float64) bool {
	common := math.Min(end, p.Leave) - math.Max(start, p.Enter)
	return common >= math.Min(dwellMin, p.Leave-p.Enter)-MS
}

// Bands are the goal's bands that a receiver can give it; 0 where the receiver
// or its telescope cannot take part.
func (s *Set) Bands(g *Goal, telescope, receiver int) BandSet {
	if !g.all && !g.tels[telescope] {
		return 0
	}
	return g.bands & s.receivers[telescope][receiver].bands
}

// Wants are all of the goal's bands.
func (g *Goal) Wants() BandSet { return g.bands }

// Detectable tells whether a receiver sees the source's pulses at all.
func (s *Set) Detectable(source, telescope, receiver int) bool {
	return s.seen[seenKey{source, telescope, receiver}]
}

// BandSet is a set of band labels.
type BandSet uint64

// maxBands is how many labels a BandSet can tell apart.
const maxBands = 64

type bandNames map[string]BandSet

func (b bandNames) set(labels []string) (BandSet, error) {
	var s BandSet
	for _, l := range labels {
		bit, ok := b[l]
		if !ok {
			if len(b) == maxBands {
				return 0, fmt.Errorf("band %q: a campaign can have at most %d different band labels", l, maxBands)
			}
			bit = 1 << len(b)
			b[l] = bit
		}
		s |= bit
	}
	return s, nil
}

type receiver struct{ bands BandSet }

type seenKey struct{ source, telescope, receiver int }

// exact is an instant in minutes with all its digits: passages are not rounded
// to the millisecond.
func exact(t time.Time) float64 {
	return float64(t.Unix())/60 + float64(t.Nanosecond())/60e9
}
