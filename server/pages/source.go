package pages

import (
	"fmt"
	"io"
	"net/http"
	"strings"
	"time"

	"cadencewright/scheduler"
	"cadencewright/scheduler/almanac"
	"cadencewright/server/runsheet"
	"cadencewright/server/store"
	"cadencewright/web/page"
	"cadencewright/web/view"
)

// Source is the page of one source.
func (p *Pages) Source(w http.ResponseWriter, r *http.Request) error {
	c, ref, f, err := p.live(r)
	if err != nil {
		return err
	}
	src := c.SourceByName(r.PathValue("name"))
	if src == nil {
		return scheduler.Errorf(scheduler.ErrNotFound, "there is no source %q in the live campaign", r.PathValue("name"))
	}
	now := p.clock().UTC()
	st, err := p.standingNow(r, c, ref, now)
	if err != nil {
		return err
	}
	from := scheduler.WeekStart(now)
	to := from.AddDate(0, 0, 7)
	live, err := p.store.LiveScans(r.Context(), "", from.AddDate(0, 0, -7), from.AddDate(0, 0, 28))
	if err != nil {
		return err
	}
	v := view.Source{Page: f, Name: src.Name, RA: runsheet.FormatRA(src.Star().RA), Dec: typeset(runsheet.FormatDec(src.Star().Dec)), RADeg: src.RADeg, DecDeg: src.DecDeg,
		PMRAMasYr: src.PMRAMasYr, PMDecMasYr: src.PMDecMasYr, PeriodMs: src.PeriodS * 1e3, DMPcCm3: src.DMPcCm3, FluxMJy: src.FluxMJy,
		FluxFreqMHz: src.FluxFreqMHz, SpectralIdx: src.SpectralIdx, WidthUs: src.WidthS * 1e6, JitterUs1h: src.JitterUs1h, SunMinDeg: src.SunMinDeg,
		ScanMinutes: src.ScanMinutes, Week: scheduler.WeekName(from), From: from, To: to, Cadence: cadence(c, src, live, now)}
	for i := range c.Sources {
		if &c.Sources[i] == src {
			v.State = st.state(i)
			if st.last[i] != nil {
				v.Last = st.last[i].Start
			}
		}
	}
	for i := range c.Telescopes {
		panel, err := skyPanel(c, &c.Telescopes[i], src, live, from, to)
		if err != nil {
			return err
		}
		v.Sky = append(v.Sky, panel)
	}
	v.Goals = goalRows(c, src, st.set, now, st.soon)
	if src.Binary != nil {
		if v.Orbit, err = orbitView(c, src, live, now); err != nil {
			return err
		}
	}
	return write(w, http.StatusOK, func(b io.Writer) error { return page.Source(b, v) })
}

// panelStep is how finely a week's elevation is drawn.
const panelStep = 15 * time.Minute

// skyPanel is a source's week at one telescope.
func skyPanel(c *scheduler.Campaign, tel *scheduler.Telescope, src *scheduler.Source, live []store.StoredScan, from, to time.Time) (view.SkyPanel, error) {
	v := view.SkyPanel{Telescope: tel.Code, Name: tel.Name, LimitDeg: tel.ElevationMinDeg, MaxDeg: tel.ElevationMaxDeg, SunMinDeg: max(tel.SunMinDeg, src.SunMinDeg)}
	samples, err := almanac.Track(tel, src, c.DUT1S, from, to, panelStep)
	if err != nil {
		return v, err
	}
	best := -90.0
	for i, s := range samples {
		v.Points = append(v.Points, view.Point{At: s.At, ElDeg: s.ElDeg})
		best = max(best, s.ElDeg)
		if i == len(samples)/2 {
			v.SunDeg = s.SunDeg
		}
		if s.SunDeg < v.SunMinDeg && s.At.Before(to) {
			v.NearSun = extend(v.NearSun, s.At, panelStep)
		}
	}
	// Half a minute's error in an edge does not show in a week's plot, so the
	// samples do: no search for the edges is needed.
	up := 0
	for _, s := range samples {
		if s.Down == 0 && s.At.Before(to) { // the last sample is the week's end
			v.Up = extend(v.Up, s.At, panelStep)
			up++
		}
	}
	v.Verdict = verdict(samples[:len(samples)-1], up, best, tel, v.SunMinDeg)
	for i := range c.Blocks {
		if b := &c.Blocks[i]; b.Telescope == tel.Code && b.Start.Before(to) && b.End.After(from) {
			v.Blocks = append(v.Blocks, view.Span{Start: b.Start, End: b.End})
		}
	}
	for i := range live {
		if x := &live[i]; x.Telescope == tel.Code && x.Source == src.Name && x.Start.Before(to) && x.End().After(from) && x.State != store.ScanDropped {
			v.Scans = append(v.Scans, view.Span{Start: x.Start, End: x.End()})
		}
	}
	return v, nil
}

// extend lengthens the last span by a step, or begins a new one.
func extend(spans []view.Span, at time.Time, step time.Duration) []view.Span {
	if n := len(spans); n > 0 && !spans[n-1].End.Before(at) {
		spans[n-1].End = at.Add(step)
		return spans
	}
	return append(spans, view.Span{Start: at, End: at.Add(step)})
}

// verdict says in words when a source is up at a telescope.
func verdict(samples []almanac.Sample, up int, best float64, tel *scheduler.Telescope, sunMin float64) string {
	if up > 0 {
		return fmt.Sprintf("up %.1f h a day, best %s", float64(up)/float64(len(samples))*24, view.Degrees(best))
	}
	causes := map[almanac.Cause]int{}
	for _, s := range samples {
		for _, c := range s.Down.Each() {
			causes[c]++
		}
	}
	if best < tel.ElevationMinDeg {
		return "never up: highest " + view.Degrees(best) + ", the limit is " + view.Degrees(tel.ElevationMinDeg)
	}
	var list []string
	for _, s := range samples {
		for _, c := range s.Down.Each() {
			if causes[c] > 0 {
				list = append(list, c.String())
				causes[c] = 0
			}
		}
	}
	return "never up this week: " + strings.Join(list, ", ")
}
