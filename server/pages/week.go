package pages

import (
	"context"
	"errors"
	"io"
	"net/http"
	"net/url"
	"slices"
	"strconv"
	"strings"
	"time"

	"cadencewright/scheduler"
	"cadencewright/scheduler/units"
	"cadencewright/server/auth"
	"cadencewright/server/store"
	"cadencewright/web/page"
	"cadencewright/web/view"
)

// Home leads to this week.
func (p *Pages) Home(w http.ResponseWriter, r *http.Request) error {
	http.Redirect(w, r, "/weeks/"+scheduler.WeekName(p.clock()), http.StatusSeeOther)
	return nil
}

// Week is the page of a week.
func (p *Pages) Week(w http.ResponseWriter, r *http.Request) error {
	h, err := scheduler.WeekHorizon(r.PathValue("week"))
	if err != nil {
		return scheduler.Errorf(scheduler.ErrNotFound, "%w", err)
	}
	c, ref, f, err := p.live(r)
	if errors.Is(err, scheduler.ErrNotFound) {
		v := view.Week{Page: f, Week: r.PathValue("week"), From: h.From, To: h.To}
		return write(w, http.StatusOK, func(b io.Writer) error { return page.Week(b, v) })
	}
	if err != nil {
		return err
	}
	v, err := p.week(r, c, ref, f, h)
	if err != nil {
		return err
	}
	return write(w, http.StatusOK, func(b io.Writer) error { return page.Week(b, *v) })
}

// week fills the page.
func (p *Pages) week(r *http.Request, c *scheduler.Campaign, ref store.CampaignRef, f view.Page, h scheduler.Horizon) (*view.Week, error) {
	q := r.URL.Query()
	v := &view.Week{Page: f, Week: scheduler.WeekName(h.From), From: h.From, To: h.To, Query: q.Get("q"), Show: q.Get("show"),
		MayPlan: auth.From(r.Context()).Role == auth.RoleCoordinator,
		Prev:    neighbour(c, h.From.AddDate(0, 0, -7)), Next: neighbour(c, h.From.AddDate(0, 0, 7))}
	shown, err := p.plans(r.Context(), ref, h, q.Get("plan"), v)
	if err != nil {
		return nil, err
	}
	if v.Job, err = p.job(r.Context(), ref.ID, h, v.MayPlan); err != nil {
		return nil, err
	}
	if v.Job != nil && !v.Job.Active() && v.Job.State == view.JobDone {
		v.Job = nil // its plan is the news
	}
	for i := range c.Sources {
		v.Sources = append(v.Sources, c.Sources[i].Name)
	}
	if s := q.Get("source"); slices.Contains(v.Sources, s) {
		v.Source = s
	}
	if err := blocks(v, c, shown); err != nil {
		return nil, err
	}
	set, err := units.Build(c, h)
	if err != nil {
		return nil, err
	}
	needs(v, c, set, shown)
	return v, nil
}

// shownPlan is the plan on the page; nil content: there is none.
type shownPlan struct {
	info  store.PlanInfo
	plan  *scheduler.Plan
	scans []store.StoredScan
}

// neighbour is the name of a week that the campaign reaches, or nothing.
func neighbour(c *scheduler.Campaign, from time.Time) string {
	if from.AddDate(0, 0, 7).After(c.Start) && from.Before(c.End) {
		return scheduler.WeekName(from)
	}
	return ""
}

// plans chooses the plan to show: the one that was asked for, or the newest.
func (p *Pages) plans(ctx context.Context, ref store.CampaignRef, h scheduler.Horizon, asked string, v *view.Week) (*shownPlan, error) {
	list, err := p.store.PlansOf(ctx, ref.ID, h, 30)
	if err != nil || len(list) == 0 {
		return &shownPlan{}, err
	}
	at := 0
	for i := range list {
		if strconv.FormatInt(list[i].ID, 10) == asked {
			at = i
		}
	}
	s := &shownPlan{}
	if s.info, s.plan, s.scans, err = p.store.Plan(ctx, list[at].ID); err != nil {
		return nil, err
	}
	shown := planView(&s.info)
	for _, x := range s.scans {
		shown.Scans++
		shown.Minutes += x.Minutes
	}
	if s.info.State == store.PlanDraft && s.info.CampaignRevision != ref.Revision {
		shown.Stale = "The campaign has changed since this draft was made: plan again before issuing."
	}
	v.Plan = &shown
	for i := range list {
		o := planView(&list[i])
		if list[i].State == store.PlanIssued && i != at {
			v.InUse = &o
		}
		if i != at {
			v.Others = append(v.Others, o)
		}
	}
	return s, nil
}

func planView(p *store.PlanInfo) view.Plan {
	return view.Plan{ID: p.ID, Version: p.Version, State: view.PlanState(p.State), Revision: p.Revision, MadeAt: p.MadeAt, MadeBy: p.MadeBy,
		IssuedAt: p.IssuedAt, IssuedBy: p.IssuedBy, SupersededBy: p.SupersededBy, Score: p.Score, Possible: p.Possible, Bound: p.Bound, Status: p.Status}
}

