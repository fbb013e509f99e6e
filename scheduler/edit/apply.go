package edit

import (
	"cmp"
	"slices"

	"cadencewright/scheduler"
	"cadencewright/scheduler/units"
)

// Apply makes changes and returns the plan as it then is: its scans with what
// they earn, its score and its unmet units. Units that were unmet before keep
// their reasons; those that become so have none yet. The certificate and the
// bound stay what they were: they hold for every plan of the campaign. The
// session's own plan does not change; to go on from the new one, make a new
// session.
//
// pins are the campaign's pins from then on. They differ from those of now only
// where a change pins or unpins a scan; the certificate is then that of the
// campaign as it was, and planning again makes a new one.
//
// A change that breaks rules is made all the same: what Try says of it is for
// the caller to judge.
func (s *Session) Apply(changes ...Change) (plan *scheduler.Plan, pins []scheduler.Pin, err error) {
	d, err := s.draft(changes)
	if err != nil {
		return nil, nil, err
	}
	p := &scheduler.Plan{Campaign: s.plan.Campaign, From: s.plan.From, To: s.plan.To, Possible: s.p.Units.Possible,
		Bound: s.plan.Bound, Certificate: s.plan.Certificate}
	for _, bi := range s.inOrder() {
		for _, x := range s.rowOf(d, bi).scans {
			p.Scans = append(p.Scans, s.out(d, x))
		}
	}
	for si := range s.source {
		p.Score += worth(s.awardsOf(d, si))
	}
	p.Unmet = s.unmet(d)
	return p, s.pinsAfter(d), nil
}

// inOrder are the blocks by start, then name.
func (s *Session) inOrder() []int {
	order := make([]int, len(s.p.Blocks))
	for i := range order {
		order[i] = i
	}
	slices.SortFunc(order, func(a, b int) int {
		x, y := &s.p.Campaign.Blocks[s.p.Blocks[a].Index], &s.p.Campaign.Blocks[s.p.Blocks[b].Index]
		if d := x.Start.Compare(y.Start); d != 0 {
			return d
		}
		return cmp.Compare(x.ID, y.ID)
	})
	return order
}

func (s *Session) rowOf(d *draft, bi int) *row {
	if r := d.rows[bi]; r != nil {
		return r
	}
	return &s.blocks[bi]
}

func (s *Session) awardsOf(d *draft, si int) []award {
	if list, ok := d.awards[si]; ok {
		return list
	}
	return s.awards[si]
}

// out is a scan as the changed plan has it.
func (s *Session) out(d *draft, x *scan) scheduler.Scan {
	l := s.listed(x)
	l.Pinned = isPin(d.pins, x)
	for _, a := range s.awardsOf(d, x.source) {
		if slices.Contains(a.by, x) {
			u := &s.p.Units.Units[a.unit]
			l.Earns = append(l.Earns, scheduler.Earning{Goal: s.p.Units.Goals[u.Goal].ID, Unit: u.Name, Value: a.value / float64(len(a.by))})
		}
	}
	if s.p.Campaign.Telescopes[x.tel].Mount == scheduler.MountAltAz {
		r := s.rowOf(d, x.block)
		az := x.from1 + 360*float64(r.turns[slices.Index(r.scans, x)])
		l.MotorAzDeg = &az
	}
	return l
}

// unmet lists the units that are earned fewer times than they could be.
func (s *Session) unmet(d *draft) []scheduler.Unmet {
	reasons := map[string][]scheduler.Reason{}
	for _, u := range s.plan.Unmet {
		reasons[u.Unit] = u.Reasons
	}
	var list []scheduler.Unmet
	for ui := range s.p.Units.Units {
		u := &s.p.Units.Units[ui]
		g := &s.p.Units.Goals[u.Goal]
		if times(s.awardsOf(d, g.Source), ui) < u.N {
			list = append(list, scheduler.Unmet{Goal: g.ID, Unit: u.Name, Weight: u.Weight, Reasons: reasons[u.Name]})
		}
	}
	return list
}

// pinsAfter are the campaign's pins with what was pinned and unpinned: those of
// the horizon's blocks that still hold, in their order, then the new ones.
func (s *Session) pinsAfter(d *draft) []scheduler.Pin {
	var list []scheduler.Pin
	left := slices.Clone(d.pins)
	for _, q := range s.p.Campaign.Pins {
		mine := s.pinsOf([]scheduler.Pin{q})
		if len(mine) == 0 {
			list = append(list, q) // of another horizon
			continue
		}
		if i := slices.Index(left, mine[0]); i >= 0 {
			left = slices.Delete(left, i, i+1)
			list = append(list, q)
		}
	}
	for _, p := range left {
		c, b := s.p.Campaign, &s.p.Blocks[p.block]
		list = append(list, scheduler.Pin{Block: c.Blocks[b.Index].ID, Source: c.Sources[p.source].Name,
			Receiver: c.Telescopes[b.Telescope].Receivers[p.rx].Code, Start: units.Instant(p.startMin), Minutes: p.minutes})
	}
	return list
}
