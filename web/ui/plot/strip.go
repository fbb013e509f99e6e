package plot

import (
	"time"

	"cadencewright/web/view"
)

// Strip draws the week at a glance: a line a telescope, seven days, each block
// a link to its row, filled as far as scans fill it.
func Strip(w view.Week) string {
	const x0, x1, top, step = 54, 952, 20, 17
	height := float64(top + step*len(w.Telescopes) + 4)
	var c canvas
	a := axis{w.From, w.To, x0, x1}
	c.beginGroup("strip", rowW, height, "Blocks of the week by telescope", "One line a telescope, seven days from Monday 00:00 UTC")
	for t, odd := w.From, false; t.Before(w.To); t, odd = t.AddDate(0, 0, 1), !odd {
		x, width := a.clip(view.Span{Start: t, End: t.AddDate(0, 0, 1)})
		if odd {
			c.rect("stripe", x, top-2, width, height-top)
		}
		c.text("tick", x+4, 13, "start", view.Day(t))
	}
	for i, tel := range w.Telescopes {
		y := float64(top + step*i)
		c.text("scale", 2, y+11, "start", tel.Code)
		c.line("grid", x0, y+7, x1, y+7)
		for _, b := range tel.Blocks {
			c.stripBlock(a, tel, b, y)
		}
	}
	if !w.Now.Before(w.From) && w.Now.Before(w.To) {
		x := a.x(w.Now)
		c.line("now", x, top-4, x, height-2)
		c.text("now-label", min(x+3, x1-24), height-1, "start", "now")
	}
	return c.end()
}

func (c *canvas) stripBlock(a axis, tel view.StripRow, b view.StripBlock, y float64) {
	x, width := a.clip(b.Span)
	if width <= 0 {
		return
	}
	width = max(width, 3)
	label := tel.Name + ", " + view.Range(b.Span) + " UTC, " + view.Duration(b.UsedMin) + " under scans"
	c.tag("a", "href", "#block-"+b.ID, "aria-label", label, "class", "block")
	c.titles(label, "")
	c.rect("hit", x, y-1, width, 16)
	c.rect("frame", x, y+1, width, 12)
	if total := b.Minutes(); total > 0 {
		c.rect("used", x, y+1, width*min(float64(b.UsedMin)/float64(total), 1), 12)
	}
	if b.Lost {
		c.rect("pattern", x, y+1, width, 12, "fill", "url(#hatch)")
	}
	c.close("a")
}

// Cadence draws the past weeks and the coming ones of a source, a line a band.
func Cadence(d view.Cadence) string {
	const x0, x1, top, step = 84, 948, 22, 26
	height := float64(top + step*len(d.Bands) + 6)
	var c canvas
	a := axis{d.From, d.To, x0, x1}
	c.begin("cadence", rowW, height, "Scans of the past weeks by band",
		"A filled dot is a scan that counts, a cross one that does not, an open diamond one that is planned")
	for i, t := 0, d.From; t.Before(d.To) && i < 120; i, t = i+1, t.AddDate(0, 0, 7) {
		x, w := a.clip(view.Span{Start: t, End: t.AddDate(0, 0, 7)})
		if i%2 == 1 {
			c.rect("stripe", x, top-4, w, height-top)
		}
		if d.To.Sub(d.From) < 20*7*24*time.Hour || i%4 == 0 {
			c.text("tick", x+3, 13, "start", t.UTC().Format("2 Jan"))
		}
	}
	for i, b := range d.Bands {
		y := float64(top+step*i) + 9
		label := b.Band
		if b.EveryD > 0 {
			label += " · " + view.Figure(b.EveryD) + " d"
		}
		c.text("scale", 2, y+4, "start", label)
		c.line("grid", x0, y, x1, y)
		for _, m := range b.Marks {
			c.cadenceMark(a.x(m.At), y, m.Kind)
		}
	}
	if !d.Now.Before(d.From) && d.Now.Before(d.To) {
		x := a.x(d.Now)
		c.line("now", x, top-6, x, height)
		c.text("now-label", x+3, height-1, "start", "now")
	}
	return c.end()
}

func (c *canvas) cadenceMark(x, y float64, kind view.CadenceKind) {
	switch kind {
	case view.ScanCounted:
		c.leaf("circle", "class", "had", "cx", num(x), "cy", num(y), "r", "4")
	case view.ScanPlanned:
		c.leaf("path", "class", "planned", "d", "M"+num(x)+" "+num(y-5)+"l5 5l-5 5l-5 -5z")
	default:
		c.leaf("path", "class", "failed", "d", "M"+num(x-3.5)+" "+num(y-3.5)+"l7 7m0 -7l-7 7")
	}
}
