package main

import (
	"fmt"
	"io"
	"strings"
	"time"

	"cadencewright/scheduler"
	"cadencewright/scheduler/almanac"
)

// skyAnswer is when a source is up at some telescopes.
type skyAnswer struct {
	source   *scheduler.Source
	from, to time.Time
	sites    []skySite
}

// skySite is the answer for one telescope; track is empty where none was
// asked for.
type skySite struct {
	telescope *scheduler.Telescope
	visible   *almanac.Visible
	sunNeeded float64 // degrees
	track     []almanac.Sample
}

// How instants are written: for people to the minute, UTC said in words; for
// programs as RFC 3339.
const (
	minuteLayout = "2006-01-02 15:04"
	secondLayout = "2006-01-02T15:04:05Z"
	milliLayout  = "2006-01-02T15:04:05.000Z"
)

// write writes the answer in one of the three forms. The table is put together
// first, so that an error leaves no half of it.
func (a *skyAnswer) write(w io.Writer, format string) error {
	// Only the table is put into words; the other forms hold plain values.
	switch format {
	case formCSV:
		return a.csvRows().writeCSV(w)
	case formJSON:
		return writeJSON(w, a.json())
	}
	var b strings.Builder
	fmt.Fprintf(&b, "%s   RA %s  Dec %s\n%s to %s UTC\n", a.source.Name, sexagesimal(a.source.RADeg/15, 2, false),
		sexagesimal(a.source.DecDeg, 1, true), a.from.Format(minuteLayout), a.to.Format(minuteLayout))
	for i := range a.sites {
		if err := a.sites[i].describe(&b); err != nil {
			return err
		}
	}
	_, err := io.WriteString(w, b.String())
	return err
}

// describe writes one telescope's part for people.
func (s *skySite) describe(b *strings.Builder) error {
	t := s.telescope
	fmt.Fprintf(b, "\n%s, %s: longitude %.4f E, latitude %.4f, elevation %g to %g deg\n", t.Code, t.Name, t.LongitudeDeg, t.LatitudeDeg,
		t.ElevationMinDeg, t.ElevationMaxDeg)
	// Local time only where the telescope has a zone.
	up := rows{columns: []string{"up from (UTC)", "to (UTC)", "local", "LST", "highest"}}
	if s.zone() == nil {
		up.columns = []string{"up from (UTC)", "to (UTC)", "LST", "highest"}
	}
	for _, u := range s.visible.Up {
		// Whole minutes in which it is up.
		start, end := u.Start.Add(time.Minute-time.Nanosecond).Truncate(time.Minute), u.End.Truncate(time.Minute)
		line := []string{cut(u.CutStart, "<") + start.Format(minuteLayout), end.Format(minuteLayout) + cut(u.CutEnd, ">")}
		if z := s.zone(); z != nil {
			line = append(line, start.In(z).Format("15:04")+" - "+end.In(z).Format("15:04"))
		}
		up.add(append(line, clockOf(u.StartLSTDeg)+" - "+clockOf(u.EndLSTDeg), fmt.Sprintf("%.1f deg", u.HighestDeg))...)
	}
	// Why a source is never up matters more then than a table without lines.
	if len(up.lines) == 0 {
		fmt.Fprintf(b, "not up at all; it stands highest at %s UTC, %.1f deg\n", s.visible.Highest.At.Format(minuteLayout), s.visible.Highest.ElDeg)
	} else if err := up.writeAligned(b); err != nil {
		return err
	}
	for _, tr := range s.visible.Transits {
		fmt.Fprintf(b, "transit %s UTC, LST %s, %.1f deg\n", tr.At.Format(minuteLayout), clockOf(tr.LSTDeg), tr.ElDeg)
	}
	fmt.Fprintf(b, "Sun %.1f deg away or more; %g needed\n", s.visible.SunMin, s.sunNeeded)
	if text := s.downText(); text != "" {
		fmt.Fprintf(b, "kept down by: %s\n", text)
	}
	if len(s.track) == 0 {
		return nil
	}
	b.WriteString("\n")
	table := rows{columns: []string{"UTC", "LST", "azimuth", "elevation", "hour angle", "Sun", "up"}}
	// The causes stand with each sample that is down, all of them, so that it
	// shows which limit to look at.
	for _, p := range s.track {
		mark := "up"
		if p.Down != 0 {
			mark = "- " + p.Down.String()
		}
		table.add(p.At.Format(minuteLayout), clockOf(p.LSTDeg), fmt.Sprintf("%.2f", p.AzDeg), fmt.Sprintf("%.2f", p.ElDeg),
			fmt.Sprintf("%+.2f h", p.HADeg/15), fmt.Sprintf("%.1f", p.SunDeg), mark)
	}
	return table.writeAligned(b)
}

// zone is the telescope's time zone, or nil where it has none.
func (s *skySite) zone() *time.Location {
	if s.telescope.Timezone == "" {
		return nil
	}
	// Zones were checked when the campaign was read. If one could not be loaded
	// all the same, a table without local times is better than none.
	z, err := s.telescope.Location()
	if err != nil {
		return nil
	}
	return z
}

// cut marks an end that is only that of the time asked for.
func cut(is bool, mark string) string {
	if is {
		return mark
	}
	return ""
}

