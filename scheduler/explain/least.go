package explain

import (
	"fmt"
	"math"
	"slices"
	"strings"
	"time"

	"cadencewright/astro"
	"cadencewright/astro/timescale"
	"cadencewright/scheduler"
	"cadencewright/scheduler/units"
)

// least is the change of the real campaign that a choice in the world needs.
// It is one change of one thing, or nothing is suggested.
func (w *world) least(found *question) (Suggestion, bool) {
	var owing []*option
	for i := range found.best.options {
		if o := &found.best.options[i]; o.had == nil && o.toll > 0 {
			owing = append(owing, o)
		}
	}
	if len(owing) == 0 {
		return Suggestion{}, false
	}
	switch w.kind {
	case Receiver:
		return w.leastReceiver(owing)
	case ScanLength:
		return w.leastLength(owing)
	case LowerLimit:
		return w.leastLimit(owing)
	case LongerBlock:
		return w.leastBlock(owing)
	}
	for _, o := range owing {
		if o.block != owing[0].block {
			return Suggestion{}, false
		}
	}
	return w.newBlock(found, owing)
}

// leastReceiver is one receiver more in one block.
func (w *world) leastReceiver(owing []*option) (Suggestion, bool) {
	for _, o := range owing {
		if o.block != owing[0].block || o.receiver != owing[0].receiver {
			return Suggestion{}, false
		}
	}
	b := w.blockOf(owing[0])
	return Suggestion{Telescope: b.Telescope, Block: b.ID, Receivers: []string{w.receiverOf(owing[0])}}, true
}

// leastLength is one length more.
func (w *world) leastLength(owing []*option) (Suggestion, bool) {
	for _, o := range owing[1:] {
		if o.steps != owing[0].steps {
			return Suggestion{}, false
		}
	}
	return Suggestion{Source: w.q.source.Name, ScanMinutes: owing[0].steps * w.GridMin}, true
}

// leastLimit is a lower limit at one telescope.
func (w *world) leastLimit(owing []*option) (Suggestion, bool) {
	b, low := &w.Blocks[owing[0].block], math.Inf(1)
	for _, o := range owing {
		if w.Blocks[o.block].Telescope != b.Telescope {
			return Suggestion{}, false
		}
		low = math.Min(low, w.lowest(&w.Blocks[o.block], o))
	}
	// To a tenth of a degree, downwards.
	return Suggestion{Telescope: w.Campaign.Telescopes[b.Telescope].Code, ElevationDeg: math.Max(0, math.Floor(10*low-1e-4)/10)}, true
}

// leastBlock is more time for one block, at one end or at both.
func (w *world) leastBlock(owing []*option) (Suggestion, bool) {
	early, late := 0.0, 0.0
	for _, o := range owing {
		if o.block != owing[0].block {
			return Suggestion{}, false
		}
		e, l := w.outside(o)
		early, late = math.Max(early, e), math.Max(late, l)
	}
	real := w.base.index.Block(w.blockOf(owing[0]).ID)
	return Suggestion{Telescope: real.Telescope, Block: real.ID, MoreMinutes: early + late,
		Start: real.Start.Add(-wholeMinutes(early)), End: real.End.Add(wholeMinutes(late))}, true
}

func wholeMinutes(m float64) time.Duration { return time.Duration(m) * time.Minute }

// newBlock is a block for the scans that need one, and where else in sidereal
// time it could be.
func (w *world) newBlock(found *question, owing []*option) (Suggestion, bool) {
	o := owing[0]
	ready := math.Ceil(w.readyMin(o) - units.MS)
	from, to := math.Inf(1), math.Inf(-1)
	t := found.telescope(&w.Blocks[o.block])
	s := Suggestion{Telescope: t.Code, Block: freeID(w.base.Campaign, t.Code+"-new")}
	for _, x := range owing {
		from, to = math.Min(from, x.startMin-ready), math.Max(to, x.endMin)
		if code := w.receiverOf(x); !slices.Contains(s.Receivers, code) {
			s.Receivers = append(s.Receivers, code)
		}
	}
	s.Start, s.End, s.Hours = instant(from), instant(to), (to-from)/60
	first, last := from, to
	if found.goal.Kind == scheduler.KindCadence { // one scan, whenever it counts
		early, late := w.reachOf(found, o)
		first, last = early-ready, late+float64(o.steps*w.GridMin)
	}
	// Sidereal time says it once for all days: the sky comes round to it.
	if last-first >= siderealDayMin {
		s.LSTHours = [2]float64{0, 24}
		return s, true
	}
	for i, m := range []float64{first, last} {
		lst, err := timescale.LST(instant(m), w.Campaign.DUT1S, astro.FromDeg(t.LongitudeDeg))
		if err != nil {
			return s, false
		}
		s.LSTHours[i] = lst.Hours()
	}
	return s, true
}

