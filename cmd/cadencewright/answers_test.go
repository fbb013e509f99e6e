package main

import (
	"bytes"
	"encoding/csv"
	"encoding/json"
	"math"
	"strings"
	"testing"
	"time"

	"cadencewright/scheduler/almanac"
)

// skyOf answers for one source of every-field.json at some telescopes.
func skyOf(t *testing.T, codes string, withTrack bool) *skyAnswer {
	t.Helper()
	c := everyField(t)
	src, err := pickSource(c, "SIM J0412+1833")
	if err != nil {
		t.Fatal(err)
	}
	telescopes, err := pickTelescopes(c, codes)
	if err != nil {
		t.Fatal(err)
	}
	a := &skyAnswer{source: src, from: c.Start, to: c.Start.Add(36 * time.Hour)}
	for _, tel := range telescopes {
		v, err := almanac.When(tel, src, c.DUT1S, a.from, a.to)
		if err != nil {
			t.Fatal(err)
		}
		site := skySite{telescope: tel, visible: v}
		if withTrack {
			if site.track, err = almanac.Track(tel, src, c.DUT1S, a.from, a.to, time.Hour); err != nil {
				t.Fatal(err)
			}
		}
		a.sites = append(a.sites, site)
	}
	return a
}

// orbitsOf answers for all binaries of every-field.json over some days; 0:
// at the campaign's start.
func orbitsOf(t *testing.T, days int) *orbitAnswer {
	t.Helper()
	c := everyField(t)
	a := &orbitAnswer{from: c.Start, to: c.Start.AddDate(0, 0, days)}
	for i := range c.Sources {
		if c.Sources[i].Binary == nil {
			continue
		}
		o, err := askOrbit(&c.Sources[i], c.PhaseGoals, a.from, a.to, 6*time.Hour, 2)
		if err != nil {
			t.Fatal(err)
		}
		a.orbits = append(a.orbits, o)
	}
	return a
}

// TestEveryFormOfAnswersIsSound writes each answer in each form and reads it
// back: JSON and CSV parse, and a table has no empty line at its end.
func TestEveryFormOfAnswersIsSound(t *testing.T) {
	events := orbitsOf(t, 9)
	events.eventsOnly = true
	forms := map[string]func(b *bytes.Buffer, format string) error{
		"sky, one telescope":      func(b *bytes.Buffer, f string) error { return skyOf(t, "ALT", true).write(b, f) },
		"sky, several telescopes": func(b *bytes.Buffer, f string) error { return skyOf(t, "", false).write(b, f) },
		"orbits now":              func(b *bytes.Buffer, f string) error { return orbitsOf(t, 0).write(b, f) },
		"orbits over days":        func(b *bytes.Buffer, f string) error { return orbitsOf(t, 9).write(b, f) },
		"events":                  func(b *bytes.Buffer, f string) error { return events.write(b, f) },
	}
	for name, write := range forms {
		t.Run(name, func(t *testing.T) {
			var table, values, object bytes.Buffer
			for format, b := range map[string]*bytes.Buffer{formTable: &table, formCSV: &values, formJSON: &object} {
				if err := write(b, format); err != nil {
					t.Fatalf("%s: %v", format, err)
				}
			}
			if !strings.HasSuffix(table.String(), "\n") || strings.HasSuffix(table.String(), "\n\n") || strings.Contains(table.String(), "%!") {
				t.Errorf("table:\n%s", table.String())
			}
			lines, err := csv.NewReader(&values).ReadAll() // also: as many cells in every line
			if err != nil || len(lines) < 2 {
				t.Errorf("CSV: %d lines, %v", len(lines), err)
			}
			var any map[string]any
			if err := json.Unmarshal(object.Bytes(), &any); err != nil {
				t.Errorf("JSON: %v", err)
			}
		})
	}
}

// TestSkyJSONHoldsTheNumbers reads the JSON back into numbers and compares
// them with the answer.
func TestSkyJSONHoldsTheNumbers(t *testing.T) {
	a := skyOf(t, "ALT", true)
	var b bytes.Buffer
	if err := a.write(&b, formJSON); err != nil {
		t.Fatal(err)
	}
	var got struct {
		Telescopes []struct {
			Telescope string
			Up        []struct {
				Start, End string
				HighestDeg float64 `json:"highest_deg"`
			}
			Track []struct {
				At           time.Time
				ElevationDeg float64  `json:"elevation_deg"`
				HourAngleH   float64  `json:"hour_angle_h"`
				Up           bool     `json:"up"`
				DownBy       []string `json:"down_by"`
			}
		}
	}
	if err := json.Unmarshal(b.Bytes(), &got); err != nil {
		t.Fatal(err)
	}
	site, want := got.Telescopes[0], a.sites[0]
	if site.Telescope != "ALT" || len(site.Up) != len(want.visible.Up) || len(site.Track) != len(want.track) {
		t.Fatalf("got %+v", site)
	}
	for i, u := range want.visible.Up {
		if site.Up[i].Start != u.Start.Format(milliLayout) || site.Up[i].End != u.End.Format(milliLayout) || math.Abs(site.Up[i].HighestDeg-u.HighestDeg) > 1e-4 {
			t.Errorf("got %+v, want %+v", site.Up[i], u)
		}
	}
	for i, p := range want.track {
		g := site.Track[i]
		if !g.At.Equal(p.At) || math.Abs(g.ElevationDeg-p.ElDeg) > 1e-4 || math.Abs(15*g.HourAngleH-p.HADeg) > 1e-3 || g.Up != (p.Down == 0) ||
			strings.Join(g.DownBy, ",") != p.Down.String() {
			t.Errorf("got %+v, want %+v", g, p)
		}
	}
}

// TestOrbitTableListsOnlyWhatWasAsked tells the three layouts apart.
func TestOrbitTableListsOnlyWhatWasAsked(t *testing.T) {
	text := func(a *orbitAnswer) string {
		var b bytes.Buffer
		if err := a.write(&b, formTable); err != nil {
			t.Fatal(err)
		}
		return b.String()
	}
	overview, series := text(orbitsOf(t, 0)), text(orbitsOf(t, 9))
	if strings.Count(overview, "SIM J") != 2 || strings.Contains(overview, "wanted window") {
		t.Errorf("overview:\n%s", overview)
	}
	for _, part := range []string{"wanted window", "p1@0", "p1@1", "conjunction", "from periastron"} {
		if !strings.Contains(series, part) {
			t.Errorf("over days there should be %q:\n%s", part, series)
		}
	}
	one := orbitsOf(t, 0)
	one.orbits = one.orbits[:1]
	if got := text(one); !strings.Contains(got, "true anomaly") || !strings.Contains(got, "companion's gravity") {
		t.Errorf("one binary:\n%s", got)
	}
	one.eventsOnly = true
	if got := text(one); strings.Contains(got, "true anomaly") || !strings.Contains(got, "passes") {
		t.Errorf("its events:\n%s", got)
	}
}

func TestPickingThings(t *testing.T) {
	c := everyField(t)
	if list, err := pickTelescopes(c, " ALT , TRA"); err != nil || len(list) != 2 || list[1].Code != "TRA" {
		t.Errorf("got %v, %v", list, err)
	}
	if list, err := pickTelescopes(c, ""); err != nil || len(list) != 3 {
		t.Errorf("all: got %v, %v", list, err)
	}
	c.Sources = nil
	if _, err := pickSource(c, "X"); err == nil || !strings.HasSuffix(err.Error(), "it has none") {
		t.Errorf("a campaign without sources: got %v", err)
	}
}
