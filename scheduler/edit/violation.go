package edit

import (
	"fmt"
	"time"

	"cadencewright/scheduler/units"
)

// Rule names a rule of the planning model.
type Rule string

// The rules that a change can break.
const (
	RuleGrid       Rule = "grid"        // start or length off the planning grid; such a scan earns nothing
	RuleLength     Rule = "length"      // not one of the source's scan lengths
	RuleReceiver   Rule = "receiver"    // not one of the block's receivers
	RuleLow        Rule = "low"         // below the elevation limit or the horizon
	RuleHigh       Rule = "high"        // above the highest elevation
	RuleSun        Rule = "sun"         // too near the Sun
	RuleHourAngle  Rule = "hour_angle"  // outside the equatorial mount's range, or through 12 h
	RuleMeridian   Rule = "meridian"    // too far from upper transit for a transit mount
	RuleMotor      Rule = "motor_range" // no whole turn keeps the motor azimuth in its range
	RuleBlockStart Rule = "block_start" // begins before its block
	RuleSetup      Rule = "setup"       // too little before the first scan of a block or after a lost part
	RuleBlockEnd   Rule = "block_end"   // ends after its block
	RuleLost       Rule = "lost"        // uses lost time
	RuleOverlap    Rule = "overlap"     // begins before the scan before it ends
	RuleRoom       Rule = "room"        // too little time after the scan before it
	RulePin        Rule = "pin"         // a pin does not stand in the plan exactly once
)

// Ref says which scan of a plan is meant.
type Ref struct {
	Block, Source, Receiver string
	Start                   time.Time
	Minutes                 int
	Pinned                  bool
}

// Violation is one rule broken, in words and in numbers.
type Violation struct {
	Rule  Rule
	New   bool   // the change brings it; else the plan broke it before
	Scan  Ref    // the scan, or the later of two; the pin that is missing
	Other *Ref   // the scan before it, for overlap and room
	Text  string // one sentence

	// The figures behind the text. Measure is their unit ("deg", "s", "min" or
	// "times"); where it is empty there are none.
	Value   float64 // what the plan has
	Allowed float64 // the limit that it breaks
	Measure string
}

// figures are a value, its limit, and their unit.
type figures struct {
	value, allowed float64
	measure        string
}

// breach is a rule broken by a scan, said in a sentence that begins with the
// scan's name.
func (s *Session) breach(rule Rule, x *scan, f figures, format string, args ...any) Violation {
	return Violation{Rule: rule, Scan: s.ref(x), Text: s.title(x) + ": " + fmt.Sprintf(format, args...),
		Value: f.value, Allowed: f.allowed, Measure: f.measure}
}

func (s *Session) ref(x *scan) Ref {
	l := s.listed(x)
	return Ref{l.Block, l.Source, l.Receiver, l.Start, l.Minutes, false}
}

// What was broken before is known by the rule and the scans, not by the text:
// the figures of a fault may change with its neighbours.

// key tells violations apart: the same rule about the same scans.
type key struct {
	rule        Rule
	scan, other Ref
	limit       float64 // lost parts of one block differ in it
}

func (v *Violation) key() key {
	k := key{rule: v.Rule, scan: v.Scan}
	if v.Other != nil {
		k.other = *v.Other
	}
	k.scan.Pinned, k.other.Pinned = false, false // to pin a scan breaks nothing
	if v.Rule == RuleLost || v.Rule == RuleSetup {
		k.limit = v.Value
	}
	return k
}

// compare lists what the changed plan breaks: what is new first.
func (s *Session) compare(d *draft) []Violation {
	var fresh, stood []Violation
	for bi := range s.blocks {
		r := d.rows[bi]
		if r == nil { // nothing has changed there, nor its pins
			stood = append(stood, s.blocks[bi].faults...)
			continue
		}
		before := map[key]bool{}
		for i := range s.blocks[bi].faults {
			before[s.blocks[bi].faults[i].key()] = true
		}
		for _, v := range s.faultsOf(bi, r, d.pins) {
			if v.New = !before[v.key()]; v.New {
				fresh = append(fresh, v)
			} else {
				stood = append(stood, v)
			}
		}
	}
	return append(fresh, stood...)
}

// faultsOf are all rules that a block's scans break: each by itself, the room
// between them, and its pins.
func (s *Session) faultsOf(bi int, r *row, pins []pin) []Violation {
	var list []Violation
	for _, x := range r.scans {
		pinned := isPin(pins, x)
		for _, v := range x.faults {
			if v.Rule == RuleLength && pinned {
				continue // a pin may have any length
			}
			v.Scan.Pinned = pinned
			list = append(list, v)
		}
	}
	for i := 1; i < len(r.scans); i++ {
		if v, bad := s.crowded(r, i, pins); bad {
			list = append(list, v)
		}
	}
	for i := range pins {
		if p := &pins[i]; p.block == bi {
			n := 0
			for _, x := range r.scans {
				if p.is(x) {
					n++
				}
			}
			if n != 1 {
				list = append(list, s.unpinned(p, n))
			}
		}
	}
	return list
}

func isPin(pins []pin, x *scan) bool {
	for i := range pins {
		if pins[i].is(x) {
			return true
		}
	}
	return false
}

// unpinned says that a pin stands in the plan some times that are not one.
func (s *Session) unpinned(p *pin, n int) Violation {
	c := s.p.Campaign
	b := &s.p.Blocks[p.block]
	ref := Ref{Block: c.Blocks[b.Index].ID, Start: units.Instant(p.startMin), Minutes: p.minutes, Pinned: true}
	if p.source >= 0 {
		ref.Source = c.Sources[p.source].Name
	}
	if p.rx >= 0 {
		ref.Receiver = c.Telescopes[b.Telescope].Receivers[p.rx].Code
	}
	return Violation{Rule: RulePin, Scan: ref, Value: float64(n), Allowed: 1, Measure: "times",
		Text: fmt.Sprintf("The pin of %s with %s in block %s at %s for %d min stands in the plan %d times, not once",
			ref.Source, ref.Receiver, ref.Block, clock(p.startMin), p.minutes, n)}
}
