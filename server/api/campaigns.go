package api

import (
	"context"
	"encoding/json"
	"net/http"
	"time"

	"github.com/danielgtaylor/huma/v2"

	"cadencewright/scheduler"
)

func (a *API) campaigns(h huma.API) {
	huma.Register(h, operation(http.MethodGet, "/campaigns", "list-campaigns", "The stored campaigns", "The live one first."), a.listCampaigns)
	huma.Register(h, operation(http.MethodGet, "/campaigns/{id}/file", "get-campaign-file", "A campaign as a file", "The campaign file (campaign/1), in canonical order.", 404), a.campaignFile)
	huma.Register(h, operation(http.MethodGet, "/journal", "list-journal", "The journal", "Every change: who, when, what; the newest first.", 404, 422), a.journal)
}

// Campaign is a stored campaign in brief.
type Campaign struct {
	ID       int64     `json:"id" example:"1"`
	Name     string    `json:"name"`
	Start    time.Time `json:"start"`
	End      time.Time `json:"end"`
	Live     bool      `json:"live" doc:"pages and control scripts serve this one"`
	Revision int64     `json:"revision" doc:"counts every change to anything of it"`
}

type campaignsOutput struct{ Body []Campaign }

func (a *API) listCampaigns(ctx context.Context, _ *struct{}) (*campaignsOutput, error) {
	list, err := a.store.Campaigns(ctx)
	if err != nil {
		return nil, fail(err)
	}
	out := &campaignsOutput{Body: []Campaign{}}
	for _, c := range list {
		out.Body = append(out.Body, Campaign(c))
	}
	return out, nil
}

type campaignInput struct {
	ID int64 `path:"id" minimum:"1" example:"1"`
}

func (a *API) campaignFile(ctx context.Context, in *campaignInput) (*fileOutput, error) {
	c, _, err := a.store.LoadCampaign(ctx, in.ID)
	if err != nil {
		return nil, fail(err)
	}
	b, err := scheduler.WriteCampaign(c)
	if err != nil {
		return nil, fail(err)
	}
	return &fileOutput{"application/json", `attachment; filename="campaign.json"`, b}, nil
}

// Entry is a line of the journal.
type Entry struct {
	ID      int64           `json:"id"`
	At      time.Time       `json:"at"`
	Actor   string          `json:"actor"`
	Action  string          `json:"action"`
	Subject string          `json:"subject"`
	Before  json.RawMessage `json:"before,omitempty"`
	After   json.RawMessage `json:"after,omitempty"`
}

type journalInput struct {
	Before int64 `query:"before" minimum:"0" doc:"only lines before this id: the next page"`
	Limit  int   `query:"limit" minimum:"1" maximum:"500" default:"100"`
}

type journalOutput struct{ Body []Entry }

func (a *API) journal(ctx context.Context, in *journalInput) (*journalOutput, error) {
	ref, err := a.store.LiveCampaign(ctx)
	if err != nil {
		return nil, fail(err)
	}
	list, err := a.store.Journal(ctx, ref.ID, in.Before, in.Limit)
	if err != nil {
		return nil, fail(err)
	}
	out := &journalOutput{Body: []Entry{}}
	for _, e := range list {
		out.Body = append(out.Body, Entry(e))
	}
	return out, nil
}
