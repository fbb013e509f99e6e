// Package plot draws the pages' pictures as SVG text: block rows, the strip of
// a week, elevation tracks, the orbit ring, the cadence strip and horizons.
//
// A picture carries no colour and no font of its own: its parts have classes
// that the style sheet paints, so that light, dark and print are one drawing.
// Hatching is the exception: a pattern must be named in the drawing itself, and
// every page carries it once (see Patterns). Each picture has a title and a
// description; the page gives the same figures as a table beside it.
package plot

import (
	"html"
	"math"
	"strconv"
	"strings"
	"time"

	"cadencewright/web/view"
)

// Patterns is an invisible drawing with the hatchings that pictures refer to.
// A page carries it once, before its first picture.
const Patterns = `<svg class="patterns" width="0" height="0" aria-hidden="true" focusable="false"><defs>` +
	`<pattern id="hatch" width="7" height="7" patternUnits="userSpaceOnUse" patternTransform="rotate(45)"><path class="hatch" d="M0 0V7"/></pattern>` +
	`<pattern id="dots" width="6" height="6" patternUnits="userSpaceOnUse"><circle class="dot" cx="1.5" cy="1.5" r="1"/></pattern>` +
	`</defs></svg>`

// canvas collects one drawing.
type canvas struct{ strings.Builder }

// begin opens a picture w by h units. Its title and description are what a
// screen reader says of it.
func (c *canvas) begin(class string, w, h float64, title, desc string) {
	c.tag("svg", "class", "plot "+class, "viewBox", "0 0 "+num(w)+" "+num(h), "role", "img",
		"aria-label", title+". "+desc, "preserveAspectRatio", "xMinYMin meet")
	c.titles(title, desc)
}

// beginGroup opens a picture whose parts are links, which role img would hide.
func (c *canvas) beginGroup(class string, w, h float64, title, desc string) {
	c.tag("svg", "class", "plot "+class, "viewBox", "0 0 "+num(w)+" "+num(h), "role", "group",
		"aria-label", title, "preserveAspectRatio", "xMinYMin meet")
	c.titles(title, desc)
}

func (c *canvas) titles(title, desc string) {
	c.WriteString("<title>" + html.EscapeString(title) + "</title><desc>" + html.EscapeString(desc) + "</desc>")
}

func (c *canvas) end() string {
	c.WriteString("</svg>")
	return c.String()
}

// tag opens an element; pairs are attribute names and values.
func (c *canvas) tag(name string, pairs ...string) {
	c.WriteString("<" + name)
	c.attrs(pairs)
	c.WriteString(">")
}

// leaf writes an element without content.
func (c *canvas) leaf(name string, pairs ...string) {
	c.WriteString("<" + name)
	c.attrs(pairs)
	c.WriteString("/>")
}

func (c *canvas) attrs(pairs []string) {
	for i := 0; i+1 < len(pairs); i += 2 {
		c.WriteString(" " + pairs[i] + `="` + html.EscapeString(pairs[i+1]) + `"`)
	}
}

func (c *canvas) close(name string) { c.WriteString("</" + name + ">") }

// rect draws a rectangle of a class; nothing where it has no width.
func (c *canvas) rect(class string, x, y, w, h float64, more ...string) {
	if w <= 0 || h <= 0 {
		return
	}
	c.leaf("rect", append([]string{"class", class, "x", num(x), "y", num(y), "width", num(w), "height", num(h)}, more...)...)
}

// hatched draws a rectangle under a hatching.
func (c *canvas) hatched(class string, x, y, w, h float64, pattern string) {
	c.rect(class, x, y, w, h)
	c.rect("pattern", x, y, w, h, "fill", "url(#"+pattern+")")
}

func (c *canvas) line(class string, x1, y1, x2, y2 float64) {
	c.leaf("line", "class", class, "x1", num(x1), "y1", num(y1), "x2", num(x2), "y2", num(y2))
}

// text writes a label; anchor is start, middle or end.
func (c *canvas) text(class string, x, y float64, anchor, s string) {
	pairs := []string{"class", class, "x", num(x), "y", num(y)}
	if anchor != "start" {
		pairs = append(pairs, "text-anchor", anchor)
	}
	c.tag("text", pairs...)
	c.WriteString(html.EscapeString(s))
	c.close("text")
}

