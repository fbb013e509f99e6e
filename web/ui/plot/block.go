package plot

import (
	"fmt"
	"html"
	"slices"
	"strconv"
	"time"

	"cadencewright/web/view"
)

// Geometry of a block row, in the drawing's units.
const (
	rowW, rowH       = 960, 136
	rowX0, rowX1     = 54, 952
	laneTop, laneBot = 20, 104
	barTop, barH     = 50, 42
	charW            = 6.7 // width of a character of a bar's label
)

// BlockRow draws a block: a UTC axis above, sidereal and local time below, the
// scans as bars that link to their cards, free time in the open, lost time
// hatched, night shaded, and the chosen source's elevation behind.
func BlockRow(b view.BlockRow, week, source string) string {
	var c canvas
	a := axis{b.Start, b.End, rowX0, rowX1}
	c.beginGroup("row", rowW, rowH, "Block "+b.ID+" at "+b.Name, rowDesc(b))
	c.rect("lane", rowX0, laneTop, rowX1-rowX0, laneBot-laneTop)
	for _, s := range b.Night {
		x, w := a.clip(s)
		c.rect("night", x, laneTop, w, laneBot-laneTop)
	}
	c.rowAxes(a, b)
	c.rowCurve(a, b, source)
	for _, s := range b.Lost {
		x, w := a.clip(s)
		c.hatched("lost", x, laneTop, w, laneBot-laneTop, "hatch")
	}
	for _, s := range freeOf(b) {
		x, w := a.clip(s)
		if label := view.Duration(s.Minutes()) + " free"; w > charW*float64(len(label))+8 {
			c.text("free", x+w/2, barTop+barH/2+4, "middle", label)
		}
	}
	for _, s := range b.Scans {
		c.bar(a, s, week)
	}
	return c.end()
}

func rowDesc(b view.BlockRow) string {
	d := view.Range(b.Span) + " UTC, " + view.Plural(len(b.Scans), "scan") + ", " + view.Duration(b.FreeMin) + " free"
	if len(b.Lost) > 0 {
		d += ", parts lost"
	}
	return d
}

// rowAxes draws the three scales. Local time stands at the ticks of UTC, as
// the two differ by a constant; sidereal time has ticks of its own.
func (c *canvas) rowAxes(a axis, b view.BlockRow) {
	c.text("scale", 2, 13, "start", "UTC")
	c.text("scale", 2, laneBot+15, "start", "LST")
	c.text("scale", 2, laneBot+29, "start", "local")
	for _, t := range a.ticks(9) {
		x := a.x(t)
		c.line("grid", x, laneTop, x, laneBot)
		c.text("tick", labelX(x), 13, "middle", view.Clock(t))
		c.text("tick local", labelX(x), laneBot+29, "middle", view.LocalClock(t, b.Zone))
	}
	for _, t := range a.lstTicks(b.LSTStartH, 9) {
		c.line("mark", t.x, laneBot, t.x, laneBot+4)
		c.text("tick lst", labelX(t.x), laneBot+15, "middle", t.label)
	}
}

// labelX keeps a label in the middle of x within the drawing.
func labelX(x float64) float64 { return min(max(x, rowX0+6), rowX1-12) }

// rowCurve draws where the chosen source is and where it may be observed.
func (c *canvas) rowCurve(a axis, b view.BlockRow, source string) {
	if len(b.Curve) == 0 {
		return
	}
	y := func(el float64) float64 { return laneBot - (laneBot-laneTop)*min(max(el, 0), 90)/90 }
	for _, s := range b.Allowed {
		x, w := a.clip(s)
		c.rect("allowed", x, laneTop, w, laneBot-laneTop)
		c.rect("allowed-edge", x, laneTop, w, 3)
	}
	c.line("limit", rowX0, y(b.LimitDeg), rowX1, y(b.LimitDeg))
	c.curve("curve", a, b.Curve, y, 0)
	best := slices.MaxFunc(b.Curve, func(p, q view.Point) int {
		if p.ElDeg < q.ElDeg {
			return -1
		}
		return 1
	})
	if best.ElDeg > 0 {
		label := view.ShortName(source) + " " + view.Fixed(best.ElDeg, 0) + "°"
		x := min(max(a.x(best.At), rowX0+50), rowX1-50)
		c.text("curve-label", x, laneTop+18, "middle", label)
	}
}

