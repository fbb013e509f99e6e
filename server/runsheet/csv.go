package runsheet

import (
	"encoding/csv"
	"io"
	"regexp"
	"strconv"
	"strings"
	"time"
)

var sexagesimal = regexp.MustCompile(`^[+-]\d\d:\d\d:\d\d(\.\d+)?$`)

var csvHead = []string{
	"number", "scan_id", "state", "block", "start_utc", "end_utc", "start_local", "lst_start_h", "source",
	"ra_j2000", "dec_j2000", "receiver", "freq_mhz", "bandwidth_mhz", "cal_s", "minutes", "slew_s",
	"az_start_deg", "el_start_deg", "az_end_deg", "el_end_deg", "motor_az_start_deg", "motor_az_end_deg",
	"lowest_el_deg", "least_sun_deg", "snr_expected", "toa_us_expected", "for", "pinned", "notes",
	"telescope", "night", "plan_revision", "issued_at_utc", "superseded_by_revision",
}

// WriteCSV writes one line a scan, with the sheet's own facts repeated on each
// line so that a line torn off its sheet still says what it belongs to.
func (s *Sheet) WriteCSV(w io.Writer) error {
	out := csv.NewWriter(w)
	out.UseCRLF = true // RFC 4180
	if err := out.Write(csvHead); err != nil {
		return err
	}
	for _, b := range s.Blocks {
		for _, x := range b.Scans {
			if err := out.Write(s.csvLine(b, x)); err != nil {
				return err
			}
		}
	}
	out.Flush()
	return out.Error()
}

func (s *Sheet) csvLine(b Block, x Scan) []string {
	superseded := ""
	if s.Superseded != nil {
		superseded = strconv.Itoa(s.Superseded.ByRevision)
	}
	line := []string{
		strconv.Itoa(x.Number), x.ID, x.State, b.ID, utc(x.Start), utc(x.End),
		s.Local(x.Start).Format("2006-01-02T15:04:05-07:00"), fixed(x.LSTStartH, 4), x.Source,
		x.RAJ2000, x.DecJ2000, x.Receiver, number(x.FreqMHz), number(x.BandwidthMHz), number(x.CalS),
		strconv.Itoa(x.Minutes), fixed(x.SlewS, 0),
		fixed(x.First.AzDeg, 2), fixed(x.First.ElDeg, 2), fixed(x.Last.AzDeg, 2), fixed(x.Last.ElDeg, 2),
		motor(x.First), motor(x.Last), fixed(x.LowestElDeg, 2), fixed(x.LeastSunDeg, 1),
		positive(x.SNR, 0), positive(x.TOAUs, 3), strings.Join(x.For, " "), strconv.FormatBool(x.Pinned),
		strings.Join(x.Notes, "; "),
		s.Telescope.Code, s.Night, strconv.Itoa(s.PlanRevision), utc(s.IssuedAt), superseded,
	}
	for i, cell := range line {
		line[i] = plain(cell)
	}
	return line
}

// plain keeps a spreadsheet from reading a text cell as a formula. Numbers may
// start with a sign: declinations and azimuths must stay numbers.
func plain(cell string) string {
	if cell == "" || !strings.ContainsRune("=+-@\t\r", rune(cell[0])) {
		return cell
	}
	if _, err := strconv.ParseFloat(cell, 64); err == nil {
		return cell
	}
	if sexagesimal.MatchString(cell) {
		return cell
	}
	return "'" + cell
}

func utc(t time.Time) string {
	if t.IsZero() {
		return ""
	}
	return t.UTC().Format(time.RFC3339)
}

func fixed(x float64, digits int) string { return strconv.FormatFloat(x, 'f', digits, 64) }

func number(x float64) string { return strconv.FormatFloat(x, 'f', -1, 64) }

// positive leaves a cell empty where there is no value.
func positive(x float64, digits int) string {
	if x <= 0 {
		return ""
	}
	return fixed(x, digits)
}

func motor(p Pointing) string {
	if p.MotorAzDeg == nil {
		return ""
	}
	return fixed(*p.MotorAzDeg, 2)
}
