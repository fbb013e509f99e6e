// Package api is the REST API under /api/v1: JSON in and out, described by an
// OpenAPI document that the program serves itself. It sees neither SQL nor
// pages. Who may call what is decided before a request gets here.
package api

import (
	"context"
	"io"
	"net/http"
	"reflect"
	"strings"
	"time"

	"github.com/danielgtaylor/huma/v2"
	"github.com/danielgtaylor/huma/v2/adapters/humachi"
	"github.com/go-chi/chi/v5"

	"cadencewright/scheduler"
	"cadencewright/server/httperr"
	"cadencewright/server/runsheet"
	"cadencewright/server/store"
)

// Store is what the API needs of the database.
type Store interface {
	LiveCampaign(ctx context.Context) (store.CampaignRef, error)
	Campaigns(ctx context.Context) ([]store.CampaignRef, error)
	LoadCampaign(ctx context.Context, id int64) (*scheduler.Campaign, store.CampaignRef, error)
	HasTelescope(ctx context.Context, code string) (bool, error)
	NowNext(ctx context.Context, telescope string, at time.Time) (now, next *store.StoredScan, err error)
	LiveScans(ctx context.Context, telescope string, from, to time.Time) ([]store.StoredScan, error)
	Scan(ctx context.Context, id int64) (store.StoredScan, error)
	ReportOutcome(ctx context.Context, scan int64, r store.Report, actor, onlyTelescope string, idem store.Idempotency) (store.StoredScan, error)
	PlansOf(ctx context.Context, campaign int64, h scheduler.Horizon, limit int) ([]store.PlanInfo, error)
	Plan(ctx context.Context, id int64) (store.PlanInfo, *scheduler.Plan, []store.StoredScan, error)
	Issue(ctx context.Context, plan, version int64, actor string) (store.PlanInfo, error)
	Job(ctx context.Context, id int64) (store.PlanJob, error)
	StopJob(ctx context.Context, id int64, actor string) error
	Journal(ctx context.Context, campaign, before int64, limit int) ([]store.Entry, error)
}

// Planner hands planning jobs to the queue.
type Planner interface {
	Plan(ctx context.Context, campaign int64, h scheduler.Horizon, seed int64, actor string) (store.PlanJob, error)
}

// Sheets makes run sheets.
type Sheets interface {
	Sheet(ctx context.Context, telescope, night string) (*runsheet.Sheet, error)
}

// API is the handlers with what they need.
type API struct {
	store   Store
	planner Planner
	sheets  Sheets
	clock   func() time.Time
}

// Prefix is where the API lives.
const Prefix = "/api/v1"

// Register puts every operation on the router. version is the program's.
func Register(r chi.Router, s Store, p Planner, sheets Sheets, clock func() time.Time, version string) huma.API {
	cfg := huma.DefaultConfig("Cadencewright", version)
	cfg.Info.Description = "Plans, scans and outcomes of a pulsar timing array. Times are UTC (RFC 3339), angles degrees. " +
		"Errors are problem documents (RFC 9457). Control scripts send their key as a bearer token; people's browsers their session's cookie."
	cfg.DocsPath, cfg.SchemasPath = "", ""
	cfg.OpenAPIPath = Prefix + "/openapi"
	cfg.CreateHooks = nil
	cfg.Servers = []*huma.Server{{URL: "/", Description: "this service"}}
	cfg.Components.Schemas = huma.NewMapRegistry("#/components/schemas/", schemaName)
	cfg.Components.SecuritySchemes = map[string]*huma.SecurityScheme{
		"key":     {Type: "http", Scheme: "bearer", Description: "a control script's key"},
		"session": {Type: "apiKey", In: "cookie", Name: "cadencewright_session", Description: "a person's session"},
	}
	huma.NewError = problem
	huma.NewErrorWithContext = func(_ huma.Context, status int, msg string, errs ...error) huma.StatusError {
		return problem(status, msg, errs...)
	}
	h := humachi.New(r, cfg)
	a := &API{s, p, sheets, clock}
	a.telescopes(h)
	a.scans(h)
	a.weeks(h)
	a.plans(h)
	a.campaigns(h)
	return h
}

// schemaName names the schema of a type: parts of a run sheet have names of
// their own, since a sheet's scan is not a plan's scan.
func schemaName(t reflect.Type, hint string) string {
	name := huma.DefaultSchemaNamer(t, hint)
	for t.Kind() == reflect.Pointer || t.Kind() == reflect.Slice {
		t = t.Elem()
	}
	if strings.HasSuffix(t.PkgPath(), "/runsheet") && name != "Sheet" {
		name = "Sheet" + name
	}
	return name
}

// operation is what all operations have in common.
func operation(method, path, id, summary, description string, errors ...int) huma.Operation {
	return huma.Operation{Method: method, Path: Prefix + path, OperationID: id, Summary: summary, Description: description,
		Security: []map[string][]string{{"key": {}}, {"session": {}}}, Errors: append([]int{401, 403, 503}, errors...), MaxBodyBytes: 1 << 20}
}

// statusProblem is a problem document as the API library wants it.
type statusProblem struct {
	httperr.Problem
}

// Error is the detail.
func (p *statusProblem) Error() string { return p.Detail }

// GetStatus is the HTTP status.
func (p *statusProblem) GetStatus() int { return p.Status }

// ContentType is that of problem documents.
func (p *statusProblem) ContentType(string) string { return "application/problem+json" }

// problem makes the library's own errors (a body that does not fit its schema)
// into our documents, with a pointer to each bad field.
func problem(status int, msg string, errs ...error) huma.StatusError {
	p := &statusProblem{httperr.Problem{Type: "about:blank", Title: http.StatusText(status), Status: status, Detail: msg}}
	for _, err := range errs {
		if d, ok := err.(huma.ErrorDetailer); ok {
			e := d.ErrorDetail()
			p.Errors = append(p.Errors, httperr.Field{Pointer: pointer(e.Location), Detail: e.Message})
		} else if err != nil {
			p.Errors = append(p.Errors, httperr.Field{Detail: err.Error()})
		}
	}
	return p
}

// pointer turns the library's place (body.state) into a JSON Pointer (/state).
func pointer(location string) string {
	out := []byte{}
	for i := range len(location) {
		switch c := location[i]; c {
		case '.', '[':
			out = append(out, '/')
		case ']':
		default:
			out = append(out, c)
		}
	}
	s := string(out)
	for _, prefix := range []string{"body", "path", "query", "header"} {
		if s == prefix {
			return ""
		}
		if len(s) > len(prefix) && s[:len(prefix)] == prefix && s[len(prefix)] == '/' {
			return s[len(prefix):]
		}
	}
	return "/" + s
}

// fail turns an error of the layers below into a problem document.
func fail(err error) error {
	if err == nil {
		return nil
	}
	p := &statusProblem{httperr.Of(err)}
	if p.Status == http.StatusInternalServerError {
		return &faultError{p, err}
	}
	h := http.Header{}
	if p.Status == http.StatusServiceUnavailable || p.Status == http.StatusTooManyRequests {
		h.Set("Retry-After", httperr.RetryAfterS)
	}
	return huma.ErrorWithHeaders(p, h)
}

// faultError is a fault of the program: the document says nothing of it, the
// log everything.
type faultError struct {
	*statusProblem
	cause error
}

// Unwrap is the cause, for the log.
func (e *faultError) Unwrap() error { return e.cause }

// Document writes the OpenAPI document as YAML.
func Document(h huma.API, w io.Writer) error {
	b, err := h.OpenAPI().YAML()
	if err != nil {
		return err
	}
	_, err = w.Write(b)
	return err
}
