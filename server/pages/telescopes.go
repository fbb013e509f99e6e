package pages

import (
	"fmt"
	"io"
	"net/http"
	"slices"
	"strconv"
	"time"

	"cadencewright/scheduler"
	"cadencewright/server/store"
	"cadencewright/web/page"
	"cadencewright/web/view"
)

func itoa(n int) string { return strconv.Itoa(n) }

// Telescopes is the list of telescopes.
func (p *Pages) Telescopes(w http.ResponseWriter, r *http.Request) error {
	c, _, f, err := p.live(r)
	if err != nil {
		return err
	}
	from := scheduler.WeekStart(p.clock())
	to := from.AddDate(0, 0, 7)
	live, err := p.store.LiveScans(r.Context(), "", from, to)
	if err != nil {
		return err
	}
	v := view.Telescopes{Page: f, Week: scheduler.WeekName(from)}
	for i := range c.Telescopes {
		v.Rows = append(v.Rows, telescopeRow(c, &c.Telescopes[i], live, from, f.Now))
	}
	return write(w, http.StatusOK, func(b io.Writer) error { return page.Telescopes(b, v) })
}

// telescopeRow is a telescope's line for the week that begins at from.
func telescopeRow(c *scheduler.Campaign, t *scheduler.Telescope, live []store.StoredScan, from, now time.Time) view.TelescopeRow {
	to := from.AddDate(0, 0, 7)
	row := view.TelescopeRow{Code: t.Code, Name: t.Name, LongitudeDeg: t.LongitudeDeg, LatitudeDeg: t.LatitudeDeg, Mount: string(t.Mount)}
	for j := range t.Receivers {
		row.Receivers = append(row.Receivers, t.Receivers[j].Code)
	}
	for j := range c.Blocks {
		b := &c.Blocks[j]
		if b.Telescope != t.Code {
			continue
		}
		if !b.Start.Before(from) && b.Start.Before(to) {
			row.WeekBlocks++
			row.WeekHours += b.Duration().Hours()
		}
		if b.End.After(now) && (row.Next.IsZero() || b.Start.Before(row.Next)) {
			row.Next = b.Start
		}
	}
	for j := range live {
		if live[j].Telescope == t.Code && live[j].State != store.ScanDropped {
			row.UsedHours += float64(live[j].Minutes) / 60
		}
	}
	return row
}

// Telescope is the page of one telescope.
func (p *Pages) Telescope(w http.ResponseWriter, r *http.Request) error {
	c, _, f, err := p.live(r)
	if err != nil {
		return err
	}
	t := c.TelescopeByCode(r.PathValue("code"))
	if t == nil {
		return scheduler.Errorf(scheduler.ErrNotFound, "there is no telescope %q in the live campaign", r.PathValue("code"))
	}
	v := view.Telescope{Page: f, Code: t.Code, Name: t.Name, LongitudeDeg: t.LongitudeDeg, LatitudeDeg: t.LatitudeDeg, HeightM: t.HeightM, Mount: string(t.Mount),
		ElevationMinDeg: t.ElevationMinDeg, ElevationMaxDeg: t.ElevationMaxDeg, SunMinDeg: t.SunMinDeg, Limits: limitFacts(t),
		Overheads: []view.Fact{{Name: "Before the first scan of a block", Value: seconds(t.SetupS)}, {Name: "Calibration before every scan", Value: seconds(t.CalS)},
			{Name: "Receiver change", Value: seconds(t.SwitchS)}, {Name: "Settling after a slew", Value: seconds(t.SettleS)}}}
	if v.Zone, err = t.Location(); err != nil {
		return err
	}
	for _, h := range t.Horizon {
		v.Horizon = append(v.Horizon, view.HorizonPoint{AzDeg: h.AzimuthDeg, ElDeg: h.ElevationDeg})
	}
	for j := range t.Receivers {
		v.Receivers = append(v.Receivers, receiverRow(&t.Receivers[j]))
	}
	live, err := p.store.LiveScans(r.Context(), t.Code, scheduler.WeekStart(f.Now).AddDate(0, 0, -70), f.Now.AddDate(0, 0, 35))
	if err != nil {
		return err
	}
	telescopeBlocks(&v, c, t, live)
	return write(w, http.StatusOK, func(b io.Writer) error { return page.Telescope(b, v) })
}

