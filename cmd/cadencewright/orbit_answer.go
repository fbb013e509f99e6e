package main

import (
	"fmt"
	"io"
	"strings"
	"time"

	"cadencewright/scheduler"
	"cadencewright/scheduler/almanac"
)

// orbitAnswer is where binaries stand, at one instant or over a time.
type orbitAnswer struct {
	// The two are the same where the question was about one instant.
	from, to   time.Time
	eventsOnly bool
	orbits     []orbitOf
}

// orbitOf is the answer for one source.
type orbitOf struct {
	// Passages are those of windows that the campaign wants; there are none
	// for an orbit given by its elements.
	source   *scheduler.Source
	states   []almanac.OrbitState
	events   []almanac.OrbitEvent
	passages []almanac.GoalPassage
}

// write writes the answer in one of the three forms; the table of several
// binaries at one instant is a line each.
func (a *orbitAnswer) write(w io.Writer, format string) error {
	// CSV has one kind of line: phases, or events where only they are wanted.
	switch {
	case format == formJSON:
		return writeJSON(w, a.json())
	case format == formCSV && a.eventsOnly:
		return a.eventRows().writeCSV(w)
	case format == formCSV:
		return a.stateRows().writeCSV(w)
	}
	var b strings.Builder
	var err error
	if len(a.orbits) > 1 && a.from.Equal(a.to) {
		err = a.overview(&b)
	} else {
		for i := range a.orbits {
			if i > 0 {
				b.WriteString("\n")
			}
			if err = a.describe(&b, &a.orbits[i]); err != nil {
				break
			}
		}
	}
	if err != nil {
		return err
	}
	_, err = io.WriteString(w, b.String())
	return err
}

// overview is one line a binary.
func (a *orbitAnswer) overview(b *strings.Builder) error {
	fmt.Fprintf(b, "at %s UTC; phases in cycles\n\n", a.from.Format(minuteLayout))
	t := rows{columns: []string{"source", "period d", "from periastron", "from node", "from conjunction", "next periastron", "next conjunction"}}
	for _, o := range a.orbits {
		// One state a binary: overview is for one instant.
		s := o.states[0]
		t.add(o.source.Name, fmt.Sprintf("%.6g", o.source.Binary.PbD), phase(s.FromPeriastron), phase(s.FromNode), phase(s.FromConjunction),
			o.first(scheduler.RefPeriastron), o.first(scheduler.RefConjunction))
	}
	return t.writeAligned(b)
}

// phase writes cycles for people: a ten-thousandth is 0.7 s of a two-hour
// orbit.
func phase(cycles float64) string { return fmt.Sprintf("%.4f", cycles) }

// first is the first coming passage of a point, for people.
func (o *orbitOf) first(point scheduler.PhaseReference) string {
	for _, e := range o.events {
		if e.Point == point {
			return e.At.Round(time.Second).Format("2006-01-02 15:04:05")
		}
	}
	return "-"
}

// describe writes one source's part for people.
func (a *orbitAnswer) describe(b *strings.Builder, o *orbitOf) error {
	p := o.source.Binary
	fmt.Fprintf(b, "%s   period %.10g d", o.source.Name, p.PbD)
	// An ELL1 orbit is nearly round; its eccentricity is no number of its own.
	if p.Model == scheduler.BinaryKepler {
		fmt.Fprintf(b, ", eccentricity %g", p.Ecc)
	}
	b.WriteString("\n")
	// One instant in sentences, several as a table.
	if len(o.states) == 1 && !a.eventsOnly {
		s := o.states[0]
		fmt.Fprintf(b, "at %s UTC (barycentric TDB is %+.3f s from it)\n", s.At.Format("2006-01-02 15:04:05"), s.BarycentricS)
		fmt.Fprintf(b, "phase from periastron %.6f, from the node %.6f, from conjunction %.6f; orbit %d\n", s.FromPeriastron, s.FromNode,
			s.FromConjunction, s.OrbitNumber)
		fmt.Fprintf(b, "true anomaly %.3f deg, omega %.4f deg, from the node %.3f deg\n", s.TrueAnomalyDeg, s.OmegaDeg, s.ArgumentDeg)
		// Without a projected axis there is no delay to speak of, and without mass
		// and inclination of the companion none in its gravity.
		if p.A1Ls > 0 {
			fmt.Fprintf(b, "delay in the orbit %+.6f s", s.RoemerS)
			if p.M2Msun > 0 && p.Sini > 0 {
				fmt.Fprintf(b, ", in the companion's gravity %+.3f us", s.ShapiroUs)
			}
			b.WriteString("\n")
		}
	} else if !a.eventsOnly {
		t := rows{columns: []string{"UTC", "from periastron", "from node", "from conjunction", "true anomaly", "omega", "orbit"}}
		for _, s := range o.states {
			t.add(s.At.Format(minuteLayout), phase(s.FromPeriastron), phase(s.FromNode), phase(s.FromConjunction),
				fmt.Sprintf("%.2f", s.TrueAnomalyDeg), fmt.Sprintf("%.3f", s.OmegaDeg), fmt.Sprint(s.OrbitNumber))
		}
		if err := t.writeAligned(b); err != nil {
			return err
		}
	}
	return o.describeEvents(b)
}

