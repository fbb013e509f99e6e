package api

import (
	"context"
	"encoding/json"
	"net/http"
	"time"

	"github.com/danielgtaylor/huma/v2"

	"cadencewright/scheduler"
	"cadencewright/server/auth"
	"cadencewright/server/store"
)

func (a *API) scans(h huma.API) {
	huma.Register(h, operation(http.MethodGet, "/telescopes/{code}/scans", "list-scans", "A telescope's scans in a stretch of time",
		"Scans of the issued plans that touch [from, to), at most a fortnight.", 404, 422), a.listScans)
	huma.Register(h, operation(http.MethodGet, "/scans/{id}", "get-scan", "One scan", "A scan of any plan.", 404), a.getScan)
	report := operation(http.MethodPost, "/scans/{id}/outcome", "report-outcome", "Report what became of a scan",
		"A scan goes from planned to observing, done, partial or lost, and from observing to done, partial or lost; every other change is refused. "+
			"A scan that is done, or partial with at least half of its time, counts for its goals from then on. "+
			"Send an Idempotency-Key: the same key and body may then be sent again after a dropped line and count once.", 404, 409, 413, 422)
	huma.Register(h, report, a.report)
}

type scansInput struct {
	Code string    `path:"code" maxLength:"100" example:"BRM"`
	From time.Time `query:"from" doc:"UTC; left out: now"`
	To   time.Time `query:"to" doc:"UTC; left out: a day after from"`
}

type scansOutput struct{ Body []Scan }

// maxSpan bounds one list of scans.
const maxSpan = 14 * 24 * time.Hour

func (a *API) listScans(ctx context.Context, in *scansInput) (*scansOutput, error) {
	from, to := in.From, in.To
	if from.IsZero() {
		from = a.clock()
	}
	if to.IsZero() {
		to = from.Add(24 * time.Hour)
	}
	if to.Sub(from) > maxSpan {
		return nil, fail(scheduler.Errorf(scheduler.ErrInvalid, "from %s to %s is more than a fortnight", from.Format(time.RFC3339), to.Format(time.RFC3339)))
	}
	ok, err := a.store.HasTelescope(ctx, in.Code)
	if err != nil {
		return nil, fail(err)
	}
	if !ok {
		return nil, fail(scheduler.Errorf(scheduler.ErrNotFound, "there is no telescope %s in the live campaign", in.Code))
	}
	list, err := a.store.LiveScans(ctx, in.Code, from.UTC(), to.UTC())
	if err != nil {
		return nil, fail(err)
	}
	return &scansOutput{scanViews(list)}, nil
}

type scanInput struct {
	ID int64 `path:"id" minimum:"1" example:"1042"`
}

type scanOutput struct{ Body Scan }

func (a *API) getScan(ctx context.Context, in *scanInput) (*scanOutput, error) {
	x, err := a.store.Scan(ctx, in.ID)
	if err != nil {
		return nil, fail(err)
	}
	return &scanOutput{scanView(&x)}, nil
}

// Report is what a telescope says of a scan.
type Report struct {
	State     string     `json:"state" enum:"observing,done,partial,lost" example:"done"`
	Cause     string     `json:"cause,omitempty" enum:"wind,snow,fault,receiver,interference,power,operator,target of opportunity,other" doc:"of a loss; wanted where lost"`
	StartedAt *time.Time `json:"started_at,omitempty" doc:"when it really began; left out: as planned"`
	EndedAt   *time.Time `json:"ended_at,omitempty" doc:"when it really ended; left out: as planned"`
	SNR       *float64   `json:"snr,omitempty" exclusiveMinimum:"0" example:"412"`
	TOAUs     *float64   `json:"toa_us,omitempty" exclusiveMinimum:"0" example:"0.91" doc:"measured TOA uncertainty in microseconds"`
	Note      string     `json:"note,omitempty" maxLength:"2000"`
}

type reportInput struct {
	ID             int64  `path:"id" minimum:"1" example:"1042"`
	IdempotencyKey string `header:"Idempotency-Key" maxLength:"200" doc:"names this report; may be sent again with the same body"`
	Body           Report
}

func (a *API) report(ctx context.Context, in *reportInput) (*scanOutput, error) {
	id := auth.From(ctx)
	only := ""
	if id.Role == auth.RoleKey {
		only = id.Telescopes[0]
	} else {
		x, err := a.store.Scan(ctx, in.ID)
		if err != nil {
			return nil, fail(err)
		}
		if !id.MayReport(x.Telescope) {
			return nil, fail(scheduler.Errorf(scheduler.ErrForbidden, "%s may not report for telescope %s", id.Name, x.Telescope))
		}
	}
	body, err := json.Marshal(struct {
		ID int64
		Report
	}{in.ID, in.Body})
	if err != nil {
		return nil, fail(err)
	}
	b := &in.Body
	x, err := a.store.ReportOutcome(ctx, in.ID, store.Report{State: b.State, Cause: b.Cause, StartedAt: b.StartedAt, EndedAt: b.EndedAt,
		SNR: b.SNR, TOAUs: b.TOAUs, Note: b.Note}, id.Actor(), only, store.Idempotency{Key: in.IdempotencyKey, Body: body})
	if err != nil {
		return nil, fail(err)
	}
	return &scanOutput{scanView(&x)}, nil
}
