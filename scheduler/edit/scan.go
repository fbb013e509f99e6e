package edit

import (
	"math"
	"time"

	"cadencewright/astro/sky"
	"cadencewright/scheduler"
	"cadencewright/scheduler/feasible"
	"cadencewright/scheduler/units"
)

// scan is a scan with all that the rules ask of it worked out. It does not
// change once made: the turn of the azimuth drive stands in its row.
type scan struct {
	index                  int // in the plan's scans; -1: added
	block, source          int // indices into Problem.Blocks and Campaign.Sources
	tel, rx                int // indices into Campaign.Telescopes and its receivers
	startMin, endMin       float64
	minutes, steps         int
	gridded                bool // start and length lie on the grid
	wanted                 int  // the turn that the plan has
	info                   float64
	turnLo, turnHi         int     // turns that keep the motor in its range
	from1, from2, to1, to2 float64 // axes at start and end, at turn 0
	faults                 []Violation
}

// read makes a scan of one that is listed. The telescope may be left out.
func (s *Session) read(l *scheduler.Scan) (*scan, error) {
	c := s.p.Campaign
	bi, ok := s.blockAt[l.Block]
	if !ok {
		return nil, scheduler.Errorf(scheduler.ErrInvalid, "block %q is not one of the horizon's blocks", l.Block)
	}
	b := &s.p.Blocks[bi]
	t := &c.Telescopes[b.Telescope]
	x := &scan{block: bi, source: s.sourceAt(l.Source), tel: b.Telescope, rx: receiverAt(t, l.Receiver), minutes: l.Minutes,
		startMin: units.Minutes(l.Start), wanted: noTurn}
	x.endMin = x.startMin + float64(l.Minutes)
	bl := &c.Blocks[b.Index]
	switch {
	// What cannot be looked up cannot be weighed; all else is a rule to break.
	case l.Telescope != "" && l.Telescope != t.Code:
		return nil, scheduler.Errorf(scheduler.ErrInvalid, "telescope %q is not that of block %s, which is %s", l.Telescope, l.Block, t.Code)
	case x.source < 0:
		return nil, scheduler.Errorf(scheduler.ErrInvalid, "source %q is not in the campaign", l.Source)
	case x.rx < 0:
		return nil, scheduler.Errorf(scheduler.ErrInvalid, "receiver %q is not one of telescope %s", l.Receiver, t.Code)
	case l.Minutes < 1 || time.Duration(l.Minutes)*time.Minute > scheduler.MaxBlock:
		return nil, scheduler.Errorf(scheduler.ErrInvalid, "length %d min: a scan takes from 1 min to %g d", l.Minutes, scheduler.MaxBlock.Hours()/24)
	case l.Start.Before(bl.Start.Add(-day)) || l.End().After(bl.End.Add(day)):
		return nil, scheduler.Errorf(scheduler.ErrInvalid, "start %s: more than a day outside block %s, which is from %s to %s",
			instantText(l.Start), l.Block, instantText(bl.Start), instantText(bl.End))
	}
	if err := s.place(x, l.MotorAzDeg); err != nil {
		return nil, err
	}
	return x, nil
}

const (
	day    = 24 * time.Hour
	noTurn = math.MinInt // no turn is wanted
	// slackDeg is by how much limits of the sky are not held: two ways to round
	// the same direction. It is far below what anything else is good to.
	slackDeg = 1e-6
)