// describeEvents writes the events and the passages of wanted windows.
func (o *orbitOf) describeEvents(b *strings.Builder) error {
	if len(o.events) > 0 {
		b.WriteString("\n")
		t := rows{columns: []string{"UTC", "passes", "orbit"}}
		for _, e := range o.events {
			t.add(e.At.Round(time.Millisecond).Format("2006-01-02 15:04:05.000"), string(e.Point), fmt.Sprint(e.Orbit))
		}
		if err := t.writeAligned(b); err != nil {
			return err
		}
	}
	if len(o.passages) == 0 {
		return nil
	}
	b.WriteString("\n")
	t := rows{columns: []string{"wanted window", "from (UTC)", "to (UTC)", "orbit"}}
	for _, p := range o.passages {
		t.add(fmt.Sprintf("%s@%d", p.Goal, p.Window), p.Enter.Round(time.Second).Format("2006-01-02 15:04:05"), p.Leave.Round(time.Second).Format("2006-01-02 15:04:05"), fmt.Sprint(p.Orbit))
	}
	return t.writeAligned(b)
}

// stateRows are the phases as a table of plain values.
func (a *orbitAnswer) stateRows() *rows {
	// Column names carry their units; their order does not change, and new
	// columns come last.
	r := &rows{columns: []string{"source", "utc", "barycentric_minus_utc_s", "orbit", "phase_periastron", "phase_node", "phase_conjunction",
		"true_anomaly_deg", "omega_deg", "argument_deg", "roemer_s", "shapiro_us"}}
	for _, o := range a.orbits {
		for _, s := range o.states {
			r.add(plainText(o.source.Name), s.At.Format(secondLayout), fmt.Sprintf("%.3f", s.BarycentricS), fmt.Sprint(s.OrbitNumber),
				fmt.Sprintf("%.7f", s.FromPeriastron), fmt.Sprintf("%.7f", s.FromNode), fmt.Sprintf("%.7f", s.FromConjunction),
				fmt.Sprintf("%.5f", s.TrueAnomalyDeg), fmt.Sprintf("%.5f", s.OmegaDeg), fmt.Sprintf("%.5f", s.ArgumentDeg),
				fmt.Sprintf("%.7f", s.RoemerS), fmt.Sprintf("%.4f", s.ShapiroUs))
		}
	}
	return r
}

// eventRows are the events, and the edges of wanted windows, as a table of
// plain values.
func (a *orbitAnswer) eventRows() *rows {
	r := &rows{columns: []string{"source", "event", "utc", "until_utc", "orbit"}}
	// Events are good to some hundredths of a second; the next digit is kept.
	at := func(t time.Time) string { return t.Round(time.Millisecond).Format(milliLayout) }
	for _, o := range a.orbits {
		for _, e := range o.events {
			r.add(plainText(o.source.Name), string(e.Point), at(e.At), "", fmt.Sprint(e.Orbit))
		}
		for _, p := range o.passages {
			r.add(plainText(o.source.Name), plainText(fmt.Sprintf("%s@%d", p.Goal, p.Window)), at(p.Enter), at(p.Leave), fmt.Sprint(p.Orbit))
		}
	}
	return r
}

// json is the whole answer as plain values; lists are never null. Digits end
// where the Roemer delay's 0.03 s or the orbit's own numbers do.
func (a *orbitAnswer) json() any {
	type object = map[string]any
	at := func(t time.Time) string { return t.Round(time.Millisecond).Format(milliLayout) }
	sources := []object{}
	for _, o := range a.orbits {
		states, events, windows := []object{}, []object{}, []object{}
		for _, s := range o.states {
			states = append(states, object{"at": s.At.Format(secondLayout), "barycentric_minus_utc_s": rounded(s.BarycentricS, 4), "orbit": s.OrbitNumber,
				"phase_periastron": rounded(s.FromPeriastron, 8), "phase_node": rounded(s.FromNode, 8), "phase_conjunction": rounded(s.FromConjunction, 8),
				"true_anomaly_deg": rounded(s.TrueAnomalyDeg, 6), "omega_deg": rounded(s.OmegaDeg, 6), "argument_deg": rounded(s.ArgumentDeg, 6),
				"roemer_s": rounded(s.RoemerS, 7), "shapiro_us": rounded(s.ShapiroUs, 4)})
		}
		for _, e := range o.events {
			events = append(events, object{"event": e.Point, "at": at(e.At), "orbit": e.Orbit})
		}
		for _, p := range o.passages {
			windows = append(windows, object{"goal": p.Goal, "window": p.Window, "from": at(p.Enter), "to": at(p.Leave), "orbit": p.Orbit})
		}
		source := object{"source": o.source.Name, "period_d": o.source.Binary.PbD, "events": events}
		if !a.eventsOnly {
			source["states"] = states
		}
		if len(windows) > 0 {
			source["wanted_windows"] = windows
		}
		sources = append(sources, source)
	}
	return object{"from": a.from.Format(secondLayout), "to": a.to.Format(secondLayout), "sources": sources}
}
