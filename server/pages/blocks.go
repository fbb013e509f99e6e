package pages

import (
	"slices"
	"time"

	"cadencewright/astro/sky"
	"cadencewright/astro/timescale"
	"cadencewright/scheduler"
	"cadencewright/scheduler/almanac"
	"cadencewright/server/runsheet"
	"cadencewright/server/store"
	"cadencewright/web/ui/plot"
	"cadencewright/web/view"
)

// curveStep is how finely elevation curves are drawn.
const curveStep = 10 * time.Minute

// blocks fills the strip and the block rows.
func blocks(v *view.Week, c *scheduler.Campaign, shown *shownPlan) error {
	byBlock := map[string][]store.StoredScan{}
	for _, x := range shown.scans {
		byBlock[x.Block] = append(byBlock[x.Block], x)
	}
	strip := map[string]int{}
	for i := range c.Telescopes {
		strip[c.Telescopes[i].Code] = i
		v.Telescopes = append(v.Telescopes, view.StripRow{Code: c.Telescopes[i].Code, Name: c.Telescopes[i].Name})
	}
	chosen := c.SourceByName(v.Source)
	for i := range c.Blocks {
		b := &c.Blocks[i]
		if b.Start.Before(v.From) || !b.Start.Before(v.To) {
			continue
		}
		tel := c.TelescopeByCode(b.Telescope)
		row, err := blockRow(c, tel, b, byBlock[b.ID], chosen)
		if err != nil {
			return err
		}
		used := 0
		for _, s := range row.Scans {
			used += int(s.End.Sub(s.Start).Minutes())
		}
		for _, s := range plot.Free(row) { // lost time and scans may overlap
			row.FreeMin += s.Minutes()
		}
		if v.Plan != nil {
			v.Plan.Free += row.FreeMin
		}
		v.Blocks = append(v.Blocks, row)
		s := &v.Telescopes[strip[b.Telescope]]
		s.Blocks = append(s.Blocks, view.StripBlock{ID: b.ID, Span: view.Span{Start: b.Start, End: b.End}, UsedMin: used, Lost: len(b.Lost) > 0})
	}
	slices.SortStableFunc(v.Blocks, func(a, b view.BlockRow) int { return a.Start.Compare(b.Start) })
	return nil
}

func lostMinutes(b *scheduler.Block) int {
	n := 0
	for _, l := range b.Lost {
		n += int(l.End.Sub(l.Start).Minutes())
	}
	return n
}

func blockRow(c *scheduler.Campaign, tel *scheduler.Telescope, b *scheduler.Block, scans []store.StoredScan, chosen *scheduler.Source) (view.BlockRow, error) {
	row := view.BlockRow{ID: b.ID, Label: b.Label, Telescope: tel.Code, Name: tel.Name, Receivers: b.Receivers, Span: view.Span{Start: b.Start, End: b.End}, LimitDeg: tel.ElevationMinDeg}
	var err error
	if row.Zone, err = tel.Location(); err != nil {
		return row, err
	}
	lst, err := timescale.LST(b.Start, c.DUT1S, tel.Site().Lon)
	if err != nil {
		return row, err
	}
	row.LSTStartH = lst.Hours()
	for _, l := range b.Lost {
		row.Lost = append(row.Lost, view.Span{Start: l.Start, End: l.End})
	}
	if row.Night, err = darkness(tel, b.Start, b.End, c.DUT1S); err != nil {
		return row, err
	}
	for i := range scans {
		row.Scans = append(row.Scans, scanView(tel, &scans[i]))
	}
	if len(scans) > 0 && scans[0].Live {
		n, err := runsheet.NightAt(tel, b.Start)
		if err != nil {
			return row, err
		}
		row.NightDate = n.Name
	}
	if chosen != nil {
		row.Curve, row.Allowed, err = curve(c, tel, chosen, b.Start, b.End)
	}
	return row, err
}

func scanView(tel *scheduler.Telescope, x *store.StoredScan) view.Scan {
	s := view.Scan{ID: x.ID, Source: x.Source, Receiver: x.Receiver, Span: view.Span{Start: x.Start, End: x.End()}, State: x.State, Pinned: x.Pinned, Extra: len(x.Earns) == 0, TOAUs: x.TOAUs}
	if r := tel.ReceiverByCode(x.Receiver); r != nil {
		s.Bands = r.Bands
	}
	for _, e := range x.Earns {
		s.Value += e.Value
	}
	return s
}

// curve is a source's elevation in a stretch of time, and where it is up.
func curve(c *scheduler.Campaign, tel *scheduler.Telescope, src *scheduler.Source, from, to time.Time) ([]view.Point, []view.Span, error) {
	samples, err := almanac.Track(tel, src, c.DUT1S, from, to, curveStep)
	if err != nil {
		return nil, nil, err
	}
	var points []view.Point
	any := false
	for _, s := range samples {
		points = append(points, view.Point{At: s.At, ElDeg: s.ElDeg})
		any = any || s.ElDeg > 0
	}
	if !any {
		return nil, nil, nil
	}
	up, err := almanac.When(tel, src, c.DUT1S, from, to)
	if err != nil {
		return nil, nil, err
	}
	var spans []view.Span
	for _, u := range up.Up {
		spans = append(spans, view.Span{Start: u.Start, End: u.End})
	}
	return points, spans, nil
}

// darkDeg is the Sun's elevation below which it is night: the end of civil
// twilight.
const darkDeg = -6

// darkness is where the Sun is well below the horizon.
func darkness(tel *scheduler.Telescope, from, to time.Time, dut1S float64) ([]view.Span, error) {
	const step = 10 * time.Minute
	var spans []view.Span
	for t := from; t.Before(to); t = t.Add(step) {
		s, err := sky.SunOver(tel.Site(), t, dut1S)
		if err != nil {
			return nil, err
		}
		if s.ElDeg >= darkDeg {
			continue
		}
		end := t.Add(step)
		if end.After(to) {
			end = to
		}
		if n := len(spans); n > 0 && spans[n-1].End.Equal(t) {
			spans[n-1].End = end
		} else {
			spans = append(spans, view.Span{Start: t, End: end})
		}
	}
	return spans, nil
}
