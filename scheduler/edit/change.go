package edit

import (
	"fmt"
	"slices"
	"time"

	"cadencewright/scheduler"
	"cadencewright/scheduler/units"
)

// Op is what a change does.
type Op string

// What can be done to a plan.
const (
	OpAdd   Op = "add"   // a scan that is not in the plan
	OpAlter Op = "alter" // another block, receiver, start or length
	OpDrop  Op = "drop"
	OpPin   Op = "pin"   // it must stand as it is from now on
	OpUnpin Op = "unpin" // it may be moved again
)

// Change is one change of a plan. Add wants Block, Source, Receiver, Start and
// Minutes; the others want Scan, and Alter what is to be other than it is.
type Change struct {
	Op       Op
	Scan     int // index into the scans of the session's plan
	Block    string
	Source   string
	Receiver string
	Start    time.Time
	Minutes  int
}

// Add is a new scan.
func Add(block, source, receiver string, start time.Time, minutes int) Change {
	return Change{Op: OpAdd, Block: block, Source: source, Receiver: receiver, Start: start, Minutes: minutes}
}

// Move gives a scan another start.
func Move(scan int, start time.Time) Change { return Change{Op: OpAlter, Scan: scan, Start: start} }

// MoveTo gives a scan another block, which may be another telescope's, one of
// its receivers and a start there.
func MoveTo(scan int, block, receiver string, start time.Time) Change {
	return Change{Op: OpAlter, Scan: scan, Block: block, Receiver: receiver, Start: start}
}

// Resize gives a scan another length; its start stays.
func Resize(scan, minutes int) Change { return Change{Op: OpAlter, Scan: scan, Minutes: minutes} }

// Tune gives a scan another receiver.
func Tune(scan int, receiver string) Change {
	return Change{Op: OpAlter, Scan: scan, Receiver: receiver}
}

// Drop takes a scan out of the plan.
func Drop(scan int) Change { return Change{Op: OpDrop, Scan: scan} }

// Pin makes a scan one that must stand as it is: a pin of the campaign.
func Pin(scan int) Change { return Change{Op: OpPin, Scan: scan} }

// Unpin takes the pin of a scan away; the scan stays.
func Unpin(scan int) Change { return Change{Op: OpUnpin, Scan: scan} }

// Pins are compared by what they are, not by their place in a list: a scan is
// pinned if the campaign has a pin just like it.

// pin is a pin of the campaign, in the session's terms.
type pin struct {
	block, source, rx int
	startMin          float64
	minutes           int
}

func (p pin) is(x *scan) bool {
	return p == pin{x.block, x.source, x.rx, x.startMin, x.minutes}
}

// pinsOf are the pins that lie in the horizon's blocks.
func (s *Session) pinsOf(list []scheduler.Pin) []pin {
	var pins []pin
	for i := range list {
		q := &list[i]
		bi, ok := s.blockAt[q.Block]
		if !ok {
			continue
		}
		p := pin{block: bi, source: s.sourceAt(q.Source), rx: -1, startMin: units.Minutes(q.Start), minutes: q.Minutes}
		t := &s.p.Campaign.Telescopes[s.p.Blocks[bi].Telescope]
		p.rx = receiverAt(t, q.Receiver)
		pins = append(pins, p)
	}
	return pins
}

// draft is the plan with changes made: what is touched stands here, the rest
// in the session.
type draft struct {
	rows           map[int]*row
	sources        map[int][]*scan
	awards         map[int][]award
	pins           []pin
	touchedBlocks  []int // ascending
	touchedSources []int // ascending
	made           []*scan
	faults         []Violation
}

// draft makes the changes.
func (s *Session) draft(changes []Change) (*draft, error) {
	d := &draft{rows: map[int]*row{}, sources: map[int][]*scan{}, awards: map[int][]award{}, pins: s.pins}
	// All indices are of the plan as it is, so the order of changes does not
	// matter, and two of one scan would contradict each other.
	seen := map[int]bool{}
	for _, c := range changes {
		if c.Op != OpAdd {
			if c.Scan < 0 || c.Scan >= len(s.scans) {
				return nil, scheduler.Errorf(scheduler.ErrInvalid, "scan %d: the plan has %d scans, counted from 0", c.Scan, len(s.scans))
			}
			if seen[c.Scan] {
				return nil, scheduler.Errorf(scheduler.ErrInvalid, "scan %d: changed twice at once", c.Scan)
			}
			seen[c.Scan] = true
		}
		if err := s.change(d, c); err != nil {
			return nil, err
		}
	}
	for bi := range d.rows {
		d.touchedBlocks = append(d.touchedBlocks, bi)
	}
	for si := range d.sources {
		d.touchedSources = append(d.touchedSources, si)
	}
	// In one order, so that sums and lists are always the same.
	slices.Sort(d.touchedBlocks)
	slices.Sort(d.touchedSources)
	// Only now that all changes are made: in between, scans may overlap.
	for _, bi := range d.touchedBlocks {
		slices.SortStableFunc(d.rows[bi].scans, inTime)
		s.turn(d.rows[bi])
	}
	for _, si := range d.touchedSources {
		slices.SortStableFunc(d.sources[si], inTime)
		d.awards[si] = s.earn(si, d.sources[si])
	}
	d.faults = s.compare(d)
	return d, nil
}

