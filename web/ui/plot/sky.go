package plot

import (
	"time"

	"cadencewright/web/view"
)

// Track draws a scan's elevation over its block: the scan marked, the allowed
// stretch behind, the limit as a line.
func Track(v view.ScanCard) string {
	const w, h, x0, x1, top, bot = 720, 224, 62, 712, 20, 178
	var c canvas
	from, to := v.BlockSpan.Start, v.BlockSpan.End
	if n := len(v.Track); n > 0 && (from.IsZero() || !to.After(from)) {
		from, to = v.Track[0].At, v.Track[n-1].At
	}
	a := axis{from, to, x0, x1}
	y := elScale(top, bot)
	c.begin("track", w, h, "Elevation of "+v.Scan.Source+" from "+v.Name,
		"From "+view.Degrees(v.First.ElDeg)+" at the start of the scan to "+view.Degrees(v.Last.ElDeg)+" at its end")
	c.rect("lane", x0, top, x1-x0, bot-top)
	for _, s := range v.Allowed {
		x, width := a.clip(s)
		c.rect("allowed", x, top, width, bot-top)
	}
	c.elevations(y, x0, x1)
	x, width := a.clip(v.Scan.Span)
	c.rect("here", x, top, width, bot-top)
	c.line("limit", x0, y(v.LimitDeg), x1, y(v.LimitDeg))
	c.curve("curve", a, v.Track, y, 0)
	c.text("scale", 2, 13, "start", "UTC")
	c.text("scale", 2, bot+16, "start", "LST")
	c.text("scale", 2, bot+32, "start", "local")
	for _, t := range a.ticks(7) {
		c.line("grid", a.x(t), top, a.x(t), bot)
		c.text("tick", min(max(a.x(t), x0+6), x1-12), 13, "middle", view.Clock(t))
		c.text("tick local", min(max(a.x(t), x0+6), x1-12), bot+32, "middle", view.LocalClock(t, v.Zone))
	}
	lst := v.LSTStartH - v.Scan.Start.Sub(from).Hours()*view.SiderealRate
	for _, t := range a.lstTicks(lst, 7) {
		c.line("mark", t.x, bot, t.x, bot+4)
		c.text("tick lst", min(max(t.x, x0+6), x1-10), bot+16, "middle", t.label)
	}
	c.text("tick", x0+4, y(v.LimitDeg)-3, "start", "limit "+view.Degrees(v.LimitDeg))
	return c.end()
}

// elScale maps elevation 0 to 90 degrees onto a band of y.
func elScale(top, bot float64) func(float64) float64 {
	return func(el float64) float64 { return bot - (bot-top)*min(max(el, 0), 90)/90 }
}

// elevations draws the lines of 30 and 60 degrees with their figures.
func (c *canvas) elevations(y func(float64) float64, x0, x1 float64) {
	for _, el := range []float64{0, 30, 60, 90} {
		c.line("grid", x0, y(el), x1, y(el))
		c.text("tick", x0-4, y(el)+4, "end", view.Fixed(el, 0)+"°")
	}
}

// Sky draws a source's week at one telescope.
func Sky(p view.SkyPanel, from, to time.Time) string {
	const w, h, x0, x1, top, bot = 460, 138, 30, 452, 18, 118
	var c canvas
	a := axis{from, to, x0, x1}
	y := elScale(top, bot)
	c.begin("sky", w, h, "Elevation at "+p.Name+" over the week", p.Verdict)
	c.rect("lane", x0, top, x1-x0, bot-top)
	for _, s := range p.Blocks {
		x, width := a.clip(s)
		c.rect("block", x, top, width, bot-top)
	}
	c.elevations(y, x0, x1)
	for t := from; t.Before(to); t = t.AddDate(0, 0, 1) {
		c.line("grid", a.x(t), top, a.x(t), bot)
		c.text("tick", a.x(t)+3, 12, "start", t.UTC().Format("Mon 2"))
	}
	c.curve("curve", a, p.Points, y, 0)
	for _, s := range p.NearSun {
		x, width := a.clip(s)
		c.hatched("sun", x, top, width, bot-top, "hatch")
	}
	c.line("limit", x0, y(p.LimitDeg), x1, y(p.LimitDeg))
	if p.MaxDeg > 0 && p.MaxDeg < 90 {
		c.line("limit", x0, y(p.MaxDeg), x1, y(p.MaxDeg))
	}
	for _, s := range p.Up {
		x, width := a.clip(s)
		c.rect("up", x, bot+3, width, 4)
	}
	for _, s := range p.Scans {
		x, width := a.clip(s)
		c.rect("scan-mark", x-1, bot+9, max(width, 2.5)+1, 8)
	}
	return c.end()
}

// Horizon draws what a telescope can see: the horizon mask and the limits of
// elevation over all azimuths.
func Horizon(v view.Telescope) string {
	const w, h, x0, x1, top, bot = 720, 222, 40, 700, 12, 180
	var c canvas
	y := elScale(top, bot)
	x := func(az float64) float64 { return x0 + (x1-x0)*az/360 }
	c.begin("horizon", w, h, "Horizon and limits of "+v.Name,
		"Observing between elevations of "+view.Degrees(v.ElevationMinDeg)+" and "+view.Degrees(v.ElevationMaxDeg))
	c.rect("lane", x0, top, x1-x0, bot-top)
	c.rect("allowed", x0, y(v.ElevationMaxDeg), x1-x0, y(v.ElevationMinDeg)-y(v.ElevationMaxDeg))
	c.elevations(y, x0, x1)
	if len(v.Horizon) > 0 {
		c.leaf("path", "class", "ground", "d", groundPath(v.Horizon, x, y))
	}
	c.line("limit", x0, y(v.ElevationMinDeg), x1, y(v.ElevationMinDeg))
	c.line("limit", x0, y(v.ElevationMaxDeg), x1, y(v.ElevationMaxDeg))
	c.text("tick", x0+4, y(v.ElevationMinDeg)-3, "start", "least "+view.Degrees(v.ElevationMinDeg))
	c.text("tick", x0+4, y(v.ElevationMaxDeg)+12, "start", "greatest "+view.Degrees(v.ElevationMaxDeg))
	for i, name := range []string{"N 0°", "NE 45°", "E 90°", "SE 135°", "S 180°", "SW 225°", "W 270°", "NW 315°", "N 360°"} {
		at := x(45 * float64(i))
		c.line("mark", at, bot, at, bot+4)
		c.text("tick", at, bot+17, "middle", name)
	}
	c.text("scale", (x0+x1)/2, bot+34, "middle", "azimuth, from north through east")
	return c.end()
}

// groundPath is the outline of the mask, closed at the bottom. Between its last
// corner and its first it goes on through north.
func groundPath(m []view.HorizonPoint, x, y func(float64) float64) string {
	first, last := m[0], m[len(m)-1]
	north := first.ElDeg
	if gap := first.AzDeg + 360 - last.AzDeg; gap > 0 {
		north = last.ElDeg + (first.ElDeg-last.ElDeg)*(360-last.AzDeg)/gap
	}
	d := "M" + num(x(0)) + " " + num(y(0)) + "L" + num(x(0)) + " " + num(y(north))
	for _, p := range m {
		d += "L" + num(x(p.AzDeg)) + " " + num(y(p.ElDeg))
	}
	return d + "L" + num(x(360)) + " " + num(y(north)) + "L" + num(x(360)) + " " + num(y(0)) + "Z"
}
