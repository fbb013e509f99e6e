package plot

import (
	"math"

	"cadencewright/web/view"
)

// Geometry of the orbit ring.
const (
	ringSize, ringMid = 340, 170.0
	ringR             = 112 // the orbit
	windowR           = 132 // wanted windows, outside
	hadR, plannedR    = 100, 84
)

// Ring draws an orbit as a circle of phase: nought on top, clockwise. Wanted
// windows stand outside, scans had and planned inside.
func Ring(o view.Orbit) string {
	var c canvas
	c.begin("ring", ringSize, ringSize, "Orbital phase from "+o.Reference,
		"Phase nought on top, clockwise; wanted windows outside the ring, scans had and planned inside")
	c.leaf("circle", "class", "orbit", "cx", num(ringMid), "cy", num(ringMid), "r", num(ringR))
	for i := range 20 {
		phase := float64(i) / 20
		inner := ringR - 4.0
		if i%5 == 0 {
			inner = ringR - 9
			x, y := ringAt(phase, 62)
			c.text("tick", x, y+4, "middle", view.Figure(phase))
		}
		x1, y1 := ringAt(phase, inner)
		x2, y2 := ringAt(phase, ringR)
		c.line("mark", x1, y1, x2, y2)
	}
	for _, w := range o.Windows {
		class := "window"
		if w.Had >= w.Need {
			class += " full"
		}
		c.arc(class, w.From, w.To, windowR)
		x, y := ringAt((w.From+w.To)/2, windowR+19)
		c.text("tick", x, y+4, "middle", view.Fixed(float64(w.Had), 0)+"/"+view.Fixed(float64(w.Need), 0))
	}
	for _, m := range o.Marks {
		if m.Planned {
			c.arc("planned", m.From, m.To, plannedR)
		} else {
			c.arc("had", m.From, m.To, hadR)
		}
	}
	c.ringPoint(o.ConjunctionPhase, "conjunction")
	c.ringPoint(o.PeriastronPhase, "periastron")
	c.text("centre", ringMid, ringMid-2, "middle", view.Figure(o.PbD)+" d")
	c.text("tick", ringMid, ringMid+15, "middle", "e "+view.Figure(o.Ecc))
	return c.end()
}

// ringAt is the point of a phase at a radius.
func ringAt(phase, r float64) (x, y float64) {
	s, c := math.Sincos(2 * math.Pi * phase)
	return ringMid + r*s, ringMid - r*c
}

// arc draws a stretch of phase. One as short as a scan of a long orbit is drawn
// long enough to be seen.
func (c *canvas) arc(class string, from, to, r float64) {
	if to-from < 0.012 {
		mid := (from + to) / 2
		from, to = mid-0.006, mid+0.006
	}
	if to-from >= 1 {
		c.leaf("circle", "class", class, "cx", num(ringMid), "cy", num(ringMid), "r", num(r))
		return
	}
	x1, y1 := ringAt(from, r)
	x2, y2 := ringAt(to, r)
	large := "0"
	if to-from > 0.5 {
		large = "1"
	}
	c.leaf("path", "class", class, "d", "M"+num(x1)+" "+num(y1)+"A"+num(r)+" "+num(r)+" 0 "+large+" 1 "+num(x2)+" "+num(y2))
}

// ringPoint marks a point of the orbit with its letter: C or P.
func (c *canvas) ringPoint(phase float64, name string) {
	if phase < 0 || math.IsNaN(phase) {
		return
	}
	x, y := ringAt(phase, ringR)
	c.leaf("circle", "class", "point", "cx", num(x), "cy", num(y), "r", "8")
	letter := "C"
	if name == "periastron" {
		letter = "P"
	}
	c.text("point-letter", x, y+4, "middle", letter)
}
