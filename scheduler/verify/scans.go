package verify

import (
	"fmt"

	"cadencewright/scheduler"
)

// scan is a scan of the plan that could be understood.
type scan struct {
	listed     *scheduler.Scan
	index      int // in the plan's scans
	block      *block
	source     *source
	receiver   *receiver
	start, end msec

	info        float64 // information gathered, s^-2
	first, last pose
}

// name says which scan it is: a row of the plan can be found by it.
func (s *scan) name() string {
	return fmt.Sprintf("%s with %s in block %s at %s", s.source.Name, s.receiver.Code, s.block.ID, at(s.start))
}

// Everything that a scan refers to is looked up once, and a scan that refers to
// nothing is left out of all later rules: one violation says enough of it.

// readScans resolves the names of every scan and checks what a scan is by
// itself. A scan that cannot be understood counts for nothing from here on.
func (k *checker) readScans() {
	for i := range k.plan.Scans {
		if s := k.readScan(i, &k.plan.Scans[i]); s != nil {
			k.scans = append(k.scans, s)
		}
	}
}

func (k *checker) readScan(i int, p *scheduler.Scan) *scan {
	s := &scan{listed: p, index: i, block: k.blockByID[p.Block], source: k.sources[p.Source], start: instantOf(p.Start)}
	s.end = s.start + msec(p.Minutes)*minute
	if why := k.dangling(s); why != "" {
		k.report.Violations = append(k.report.Violations, Violation{Kind: KindReference, Scan: i, Block: p.Block, Text: why})
		return nil
	}
	if s.start%k.grid != 0 || (s.end-s.start)%k.grid != 0 || s.end <= s.start {
		k.badScan(s, KindGrid, figures{float64(p.Minutes), k.grid.minutes(), "min"},
			"start or length, %d min, is off the grid of %g min", p.Minutes, k.grid.minutes())
		return nil
	}
	if s.start < s.block.start-day || s.end > s.block.end+day {
		// Far outside its block nothing else about it is worth working out.
		k.badScan(s, KindBlockEnd, none, "is nowhere near its block, which is from %s to %s", at(s.block.start), at(s.block.end))
		return nil
	}
	k.checkLabels(s)
	return s
}

// dangling says what a scan refers to that is not there; it fills the receiver.
func (k *checker) dangling(s *scan) string {
	p := s.listed
	switch {
	case s.block == nil:
		return fmt.Sprintf("block %q is not one of the horizon's blocks", p.Block)
	case s.source == nil:
		return fmt.Sprintf("source %q is not in the campaign", p.Source)
	case p.Telescope != s.block.telescope.Code:
		return fmt.Sprintf("telescope %q is not that of block %s, which is %s", p.Telescope, p.Block, s.block.telescope.Code)
	}
	s.receiver = s.block.telescope.receivers[p.Receiver]
	if s.receiver == nil {
		return fmt.Sprintf("receiver %q is not one of telescope %s", p.Receiver, p.Telescope)
	}
	return ""
}

// checkLabels checks receiver, length and the mark of a pin.
func (k *checker) checkLabels(s *scan) {
	isPin := false
	for _, p := range s.block.pins {
		isPin = isPin || s.is(p)
	}
	switch {
	case isPin && !s.listed.Pinned:
		k.badScan(s, KindPinMark, none, "is a pin of the campaign and not marked as one")
	case !isPin && s.listed.Pinned:
		k.badScan(s, KindPinMark, none, "is marked as a pin and the campaign has no such pin")
	}
	if !isPin && !allowsLength(s.source.Source, s.listed.Minutes) {
		k.badScan(s, KindLength, figures{value: float64(s.listed.Minutes), measure: "min"},
			"%d min is not one of the source's scan lengths, %v min", s.listed.Minutes, s.source.ScanMinutes)
	}
	if !s.block.hasReceiver(s.receiver) {
		k.badScan(s, KindReceiver, none, "the block has only %v", s.block.Receivers)
	}
}

// is reports whether the scan is the pin.
func (s *scan) is(p *pin) bool {
	return s.block == p.block && s.source == p.source && s.receiver == p.receiver && s.start == p.start && s.end == p.end
}

// checkPins checks that every pin stands in the plan exactly once.
func (k *checker) checkPins() {
	for _, p := range k.pins {
		n := 0
		for _, s := range k.scans {
			if s.is(p) {
				n++
			}
		}
		if n != 1 {
			k.report.Violations = append(k.report.Violations, Violation{Kind: KindPin, Scan: -1, Block: p.Block,
				Text: fmt.Sprintf("the pin of %s with %s in block %s at %s stands in the plan %d times, not once",
					p.Source, p.Receiver, p.Block, at(p.start), n),
				Value: float64(n), Allowed: 1, Measure: "times"})
		}
	}
}

func allowsLength(s *scheduler.Source, minutes int) bool {
	for _, m := range s.ScanMinutes {
		if m == minutes {
			return true
		}
	}
	return false
}