// quiet writes a label that its link's name says already, so that it is not
// read out twice.
func (c *canvas) quiet(class string, x, y float64, anchor, s string) {
	c.tag("g", "aria-hidden", "true")
	c.text(class, x, y, anchor, s)
	c.close("g")
}

// path draws a polyline through points, with a gap where y is NaN.
func (c *canvas) path(class string, xs, ys []float64) {
	var d strings.Builder
	pen := false
	for i := range xs {
		if math.IsNaN(ys[i]) {
			pen = false
			continue
		}
		if pen {
			d.WriteString("L")
		} else {
			d.WriteString("M")
		}
		pen = true
		d.WriteString(num(xs[i]) + " " + num(ys[i]))
	}
	if d.Len() > 0 {
		c.leaf("path", "class", class, "d", d.String())
	}
}

// num writes a coordinate with a decimal at most: pages stay small.
func num(x float64) string {
	tenths := int(math.Round(x * 10))
	if tenths%10 == 0 {
		return strconv.Itoa(tenths / 10)
	}
	sign := ""
	if tenths < 0 {
		sign, tenths = "-", -tenths
	}
	return sign + strconv.Itoa(tenths/10) + "." + strconv.Itoa(tenths%10)
}

// axis maps time onto x.
type axis struct {
	from, to time.Time
	x0, x1   float64
}

func (a axis) x(t time.Time) float64 {
	span := a.to.Sub(a.from)
	if span <= 0 {
		return a.x0
	}
	return a.x0 + (a.x1-a.x0)*float64(t.Sub(a.from))/float64(span)
}

// clip is the part of a span on the axis, as x and width; width 0 outside.
func (a axis) clip(s view.Span) (x, w float64) {
	lo, hi := max(a.x(s.Start), a.x0), min(a.x(s.End), a.x1)
	return lo, max(hi-lo, 0)
}

// steps are the distances that ticks may have.
var steps = []time.Duration{
	5 * time.Minute, 10 * time.Minute, 15 * time.Minute, 30 * time.Minute, time.Hour,
	2 * time.Hour, 3 * time.Hour, 6 * time.Hour, 12 * time.Hour, 24 * time.Hour,
}

// stepFor is the shortest step that gives most ticks at most.
func stepFor(span time.Duration, most int) time.Duration {
	for _, s := range steps {
		if span/s <= time.Duration(most) {
			return s
		}
	}
	return steps[len(steps)-1]
}

// ticks are the whole steps of UTC on the axis.
func (a axis) ticks(most int) []time.Time {
	step := stepFor(a.to.Sub(a.from), most)
	var out []time.Time
	for t := a.from.UTC().Truncate(step); !t.After(a.to); t = t.Add(step) {
		if !t.Before(a.from) {
			out = append(out, t)
		}
	}
	return out
}

// lstTick is a whole step of sidereal time on an axis.
type lstTick struct {
	x     float64
	label string
}

// lstTicks are the whole steps of sidereal time on the axis; startH is the
// sidereal time at its left end.
func (a axis) lstTicks(startH float64, most int) []lstTick {
	step := stepFor(a.to.Sub(a.from), most).Hours()
	var out []lstTick
	if math.IsNaN(startH) || math.IsInf(startH, 0) {
		return nil // no sidereal time is known
	}
	for h := math.Ceil(startH/step-1e-9) * step; ; h += step {
		at := a.from.Add(time.Duration((h - startH) / view.SiderealRate * float64(time.Hour)))
		if at.After(a.to) {
			return out
		}
		out = append(out, lstTick{a.x(at), view.LST(h)})
	}
}

// curve draws elevations between lowDeg and highDeg into a band of y.
func (c *canvas) curve(class string, a axis, pts []view.Point, y func(float64) float64, lowDeg float64) {
	xs, ys := make([]float64, 0, len(pts)), make([]float64, 0, len(pts))
	for _, p := range pts {
		if p.At.Before(a.from) || p.At.After(a.to) {
			continue
		}
		v := math.NaN()
		if p.ElDeg >= lowDeg {
			v = y(p.ElDeg)
		}
		xs, ys = append(xs, a.x(p.At)), append(ys, v)
	}
	c.path(class, xs, ys)
}
