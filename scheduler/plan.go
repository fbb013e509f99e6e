package scheduler

import "time"

// PlanFormat is the value of "format" in a plan file.
const PlanFormat = "plan/1"

// Horizon is the stretch of time [From, To) that a plan fills: the blocks that
// start in it.
type Horizon struct {
	From, To time.Time
}

// Plan is scans for the blocks of one horizon, what they earn, what stays
// unmet and why, and a certificate of how good any plan could be.
type Plan struct {
	Campaign string // name of the campaign it was made for
	From, To time.Time
	Score    float64 // all that is earned
	Possible float64 // sum of the weights of all units
	Bound    float64 // no plan can score more
	Scans    []Scan  // by block start, then block, then scan start
	Unmet    []Unmet

	Certificate Certificate
}

// Scan is one source on one receiver for a whole number of minutes, [Start,
// Start+Minutes).
type Scan struct {
	Block      string
	Telescope  string
	Source     string
	Receiver   string
	Start      time.Time
	Minutes    int
	MotorAzDeg *float64 // alt-azimuth only: azimuth of the motor at the start, turns included
	Pinned     bool
	TOAUs      float64 // predicted TOA uncertainty, microseconds; 0: not detectable
	Earns      []Earning
}

// End is the instant the scan is over.
func (s Scan) End() time.Time { return s.Start.Add(time.Duration(s.Minutes) * time.Minute) }

// Earning is what one scan gets from one unit.
type Earning struct {
	Goal  string
	Unit  string
	Value float64
}

// Unmet is a unit that earned fewer times than it could, with the reasons.
type Unmet struct {
	Goal    string
	Unit    string
	Weight  float64
	Reasons []Reason
}

// ReasonCode names a cause for a unit being unmet.
type ReasonCode string

// Reason is one cause, with the figures a person can act on.
type Reason struct {
	Code  ReasonCode
	Text  string // one sentence in plain words, with its numbers and units
	Count int    // candidate scans or blocks it applies to; 0: not countable
}

// Certificate lets anyone recompute an upper bound on every plan's score:
// prices p_u >= 0, one a unit name (0 where left out).
type Certificate struct {
	Prices map[string]float64
	Bound  float64
}
