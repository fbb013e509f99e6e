// Package pages answers browsers: it reads what the database holds, turns it
// into the view models of package web/view and hands those to the pages; forms
// come in here. It sees no SQL and writes no HTML.
package pages

import (
	"bytes"
	"context"
	"io"
	"net/http"
	"time"

	"cadencewright/scheduler"
	"cadencewright/server/auth"
	"cadencewright/server/httperr"
	"cadencewright/server/runsheet"
	"cadencewright/server/store"
	"cadencewright/web/page"
	"cadencewright/web/view"
)

// Store is what pages need of the database.
type Store interface {
	LiveCampaign(ctx context.Context) (store.CampaignRef, error)
	LoadCampaign(ctx context.Context, id int64) (*scheduler.Campaign, store.CampaignRef, error)
	PlansOf(ctx context.Context, campaign int64, h scheduler.Horizon, limit int) ([]store.PlanInfo, error)
	Plan(ctx context.Context, id int64) (store.PlanInfo, *scheduler.Plan, []store.StoredScan, error)
	LiveScans(ctx context.Context, telescope string, from, to time.Time) ([]store.StoredScan, error)
	Scan(ctx context.Context, id int64) (store.StoredScan, error)
	Issue(ctx context.Context, plan, version int64, actor string) (store.PlanInfo, error)
	LastJob(ctx context.Context, campaign int64, h scheduler.Horizon) (*store.PlanJob, error)
	Job(ctx context.Context, id int64) (store.PlanJob, error)
	StopJob(ctx context.Context, id int64, actor string) error
}

// Planner hands planning jobs to the queue.
type Planner interface {
	Plan(ctx context.Context, campaign int64, h scheduler.Horizon, seed int64, actor string) (store.PlanJob, error)
}

// Sheets makes run sheets.
type Sheets interface {
	Sheet(ctx context.Context, telescope, night string) (*runsheet.Sheet, error)
}

// Pages is the handlers with what they need.
type Pages struct {
	store   Store
	planner Planner
	sheets  Sheets
	auth    *auth.Auth
	clock   func() time.Time
}

// New makes the handlers.
func New(s Store, p Planner, sheets Sheets, a *auth.Auth, clock func() time.Time) *Pages {
	return &Pages{s, p, sheets, a, clock}
}

// frame is what all pages have in common.
func (p *Pages) frame(r *http.Request) view.Page {
	now := p.clock().UTC()
	f := view.Page{Path: r.URL.Path, Now: now, ThisWeek: scheduler.WeekName(now)}
	if id := auth.From(r.Context()); id.PersonID != 0 {
		f.Person = &view.Person{Name: id.Name, Role: string(id.Role)}
	}
	return f
}

// live is the live campaign with the frame that names it.
func (p *Pages) live(r *http.Request) (*scheduler.Campaign, store.CampaignRef, view.Page, error) {
	f := p.frame(r)
	ref, err := p.store.LiveCampaign(r.Context())
	if err != nil {
		return nil, ref, f, err
	}
	c, ref, err := p.store.LoadCampaign(r.Context(), ref.ID)
	f.Campaign = ref.Name
	return c, ref, f, err
}

// write renders a page whole before the first byte goes out, so that a fault
// never leaves half a page with status 200.
func write(w http.ResponseWriter, status int, render func(io.Writer) error) error {
	var b bytes.Buffer
	if err := render(&b); err != nil {
		return err
	}
	h := w.Header()
	h.Set("Content-Type", "text/html; charset=utf-8")
	h.Set("Cache-Control", "private, no-cache")
	w.WriteHeader(status)
	_, err := w.Write(b.Bytes())
	return ignoreGone(err)
}

// ignoreGone drops the error of a client that went away: nobody is left to
// tell.
func ignoreGone(error) error { return nil }

// Error is the page of a problem.
func (p *Pages) Error(w http.ResponseWriter, r *http.Request, problem httperr.Problem) {
	v := view.Error{Page: p.frame(r), Status: problem.Status, Title: problem.Title, Detail: typeset(problem.Detail), Request: problem.Instance}
	switch problem.Status {
	case http.StatusNotFound:
		v.Advice = "Check the address, or start from this week."
	case http.StatusPreconditionFailed:
		v.Advice = "Go back to the week, look at what has changed, and decide again."
	case http.StatusServiceUnavailable:
		v.Advice = "Wait a few seconds and load the page again. Nothing you saved is lost."
	case http.StatusForbidden, http.StatusConflict, http.StatusUnprocessableEntity, http.StatusRequestEntityTooLarge:
		v.Advice = problem.Advice // the others' words are for programs
	}
	if n := len(problem.Errors); n > 1 { // of one, the detail tells
		v.Detail += "; the first is " + problem.Errors[0].Pointer + ": " + typeset(problem.Errors[0].Detail)
	}
	if err := write(w, problem.Status, func(b io.Writer) error { return page.Error(b, v) }); err != nil {
		http.Error(w, problem.Title, problem.Status)
	}
}

// Help is the help page.
func (p *Pages) Help(w http.ResponseWriter, r *http.Request) error {
	f := p.frame(r)
	if ref, err := p.store.LiveCampaign(r.Context()); err == nil {
		f.Campaign = ref.Name
	}
	scheme := "http://"
	if r.TLS != nil {
		scheme = "https://"
	}
	return write(w, http.StatusOK, func(b io.Writer) error { return page.Help(b, view.Help{Page: f, BaseURL: scheme + r.Host}) })
}
