package pages

import (
	"io"
	"net/http"
	"net/url"
	"time"

	"cadencewright/scheduler"
	"cadencewright/server/runsheet"
	"cadencewright/web/page"
	"cadencewright/web/view"
)

// RunSheet is a telescope's night.
func (p *Pages) RunSheet(w http.ResponseWriter, r *http.Request) error {
	s, err := p.sheets.Sheet(r.Context(), r.PathValue("code"), r.PathValue("night"))
	if err != nil {
		return notFoundIfInvalid(err)
	}
	f := p.frame(r)
	f.Campaign = s.Campaign
	v := sheetView(s, f)
	return write(w, http.StatusOK, func(b io.Writer) error { return page.RunSheet(b, v) })
}

// RunSheetCSV is the same content as a file.
func (p *Pages) RunSheetCSV(w http.ResponseWriter, r *http.Request) error {
	s, err := p.sheets.Sheet(r.Context(), r.PathValue("code"), r.PathValue("night"))
	if err != nil {
		return notFoundIfInvalid(err)
	}
	w.Header().Set("Content-Type", "text/csv; charset=utf-8")
	w.Header().Set("Content-Disposition", `attachment; filename="`+safeName("run-sheet-"+s.Telescope.Code+"-"+s.Night)+`.csv"`)
	w.Header().Set("Cache-Control", "private, no-cache")
	return s.WriteCSV(w)
}

// notFoundIfInvalid makes a night that is no date a page that does not exist.
func notFoundIfInvalid(err error) error {
	if scheduler.KindOf(err) == scheduler.ErrInvalid {
		return scheduler.Errorf(scheduler.ErrNotFound, "%w", err)
	}
	return err
}

// safeName keeps a file name to letters, digits and dashes.
func safeName(s string) string {
	b := []byte(s)
	for i, c := range b {
		if !(c >= 'a' && c <= 'z' || c >= 'A' && c <= 'Z' || c >= '0' && c <= '9') {
			b[i] = '-'
		}
	}
	return string(b)
}

func sheetView(s *runsheet.Sheet, f view.Page) view.RunSheet {
	t := s.Telescope
	v := view.RunSheet{Page: f, Campaign: s.Campaign, Night: s.Night, From: s.From, To: s.To, Zone: s.Zone(), PlanWeek: s.PlanWeek, PlanRevision: s.PlanRevision, IssuedAt: s.IssuedAt, IssuedBy: s.IssuedBy,
		Cautions: s.Cautions, Reminders: s.Reminders, CSV: "/telescopes/" + url.PathEscape(t.Code) + "/nights/" + s.Night + ".csv",
		PrevNight: shift(s.Night, -1), NextNight: shift(s.Night, 1),
		Telescope: view.SheetTelescope{Code: t.Code, Name: t.Name, LongitudeDeg: t.LongitudeDeg, LatitudeDeg: t.LatitudeDeg, HeightM: t.HeightM, Timezone: t.Timezone,
			Mount: t.Mount, ElevationMinDeg: t.ElevationMinDeg, ElevationMaxDeg: t.ElevationMaxDeg, SunMinDeg: t.SunMinDeg}}
	if s.Superseded != nil {
		v.Superseded = &view.SheetSuperseded{At: s.Superseded.At, ByRevision: s.Superseded.ByRevision}
	}
	for _, b := range s.Blocks {
		row := view.SheetBlock{ID: b.ID, Label: b.Label, Span: view.Span{Start: b.Start, End: b.End}, Receivers: b.Receivers}
		for _, l := range b.Lost {
			row.Lost = append(row.Lost, view.Span{Start: l.Start, End: l.End})
		}
		for _, x := range b.Scans {
			row.Scans = append(row.Scans, sheetScan(x))
		}
		v.Blocks = append(v.Blocks, row)
	}
	return v
}

func sheetScan(x runsheet.Scan) view.SheetScan {
	pointing := func(p runsheet.Pointing) view.Pointing {
		return view.Pointing{AzDeg: p.AzDeg, ElDeg: p.ElDeg, HAH: p.HAH, MotorAzDeg: p.MotorAzDeg, Turn: p.Turn}
	}
	v := view.SheetScan{Number: x.Number, ID: x.ID, State: x.State, Span: view.Span{Start: x.Start, End: x.End}, Minutes: x.Minutes, LSTStartH: x.LSTStartH,
		Source: x.Source, RAJ2000: x.RAJ2000, DecJ2000: typeset(x.DecJ2000), Receiver: x.Receiver, FreqMHz: x.FreqMHz, BandwidthMHz: x.BandwidthMHz, CalS: x.CalS,
		First: pointing(x.First), Last: pointing(x.Last), LowestElDeg: x.LowestElDeg, LeastSunDeg: x.LeastSunDeg, SlewS: x.SlewS, Begins: x.Begins, Extra: len(x.For) == 0, SNR: x.SNR, TOAUs: x.TOAUs,
		For: x.For, Pinned: x.Pinned, Notes: x.Notes}
	if x.Phase != nil {
		v.Phase = &view.SheetPhase{Reference: x.Phase.Reference, From: x.Phase.From, To: x.Phase.To}
	}
	return v
}

func shift(date string, days int) string {
	t, err := time.Parse(time.DateOnly, date)
	if err != nil {
		return ""
	}
	return t.AddDate(0, 0, days).Format(time.DateOnly)
}
