package plot

import "cadencewright/web/view"

// Score draws what a plan earns on the scale of all that is due: the score as
// far as it is filled, the gap up to the bound, the rest out of reach.
func Score(p view.Plan) string {
	const w, h, x0, x1, top, tall = 460, 66, 2, 456, 22, 18
	var c canvas
	c.begin("scoreplot", w, h, "Score and bound",
		"Score "+view.Figure(p.Score)+", bound "+view.Figure(p.Bound)+", all that is due "+view.Figure(p.Possible))
	most := max(p.Possible, p.Bound, p.Score)
	if most <= 0 {
		return c.end()
	}
	x := func(v float64) float64 { return x0 + (x1-x0)*v/most }
	c.rect("possible", x0, top, x1-x0, tall)
	c.rect("gap", x(p.Score), top, x(p.Bound)-x(p.Score), tall)
	c.rect("score", x0, top, x(p.Score)-x0, tall)
	c.line("bound", x(p.Bound), top-5, x(p.Bound), top+tall+5)
	for i := range 11 {
		c.line("mark", x(most*float64(i)/10), top+tall, x(most*float64(i)/10), top+tall+3)
	}
	c.text("tick", x0, top-7, "start", "score "+view.Figure(p.Score))
	c.text("tick", min(max(x(p.Bound), 40), x1-34), h-8, "middle", "bound "+view.Figure(p.Bound))
	c.text("tick", x1, top-7, "end", "all that is due "+view.Figure(p.Possible))
	return c.end()
}
