package almanac

import (
	"errors"
	"fmt"
	"slices"
	"time"

	"cadencewright/astro"
	"cadencewright/astro/orbit"
	"cadencewright/astro/timescale"
	"cadencewright/scheduler"
)

// Orbit is the orbit of one source, ready to be asked.
type Orbit struct {
	source   *scheduler.Source
	elements orbit.Elements
	star     astro.Star
	clock    orbit.Clock
}

// OrbitState is where a binary stands when its light reaches the Earth.
type OrbitState struct {
	At              time.Time // UTC at the Earth's centre
	BarycentricS    float64   // barycentric TDB minus UTC, seconds
	OrbitNumber     int       // orbits since T0, counted from periastron
	FromPeriastron  float64   // phases in cycles, [0, 1)
	FromNode        float64
	FromConjunction float64
	TrueAnomalyDeg  float64 // [0, 360)
	OmegaDeg        float64 // longitude of periastron, [0, 360)
	ArgumentDeg     float64 // omega + true anomaly, [0, 360); 90 at superior conjunction
	RoemerS         float64 // light time of the pulsar's own orbit
	ShapiroUs       float64 // delay in the companion's gravity
}

// OrbitEvent is the passage of a reference point.
type OrbitEvent struct {
	Point scheduler.PhaseReference
	Orbit int
	At    time.Time
}

// GoalPassage is the passage of one window of a phase goal.
type GoalPassage struct {
	Goal         string
	Window       int
	Orbit        int
	Enter, Leave time.Time
}

// NewOrbit prepares the orbit of a source for questions about [from, to]; it
// answers others too, more slowly. A source without a companion is an error
// of kind scheduler.ErrInvalid.
func NewOrbit(src *scheduler.Source, from, to time.Time) (*Orbit, error) {
	if src.Binary == nil {
		return nil, scheduler.Errorf(scheduler.ErrInvalid, "source %s is not a binary", src.Name)
	}
	e, err := src.Binary.Elements()
	if err != nil {
		return nil, fmt.Errorf("source %s: %w", src.Name, err)
	}
	earth, err := orbit.NewEarth(from, to)
	if err != nil {
		return nil, err
	}
	return &Orbit{source: src, elements: e, star: src.Star(), clock: earth.Clock(src.Star())}, nil
}

// PeriodD is the orbital period in days.
func (o *Orbit) PeriodD() float64 { return o.elements.PbD }

// At is the state at a UTC.
func (o *Orbit) At(t time.Time) (OrbitState, error) {
	bary, err := o.clock.TDB(t)
	if err != nil {
		return OrbitState{}, err
	}
	utc := timescale.UTC(t)
	s := o.elements.At(bary)
	// The number of the orbit is that of the last periastron: the count's floor.
	peri := o.elements.TurnsAt(orbit.Periastron, bary)
	return OrbitState{
		At:              t.UTC(),
		BarycentricS:    (float64(bary.Day-utc.Day) + (bary.Frac - utc.Frac)) * 86400,
		OrbitNumber:     floor(peri),
		FromPeriastron:  o.elements.PhaseAt(orbit.Periastron, bary),
		FromNode:        o.elements.PhaseAt(orbit.Node, bary),
		FromConjunction: o.elements.PhaseAt(orbit.Conjunction, bary),
		TrueAnomalyDeg:  s.True.Deg(),
		OmegaDeg:        s.Om.Deg(),
		ArgumentDeg:     s.Argument.Deg(),
		RoemerS:         o.elements.RoemerDelayS(bary),
		ShapiroUs:       1e6 * o.elements.ShapiroDelayS(bary),
	}, nil
}

func floor(x float64) int {
	n := int(x)
	if float64(n) > x {
		n--
	}
	return n
}

// Series is the state at from, from+step and so on up to to.
func (o *Orbit) Series(from, to time.Time, step time.Duration) ([]OrbitState, error) {
	if err := checkSpan(from, to); err != nil {
		return nil, err
	}
	if step <= 0 || to.Sub(from)/step >= MaxSamples {
		return nil, scheduler.Errorf(scheduler.ErrInvalid, "a step of %v is too short for %v: at most %d samples are allowed",
			step, to.Sub(from), MaxSamples)
	}
	var list []OrbitState
	for t := from; !t.After(to); t = t.Add(step) {
		s, err := o.At(t)
		if err != nil {
			return nil, err
		}
		list = append(list, s)
	}
	return list, nil
}

// points are the reference points that the orbit has: a circle has no
// periastron.
func (o *Orbit) points() []scheduler.PhaseReference {
	if o.elements.Ecc == 0 {
		return []scheduler.PhaseReference{scheduler.RefNode, scheduler.RefConjunction}
	}
	return []scheduler.PhaseReference{scheduler.RefPeriastron, scheduler.RefNode, scheduler.RefConjunction}
}

// Next are the first n passages of each reference point after t, all in time
// order; fewer where the years that can be computed end.
func (o *Orbit) Next(after time.Time, n int) ([]OrbitEvent, error) {
	if _, err := timescale.TT(after); err != nil {
		return nil, err
	}
	var list []OrbitEvent
	for _, p := range o.points() {
		t := after // from each passage on to the next
		for range n {
			ev, err := o.elements.Next(p.Point(), o.star, t)
			var beyond *astro.RangeError
			if errors.As(err, &beyond) {
				break
			}
			if err != nil {
				return nil, fmt.Errorf("source %s: %w", o.source.Name, err)
			}
			list = append(list, OrbitEvent{Point: p, Orbit: ev.Orbit, At: ev.At})
			t = ev.At
		}
	}
	sortEvents(list)
	return list, nil
}

// Events are all passages of the reference points in [from, to), in time
// order.
func (o *Orbit) Events(from, to time.Time) ([]OrbitEvent, error) {
	if err := checkSpan(from, to); err != nil {
		return nil, err
	}
	var list []OrbitEvent
	for _, p := range o.points() {
		events, err := o.clock.Events(o.elements, p.Point(), from, to)
		if err != nil {
			return nil, fmt.Errorf("source %s: %w", o.source.Name, err)
		}
		for _, ev := range events {
			list = append(list, OrbitEvent{Point: p, Orbit: ev.Orbit, At: ev.At})
		}
	}
	sortEvents(list)
	return list, nil
}

func sortEvents(list []OrbitEvent) {
	slices.SortStableFunc(list, func(a, b OrbitEvent) int { return a.At.Compare(b.At) })
}

// Passages are the passages of a phase goal's windows that touch [from, to),
// by entry, then window.
func (o *Orbit) Passages(g *scheduler.PhaseGoal, from, to time.Time) ([]GoalPassage, error) {
	if err := checkSpan(from, to); err != nil {
		return nil, err
	}
	var list []GoalPassage
	for i, w := range g.Windows {
		found, err := o.clock.Passages(o.elements, g.Reference.Point(), w.From, w.To, from, to)
		if err != nil {
			return nil, fmt.Errorf("goal %s: %w", g.ID, err)
		}
		for _, p := range found {
			list = append(list, GoalPassage{Goal: g.ID, Window: i, Orbit: p.Orbit, Enter: p.Enter, Leave: p.Leave})
		}
	}
	slices.SortStableFunc(list, func(a, b GoalPassage) int { return a.Enter.Compare(b.Enter) })
	return list, nil
}