// siderealDayMin is 23 h 56 min.
const siderealDayMin = 1436

// reachOf are the first and the last start, around an option's, with which a
// scan of its length would serve a cadence unit all the same.
func (w *world) reachOf(q *question, o *option) (first, last float64) {
	b := &w.Blocks[o.block]
	serves := func(start int) bool {
		at := b.Minute(start, w.GridMin)
		return o.place.Allows(o.steps, start) && q.unit.Timeliness(at) > 0 && q.spaced(at) &&
			units.Quality(o.place.InfoOf(o.receiver, start, o.steps), q.goal.TOAUs) > 0
	}
	// Step by step: what is gathered depends on how high the source stands.
	lo, hi := o.start, o.start
	for serves(lo - 1) {
		lo--
	}
	for serves(hi + 1) {
		hi++
	}
	return b.Minute(lo, w.GridMin), b.Minute(hi, w.GridMin)
}

// spare is the id of the block of the choice that does not exist; "" where it
// needs none.
func (w *world) spare(c *choice) string {
	for i := range c.options {
		if o := &c.options[i]; o.had == nil && w.spares[w.blockOf(o).ID] {
			return w.blockOf(o).ID
		}
	}
	return ""
}

// text says what is to be changed.
func (w *world) text(found *question, s *Suggestion) string {
	var what string
	switch s.Kind {
	case Receiver:
		what = sentence("let block %s of %s use %s as well", s.Block, s.Telescope, both(s.Receivers))
	case ScanLength:
		what = sentence("allow %s scans of %d min (now %s)", s.Source, s.ScanMinutes, minutesList(w.q.source.ScanMinutes))
	case LowerLimit:
		what = sentence("let %s go down to %.1f deg (now %g deg)", s.Telescope, s.ElevationDeg, w.base.index.Telescope(s.Telescope).ElevationMinDeg)
	case LongerBlock:
		real := w.base.index.Block(s.Block)
		var ends []string
		if s.Start.Before(real.Start) {
			ends = append(ends, "from "+clock(units.Minutes(s.Start)))
		}
		if s.End.After(real.End) {
			ends = append(ends, "until "+clock(units.Minutes(s.End)))
		}
		what = sentence("give block %s of %s %.0f min more, %s", s.Block, s.Telescope, s.MoreMinutes, both(ends))
	case NewBlock:
		lst := sentence("between %.1f and %.1f h of local sidereal time", s.LSTHours[0], s.LSTHours[1])
		if s.LSTHours[1] == 24 {
			lst = "at any time of day"
		}
		what = sentence("get a block of %.1f h at %s with %s %s, for instance from %s to %s", s.Hours, s.Telescope, both(s.Receivers), lst,
			clock(units.Minutes(s.Start)), clock(units.Minutes(s.End)))
	}
	instead := ""
	if n := len(s.Drop); n > 0 {
		instead = sentence(" in place of %s, which earns nothing", s.Drop[0].Source)
		if n > 1 {
			instead = sentence(" in place of %d scans that earn nothing", n)
		}
	}
	return sentence("To meet it, %s, and add %s%s: %s.", what, addedTitles(s.Add), instead, signed(s.Gain))
}

// addedTitles are scans in words.
func addedTitles(list []scheduler.Scan) string {
	var names []string
	for _, x := range list {
		names = append(names, fmt.Sprintf("%s with %s from %s for %d min", x.Telescope, x.Receiver, clock(units.Minutes(x.Start)), x.Minutes))
	}
	return both(names)
}

// minutesList is "20 and 40 min".
func minutesList(list []int) string {
	return both(strings.Fields(strings.Trim(fmt.Sprint(list), "[]"))) + " min"
}