// place follows the source over the scan: where the axes stand, what is
// gathered and which limits are broken. A scan off the grid is followed from
// its own start.
func (s *Session) place(x *scan, motorAzDeg *float64) error {
	g := s.p.GridMin
	start := math.Round(x.startMin)
	// Instants are whole milliseconds; half of one is rounding.
	x.gridded = math.Abs(x.startMin-start) < units.MS/2 && int64(start)%int64(g) == 0 && x.minutes%g == 0
	x.steps = (x.minutes + g - 1) / g
	t := &s.p.Campaign.Telescopes[x.tel]
	src := &s.p.Campaign.Sources[x.source]
	// Half steps: limits hold at grid instants, information is taken at the
	// middle of each step.
	half := time.Duration(g) * time.Minute / 2
	w, err := sky.NewWindow(t.Site(), units.Instant(x.startMin), half, 2*x.steps+1, s.p.Campaign.DUT1S)
	if err != nil {
		return err
	}
	var tr sky.Track
	w.Track(src.Star(), &tr)
	az := make([]float64, x.steps+1)
	for k := range az {
		az[k] = tr.AzDeg[2*k]
	}
	sky.UnwrapDeg(az, az)
	last := 2 * x.steps
	switch t.Mount {
	case scheduler.MountAltAz:
		x.from1, x.from2, x.to1, x.to2 = az[0], tr.ElDeg[0], az[x.steps], tr.ElDeg[last]
		if motorAzDeg != nil {
			// Within reason, whatever stands in a file.
			x.wanted = int(math.Round(math.Max(-10, math.Min(10, (*motorAzDeg-az[0])/360))))
		}
	case scheduler.MountEquatorial:
		x.from1, x.from2, x.to1, x.to2 = tr.HADeg[0], tr.DecDeg[0], tr.HADeg[last], tr.DecDeg[last]
	default:
		x.from2, x.to2 = tr.DecDeg[0], tr.DecDeg[last]
	}
	s.timeFaults(x)
	s.skyFaults(x, &tr)
	if t.Mount == scheduler.MountAltAz {
		s.motorFaults(x, az)
	}
	if x.gridded {
		x.info = s.info(x, &tr)
	}
	return nil
}

// info is the information that a scan gathers in 1/s²: the sum over its grid
// steps of the rate at mid-step.
func (s *Session) info(x *scan, tr *sky.Track) float64 {
	r := &s.p.Campaign.Telescopes[x.tel].Receivers[x.rx]
	meter := feasible.Radiometer(&s.p.Campaign.Sources[x.source], r)
	if !meter.Detectable() {
		return 0
	}
	g := float64(s.p.GridMin)
	// Interference goes by the hour on the clock at the telescope. Below the
	// horizon, where only a scan that breaks a limit looks, air is not infinite.
	sum := 0.0
	for k := range x.steps {
		part := 1.0
		if len(r.RFILoss) > 0 {
			mid := units.Instant(x.startMin + (float64(k)+0.5)*g)
			part = 1 - r.RFILoss[mid.In(s.zones[x.tel]).Hour()]
		}
		sum += meter.InfoRate(math.Sin(math.Max(tr.ElDeg[2*k+1], 0.1)*math.Pi/180), part) * g * 60
	}
	return sum
}

// listed is a scan as a plan has it, but for what it earns and its turn.
func (s *Session) listed(x *scan) scheduler.Scan {
	c := s.p.Campaign
	t := &c.Telescopes[x.tel]
	l := scheduler.Scan{Block: c.Blocks[s.p.Blocks[x.block].Index].ID, Telescope: t.Code, Source: c.Sources[x.source].Name,
		Receiver: t.Receivers[x.rx].Code, Start: units.Instant(x.startMin), Minutes: x.minutes}
	if x.info > 0 {
		l.TOAUs = 1e6 / math.Sqrt(x.info)
	}
	return l
}

// title names a scan in a sentence.
func (s *Session) title(x *scan) string {
	l := s.listed(x)
	return l.Source + " with " + l.Receiver + " in block " + l.Block + " at " + clock(x.startMin)
}

func (s *Session) sourceAt(name string) int {
	if i, ok := s.sources[name]; ok {
		return i
	}
	return -1
}

func receiverAt(t *scheduler.Telescope, code string) int {
	for i := range t.Receivers {
		if t.Receivers[i].Code == code {
			return i
		}
	}
	return -1
}
