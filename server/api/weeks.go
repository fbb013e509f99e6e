package api

import (
	"context"
	"net/http"
	"strconv"
	"strings"

	"github.com/danielgtaylor/huma/v2"

	"cadencewright/scheduler"
	"cadencewright/server/auth"
	"cadencewright/server/httperr"
	"cadencewright/server/store"
)

func (a *API) weeks(h huma.API) {
	huma.Register(h, operation(http.MethodGet, "/weeks/{week}/plans", "list-plans", "A week's plans", "Drafts and issued plans of an ISO week, the newest first.", 404, 422), a.listPlans)
	op := operation(http.MethodPost, "/weeks/{week}/plan", "plan-week", "Plan a week",
		"Starts a background job; it ends with a draft. A week has one job at a time.", 404, 409, 422)
	op.DefaultStatus = http.StatusAccepted
	huma.Register(h, op, a.planWeek)
	huma.Register(h, operation(http.MethodGet, "/jobs/{id}", "get-job", "A planning job", "Its progress: score rising, bound falling.", 404), a.getJob)
	huma.Register(h, operation(http.MethodPost, "/jobs/{id}/stop", "stop-job", "Stop a planning job", "It ends soon, with the best plan so far as its draft.", 404), a.stopJob)
}

type weekInput struct {
	Week string `path:"week" pattern:"^\\d{4}-W\\d{2}$" example:"2027-W03" doc:"ISO week"`
}

type plansOutput struct{ Body []Plan }

func (a *API) listPlans(ctx context.Context, in *weekInput) (*plansOutput, error) {
	ref, h, err := a.week(ctx, in.Week)
	if err != nil {
		return nil, fail(err)
	}
	list, err := a.store.PlansOf(ctx, ref.ID, h, 100)
	if err != nil {
		return nil, fail(err)
	}
	out := &plansOutput{Body: []Plan{}}
	for i := range list {
		out.Body = append(out.Body, planView(&list[i]))
	}
	return out, nil
}

// week is the live campaign and a week's horizon.
func (a *API) week(ctx context.Context, name string) (store.CampaignRef, scheduler.Horizon, error) {
	h, err := scheduler.WeekHorizon(name)
	if err != nil {
		return store.CampaignRef{}, h, err
	}
	ref, err := a.store.LiveCampaign(ctx)
	return ref, h, err
}

type planWeekInput struct {
	Week string `path:"week" pattern:"^\\d{4}-W\\d{2}$" example:"2027-W03"`
	Body struct {
		Seed int64 `json:"seed,omitempty" minimum:"0" doc:"of the search's random choices; the same seed gives the same plan"`
	} `required:"false"`
}

type jobOutput struct{ Body Job }

func (a *API) planWeek(ctx context.Context, in *planWeekInput) (*jobOutput, error) {
	ref, h, err := a.week(ctx, in.Week)
	if err != nil {
		return nil, fail(err)
	}
	j, err := a.planner.Plan(ctx, ref.ID, h, in.Body.Seed, auth.From(ctx).Actor())
	if err != nil {
		return nil, fail(err)
	}
	return &jobOutput{jobView(&j)}, nil
}

type jobInput struct {
	ID int64 `path:"id" minimum:"1" example:"5"`
}

func (a *API) getJob(ctx context.Context, in *jobInput) (*jobOutput, error) {
	j, err := a.store.Job(ctx, in.ID)
	if err != nil {
		return nil, fail(err)
	}
	return &jobOutput{jobView(&j)}, nil
}

func (a *API) stopJob(ctx context.Context, in *jobInput) (*jobOutput, error) {
	if err := a.store.StopJob(ctx, in.ID, auth.From(ctx).Actor()); err != nil {
		return nil, fail(err)
	}
	return a.getJob(ctx, in)
}

func (a *API) plans(h huma.API) {
	huma.Register(h, operation(http.MethodGet, "/plans/{id}", "get-plan", "One plan", "What is known of it, with its ETag.", 404), a.getPlan)
	huma.Register(h, operation(http.MethodGet, "/plans/{id}/file", "get-plan-file", "A plan as a file", "The plan file (plan/1), with its certificate, for re-checking elsewhere.", 404), a.planFile)
	huma.Register(h, operation(http.MethodGet, "/plans/{id}/scans", "list-plan-scans", "A plan's scans", "All scans with their states.", 404), a.planScans)
	huma.Register(h, operation(http.MethodPost, "/plans/{id}/issue", "issue-plan", "Issue a draft",
		"Makes the draft what the telescopes follow; the plan before it is superseded. Needs If-Match with the draft's ETag.", 404, 409, 412, 428), a.issue)
}

type planOutput struct {
	ETag string `header:"ETag"`
	Body Plan
}

func planAnswer(p *store.PlanInfo) *planOutput {
	return &planOutput{ETag: `"` + strconv.FormatInt(p.Version, 10) + `"`, Body: planView(p)}
}

type planInput struct {
	ID int64 `path:"id" minimum:"1" example:"17"`
}

func (a *API) getPlan(ctx context.Context, in *planInput) (*planOutput, error) {
	info, _, _, err := a.store.Plan(ctx, in.ID)
	if err != nil {
		return nil, fail(err)
	}
	return planAnswer(&info), nil
}

type fileOutput struct {
	ContentType        string `header:"Content-Type"`
	ContentDisposition string `header:"Content-Disposition"`
	Body               []byte
}

func (a *API) planFile(ctx context.Context, in *planInput) (*fileOutput, error) {
	info, p, _, err := a.store.Plan(ctx, in.ID)
	if err != nil {
		return nil, fail(err)
	}
	b, err := scheduler.WritePlan(p)
	if err != nil {
		return nil, fail(err)
	}
	name := "plan-" + scheduler.WeekName(info.From) + "-" + strconv.FormatInt(info.ID, 10) + ".json"
	return &fileOutput{"application/json", `attachment; filename="` + name + `"`, b}, nil
}

func (a *API) planScans(ctx context.Context, in *planInput) (*scansOutput, error) {
	_, _, scans, err := a.store.Plan(ctx, in.ID)
	if err != nil {
		return nil, fail(err)
	}
	return &scansOutput{scanViews(scans)}, nil
}

type issueInput struct {
	ID      int64  `path:"id" minimum:"1" example:"17"`
	IfMatch string `header:"If-Match" doc:"the draft's ETag" example:"\"1\""`
}

func (a *API) issue(ctx context.Context, in *issueInput) (*planOutput, error) {
	if in.IfMatch == "" {
		return nil, fail(httperr.ErrNeedsVersion)
	}
	version, err := strconv.ParseInt(strings.Trim(strings.TrimPrefix(in.IfMatch, "W/"), `"`), 10, 64)
	if err != nil {
		version = -1 // no version of ours: stale
	}
	info, err := a.store.Issue(ctx, in.ID, version, auth.From(ctx).Actor())
	if err != nil {
		return nil, fail(err)
	}
	return planAnswer(&info), nil
}
