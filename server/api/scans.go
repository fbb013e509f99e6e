package api

import (
	"context"
	"net/http"
	"strconv"
	"time"

	"cadencewright/scheduler"
	"cadencewright/server/auth"
	"cadencewright/server/logline"
	"cadencewright/server/store"
)

func (a *API) scans() {
	register(a, operation("control", http.MethodGet, "/telescopes/{code}/scans", "list-scans", "A telescope's scans in a stretch of time",
		"Scans of the issued plans that touch [from, to), at most a fortnight, in order of time.", 404, 413, 422), exampleList(exampleScan), a.listScans)
	register(a, operation("control", http.MethodGet, "/scans/{id}", "get-scan", "One scan", "A scan of any plan. A key sees those of its own telescope.", 404), exampleScan, a.getScan)
	report := operation("control", http.MethodPost, "/scans/{id}/outcome", "report-outcome", "Report what became of a scan",
		"A scan goes from planned to observing, done, partial or lost, and from observing to done, partial or lost; every other change is refused. "+
			"A scan that is done, or partial with at least half of its time, counts for its goals from then on. "+
			"Send an Idempotency-Key: the same key and body may then be sent again after a dropped line and count once.", 404, 409, 413, 415, 422)
	register(a, withRequest(report, exampleReport), exampleScan, a.report)
}

type scansInput struct {
	CodeInput
	PageInput
	From time.Time `query:"from" doc:"inclusive; left out: now" example:"2027-01-18T00:00:00Z"`
	To   time.Time `query:"to" doc:"exclusive; left out: a day after from" example:"2027-01-19T00:00:00Z"`
}

// maxSpan bounds one list of scans.
const maxSpan = 14 * 24 * time.Hour

func (a *API) listScans(ctx context.Context, in *scansInput) (*listOutput[Scan], error) {
	from, to := in.From.UTC(), in.To.UTC()
	if in.From.IsZero() {
		from = a.clock().UTC()
	}
	if in.To.IsZero() {
		to = from.Add(24 * time.Hour)
	}
	switch {
	case !from.Before(to):
		return nil, scheduler.Problems{{Pointer: "to", Message: "must be after from, " + from.Format(time.RFC3339)}}
	case to.Sub(from) > maxSpan:
		return nil, scheduler.Problems{{Pointer: "to", Message: "must be at most a fortnight after from, " + from.Format(time.RFC3339)}}
	case from.Year() < 1900 || to.Year() > 2200:
		return nil, scheduler.Problems{{Pointer: "from", Message: "must be a year that observing plans are made for"}}
	}
	if err := a.known(ctx, in.Code); err != nil {
		return nil, err
	}
	all, err := a.store.LiveScans(ctx, in.Code, from, to)
	if err != nil {
		return nil, err
	}
	page, err := pageOf(scanViews(all), in.PageInput, func(s *Scan) string { return strconv.FormatInt(s.ID, 10) }, nil)
	return &listOutput[Scan]{page}, err
}

type scanInput struct {
	ID int64 `path:"id" minimum:"1" example:"1042"`
}

type scanOutput struct{ Body Scan }

func (a *API) getScan(ctx context.Context, in *scanInput) (*scanOutput, error) {
	x, err := a.store.Scan(ctx, in.ID)
	if err != nil {
		return nil, err
	}
	if id := auth.From(ctx); !id.MaySee(x.Telescope) {
		return nil, scheduler.Errorf(scheduler.ErrForbidden, "scan %d belongs to telescope %s, this key to another", in.ID, x.Telescope)
	}
	return &scanOutput{scanView(&x)}, nil
}

// Report is what a telescope says of a scan.
type Report struct {
	State     string     `json:"state" enum:"observing,done,partial,lost" example:"done"`
	Cause     string     `json:"cause,omitempty" enum:"wind,snow,fault,receiver,interference,power,operator,target of opportunity,other" doc:"of a loss; wanted where lost"`
	StartedAt *time.Time `json:"started_at,omitempty" doc:"when it really began; left out: as planned"`
	EndedAt   *time.Time `json:"ended_at,omitempty" doc:"when it really ended; left out: as planned"`
	SNR       *float64   `json:"snr,omitempty" exclusiveMinimum:"0" maximum:"1e12" example:"412" doc:"signal-to-noise ratio of the pulse profile"`
	TOAUs     *float64   `json:"toa_us,omitempty" exclusiveMinimum:"0" maximum:"1e12" example:"0.91" doc:"measured TOA uncertainty in microseconds"`
	Note      string     `json:"note,omitempty" maxLength:"500" example:"light rain towards the end"`
}

type reportInput struct {
	ID             int64  `path:"id" minimum:"1" example:"1042"`
	IdempotencyKey string `header:"Idempotency-Key" maxLength:"200" example:"BRM-1042-done" doc:"names this report; may be sent again with the same body"`
	Body           Report
	RawBody        []byte
}

func (a *API) report(ctx context.Context, in *reportInput) (*scanOutput, error) {
	id, l := auth.From(ctx), logline.From(ctx)
	l.Set("scan", in.ID)
	l.Set("state", in.Body.State)
	only := "" // a key's telescope is checked where the scan is locked
	if id.Role == auth.RoleKey {
		only = id.Telescopes[0]
	} else {
		x, err := a.store.Scan(ctx, in.ID)
		if err != nil {
			return nil, err
		}
		if !id.MayReport(x.Telescope) {
			return nil, scheduler.Errorf(scheduler.ErrForbidden, "%s may not report for telescope %s", id.Name, x.Telescope)
		}
	}
	b := &in.Body
	r := store.Report{State: b.State, Cause: b.Cause, StartedAt: b.StartedAt, EndedAt: b.EndedAt, SNR: b.SNR, TOAUs: b.TOAUs, Note: b.Note}
	// The same key for another scan is another request.
	idem := store.Idempotency{Key: in.IdempotencyKey, Body: append([]byte(strconv.FormatInt(in.ID, 10)+"\n"), in.RawBody...)}
	x, err := a.store.ReportOutcome(ctx, in.ID, r, id.Actor(), only, idem)
	if err != nil {
		return nil, err
	}
	return &scanOutput{scanView(&x)}, nil
}
