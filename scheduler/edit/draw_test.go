package edit

import (
	"time"

	"pgregory.net/rapid"
)

// drawChange draws a change of a session's plan: most near to what could be
// allowed, some anywhere.
func drawChange(t *rapid.T, s *Session) Change {
	if len(s.plan.Scans) == 0 {
		return drawAdd(t, s)
	}
	grid := time.Duration(s.p.GridMin) * time.Minute
	i := rapid.IntRange(0, len(s.plan.Scans)-1).Draw(t, "scan")
	x := s.plan.Scans[i]
	tel := s.p.Campaign.TelescopeByCode(x.Telescope)
	switch rapid.IntRange(0, 9).Draw(t, "what") {
	case 0, 1, 2:
		return drawAdd(t, s)
	case 3, 4:
		return Move(i, x.Start.Add(grid*time.Duration(rapid.IntRange(-30, 30).Draw(t, "steps"))))
	case 5:
		return Resize(i, drawMinutes(t, s, x.Source))
	case 6:
		return Tune(i, tel.Receivers[rapid.IntRange(0, len(tel.Receivers)-1).Draw(t, "receiver")].Code)
	case 7:
		return Drop(i)
	case 8:
		if x.Pinned {
			return Unpin(i)
		}
		return Pin(i)
	default:
		a := drawAdd(t, s)
		return MoveTo(i, a.Block, a.Receiver, a.Start)
	}
}

// drawAdd draws a new scan: of half of them the source can be observed then.
func drawAdd(t *rapid.T, s *Session) Change {
	c := s.p.Campaign
	b := &s.p.Blocks[rapid.IntRange(0, len(s.p.Blocks)-1).Draw(t, "block")]
	bl, tel := &c.Blocks[b.Index], &c.Telescopes[b.Telescope]
	src := rapid.IntRange(0, len(c.Sources)-1).Draw(t, "source")
	step := rapid.IntRange(-20, b.Steps+20).Draw(t, "start")
	minutes := 0
	if n := len(b.Places); n > 0 && rapid.Bool().Draw(t, "up") {
		pl := &b.Places[rapid.IntRange(0, n-1).Draw(t, "place")]
		if m := len(pl.Lengths); m > 0 {
			l := &pl.Lengths[rapid.IntRange(0, m-1).Draw(t, "length")]
			r := l.Runs[rapid.IntRange(0, len(l.Runs)-1).Draw(t, "run")]
			src, step, minutes = pl.Source, rapid.IntRange(r.From, r.To-1).Draw(t, "step"), l.Minutes
		}
	}
	if minutes == 0 {
		minutes = drawMinutes(t, s, c.Sources[src].Name)
	}
	code := rapid.SampledFrom(bl.Receivers).Draw(t, "of the block")
	if rapid.IntRange(0, 9).Draw(t, "odd receiver") == 0 {
		code = tel.Receivers[rapid.IntRange(0, len(tel.Receivers)-1).Draw(t, "receiver")].Code
	}
	start := bl.Start.Add(time.Duration(b.Minute(step, s.p.GridMin)-b.Minute(0, s.p.GridMin)) * time.Minute)
	return Add(bl.ID, c.Sources[src].Name, code, start, minutes)
}

// drawMinutes draws a length, allowed or not, seldom one off the grid.
func drawMinutes(t *rapid.T, s *Session, source string) int {
	if rapid.IntRange(0, 3).Draw(t, "odd length") == 0 {
		return rapid.IntRange(1, 120).Draw(t, "minutes")
	}
	return rapid.SampledFrom(s.p.Campaign.SourceByName(source).ScanMinutes).Draw(t, "length")
}
