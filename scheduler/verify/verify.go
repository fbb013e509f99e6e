// Package verify re-checks a finished plan and its certificate from first
// principles: every rule of the planning model, what every unit earns, the
// score and the upper bound that the certificate's prices give.
//
// It derives everything itself from a campaign and package astro, and shares
// no code with the packages that make plans, so that it cannot share their
// mistakes. The scans of the plan are placed one instant at a time by
// sky.Observe; the candidate scans of the bound, of which there are millions,
// by sky.Window.
//
// Instants are whole milliseconds, the resolution of the files. The model
// allows 0.01 degrees at limits, 1 s in slews and phase windows, and a
// thousandth on numbers; see Options. Where it allows more than one reading,
// the strict one is taken.
package verify

import (
	"errors"

	"cadencewright/scheduler"
)

// What the planning model allows a plan that was worked out elsewhere.
const (
	DefaultLimitDeg = 0.01 // beyond a limit of the sky or the mount
	DefaultTimeS    = 1.0  // too little time for a slew, or in a phase window
	DefaultRelative = 1e-3 // on scores, uncertainties and bounds
)

// absolute is a difference between two numbers that never matters.
const absolute = 1e-6

// Options say how strict a check is. The zero value is the planning model's
// own tolerances.
type Options struct {
	LimitDeg float64 // 0: DefaultLimitDeg
	TimeS    float64 // 0: DefaultTimeS
	Relative float64 // 0: DefaultRelative

	// SkipBound leaves the certificate's bound alone, which takes most of the
	// time: Report.Bound is then 0, and only the prices' form is checked.
	SkipBound bool

	// Workers is how many goroutines recompute the bound; below 2: none but
	// the caller. The report does not depend on it.
	Workers int

	// Stop is asked now and then, from any worker; when it says true the
	// check ends with ErrStopped. Nil: never.
	Stop func() bool
}

// ErrStopped says that Options.Stop ended a check before its end.
var ErrStopped = errors.New("the check was stopped before its end")

// Report is what a check found.
type Report struct {
	Violations []Violation // rules broken; none: the plan is good
	Notes      []Violation // what is wrong in the plan's list of unmet units; breaks no rule

	Score    float64        // all that the plan's earnings are really worth
	Possible float64        // sum of the weights of all units
	Bound    float64        // what the certificate's prices prove; no plan can score more
	Units    map[string]int // how often each unit is earned, by its name; all units
}

// OK reports whether the plan breaks no rule.
func (r *Report) OK() bool { return len(r.Violations) == 0 }

// Gap is the part of the bound that the score leaves open, in [0, 1]; 0 where
// there is no bound.
func (r *Report) Gap() float64 {
	if r.Bound <= 0 {
		return 0
	}
	return max(0, (r.Bound-r.Score)/r.Bound)
}

// Check re-checks a plan for a campaign. The error is set only where the plan
// cannot be judged at all: an invalid campaign, a plan of another campaign, a
// horizon that is empty or backwards, an instant outside 1972-2099, or a stop.
func Check(c *scheduler.Campaign, p *scheduler.Plan, o Options) (*Report, error) {
	if err := judgeable(c, p); err != nil {
		return nil, err
	}
	m, err := newModel(c, scheduler.Horizon{From: p.From, To: p.To})
	if err != nil {
		return nil, err
	}
	k := &checker{model: m, plan: p, options: o.filled(), report: &Report{Possible: m.possible()}}
	if err := k.run(); err != nil {
		return nil, err
	}
	return k.report, nil
}

// judgeable reports why nothing can be said about a plan, if so.
func judgeable(c *scheduler.Campaign, p *scheduler.Plan) error {
	switch {
	case c == nil || p == nil:
		return scheduler.Errorf(scheduler.ErrInvalid, "a check needs a campaign and a plan")
	case p.Campaign != c.Name:
		return scheduler.Errorf(scheduler.ErrInvalid, "the plan is for campaign %q, not for %q", p.Campaign, c.Name)
	case !p.From.Before(p.To):
		return scheduler.Errorf(scheduler.ErrInvalid, "the plan's horizon ends at %s, which is not after its start %s",
			at(instantOf(p.To)), at(instantOf(p.From)))
	}
	if err := c.Validate(); err != nil {
		return scheduler.Errorf(scheduler.ErrInvalid, "the campaign is not valid: %w", err)
	}
	return nil
}

// filled is the options with the model's tolerances where none are given.
func (o Options) filled() Options {
	for _, d := range []struct {
		value    *float64
		standard float64
	}{{&o.LimitDeg, DefaultLimitDeg}, {&o.TimeS, DefaultTimeS}, {&o.Relative, DefaultRelative}} {
		if *d.value <= 0 {
			*d.value = d.standard
		}
	}
	return o
}

// stopped is ErrStopped once the caller wants no more.
func (o Options) stopped() error {
	if o.Stop != nil && o.Stop() {
		return ErrStopped
	}
	return nil
}

// checker is one check under way.
type checker struct {
	*model
	plan    *scheduler.Plan
	options Options
	report  *Report
	scans   []*scan // those that could be understood
}

// run goes through the model's sections in order.
func (k *checker) run() error {
	k.readScans()
	if err := k.checkBlocks(); err != nil {
		return err
	}
	k.checkPins()
	k.checkEarnings()
	k.checkTotals()
	return k.checkCertificate()
}

// same reports whether two numbers agree within the relative tolerance; NaN
// agrees with nothing.
func (k *checker) same(a, b float64) bool {
	d := a - b
	if d < 0 {
		d = -d
	}
	return d <= max(k.options.Relative*max(a, -a, b, -b), absolute)
}