// job is the newest planning job of a week, or nil.
func (p *Pages) job(ctx context.Context, campaign int64, h scheduler.Horizon, mayStop bool) (*view.Job, error) {
	j, err := p.store.LastJob(ctx, campaign, h)
	if err != nil || j == nil {
		return nil, err
	}
	v := &view.Job{ID: j.ID, Week: scheduler.WeekName(h.From), State: view.JobState(j.State), Score: j.Score, AskedBy: j.AskedBy, Started: j.AskedAt,
		Problem: typeset(j.Problem), MayStop: mayStop && j.Active(), Stopping: j.StopWanted && j.Active()}
	if j.State == store.JobCancelled {
		v.State = view.JobStopped
	}
	if j.EffortOf > 0 {
		v.Done = min(1, float64(j.Effort)/float64(j.EffortOf))
	}
	if j.Bound != nil {
		v.Bound = *j.Bound
	}
	return v, nil
}

// Job is the part of the week's page that shows the job's progress. When the
// job has ended, the browser is told to load the page again.
func (p *Pages) Job(w http.ResponseWriter, r *http.Request) error {
	h, err := scheduler.WeekHorizon(r.PathValue("week"))
	if err != nil {
		return scheduler.Errorf(scheduler.ErrNotFound, "%w", err)
	}
	ref, err := p.store.LiveCampaign(r.Context())
	if err != nil {
		return err
	}
	j, err := p.job(r.Context(), ref.ID, h, auth.From(r.Context()).Role == auth.RoleCoordinator)
	if err != nil {
		return err
	}
	if r.Header.Get("HX-Request") == "" { // by the plain link
		http.Redirect(w, r, "/weeks/"+r.PathValue("week"), http.StatusSeeOther)
		return nil
	}
	if j == nil || !j.Active() {
		w.Header().Set("HX-Refresh", "true")
	}
	return write(w, http.StatusOK, func(b io.Writer) error { return page.JobFragment(b, j) })
}

// Plan starts a planning job.
func (p *Pages) Plan(w http.ResponseWriter, r *http.Request) error {
	h, err := scheduler.WeekHorizon(r.PathValue("week"))
	if err != nil {
		return scheduler.Errorf(scheduler.ErrNotFound, "%w", err)
	}
	ref, err := p.store.LiveCampaign(r.Context())
	if err != nil {
		return err
	}
	_, err = p.planner.Plan(r.Context(), ref.ID, h, 0, auth.From(r.Context()).Actor())
	if err != nil && !errors.Is(err, scheduler.ErrConflict) { // under way already: the page shows it
		return err
	}
	return back(w, r, r.PathValue("week"))
}

func back(w http.ResponseWriter, r *http.Request, week string) error {
	http.Redirect(w, r, "/weeks/"+url.PathEscape(week), http.StatusSeeOther)
	return nil
}

// Issue issues the draft on the page.
func (p *Pages) Issue(w http.ResponseWriter, r *http.Request) error {
	plan, version, err := planOf(r)
	if err != nil {
		return err
	}
	if _, err := p.store.Issue(r.Context(), plan, version, auth.From(r.Context()).Actor()); err != nil {
		return err
	}
	return back(w, r, r.PathValue("week"))
}

func planOf(r *http.Request) (plan, version int64, err error) {
	if err := r.ParseForm(); err != nil {
		return 0, 0, scheduler.Errorf(scheduler.ErrInvalid, "the form cannot be read: %w", err)
	}
	plan, err1 := strconv.ParseInt(r.PostForm.Get("plan"), 10, 64)
	version, err2 := strconv.ParseInt(r.PostForm.Get("version"), 10, 64)
	if err1 != nil || err2 != nil {
		return 0, 0, scheduler.Errorf(scheduler.ErrInvalid, "the form does not say which plan in which version is meant")
	}
	return plan, version, nil
}

// Stop asks a planning job to stop and keep its best plan.
func (p *Pages) Stop(w http.ResponseWriter, r *http.Request) error {
	id, err := strconv.ParseInt(r.PathValue("id"), 10, 64)
	if err != nil {
		return scheduler.Errorf(scheduler.ErrNotFound, "there is no job %q", r.PathValue("id"))
	}
	j, err := p.store.Job(r.Context(), id)
	if err != nil {
		return err
	}
	if err := p.store.StopJob(r.Context(), id, auth.From(r.Context()).Actor()); err != nil && !errors.Is(err, scheduler.ErrNotFound) {
		return err
	}
	return back(w, r, scheduler.WeekName(j.From))
}

// holds tells whether a search finds a text, whatever its capitals.
func holds(text, query string) bool {
	return strings.Contains(strings.ToLower(text), strings.ToLower(strings.TrimSpace(query)))
}
