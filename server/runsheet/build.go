package runsheet

import (
	"fmt"
	"slices"
	"time"

	"cadencewright/scheduler"
)

// PlanInfo is what a sheet says of the plan it was made from.
type PlanInfo struct {
	Week       string // that the plan is of, 2027-W03
	Revision   int
	IssuedAt   time.Time
	IssuedBy   string
	Superseded *Superseded
}

// PlannedScan is a scan of an issued plan under the identity that outcome
// reports name.
type PlannedScan struct {
	scheduler.Scan
	ID    string
	State string
	Notes []string
}

// Input is what a sheet is made from.
type Input struct {
	Campaign  *scheduler.Campaign
	Telescope string // code
	Night     string // local date, 2027-01-18
	Plan      PlanInfo
	// Scans of the telescope; those in blocks that start in the night are
	// taken, the others passed over.
	Scans []PlannedScan
}

// Build makes the sheet. Its errors name the telescope, night, source or
// receiver that cannot be used.
func Build(in Input) (*Sheet, error) {
	tel := findTelescope(in.Campaign, in.Telescope)
	if tel == nil {
		return nil, fmt.Errorf("telescope %q: not in campaign %q", in.Telescope, in.Campaign.Name)
	}
	night, err := NightNamed(tel, in.Night)
	if err != nil {
		return nil, err
	}
	s := &Sheet{
		Campaign: in.Campaign.Name, Night: night.Name, From: night.From, To: night.To, zone: night.Zone,
		PlanWeek: in.Plan.Week, PlanRevision: in.Plan.Revision, IssuedAt: in.Plan.IssuedAt, IssuedBy: in.Plan.IssuedBy,
		Superseded: in.Plan.Superseded, Telescope: telescopeOf(tel),
		Cautions: cautions(tel), Reminders: reminders(tel),
	}
	for i := range in.Campaign.Blocks {
		b := &in.Campaign.Blocks[i]
		if b.Telescope != tel.Code || !night.Holds(b.Start) {
			continue
		}
		block, err := buildBlock(in, tel, b)
		if err != nil {
			return nil, err
		}
		s.Blocks = append(s.Blocks, block)
	}
	slices.SortFunc(s.Blocks, func(a, b Block) int { return a.Start.Compare(b.Start) })
	renumber(s)
	return s, nil
}

// renumber counts the scans through the night in the order of time.
func renumber(s *Sheet) {
	n := 0
	for i := range s.Blocks {
		for j := range s.Blocks[i].Scans {
			n++
			s.Blocks[i].Scans[j].Number = n
		}
	}
}

func buildBlock(in Input, tel *scheduler.Telescope, b *scheduler.Block) (Block, error) {
	out := Block{ID: b.ID, Label: b.Label, Start: b.Start, End: b.End, Receivers: b.Receivers, Scans: []Scan{}}
	for _, l := range b.Lost {
		out.Lost = append(out.Lost, Span{l.Start, l.End})
	}
	var mine []PlannedScan
	for _, x := range in.Scans {
		if x.Block == b.ID {
			mine = append(mine, x)
		}
	}
	slices.SortFunc(mine, func(a, b PlannedScan) int { return a.Start.Compare(b.Start) })
	var before *placed
	var end time.Time // of the scan before
	for _, x := range mine {
		scan, here, err := buildScan(in.Campaign, tel, x)
		if err != nil {
			return Block{}, err
		}
		if before == nil || lostBetween(out.Lost, end, x.Start) {
			scan.Begins = true
		} else {
			scan.SlewS = slewSeconds(tel, before.last, here.first)
		}
		before, end = &here, scan.End
		out.Scans = append(out.Scans, scan)
	}
	return out, nil
}

// lostBetween tells whether any lost time lies between two instants.
func lostBetween(lost []Span, from, to time.Time) bool {
	return slices.ContainsFunc(lost, func(l Span) bool { return l.Start.Before(to) && from.Before(l.End) })
}

func findTelescope(c *scheduler.Campaign, code string) *scheduler.Telescope {
	for i := range c.Telescopes {
		if c.Telescopes[i].Code == code {
			return &c.Telescopes[i]
		}
	}
	return nil
}

func telescopeOf(t *scheduler.Telescope) Telescope {
	return Telescope{
		Code: t.Code, Name: t.Name, LongitudeDeg: t.LongitudeDeg, LatitudeDeg: t.LatitudeDeg, HeightM: t.HeightM,
		Timezone: t.Timezone, Mount: string(t.Mount), ElevationMinDeg: t.ElevationMinDeg,
		ElevationMaxDeg: t.ElevationMaxDeg, SunMinDeg: t.SunMinDeg,
	}
}

// cautions stand on every sheet: a sheet is paper, a telescope is not.
func cautions(t *scheduler.Telescope) []string {
	sun := "Never point near the Sun below the local limit."
	if t.SunMinDeg > 0 {
		sun = fmt.Sprintf("Never point within %g° of the Sun; where the local limit is larger, it holds.", t.SunMinDeg)
	}
	return []string{
		"This sheet commands nothing. The operator on duty decides; local safety rules come first.",
		"Moving a telescope can hurt people and damage the structure: follow the site's own clearance before each move, and leave every interlock in force.",
		"Wind, snow and ice limits of the site come before any scan. Stow when the site says so.",
		sun,
	}
}

// reminders are common practice at pulsar telescopes.
func reminders(t *scheduler.Telescope) []string {
	r := []string{"Log the clock offset against GNSS every 10 to 15 minutes (common practice)."}
	if t.CalS > 0 {
		r = append(r, fmt.Sprintf("Noise diode: %g s before each scan.", t.CalS))
	}
	return r
}
