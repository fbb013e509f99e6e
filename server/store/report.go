package store

import (
	"fmt"
	"math"
	"slices"
	"time"

	"cadencewright/scheduler"
)

// Causes are the reasons for a loss that a report may give.
var Causes = []string{"wind", "snow", "fault", "receiver", "interference", "power", "operator", "target of opportunity", "other"}

// Report is what a telescope says of a scan.
type Report struct {
	State     string // observing, done, partial or lost
	Cause     string // one of Causes where lost
	StartedAt *time.Time
	EndedAt   *time.Time
	SNR       *float64
	TOAUs     *float64
	Note      string
}

const (
	// maxNote is the longest note, in bytes.
	maxNote = 2000
	// maxShift is how far actual times may lie from the planned ones: more is
	// another scan, or another clock.
	maxShift = 12 * time.Hour
)

// check is what a report must be like before the database sees it.
func (r *Report) check() error {
	bad := func(field, format string, args ...any) error {
		return &FieldError{field, fmt.Sprintf(format, args...), scheduler.ErrInvalid}
	}
	switch {
	case !slices.Contains(next[ScanPlanned], r.State):
		return bad("state", "state %q: must be observing, done, partial or lost", r.State)
	case r.State == ScanLost && r.Cause == "":
		return bad("cause", "a lost scan needs a cause, one of %q", Causes)
	case r.Cause != "" && !slices.Contains(Causes, r.Cause):
		return bad("cause", "cause %q: must be one of %q", r.Cause, Causes)
	case r.SNR != nil && !positive(*r.SNR):
		return bad("snr", "snr %g: the signal-to-noise ratio must be a number above 0", *r.SNR)
	case r.TOAUs != nil && !positive(*r.TOAUs):
		return bad("toa_us", "toa_us %g: the TOA uncertainty must be a number above 0, microseconds", *r.TOAUs)
	case len(r.Note) > maxNote:
		return bad("note", "the note has %d bytes; at most %d are allowed", len(r.Note), maxNote)
	}
	return nil
}

func positive(v float64) bool { return v > 0 && !math.IsInf(v, 1) }

// stretch is when a scan was really on: by the report, else by the one before,
// else as planned.
func (r *Report) stretch(x *lockedScan) (start, end time.Time) {
	start, end = x.span.Lower, x.span.Upper
	if x.begun != nil {
		start = *x.begun
	}
	if r.StartedAt != nil {
		start = *r.StartedAt
	}
	if r.EndedAt != nil {
		end = *r.EndedAt
	}
	return start.Truncate(time.Millisecond), end.Truncate(time.Millisecond)
}

// checkTimes compares the actual times with the planned ones and the clock.
func (r *Report) checkTimes(x *lockedScan, now time.Time) error {
	bad := func(field, format string, args ...any) error {
		return &FieldError{field, fmt.Sprintf(format, args...), scheduler.ErrInvalid}
	}
	for _, t := range []struct {
		field string
		at    *time.Time
	}{{"started_at", r.StartedAt}, {"ended_at", r.EndedAt}} {
		switch {
		case t.at == nil:
		case t.at.Before(x.span.Lower.Add(-maxShift)) || t.at.After(x.span.Upper.Add(maxShift)):
			return bad(t.field, "%s %s is more than %.0f h away from the scan as planned, %s to %s", t.field, t.at.UTC().Format(time.RFC3339),
				maxShift.Hours(), x.span.Lower.Format(time.RFC3339), x.span.Upper.Format(time.RFC3339))
		case t.at.After(now.Add(earliest)):
			return bad(t.field, "%s %s lies in the future; it is %s", t.field, t.at.UTC().Format(time.RFC3339), now.Format(time.RFC3339))
		}
	}
	if r.State == ScanPartial && r.StartedAt == nil && r.EndedAt == nil && x.begun == nil {
		return bad("ended_at", "a scan that was made in part needs its actual start or end")
	}
	start, end := r.stretch(x)
	switch {
	case start.Before(end):
	case r.State == ScanObserving && r.EndedAt == nil: // begun after its planned end: what counts is when it ends
	case r.State == ScanLost && (r.StartedAt == nil || r.EndedAt == nil): // nothing was made
	case r.EndedAt == nil:
		return bad("ended_at", "the scan started at %s, after its planned end; its actual end is wanted", start.Format(time.RFC3339))
	default:
		return bad("ended_at", "the scan ends at %s, which is not after its start, %s", end.Format(time.RFC3339), start.Format(time.RFC3339))
	}
	return nil
}

// reportDoc is a report as the journal keeps it.
type reportDoc struct {
	State     string     `json:"state"`
	Cause     string     `json:"cause,omitempty"`
	StartedAt *time.Time `json:"started_at,omitempty"`
	EndedAt   *time.Time `json:"ended_at,omitempty"`
	SNR       *float64   `json:"snr,omitempty"`
	TOAUs     *float64   `json:"toa_us,omitempty"`
	Note      string     `json:"note,omitempty"`
}

func (r Report) doc() reportDoc { return reportDoc(r) }
