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

func (a *API) weeks() {
	register(a, operation("plans", http.MethodGet, "/weeks/{week}", "get-week", "A week at a glance",
		"The plan that is issued, the newest draft and the newest planning job of an ISO week.", 404, 422), exampleWeek, a.getWeek)
	register(a, operation("plans", http.MethodGet, "/weeks/{week}/plans", "list-plans", "A week's plans",
		"Drafts and issued plans of an ISO week, the newest first; the newest 200 are kept in reach.", 404, 422), exampleList(examplePlan), a.listPlans)
	op := operation("plans", http.MethodPost, "/weeks/{week}/plan", "plan-week", "Plan a week",
		"Starts a background job; it ends with a draft. A week has one job at a time.", 404, 409, 413, 415, 422)
	op.DefaultStatus = http.StatusAccepted
	register(a, withRequest(op, PlanRequest{Seed: 7}), exampleJob, a.planWeek)
	register(a, operation("plans", http.MethodGet, "/jobs/{id}", "get-job", "A planning job", "Its progress: score rising, bound falling.", 404), exampleJob, a.getJob)
	register(a, operation("plans", http.MethodPost, "/jobs/{id}/stop", "stop-job", "Stop a planning job",
		"It ends soon, with the best plan so far as its draft; one whose search has not begun is cancelled. One that has ended already is left as it is.", 404), exampleJob, a.stopJob)
}

// WeekInput names a week in a path.
type WeekInput struct {
	Week string `path:"week" pattern:"^\\d{4}-W\\d{2}$" example:"2027-W03" doc:"ISO week"`
}

// Week is a week at a glance.
type Week struct {
	Week   string    `json:"week" example:"2027-W03"`
	From   time.Time `json:"from" doc:"Monday 00:00 UTC, inclusive"`
	To     time.Time `json:"to" doc:"exclusive"`
	Issued *Plan     `json:"issued,omitempty" doc:"the plan that telescopes follow; left out: none"`
	Draft  *Plan     `json:"draft,omitempty" doc:"the newest draft; left out: none"`
	Job    *Job      `json:"job,omitempty" doc:"the newest planning job; left out: none"`
}

type weekOutput struct{ Body Week }

// maxPlans is how many plans of a week are looked at.
const maxPlans = 200

func (a *API) getWeek(ctx context.Context, in *WeekInput) (*weekOutput, error) {
	ref, h, err := a.week(ctx, in.Week)
	if err != nil {
		return nil, err
	}
	plans, err := a.store.PlansOf(ctx, ref.ID, h, maxPlans)
	if err != nil {
		return nil, err
	}
	out := Week{Week: scheduler.WeekName(h.From), From: h.From, To: h.To}
	for i := range plans {
		v := planView(&plans[i])
		switch {
		case v.State == store.PlanIssued && out.Issued == nil:
			out.Issued = &v
		case v.State == store.PlanDraft && out.Draft == nil:
			out.Draft = &v
		}
	}
	j, err := a.store.LastJob(ctx, ref.ID, h)
	if err != nil {
		return nil, err
	}
	if j != nil {
		v := jobView(j)
		out.Job = &v
	}
	return &weekOutput{out}, nil
}

type plansInput struct {
	WeekInput
	PageInput
}

func (a *API) listPlans(ctx context.Context, in *plansInput) (*listOutput[Plan], error) {
	ref, h, err := a.week(ctx, in.Week)
	if err != nil {
		return nil, err
	}
	plans, err := a.store.PlansOf(ctx, ref.ID, h, maxPlans)
	if err != nil {
		return nil, err
	}
	all := make([]Plan, 0, len(plans))
	for i := range plans {
		all = append(all, planView(&plans[i]))
	}
	older := func(p *Plan, key string) bool {
		id, err := strconv.ParseInt(key, 10, 64)
		return err == nil && p.ID < id
	}
	page, err := pageOf(all, in.PageInput, func(p *Plan) string { return strconv.FormatInt(p.ID, 10) }, older)
	return &listOutput[Plan]{page}, err
}

// week is the live campaign and a week's horizon.
func (a *API) week(ctx context.Context, name string) (store.CampaignRef, scheduler.Horizon, error) {
	logline.From(ctx).Set("week", name)
	h, err := scheduler.WeekHorizon(name)
	if err != nil {
		return store.CampaignRef{}, h, scheduler.Problems{{Pointer: "week", Message: err.Error()}}
	}
	ref, err := a.store.LiveCampaign(ctx)
	return ref, h, err
}

// PlanRequest says how to plan.
type PlanRequest struct {
	Seed int64 `json:"seed,omitempty" minimum:"0" maximum:"9007199254740991" doc:"of the search's random choices; the same seed gives the same plan" example:"7"`
}

type planWeekInput struct {
	WeekInput
	Body *PlanRequest
}

type jobOutput struct{ Body Job }

func (a *API) planWeek(ctx context.Context, in *planWeekInput) (*jobOutput, error) {
	ref, h, err := a.week(ctx, in.Week)
	if err != nil {
		return nil, err
	}
	var seed int64
	if in.Body != nil {
		seed = in.Body.Seed
	}
	j, err := a.planner.Plan(ctx, ref.ID, h, seed, auth.From(ctx).Actor())
	if err != nil {
		return nil, err
	}
	return &jobOutput{jobView(&j)}, nil
}

type jobInput struct {
	ID int64 `path:"id" minimum:"1" example:"5"`
}

func (a *API) getJob(ctx context.Context, in *jobInput) (*jobOutput, error) {
	j, err := a.store.Job(ctx, in.ID)
	if err != nil {
		return nil, err
	}
	return &jobOutput{jobView(&j)}, nil
}

func (a *API) stopJob(ctx context.Context, in *jobInput) (*jobOutput, error) {
	j, err := a.store.Job(ctx, in.ID)
	if err != nil {
		return nil, err
	}
	if !j.Active() { // it ended by itself: no fault of who asked
		return &jobOutput{jobView(&j)}, nil
	}
	if err := a.store.StopJob(ctx, in.ID, auth.From(ctx).Actor()); err != nil && scheduler.KindOf(err) != scheduler.ErrNotFound {
		return nil, err
	}
	return a.getJob(ctx, in)
}
