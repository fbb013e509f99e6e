package main

import (
	"flag"
	"time"

	"cadencewright/scheduler"
)

// placeFlags give a source by its place.
type placeFlags struct{ ra, dec string }

// declare adds the flags to a command's.
func (p *placeFlags) declare(flags *flag.FlagSet) {
	flags.StringVar(&p.ra, "ra", "", "source without a campaign file: right ascension (ICRS), `DEGREES` or hours:minutes:seconds")
	flags.StringVar(&p.dec, "dec", "", "source: declination, `DEGREES` or degrees:minutes:seconds")
}

// given tells whether either flag was set: one alone is a mistake that source
// reports.
func (p *placeFlags) given() bool { return p.ra != "" || p.dec != "" }

// source is a source at the place, without a name or proper motion.
func (p *placeFlags) source() (*scheduler.Source, error) {
	if p.ra == "" || p.dec == "" {
		return nil, usagef("name a campaign file, or give the source by --ra and --dec")
	}
	// J2000.0, where ICRS positions without an epoch usually belong.
	src := &scheduler.Source{Name: "source", PosEpochMJD: scheduler.DefaultPosEpochMJD}
	var err error
	if src.RADeg, err = parseAngle("ra", p.ra, true, 0, 360); err != nil {
		return nil, err
	}
	if src.DecDeg, err = parseAngle("dec", p.dec, false, -90, 90); err != nil {
		return nil, err
	}
	// What to call it in the answer.
	src.Name = sexagesimal(src.RADeg/15, 1, false) + " " + sexagesimal(src.DecDeg, 0, true)
	return src, nil
}

// spanFlags give a stretch of time.
type spanFlags struct{ from, to, length string }

// declare adds the flags to a command's; length is the one used where none is
// given, as help is to show it.
func (s *spanFlags) declare(flags *flag.FlagSet, length string) {
	flags.StringVar(&s.from, "from", "now", "`START` of the time asked for: now, 2027-01-18 or 2027-01-18T20:30Z")
	flags.StringVar(&s.to, "to", "", "`END` of it; instead of --for")
	usage := "`LENGTH` of it: 90m, 36h or 7d"
	if length != "" {
		usage += "; " + length + " if left out"
	}
	flags.StringVar(&s.length, "for", "", usage)
}

// parse reads the flags; a length that is not given is the standard one.
func (s *spanFlags) parse(now time.Time, standard time.Duration) (from, to time.Time, err error) {
	if from, err = parseInstant("from", s.from, now); err != nil {
		return from, to, err
	}
	switch {
	case s.to != "" && s.length != "":
		return from, to, usagef("give --to or --for, not both")
	// An end that is not after the start is refused by who answers: an orbit
	// may be asked about one instant.
	case s.to != "":
		to, err = parseInstant("to", s.to, now)
		return from, to, err
	case s.length != "":
		if standard, err = parseSpan("for", s.length); err != nil {
			return from, to, err
		}
	}
	return from, from.Add(standard), nil
}
