package main

import (
	"context"
	"flag"
	"time"

	"cadencewright/scheduler"
	"cadencewright/scheduler/almanac"
)

// orbitCommand answers questions about orbits without planning anything: it is
// how to see whether an ephemeris in a campaign file is what one thinks it is.
var orbitCommand = command{
	name:  "orbit",
	args:  "[CAMPAIGN.json]",
	short: "orbital phases of a binary, next conjunctions and periastra",
	long: `Says where a binary pulsar stands in its orbit, as its light reaches the Earth,
and when it next passes periastron, the ascending node and superior conjunction
(the pulsar behind its companion). The source is one of a campaign file, or is
given by its place and orbital elements; with a campaign file and no --source,
all its binaries are listed. With --for or --to the phases are tabulated over
that time, with every event and every passage of the phase windows that the
campaign wants. Times are UTC at the Earth's centre; phases are cycles of mean
anomaly from the named point; good to 0.03 s and the elements' own accuracy.`,
	examples: []string{
		`cadencewright orbit campaign.json --source "SIM J0412+1833"`,
		`cadencewright orbit campaign.json --source "SIM J0412+1833" --from 2027-01-18 --for 7d --step 6h`,
		`cadencewright orbit campaign.json --format csv`,
		`cadencewright orbit --ra 04:12:15 --dec +18:33:45 --pb 8.5 --ecc 0.3 --om 121.5 --t0 58000.25`,
		`cadencewright orbit --ra 11:30 --dec -22:03:45 --pb 0.38 --tasc 59000.5 --events --for 2d --format csv`,
	},
	setup: func(flags *flag.FlagSet) action {
		q := &orbitQuestion{flags: flags}
		flags.StringVar(&q.source, "source", "", "`NAME` of the source in the campaign file; all binaries if left out")
		q.place.declare(flags)
		q.elements.declare(flags)
		// Without a length the question is about one instant.
		q.span.declare(flags, "")
		flags.StringVar(&q.step, "step", "1h", "`STEP` of the table over --for or --to")
		flags.IntVar(&q.next, "next", 3, "how `MANY` coming events of each kind to list, 0 to 1000")
		flags.BoolVar(&q.eventsOnly, "events", false, "only events, no phases")
		flags.StringVar(&q.format, "format", formTable, "`FORM` of the answer: table, csv or json")
		return q.answer
	},
}

// orbitQuestion is what was asked, as it stood on the command line. The
// source comes from a campaign file, by its name, or from place and elements.
type orbitQuestion struct {
	flags      *flag.FlagSet // to tell flags left out from flags set to 0
	source     string        // empty: all binaries of the campaign
	place      placeFlags
	elements   elementFlags
	span       spanFlags // of no length: the state at its start and what comes next
	step       string
	next       int  // coming events of each kind, where the span has no length
	eventsOnly bool // no phases
	format     string
}

// answer checks all flags before it reads a file, then asks the almanac about
// each source in turn.
func (q *orbitQuestion) answer(_ context.Context, std stdio, args []string) error {
	if err := oneOf("format", q.format, formTable, formCSV, formJSON); err != nil {
		return err
	}
	if q.next < 0 || q.next > 1000 {
		return usagef("--next is %d; allowed is 0 to 1000", q.next)
	}
	// The only clock of the answer: "now" on the command line.
	from, to, err := q.span.parse(time.Now(), 0)
	if err != nil {
		return err
	}
	step, err := parseSpan("step", q.step)
	if err != nil {
		return err
	}
	sources, goals, err := q.subjects(std, args)
	if err != nil {
		return err
	}
	a := &orbitAnswer{from: from, to: to, eventsOnly: q.eventsOnly}
	for _, src := range sources {
		o, err := askOrbit(src, goals, from, to, step, q.next)
		if err != nil {
			return err
		}
		a.orbits = append(a.orbits, o)
	}
	return a.write(std.out, q.format)
}

// askOrbit answers for one source: over [from, to), or at from and what comes
// next where the two are one.
func askOrbit(src *scheduler.Source, goals []scheduler.PhaseGoal, from, to time.Time, step time.Duration, next int) (orbitOf, error) {
	a := orbitOf{source: src}
	// Made for the span: barycentric time is worked out once for all of it.
	o, err := almanac.NewOrbit(src, from, to)
	if err != nil {
		return a, err
	}
	if from.Equal(to) { // neither --for nor --to was given
		s, err := o.At(from)
		if err != nil {
			return a, err
		}
		a.states = []almanac.OrbitState{s}
		a.events, err = o.Next(from, next)
		return a, err
	}
	if a.states, err = o.Series(from, to, step); err != nil {
		return a, err
	}
	if a.events, err = o.Events(from, to); err != nil {
		return a, err
	}
	// What the campaign wants of the orbit, where it can be had.
	for i := range goals {
		if goals[i].Source != src.Name {
			continue
		}
		passages, err := o.Passages(&goals[i], from, to)
		if err != nil {
			return a, err
		}
		a.passages = append(a.passages, passages...)
	}
	return a, nil
}