// downCauses are the causes in the order of their bits, with words for people.
var downCauses = []struct {
	cause almanac.Cause
	words string
}{
	{almanac.Low, "least elevation"},
	{almanac.Hidden, "horizon"},
	{almanac.High, "greatest elevation"},
	{almanac.Mount, "mount"},
	{almanac.Sun, "Sun"},
}

// downText says for how long each cause held.
func (s *skySite) downText() string {
	var parts []string
	for _, c := range downCauses {
		if d := s.visible.Down[c.cause]; d > 0 {
			parts = append(parts, fmt.Sprintf("%s %d h %02d min", c.words, int(d.Hours()), int(d.Minutes())%60))
		}
	}
	return strings.Join(parts, ", ")
}

// csvRows are the samples of the tracks or, where there are none, the
// stretches in which the source is up.
func (a *skyAnswer) csvRows() *rows {
	if len(a.sites) == 1 && len(a.sites[0].track) > 0 {
		r := &rows{columns: []string{"telescope", "utc", "lst_h", "azimuth_deg", "elevation_deg", "hour_angle_h", "dec_deg", "sun_deg", "up", "down_by"}}
		for _, p := range a.sites[0].track {
			r.add(plainText(a.sites[0].telescope.Code), p.At.Format(secondLayout), fmt.Sprintf("%.5f", p.LSTDeg/15), fmt.Sprintf("%.4f", p.AzDeg),
				fmt.Sprintf("%.4f", p.ElDeg), fmt.Sprintf("%.5f", p.HADeg/15), fmt.Sprintf("%.4f", p.DecDeg), fmt.Sprintf("%.3f", p.SunDeg),
				fmt.Sprint(p.Down == 0), strings.ReplaceAll(p.Down.String(), ",", " "))
		}
		return r
	}
	// up_before and up_after say that the stretch reaches beyond the time that
	// was asked for.
	r := &rows{columns: []string{"telescope", "up_from_utc", "up_to_utc", "lst_from_h", "lst_to_h", "highest_deg", "up_before", "up_after"}}
	for _, s := range a.sites {
		for _, u := range s.visible.Up {
			r.add(plainText(s.telescope.Code), u.Start.Format(secondLayout), u.End.Format(secondLayout), fmt.Sprintf("%.4f", u.StartLSTDeg/15),
				fmt.Sprintf("%.4f", u.EndLSTDeg/15), fmt.Sprintf("%.3f", u.HighestDeg), fmt.Sprint(u.CutStart), fmt.Sprint(u.CutEnd))
		}
	}
	return r
}

// json is the whole answer as plain values: lists are never null, angles have
// no more digits than they are good for, hours are decimal.
func (a *skyAnswer) json() any {
	type object = map[string]any
	var sites []object
	for _, s := range a.sites {
		up, transits, track, down := []object{}, []object{}, []object{}, object{}
		for _, u := range s.visible.Up {
			up = append(up, object{"start": u.Start.Format(milliLayout), "end": u.End.Format(milliLayout), "lst_start_h": hours(u.StartLSTDeg),
				"lst_end_h": hours(u.EndLSTDeg), "highest_deg": rounded(u.HighestDeg, 4), "up_before": u.CutStart, "up_after": u.CutEnd})
		}
		for _, t := range s.visible.Transits {
			transits = append(transits, object{"at": t.At.Format(milliLayout), "lst_h": hours(t.LSTDeg), "elevation_deg": rounded(t.ElDeg, 4)})
		}
		for _, p := range s.track {
			track = append(track, object{"at": p.At.Format(secondLayout), "lst_h": hours(p.LSTDeg), "azimuth_deg": rounded(p.AzDeg, 4),
				"elevation_deg": rounded(p.ElDeg, 4), "hour_angle_h": hours(p.HADeg), "dec_deg": rounded(p.DecDeg, 4),
				"sun_deg": rounded(p.SunDeg, 3), "up": p.Down == 0, "down_by": causeNames(p.Down)})
		}
		for _, c := range downCauses {
			if d := s.visible.Down[c.cause]; d > 0 {
				down[c.cause.String()] = rounded(d.Minutes(), 1)
			}
		}
		site := object{"telescope": s.telescope.Code, "up": up, "transits": transits, "down_min": down, "sun_min_deg": rounded(s.visible.SunMin, 3),
			"highest": object{"at": s.visible.Highest.At.Format(secondLayout), "elevation_deg": rounded(s.visible.Highest.ElDeg, 4)}}
		if len(track) > 0 {
			site["track"] = track
		}
		sites = append(sites, site)
	}
	return object{"source": object{"name": a.source.Name, "ra_deg": a.source.RADeg, "dec_deg": a.source.DecDeg},
		"from": a.from.Format(secondLayout), "to": a.to.Format(secondLayout), "telescopes": sites}
}

// hours of an angle in degrees, to 0.04 s.
func hours(deg float64) float64 { return rounded(deg/15, 5) }

// causeNames are the names of the causes, never null.
func causeNames(c almanac.Cause) []string {
	names := []string{}
	for _, one := range c.Each() {
		names = append(names, one.String())
	}
	return names
}
