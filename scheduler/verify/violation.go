package verify

import (
	"fmt"
)

// Kind names a rule of the planning model.
type Kind string

// The rules, in the order of the model's sections.
const (
	// One scan by itself.
	KindReference Kind = "reference"   // a block, telescope, source or receiver that does not exist or belong together
	KindGrid      Kind = "grid"        // start or length off the grid
	KindLength    Kind = "length"      // not one of the source's scan lengths
	KindReceiver  Kind = "receiver"    // not one of the block's receivers
	KindPinMark   Kind = "pin_mark"    // marked as a pin and none, or the other way round
	KindLow       Kind = "low"         // below the elevation limit or the horizon
	KindHigh      Kind = "high"        // above the highest elevation
	KindSun       Kind = "sun"         // too near the Sun
	KindHourAngle Kind = "hour_angle"  // outside the equatorial mount's range, or through 12 h
	KindMeridian  Kind = "meridian"    // too far from upper transit for a transit mount
	KindMotor     Kind = "motor_range" // the motor azimuth leaves its range
	KindMotorAz   Kind = "motor_az"    // the motor azimuth is missing or is not the azimuth plus whole turns
	KindTOA       Kind = "toa"         // the predicted uncertainty is another

	// One telescope's time.
	KindSetup    Kind = "setup"     // too little before the first scan of a block or after a lost part
	KindBlockEnd Kind = "block_end" // ends after its block
	KindLost     Kind = "lost"      // uses a lost part
	KindRoom     Kind = "room"      // too little after the scan before it
	KindPin      Kind = "pin"       // a pin that does not stand in the plan exactly once

	// What the plan is worth.
	KindEarning    Kind = "earning"     // a scan lists a unit that it cannot take part in
	KindOneWindow  Kind = "one_window"  // a scan earns twice from one goal
	KindUnitRule   Kind = "unit_rule"   // the scans together do not satisfy the unit
	KindUnitValue  Kind = "unit_value"  // they do, but are worth something else
	KindSpacing    Kind = "spacing"     // neighbouring windows of a goal earned too close together
	KindScore      Kind = "score"       // the plan's score is another
	KindPossible   Kind = "possible"    // the plan's possible score is another
	KindPrice      Kind = "price"       // a price of no unit, or no price
	KindCertBound  Kind = "cert_bound"  // the certificate's bound is not what its prices give
	KindPlanBound  Kind = "plan_bound"  // the plan's bound is not what the prices give
	KindUnderScore Kind = "under_score" // the bound is below the score
	KindUnmet      Kind = "unmet"       // only as a note: the list of unmet units is wrong
)

// Violation is one rule broken, in words and in numbers.
type Violation struct {
	Kind  Kind
	Scan  int    // index in the plan's scans; -1: about no one scan
	Block string // id of the block, where there is one
	Unit  string // name of the unit, where there is one
	Text  string // one sentence

	// The figures behind the text. Measure is their unit ("deg", "s", "us",
	// "h", "d", "min" or "score"); where it is empty there are none.
	Value   float64 // what the plan has
	Allowed float64 // the limit it breaks, or what it should be
	Measure string
}

// String is the text with its place before it.
func (v Violation) String() string {
	switch {
	case v.Scan >= 0:
		return fmt.Sprintf("scan %d: %s", v.Scan, v.Text)
	case v.Unit != "":
		return fmt.Sprintf("unit %s: %s", v.Unit, v.Text)
	default:
		return v.Text
	}
}

// figures are a measured value, what it should be, and their unit.
type figures struct {
	value, allowed float64
	measure        string
}

// none is for rules without figures.
var none figures

func (f figures) into(v Violation) Violation {
	v.Value, v.Allowed, v.Measure = f.value, f.allowed, f.measure
	return v
}

// badScan notes a violation by one scan. The text gets the scan's name.
func (k *checker) badScan(s *scan, kind Kind, f figures, format string, args ...any) {
	k.report.Violations = append(k.report.Violations, f.into(Violation{
		Kind: kind, Scan: s.index, Block: s.listed.Block, Text: s.name() + ": " + fmt.Sprintf(format, args...)}))
}

// badEarning notes a violation by one scan's earning from a unit.
func (k *checker) badEarning(s *scan, unit string, kind Kind, format string, args ...any) {
	k.badScan(s, kind, none, format, args...)
	k.report.Violations[len(k.report.Violations)-1].Unit = unit
}

// badUnit notes a violation by the scans of one unit together.
func (k *checker) badUnit(u *unit, kind Kind, f figures, format string, args ...any) {
	k.report.Violations = append(k.report.Violations, f.into(Violation{
		Kind: kind, Scan: -1, Unit: u.name, Text: fmt.Sprintf(format, args...)}))
}

// badPlan notes a violation by the plan as a whole.
func (k *checker) badPlan(kind Kind, f figures, format string, args ...any) {
	k.report.Violations = append(k.report.Violations, f.into(Violation{Kind: kind, Scan: -1, Text: fmt.Sprintf(format, args...)}))
}
