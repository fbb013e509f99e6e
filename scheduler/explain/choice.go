package explain

import "math"

// choice keeps the place where a unit could be served at the least cost: the
// most gained over what would have to go.
type choice struct {
	q        *question
	possible int // options looked at
	blocks   int // that have any
	pinned   int // options in whose way a pin stands

	net       float64
	moves     int
	gain      float64
	options   []option
	displaced []*planned
}

func (q *question) newChoice() *choice { return &choice{q: q, net: math.Inf(-1)} }

// The net is what the plan's score would change by. Below 0 the planner was
// right to leave the unit out, as far as this way of serving it goes; above 0
// it has not searched for long enough, and the reason says so.

// consider weighs scans that would together earn gain.
func (c *choice) consider(gain float64, options ...*option) {
	c.possible++
	if gain < c.net {
		return // cannot be better, whatever it costs
	}
	if c.q.toll != nil && len(options) == 1 && gain-c.q.toll(options[0]) < c.net {
		return
	}
	var displaced []*planned
	for _, o := range options {
		list, ok := c.q.cost(o)
		if !ok {
			c.pinned++
			return
		}
		for _, x := range list {
			displaced = addOnce(displaced, x)
		}
	}
	for _, o := range options { // a scan cannot stay and go
		for _, x := range displaced {
			if o.had == x {
				return
			}
		}
	}
	net := gain - c.q.loss(displaced)
	for _, o := range options {
		net -= o.toll
	}
	moves := len(displaced) // and scans to add: of equal choices, the one that changes least
	for _, o := range options {
		if o.had == nil {
			moves++
		}
	}
	if net < c.net || net == c.net && moves >= c.moves {
		return
	}
	c.net, c.gain, c.displaced, c.moves = net, gain, displaced, moves
	c.options = c.options[:0]
	for _, o := range options {
		c.options = append(c.options, *o)
	}
}

func addOnce(list []*planned, x *planned) []*planned {
	for _, y := range list {
		if y == x {
			return list
		}
	}
	return append(list, x)
}

// tell notes what stands in the place of the best choice, if there is any.
func (c *choice) tell() {
	q := c.q
	q.best = c
	code, text := Displaced, ""
	switch {
	case c.possible == 0:
		return
	case len(c.options) == 0:
		text = sentence("Possible in %s, but a pinned scan stands in the way of every one of %d possible starts.", blocks(c.blocks), c.possible)
	case len(c.displaced) == 0:
		code = Fits
		text = sentence("There is room: %s would earn %.2f and displace nothing. Let the planner search for longer, or add it by hand.", c.titles(), c.gain)
	default:
		text = c.costs()
	}
	for range c.blocks {
		q.found(code, 0, func(int) string { return text })
	}
}

// costs says what would have to go.
func (c *choice) costs() string {
	loss := c.q.loss(c.displaced)
	text := sentence("Lost out to other scans: possible in %s, at the least cost %s, earning %.2f in place of %s",
		blocks(c.blocks), c.titles(), c.gain, c.q.listed(c.displaced))
	if len(c.displaced) > 1 {
		text += sentence(", %.2f together", loss)
	}
	if c.gain > loss {
		return text + sentence(". That would gain %.2f: let the planner search for longer, or change it by hand.", c.gain-loss)
	}
	return text + "."
}

// titles are the options in words.
func (c *choice) titles() string {
	var names []string
	for i := range c.options {
		title := c.q.titled(&c.options[i])
		if c.options[i].had != nil {
			title = "the planned " + title
		}
		names = append(names, title)
	}
	return both(names)
}