// bar draws a scan as a link to its card.
func (c *canvas) bar(a axis, s view.Scan, week string) {
	x, w := a.clip(s.Span)
	if w <= 0 {
		return
	}
	w = max(w-1, 1.5) // a hair between neighbours
	title := fmt.Sprintf("%s, %s, %s to %s UTC, %s, %s", s.Source, s.Receiver, view.Clock(s.Start), view.Clock(s.End),
		stateWord(s), view.Micros(s.TOAUs))
	c.tag("a", "class", "scan "+s.State, "href", ScanPath(week, s.ID), "data-t", strconv.FormatInt(s.Start.Unix(), 10))
	c.WriteString("<title>" + html.EscapeString(title) + "</title>")
	c.rect("bar", x, barTop, w, barH, "rx", "1.5")
	switch s.State {
	case "lost", "dropped":
		c.rect("pattern", x, barTop, w, barH, "fill", "url(#hatch)")
	case "partial":
		c.rect("pattern", x, barTop, w, barH, "fill", "url(#dots)")
	}
	c.rect("edge", x, barTop, w, 3)
	if mark := Mark(s); mark != "" && w >= 12 {
		c.quiet("state", x+w-4, barTop+barH-6, "end", mark)
	}
	if label := fit(s.Source, w-6); label != "" {
		c.quiet("name", x+4, barTop+18, "start", label)
	}
	if room := w - 20; charW*float64(len(s.Receiver)) <= room {
		c.quiet("rx", x+4, barTop+34, "start", s.Receiver)
	}
	c.close("a")
}

// fit is the longest form of a source's name that has room in w.
func fit(source string, w float64) string {
	short := view.ShortName(source)
	least := []rune(short)
	for _, s := range []string{source, short, string(least[:min(4, len(least))])} {
		if charW*float64(len([]rune(s))) <= w {
			return s
		}
	}
	return ""
}

// ScanPath is where a scan's card is.
func ScanPath(week string, id int64) string {
	return "/weeks/" + week + "/scans/" + strconv.FormatInt(id, 10)
}

// Mark is a sign for a scan's state, so that colour is never alone.
func Mark(s view.Scan) string {
	switch s.State {
	case "done":
		return "✓"
	case "partial":
		return "◐"
	case "lost":
		return "✕"
	case "dropped":
		return "–"
	case "observing":
		return "▶"
	}
	switch {
	case s.Pinned:
		return "◆"
	case s.Extra:
		return "+"
	}
	return ""
}

func stateWord(s view.Scan) string {
	word := s.State
	if s.Pinned {
		word += ", pinned"
	}
	if s.Extra {
		word += ", extra"
	}
	return word
}

// freeOf is the parts of a block that are neither lost nor under a scan.
func freeOf(b view.BlockRow) []view.Span {
	taken := slices.Clone(b.Lost)
	for _, s := range b.Scans {
		taken = append(taken, s.Span)
	}
	slices.SortFunc(taken, func(p, q view.Span) int { return p.Start.Compare(q.Start) })
	var free []view.Span
	at := b.Start
	for _, s := range taken {
		if s.Start.Sub(at) >= time.Minute {
			free = append(free, view.Span{Start: at, End: s.Start})
		}
		if s.End.After(at) {
			at = s.End
		}
	}
	if b.End.Sub(at) >= time.Minute {
		free = append(free, view.Span{Start: at, End: b.End})
	}
	return free
}

// Free is the free parts of a block, for the table beside the drawing.
func Free(b view.BlockRow) []view.Span { return freeOf(b) }
