package demo

import (
	"fmt"
	"math"
	"time"

	"cadencewright/astro"
	"cadencewright/astro/sensitivity"
	"cadencewright/astro/sky"
	"cadencewright/scheduler"
)

// How many pulsars there are, and how many of them are new to the campaign and
// have never been observed.
const (
	sourceCount = 45
	newCount    = 3
)

// part is the part a source plays in the demo; most are ordinary.
type part int

const (
	ordinary  part = iota
	fresh          // never observed yet
	sunward        // the Sun stands beside it this week
	farSouth       // wanted at a telescope where it never rises
	scattered      // smeared out over its period at low frequency
	faint          // wanted more precisely than the array can time it
)

// cast gives the special parts; the sources are put in order of name later.
var cast = []part{sunward, farSouth, scattered, faint, fresh, fresh, fresh}

// makeSources invents the pulsars, in order of name, and returns the part each
// plays.
func makeSources(c *scheduler.Campaign, seed uint64, monday time.Time) map[string]part {
	r := stream(seed, "sources")
	kinds := map[string]part{}
	for i := range sourceCount {
		p := ordinary
		if i < len(cast) {
			p = cast[i]
		}
		star := place(r, p, monday, c.Sources)
		s := makeSource(r, p, star)
		for p != faint && !worthTiming(c, &s) {
			s = makeSource(r, p, star)
		}
		kinds[s.Name] = p
		c.Sources = append(c.Sources, s)
	}
	binaries := r.shuffled(sourceCount - len(cast))
	for i, b := range orbits {
		s := &c.Sources[len(cast)+binaries[i]]
		s.Binary = b.make(r, monday)
	}
	c.Sources = c.Canonical().Sources
	return kinds
}

// worthTiming reports whether the array times a pulsar to between 0.1 and 5
// microseconds at its best in band L: no better one is known to be so steady,
// and a worse one would not be in a timing array.
func worthTiming(c *scheduler.Campaign, s *scheduler.Source) bool {
	best := bestTOAUs(c, s, "L")
	return best >= 0.1 && best <= 5
}

// place draws a position, at least 2.5 degrees from every other: where the
// Galaxy has its pulsars for an ordinary source, where its part puts a special
// one.
func place(r *random, p part, monday time.Time, others []scheduler.Source) astro.Star {
	for {
		star := candidate(r, p, monday)
		far := true
		for i := range others {
			if separationDeg(star, others[i].Star()) < 2.5 {
				far = false
			}
		}
		if far {
			return star
		}
	}
}

// candidate draws a position without regard to others.
func candidate(r *random, p part, monday time.Time) astro.Star {
	if p == sunward {
		// Thursday noon: the Sun stays within 5 degrees all week.
		sun, err := sky.Sun(monday.Add(84 * time.Hour))
		if err != nil {
			panic("demo: " + err.Error()) // Generate keeps to the years that are tabulated
		}
		return at(sun.RADeg+r.between(-0.5, 0.5), sun.DecDeg+r.between(1, 2))
	}
	for {
		raDeg := r.between(0, 360)
		decDeg := astro.Angle(math.Asin(r.between(-0.97, 0.995))).Deg()
		star := at(raDeg, decDeg)
		l, b := sensitivity.Galactic(star)
		lDeg, bDeg := l.WrapSigned().Deg(), b.Deg()
		switch p {
		case farSouth:
			if decDeg < -58 && decDeg > -72 {
				return star
			}
		case scattered:
			if math.Abs(bDeg) < 1.5 && math.Abs(lDeg) < 30 && decDeg > -30 {
				return star
			}
		case faint:
			if math.Abs(bDeg) > 25 && decDeg > 10 {
				return star
			}
		default:
			// Known millisecond pulsars crowd toward the plane and the inner
			// Galaxy but, being near, spread far wider than young ones.
			disc := math.Exp(-math.Abs(bDeg) / 16)
			inner := 0.25 + 0.75*math.Exp(-lDeg*lDeg/(2*55*55))
			weight := 0.1 + 0.9*disc*inner
			if decDeg < -35 { // most of the array's time is in the north
				weight *= 0.45
			}
			if r.chance(weight) {
				return star
			}
		}
	}
}

// at is a star at a place rounded as a catalogue prints it.
func at(raDeg, decDeg float64) astro.Star {
	return astro.Star{RA: astro.FromDeg(round(astro.FromDeg(raDeg).Wrap().Deg(), 5)), Dec: astro.FromDeg(round(decDeg, 5)),
		PosEpochMJD: 57500}
}

// separationDeg is the angle between two stars.
func separationDeg(a, b astro.Star) float64 {
	dot := a.Direction(57500).Dot(b.Direction(57500))
	return astro.Angle(math.Acos(math.Max(-1, math.Min(1, dot)))).Deg()
}

// nameOf names a source after its place, minutes cut off and not rounded, as
// is common practice.
func nameOf(s astro.Star) string {
	raMin := int(s.RA.Hours() * 60)
	decMin := int(math.Abs(s.Dec.Deg()) * 60)
	sign := '+'
	if s.Dec < 0 {
		sign = '-'
	}
	return fmt.Sprintf("SIM J%02d%02d%c%02d%02d", raMin/60, raMin%60, sign, decMin/60, decMin%60)
}

// makeSource draws a pulsar at a place. The distributions are plain guesses at
// what a timing array selects: bright, narrow, steep.
func makeSource(r *random, p part, star astro.Star) scheduler.Source {
	_, b := sensitivity.Galactic(star)
	period := math.Max(0.0015, math.Min(0.02, r.logNormal(0.0038, 0.55)))
	duty := math.Max(0.02, math.Min(0.2, r.logNormal(0.075, 0.4)))
	flux := math.Max(0.3, math.Min(9, r.logNormal(1.1, 0.75)))
	// A plane-parallel layer of electrons, seen from near its middle.
	dm := math.Min(r.between(8, 22)/math.Max(0.08, math.Abs(b.Sin())), r.between(40, 220))
	scatter := sensitivity.BhatScatterS(dm, 1000) * r.logNormal(1, 0.8)
	switch p {
	case scattered:
		period, dm, scatter = 0.0042, 268.4, 0.0026
	case faint:
		flux, duty = 0.16, 0.09
	}
	s := scheduler.Source{
		Name: nameOf(star), RADeg: round(star.RA.Deg(), 5), DecDeg: round(star.Dec.Deg(), 5), PosEpochMJD: star.PosEpochMJD,
		PMRAMasYr: round(7*r.normal(), 2), PMDecMasYr: round(7*r.normal(), 2),
		PeriodS: significant(period, 9), DMPcCm3: round(dm, 3), FluxMJy: significant(flux, 3), FluxFreqMHz: 1400,
		SpectralIdx: round(-1.6+0.35*r.normal(), 2),
		WidthS:      significant(period*duty, 3), Scatter1GHzS: significant(scatter, 2),
		JitterUs1h:  significant(math.Min(0.4, r.logNormal(0.08, 0.6)), 2),
		ScanMinutes: pick(r, []int{20, 30, 45}, []int{25, 40, 60}, []int{30, 45, 60}, []int{30, 60}, []int{20, 40}),
	}
	if p == sunward {
		s.SunMinDeg = 12
	} else if r.chance(0.3) {
		s.SunMinDeg = pick(r, 5.0, 8.0, 10.0)
	}
	return s
}
