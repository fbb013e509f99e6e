package pages

import (
	"fmt"
	"io"
	"net/http"
	"strconv"
	"time"

	"cadencewright/astro/timescale"
	"cadencewright/scheduler"
	"cadencewright/server/runsheet"
	"cadencewright/server/store"
	"cadencewright/web/page"
	"cadencewright/web/view"
)

// Scan is the card of one scan.
func (p *Pages) Scan(w http.ResponseWriter, r *http.Request) error {
	id, err := strconv.ParseInt(r.PathValue("id"), 10, 64)
	if err != nil {
		return scheduler.Errorf(scheduler.ErrNotFound, "there is no scan %q", r.PathValue("id"))
	}
	c, _, f, err := p.live(r)
	if err != nil {
		return err
	}
	info, _, scans, err := p.planOfScan(r, id)
	if err != nil {
		return err
	}
	v := view.ScanCard{Page: f, Week: scheduler.WeekName(info.From), Plan: planView(&info)}
	at := -1
	for i := range scans {
		if scans[i].ID == id {
			at = i
		}
	}
	if at < 0 || v.Week != r.PathValue("week") {
		return scheduler.Errorf(scheduler.ErrNotFound, "there is no scan %d in week %s", id, r.PathValue("week"))
	}
	if err := card(&v, c, &scans[at]); err != nil {
		return err
	}
	for i := range scans {
		if scans[i].Block != scans[at].Block {
			continue
		}
		if i < at {
			v.Prev = scans[i].ID
		}
		if i > at && v.Next == 0 {
			v.Next = scans[i].ID
		}
	}
	return write(w, http.StatusOK, func(b io.Writer) error { return page.Scan(b, v) })
}

// planOfScan is the plan that a scan belongs to.
func (p *Pages) planOfScan(r *http.Request, id int64) (store.PlanInfo, *scheduler.Plan, []store.StoredScan, error) {
	x, err := p.store.Scan(r.Context(), id)
	if err != nil {
		return store.PlanInfo{}, nil, nil, err
	}
	return p.store.Plan(r.Context(), x.PlanID)
}

// card fills what the campaign and the sky say of a scan.
func card(v *view.ScanCard, c *scheduler.Campaign, x *store.StoredScan) error {
	tel, src, b := c.TelescopeByCode(x.Telescope), c.SourceByName(x.Source), c.BlockByID(x.Block)
	if tel == nil || src == nil || b == nil {
		return scheduler.Errorf(scheduler.ErrNotFound, "the telescope, source or block of scan %d is not in the campaign any more", x.ID)
	}
	sheet, err := runsheet.Build(runsheet.Input{Campaign: c, Telescope: tel.Code, Night: nightOf(tel, b.Start),
		Scans: []runsheet.PlannedScan{{Scan: x.Scan, ID: strconv.FormatInt(x.ID, 10), State: x.State}}})
	if err != nil {
		return err
	}
	var s runsheet.Scan
	for _, bl := range sheet.Blocks {
		if len(bl.Scans) > 0 {
			s = bl.Scans[0]
		}
	}
	v.Scan, v.Telescope, v.Name, v.Block = scanView(tel, x), tel.Code, tel.Name, b.ID
	if v.Zone, err = tel.Location(); err != nil {
		return err
	}
	lst, err := timescale.LST(x.End(), c.DUT1S, tel.Site().Lon)
	if err != nil {
		return err
	}
	v.LSTStartH, v.LSTEndH, v.FreqMHz, v.BandMHz, v.CalS, v.SNR = s.LSTStartH, lst.Hours(), s.FreqMHz, s.BandwidthMHz, s.CalS, s.SNR
	v.First, v.Last = place(s.Start, s.First), place(s.End, s.Last)
	v.First.SunDeg, v.Last.SunDeg = s.LeastSunDeg, s.LeastSunDeg
	v.MotorDeg, v.BlockSpan, v.LimitDeg = x.MotorAzDeg, view.Span{Start: b.Start, End: b.End}, tel.ElevationMinDeg
	if s.Phase != nil {
		v.Phase = fmt.Sprintf("%.3f to %.3f from %s", s.Phase.From, s.Phase.To, s.Phase.Reference)
	}
	for _, t := range c.CadenceTargets {
		if t.Source == x.Source && t.TOAUs > 0 && (v.WantedUs == 0 || t.TOAUs < v.WantedUs) {
			v.WantedUs = t.TOAUs
		}
	}
	if v.Track, v.Allowed, err = curve(c, tel, src, b.Start, b.End); err != nil {
		return err
	}
	ix := scheduler.NewIndex(c)
	for _, e := range x.Earns {
		line := view.Earning{Goal: e.Goal, Unit: e.Unit, Value: e.Value}
		if g := ix.Goal(e.Goal); g != nil {
			line.What = goalWords(c, g.ID)
		}
		v.Earns = append(v.Earns, line)
	}
	v.Outcome = outcomeView(x.Outcome)
	return nil
}

func place(at time.Time, p runsheet.Pointing) view.Place {
	return view.Place{At: at, AzDeg: p.AzDeg, ElDeg: p.ElDeg}
}

func nightOf(tel *scheduler.Telescope, t time.Time) string {
	n, err := runsheet.NightAt(tel, t)
	if err != nil {
		return "" // Build then says what is wrong with the zone
	}
	return n.Name
}

func outcomeView(o *store.Outcome) *view.Outcome {
	if o == nil {
		return nil
	}
	v := &view.Outcome{State: o.State, At: o.ReportedAt, By: o.ReportedBy, Cause: o.Cause, Note: o.Note}
	if o.StartedAt != nil {
		v.Start = *o.StartedAt
		if o.EndedAt != nil {
			v.Minutes = o.EndedAt.Sub(*o.StartedAt).Minutes()
		}
	}
	if o.SNR != nil {
		v.SNR = *o.SNR
	}
	if o.TOAUs != nil {
		v.TOAUs = *o.TOAUs
	}
	return v
}

// goalWords says in words what a goal asks for.
func goalWords(c *scheduler.Campaign, id string) string {
	for _, g := range c.CadenceTargets {
		if g.ID == id {
			s := "a scan every " + days(g.EveryD)
			if g.TOAUs > 0 {
				s += fmt.Sprintf(" to %.3g µs", g.TOAUs)
			}
			return s
		}
	}
	for _, g := range c.PhaseGoals {
		if g.ID == id {
			return fmt.Sprintf("%d windows of orbital phase from %s", len(g.Windows), g.Reference)
		}
	}
	for _, g := range c.OverlapGoals {
		if g.ID == id {
			return fmt.Sprintf("%d telescopes at once for %g min every %s", g.Count, g.OverlapMin, days(g.EveryD))
		}
	}
	for _, g := range c.BandPairGoals {
		if g.ID == id {
			return fmt.Sprintf("both bands within %g h every %s", g.WithinH, days(g.EveryD))
		}
	}
	return ""
}
