package api

import (
	"context"
	"encoding/json"
	"net/http"
	"strconv"
	"strings"

	"cadencewright/scheduler"
	"cadencewright/server/auth"
	"cadencewright/server/httperr"
	"cadencewright/server/logline"
	"cadencewright/server/store"
)

func (a *API) plans() {
	register(a, notModified(operation("plans", http.MethodGet, "/plans/{id}", "get-plan", "One plan", "What is known of it, with its ETag.", 404)), examplePlan, a.getPlan)
	register(a, operation("plans", http.MethodGet, "/plans/{id}/file", "get-plan-file", "A plan as a file",
		"The plan file (plan/1), with its certificate, for re-checking elsewhere.", 404), json.RawMessage(`{"format":"plan/1"}`), a.planFile)
	register(a, operation("plans", http.MethodGet, "/plans/{id}/scans", "list-plan-scans", "A plan's scans", "All scans of a plan with their states, in order of time.", 404, 422),
		exampleList(exampleScan), a.planScans)
	register(a, operation("plans", http.MethodPost, "/plans/{id}/issue", "issue-plan", "Issue a draft",
		"Makes the draft what the telescopes follow; the plan before it is superseded. Needs If-Match with the draft's ETag: 428 without, 412 where "+
			"the draft has changed since.", 404, 409, 412, 428), examplePlan, a.issue)
}

type planOutput struct {
	Status int
	ETag   string `header:"ETag"`
	Body   *Plan
}

// tagOf is a plan's ETag.
func tagOf(p *store.PlanInfo) string { return `"` + strconv.FormatInt(p.Version, 10) + `"` }

func planAnswer(p *store.PlanInfo) *planOutput {
	v := planView(p)
	return &planOutput{Status: http.StatusOK, ETag: tagOf(p), Body: &v}
}

// PlanInput names a plan in a path.
type PlanInput struct {
	ID int64 `path:"id" minimum:"1" example:"17"`
}

type getPlanInput struct {
	PlanInput
	IfNoneMatch string `header:"If-None-Match" maxLength:"400" doc:"ETag of the last answer"`
}

func (a *API) getPlan(ctx context.Context, in *getPlanInput) (*planOutput, error) {
	info, err := a.store.PlanFacts(ctx, in.ID)
	if err != nil {
		return nil, err
	}
	out := planAnswer(&info)
	if matches(in.IfNoneMatch, out.ETag) {
		out.Status, out.Body = http.StatusNotModified, nil
	}
	return out, nil
}

type fileOutput struct {
	ContentType        string `header:"Content-Type"`
	ContentDisposition string `header:"Content-Disposition"`
	Body               json.RawMessage
}

func file(name string, content []byte) *fileOutput {
	return &fileOutput{"application/json", `attachment; filename="` + name + `"`, content}
}

func (a *API) planFile(ctx context.Context, in *PlanInput) (*fileOutput, error) {
	info, p, _, err := a.store.Plan(ctx, in.ID)
	if err != nil {
		return nil, err
	}
	b, err := scheduler.WritePlan(p)
	return file("plan-"+scheduler.WeekName(info.From)+"-"+strconv.FormatInt(info.ID, 10)+".json", b), err
}

type planScansInput struct {
	PlanInput
	PageInput
}

func (a *API) planScans(ctx context.Context, in *planScansInput) (*listOutput[Scan], error) {
	_, _, scans, err := a.store.Plan(ctx, in.ID)
	if err != nil {
		return nil, err
	}
	page, err := pageOf(scanViews(scans), in.PageInput, func(s *Scan) string { return strconv.FormatInt(s.ID, 10) }, nil)
	return &listOutput[Scan]{page}, err
}

type issueInput struct {
	ID      int64  `path:"id" minimum:"1" example:"17"`
	IfMatch string `header:"If-Match" maxLength:"100" doc:"the draft's ETag" example:"\"1\""`
}

func (a *API) issue(ctx context.Context, in *issueInput) (*planOutput, error) {
	logline.From(ctx).Set("plan", in.ID)
	if in.IfMatch == "" {
		return nil, httperr.ErrNeedsVersion
	}
	info, err := a.store.PlanFacts(ctx, in.ID)
	if err != nil {
		return nil, err
	}
	info, err = a.store.Issue(ctx, in.ID, wantedVersion(in.IfMatch, info.Version), auth.From(ctx).Actor())
	if err != nil {
		return nil, err
	}
	return planAnswer(&info), nil
}

// wantedVersion is the version that an If-Match header asks for: * is any. One
// that is none of ours is no version, and so stale.
func wantedVersion(header string, current int64) int64 {
	for part := range strings.SplitSeq(header, ",") {
		part = strings.TrimPrefix(strings.TrimSpace(part), "W/")
		if part == "*" {
			return current
		}
		v, err := strconv.ParseInt(strings.Trim(part, `"`), 10, 64)
		if err == nil && v > 0 {
			return v
		}
	}
	return -1
}