func receiverRow(r *scheduler.Receiver) view.ReceiverRow {
	row := view.ReceiverRow{Code: r.Code, Bands: r.Bands, FreqMHz: r.FreqMHz, BandwidthMHz: r.BandwidthMHz, NPol: r.NPol, TrecK: r.TrecK, GainKPerJy: r.GainKPerJy, Digitisation: r.Digitisation}
	for _, l := range r.RFILoss {
		row.WorstRFI = max(row.WorstRFI, l)
	}
	return row
}

func seconds(s float64) string { return strconv.FormatFloat(s, 'g', 6, 64) + " s" }

// limitFacts are a mount's own limits and rates in words.
func limitFacts(t *scheduler.Telescope) []view.Fact {
	rate := func(name string, v, accel float64) view.Fact {
		s := fmt.Sprintf("%g °/s", v)
		if accel > 0 {
			s += fmt.Sprintf(", %g °/s²", accel)
		}
		return view.Fact{Name: name, Value: s}
	}
	switch t.Mount {
	case scheduler.MountAltAz:
		return []view.Fact{{Name: "Azimuth drive", Value: typeset(fmt.Sprintf("%g° to %g°", t.AzimuthRangeDeg[0], t.AzimuthRangeDeg[1]))},
			rate("Rate in azimuth", t.RateAzDegS, t.AccelAzDegS2), rate("Rate in elevation", t.RateElDegS, t.AccelElDegS2)}
	case scheduler.MountEquatorial:
		return []view.Fact{{Name: "Hour angle", Value: typeset(fmt.Sprintf("%g h to %g h", t.HourAngleRangeH[0], t.HourAngleRangeH[1]))},
			rate("Rate in hour angle", t.RateHADegS, t.AccelHADegS2), rate("Rate in declination", t.RateDecDegS, t.AccelDecDegS2)}
	}
	return []view.Fact{{Name: "Around upper transit", Value: fmt.Sprintf("± %g min / cos(declination)", t.TrackHalfMin)}, rate("Rate in declination", t.RateElDegS, t.AccelElDegS2)}
}

// telescopeBlocks fills the coming blocks, the hours and the run sheets.
func telescopeBlocks(v *view.Telescope, c *scheduler.Campaign, t *scheduler.Telescope, live []store.StoredScan) {
	used, count := map[string]int{}, map[string]int{}
	for i := range live {
		x := &live[i]
		hours := float64(x.Minutes) / 60
		switch x.State {
		case store.ScanDropped:
			continue
		case store.ScanDone, store.ScanPartial:
			v.Hours.Observed += hours
		case store.ScanLost:
			v.Hours.Lost += hours
		default:
			v.Hours.Planned += hours
		}
		used[x.Block] += x.Minutes
		count[x.Block]++
	}
	for i := range c.Blocks {
		b := &c.Blocks[i]
		if b.Telescope != t.Code {
			continue
		}
		v.Hours.Given += b.Duration().Hours()
		if b.End.Before(v.Now.Add(-24 * time.Hour)) {
			continue
		}
		row := view.TelescopeBlock{ID: b.ID, Label: b.Label, Week: scheduler.WeekName(b.Start), Span: view.Span{Start: b.Start, End: b.End}, Receivers: b.Receivers,
			LostMin: lostMinutes(b), Scans: count[b.ID], UsedMin: used[b.ID]}
		if row.Scans > 0 {
			row.Night = nightOf(t, b.Start)
			at := slices.IndexFunc(v.Recent, func(n view.NightLink) bool { return n.Night == row.Night })
			if at < 0 {
				v.Recent = append(v.Recent, view.NightLink{Night: row.Night})
				at = len(v.Recent) - 1
			}
			v.Recent[at].Scans += row.Scans
		}
		v.Blocks = append(v.Blocks, row)
	}
	slices.SortFunc(v.Blocks, func(a, b view.TelescopeBlock) int { return a.Start.Compare(b.Start) })
	slices.SortFunc(v.Recent, func(a, b view.NightLink) int {
		if a.Night < b.Night {
			return -1
		}
		return 1
	})
	v.Hours.Free = max(0, v.Hours.Given-v.Hours.Planned-v.Hours.Observed-v.Hours.Lost)
}