// subjects are the binaries asked for, and the campaign's phase goals.
func (q *orbitQuestion) subjects(std stdio, args []string) ([]*scheduler.Source, []scheduler.PhaseGoal, error) {
	if len(args) == 0 {
		if q.source != "" {
			return nil, nil, usagef("--source names a source of a campaign file, and none is given")
		}
		src, err := q.place.source()
		if err != nil {
			return nil, nil, err
		}
		src.Binary, err = q.elements.binary(q.flags)
		return []*scheduler.Source{src}, nil, err
	}
	if err := exactly(args, "CAMPAIGN.json"); err != nil {
		return nil, nil, err
	}
	// Taking both would leave open which of them the answer is about.
	if q.place.given() || q.elements.pbD != 0 {
		return nil, nil, usagef("give a campaign file or a place and elements, not both")
	}
	c, err := readCampaign(std, args[0])
	if err != nil {
		return nil, nil, err
	}
	if q.source != "" {
		src, err := pickSource(c, q.source)
		return []*scheduler.Source{src}, c.PhaseGoals, err
	}
	// A campaign without --source is a question about all of its binaries.
	var binaries []*scheduler.Source
	for i := range c.Sources {
		if c.Sources[i].Binary != nil {
			binaries = append(binaries, &c.Sources[i])
		}
	}
	if len(binaries) == 0 {
		return nil, nil, inputError{scheduler.Errorf(scheduler.ErrNotFound, "the campaign has no binary")}
	}
	return binaries, c.PhaseGoals, nil
}

// elementFlags give an orbit by its elements.
type elementFlags struct {
	// In the units of a campaign file: days, light-seconds, degrees, MJD in
	// TDB, degrees a year, solar masses; the others are plain numbers.
	pbD, a1Ls, ecc, omDeg, t0, omdot, pbdot, tasc, eps1, eps2, m2, sini float64
}

// declare names the flags after the keys of a campaign file's "binary".
func (e *elementFlags) declare(flags *flag.FlagSet) {
	for _, f := range []struct {
		to          *float64
		name, usage string
	}{
		{&e.pbD, "pb", "orbit without a campaign file: period, `DAYS`"},
		{&e.a1Ls, "a1", "orbit: projected semi-major axis, `LIGHT-SECONDS`"},
		{&e.ecc, "ecc", "orbit: `ECCENTRICITY`, 0 to 0.999"},
		{&e.omDeg, "om", "orbit: longitude of periastron at --t0, `DEGREES`"},
		{&e.t0, "t0", "orbit: a periastron passage, `MJD` (TDB)"},
		{&e.omdot, "omdot", "orbit: advance of periastron, `DEGREES` a year"},
		{&e.pbdot, "pbdot", "orbit: change of the period, `S/S`"},
		{&e.tasc, "tasc", "orbit: a passage of the ascending node, `MJD` (TDB); instead of --t0, for an orbit by --eps1 and --eps2"},
		{&e.eps1, "eps1", "orbit: `E SIN(OMEGA)`"},
		{&e.eps2, "eps2", "orbit: `E COS(OMEGA)`"},
		{&e.m2, "m2", "orbit: companion's mass, `SOLAR MASSES`"},
		{&e.sini, "sini", "orbit: `SINE` of the inclination"},
	} {
		flags.Float64Var(f.to, f.name, 0, f.usage)
	}
}

// binary checks the flags and makes an orbit of them.
func (e *elementFlags) binary(flags *flag.FlagSet) (*scheduler.Binary, error) {
	// An epoch or an eccentricity of 0 is a value, so what counts is whether
	// the flag was given.
	set := map[string]bool{}
	flags.Visit(func(f *flag.Flag) { set[f.Name] = true })
	if !set["pb"] {
		return nil, usagef("--pb is missing: the orbital period in days")
	}
	b := &scheduler.Binary{Model: scheduler.BinaryKepler, PbD: e.pbD, A1Ls: e.a1Ls, Ecc: e.ecc, OmDeg: e.omDeg, T0MJD: e.t0,
		OmdotDegYr: e.omdot, Pbdot: e.pbdot, TascMJD: e.tasc, Eps1: e.eps1, Eps2: e.eps2, M2Msun: e.m2, Sini: e.sini}
	switch {
	// Each epoch belongs to one model, and the other elements with it.
	case set["t0"] == set["tasc"]:
		return nil, usagef("give one epoch: --t0 (periastron) or --tasc (ascending node)")
	case set["tasc"] && (set["ecc"] || set["om"] || set["omdot"]):
		return nil, usagef("--ecc, --om and --omdot go with --t0; with --tasc give --eps1 and --eps2")
	case set["t0"] && (set["eps1"] || set["eps2"]):
		return nil, usagef("--eps1 and --eps2 go with --tasc; with --t0 give --ecc and --om")
	case set["tasc"]:
		b.Model = scheduler.BinaryELL1
	}
	// Ranges are the orbit's own, so that flags and files allow the same.
	if _, err := b.Elements(); err != nil {
		return nil, usagef("the orbit: %v", err)
	}
	return b, nil
}