// change makes one change.
func (s *Session) change(d *draft, c Change) error {
	switch c.Op {
	case OpAdd:
		x, err := s.read(&scheduler.Scan{Block: c.Block, Source: c.Source, Receiver: c.Receiver, Start: c.Start, Minutes: c.Minutes})
		if err != nil {
			return err
		}
		x.index = -1
		s.enter(d, x)
	case OpAlter:
		old := s.scans[c.Scan]
		x, err := s.altered(old, c)
		if err != nil {
			return err
		}
		s.leave(d, old)
		s.enter(d, x)
	case OpDrop:
		s.leave(d, s.scans[c.Scan])
	case OpPin, OpUnpin:
		return s.repin(d, s.scans[c.Scan], c)
	default:
		return scheduler.Errorf(scheduler.ErrInvalid, "change %q: must be add, alter, drop, pin or unpin", c.Op)
	}
	return nil
}

// altered is a scan with what the change says.
func (s *Session) altered(old *scan, c Change) (*scan, error) {
	to := s.listed(old)
	if c.Source != "" && c.Source != to.Source {
		return nil, scheduler.Errorf(scheduler.ErrInvalid, "scan %d: its source is %s; to observe %q instead, drop it and add another",
			c.Scan, to.Source, c.Source)
	}
	if c.Block != "" {
		to.Block = c.Block
	}
	if c.Receiver != "" {
		to.Receiver = c.Receiver
	}
	if !c.Start.IsZero() {
		to.Start = c.Start
	}
	if c.Minutes != 0 {
		to.Minutes = c.Minutes
	}
	to.Telescope = "" // that of its block, which may be another now
	x, err := s.read(&to)
	if err != nil {
		return nil, fmt.Errorf("scan %d: %w", c.Scan, err)
	}
	x.index = old.index
	return x, nil
}

// repin makes a scan a pin, or no longer one. Its block is looked at again: a
// pin may have a length that other scans may not.
func (s *Session) repin(d *draft, x *scan, c Change) error {
	// A pin that is there already, or one that is not, is a mistake worth telling.
	held := slices.ContainsFunc(d.pins, func(p pin) bool { return p.is(x) })
	switch {
	case c.Op == OpPin && held:
		return scheduler.Errorf(scheduler.ErrInvalid, "scan %d: is pinned already", c.Scan)
	case c.Op == OpUnpin && !held:
		return scheduler.Errorf(scheduler.ErrInvalid, "scan %d: is not pinned", c.Scan)
	case c.Op == OpPin:
		d.pins = append(slices.Clone(d.pins), pin{x.block, x.source, x.rx, x.startMin, x.minutes})
	default:
		d.pins = slices.DeleteFunc(slices.Clone(d.pins), func(p pin) bool { return p.is(x) })
	}
	s.open(d, x.block)
	d.made = append(d.made, x)
	return nil
}

// open is a block's row in the draft, to be changed.
func (s *Session) open(d *draft, bi int) *row {
	r := d.rows[bi]
	if r == nil {
		r = &row{scans: slices.Clone(s.blocks[bi].scans)}
		d.rows[bi] = r
	}
	return r
}

// openSource is a source's scans in the draft, to be changed.
func (s *Session) openSource(d *draft, si int) []*scan {
	list, ok := d.sources[si]
	if !ok {
		list = slices.Clone(s.source[si])
	}
	return list
}

// enter puts a scan into the draft; order and turns come when all are in.
func (s *Session) enter(d *draft, x *scan) {
	r := s.open(d, x.block)
	r.scans = append(r.scans, x)
	d.sources[x.source] = append(s.openSource(d, x.source), x)
	d.made = append(d.made, x)
}

// leave takes a scan out of the draft.
func (s *Session) leave(d *draft, x *scan) {
	same := func(y *scan) bool { return y == x }
	r := s.open(d, x.block)
	r.scans = slices.DeleteFunc(r.scans, same)
	d.sources[x.source] = slices.DeleteFunc(s.openSource(d, x.source), same)
}
