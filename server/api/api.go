// Package api is the REST API under /api/v1: JSON in and out, described by an
// OpenAPI document that the program serves itself. It sees neither SQL nor
// pages. Which role may call what is decided before a request gets here; which
// telescope a key or an observer may touch where a path does not name it, is
// decided here.
//
// A handler returns what it answers or an error; one adapter (register) turns
// errors into problem documents and keeps their causes for the log.
package api

import (
	"context"
	"net/http"
	"strconv"
	"time"

	"github.com/danielgtaylor/huma/v2"
	"github.com/danielgtaylor/huma/v2/adapters/humachi"
	"github.com/go-chi/chi/v5"

	"cadencewright/scheduler"
	"cadencewright/server/auth"
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
	PlanFacts(ctx context.Context, id int64) (store.PlanInfo, error)
	Issue(ctx context.Context, plan, version int64, actor string) (store.PlanInfo, error)
	Job(ctx context.Context, id int64) (store.PlanJob, error)
	LastJob(ctx context.Context, campaign int64, h scheduler.Horizon) (*store.PlanJob, error)
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
	h       huma.API
}

// Prefix is where the API lives.
const Prefix = "/api/v1"

// Register puts every operation on the router. version is the program's.
func Register(r chi.Router, s Store, p Planner, sheets Sheets, clock func() time.Time, version string) *API {
	cfg := huma.DefaultConfig("Cadencewright", version)
	cfg.Info.Description = about
	cfg.DocsPath, cfg.SchemasPath, cfg.OpenAPIPath = "", "", "" // the description is served by serveDocument
	cfg.CreateHooks = nil
	cfg.Servers = []*huma.Server{{URL: "/", Description: "this service"}}
	cfg.Components.Schemas = huma.NewMapRegistry("#/components/schemas/", schemaName)
	cfg.Components.SecuritySchemes = map[string]*huma.SecurityScheme{
		"key":     {Type: "http", Scheme: "bearer", Description: "a control script's key"},
		"session": {Type: "apiKey", In: "cookie", Name: auth.CookieName, Description: "a person's session"},
	}
	cfg.Tags = tags
	a := &API{store: s, planner: p, sheets: sheets, clock: clock, h: humachi.New(r, cfg)}
	a.telescopes()
	a.scans()
	a.sources()
	a.weeks()
	a.plans()
	a.campaigns()
	a.problems()
	a.serveDocument(r)
	return a
}

// about stands at the head of the description.
const about = "Plans, scans and outcomes of a pulsar timing array.\n\n" +
	"Times are UTC (RFC 3339), angles degrees, TOA uncertainties microseconds. " +
	"Errors are problem documents (RFC 9457); /api/v1/problems lists their kinds. " +
	"Lists come in pages: where an answer has `next`, ask again with it as `cursor`. " +
	"An answer's ETag names what it says: send it in If-None-Match to be told 304 while nothing has changed, " +
	"and in If-Match with a change, which fails with 412 if somebody else was faster.\n\n" +
	"Control scripts send their key (`Authorization: Bearer KEY`), which reaches its own telescope alone; browsers send their session's cookie."

// tags group the operations.
var tags = []*huma.Tag{
	{Name: "control", Description: "What a telescope's control script needs: what to do now, and reporting what happened."},
	{Name: "campaign", Description: "Telescopes, sources and what is due."},
	{Name: "plans", Description: "Weeks, planning jobs, drafts and issued plans."},
	{Name: "service", Description: "The journal and the kinds of problem."},
}

// operation is what all operations have in common. errors are the statuses,
// beyond those that every operation may answer, that clients should expect.
func operation(tag, method, path, id, summary, description string, errors ...int) huma.Operation {
	return huma.Operation{Method: method, Path: Prefix + path, OperationID: id, Summary: summary, Description: description, Tags: []string{tag},
		Security: []map[string][]string{{"key": {}}, {"session": {}}}, Errors: append([]int{401, 403, 503}, errors...), MaxBodyBytes: 1 << 20}
}

// register puts an operation on the router, with an example of its answer and
// the adapter between its handler and the wire: errors become problem
// documents, and the log learns their causes.
func register[I, O any](a *API, op huma.Operation, example any, f func(context.Context, *I) (*O, error)) {
	if op.DefaultStatus == 0 {
		op.DefaultStatus = http.StatusOK
	}
	if op.Responses == nil {
		op.Responses = map[string]*huma.Response{}
	}
	op.Responses[strconv.Itoa(op.DefaultStatus)] = &huma.Response{
		Description: op.Summary,
		Content:     map[string]*huma.MediaType{"application/json": {Example: example}},
	}
	huma.Register(a.h, op, func(ctx context.Context, in *I) (*O, error) {
		out, err := f(ctx, in)
		if err != nil {
			return nil, fail(ctx, err)
		}
		return out, nil
	})
}

// withRequest gives an operation an example of what is sent to it.
func withRequest(op huma.Operation, example any) huma.Operation {
	op.RequestBody = &huma.RequestBody{Content: map[string]*huma.MediaType{"application/json": {Example: example}}}
	return op
}

// notModified adds the answer to a request whose If-None-Match still holds.
func notModified(op huma.Operation) huma.Operation {
	op.Responses = map[string]*huma.Response{"304": {Description: "Nothing has changed since the answer whose ETag was sent"}}
	return op
}
