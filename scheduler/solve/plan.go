package solve

import (
	"cmp"
	"math"
	"slices"

	"cadencewright/scheduler"
	"cadencewright/scheduler/units"
)

// plan writes the state's scans as a plan: what each earns at best, what stays
// unmet, and the certificate.
func (s *state) plan(prices []float64, bound float64) *scheduler.Plan {
	set, c := s.t.p.Units, s.t.p.Campaign
	p := &scheduler.Plan{Campaign: c.Name, From: s.t.p.Horizon.From, To: s.t.p.Horizon.To, Possible: set.Possible, Bound: bound,
		Certificate: scheduler.Certificate{Prices: map[string]float64{}, Bound: bound}}
	earns, times := s.earnings(p)
	for _, bi := range s.inOrder() {
		for _, x := range s.blocks[bi] {
			out := s.out(x)
			out.Earns = earns[x]
			p.Scans = append(p.Scans, out)
		}
	}
	for ui := range set.Units {
		u := &set.Units[ui]
		if times[ui] < u.N {
			p.Unmet = append(p.Unmet, scheduler.Unmet{Goal: set.Goals[u.Goal].ID, Unit: u.Name, Weight: u.Weight})
		}
		if prices[ui] > 0 {
			p.Certificate.Prices[u.Name] = prices[ui]
		}
	}
	return p
}

// inOrder are the blocks by start, then name.
func (s *state) inOrder() []int {
	c := s.t.p.Campaign
	order := make([]int, len(s.t.p.Blocks))
	for i := range order {
		order[i] = i
	}
	slices.SortFunc(order, func(a, b int) int {
		x, y := &c.Blocks[s.t.p.Blocks[a].Index], &c.Blocks[s.t.p.Blocks[b].Index]
		if d := x.Start.Compare(y.Start); d != 0 {
			return d
		}
		return cmp.Compare(x.ID, y.ID)
	})
	return order
}

// earnings gives every unit's value to the scans that earn it, and adds it up.
func (s *state) earnings(p *scheduler.Plan) (map[*scan][]scheduler.Earning, []int) {
	set := s.t.p.Units
	earns, times := map[*scan][]scheduler.Earning{}, make([]int, len(set.Units))
	var list []taken
	for gi := range set.Goals {
		g := &set.Goals[gi]
		if s.goals[gi] == nil {
			continue
		}
		list = s.earn.list(s.goals[gi], s.source[g.Source], list[:0])
		slices.SortStableFunc(list, func(a, b taken) int { return a.unit - b.unit })
		for _, t := range list {
			n := 0
			t.event.each(func(*scan) { n++ })
			t.event.each(func(x *scan) {
				earns[x] = append(earns[x], scheduler.Earning{Goal: g.ID, Unit: set.Units[t.unit].Name, Value: t.value / float64(n)})
			})
			times[t.unit]++
			p.Score += t.value
		}
	}
	return earns, times
}

// out is a scan as the plan file has it.
func (s *state) out(x *scan) scheduler.Scan {
	c, b := s.t.p.Campaign, &s.t.p.Blocks[x.block]
	t := &c.Telescopes[x.tel]
	out := scheduler.Scan{Block: c.Blocks[b.Index].ID, Telescope: t.Code, Source: c.Sources[x.source].Name,
		Receiver: t.Receivers[x.receiver].Code, Start: units.Instant(x.startMin), Minutes: x.steps * s.t.p.GridMin, Pinned: x.pin >= 0}
	if x.info > 0 {
		out.TOAUs = 1e6 / math.Sqrt(x.info)
	}
	if t.Mount == scheduler.MountAltAz {
		pl := &b.Places[x.place]
		az := pl.Axis1[x.start-pl.Lo] + 360*float64(x.turn)
		out.MotorAzDeg = &az
	}
	return out
}
