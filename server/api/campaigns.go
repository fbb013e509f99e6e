package api

import (
	"context"
	"encoding/json"
	"net/http"
	"strconv"
	"time"

	"cadencewright/scheduler"
)

func (a *API) campaigns() {
	register(a, operation("campaign", http.MethodGet, "/campaigns", "list-campaigns", "The stored campaigns", "The live one first.", 422), exampleList(exampleCampaign), a.listCampaigns)
	register(a, operation("campaign", http.MethodGet, "/campaigns/{id}/file", "get-campaign-file", "A campaign as a file",
		"The campaign file (campaign/1) in canonical order, with its history and what was reported since.", 404), json.RawMessage(`{"format":"campaign/1"}`), a.campaignFile)
	register(a, operation("service", http.MethodGet, "/journal", "list-journal", "The journal", "Every change: who, when, what; the newest first.", 404, 422),
		exampleList(exampleEntry), a.journal)
}

// Campaign is a stored campaign in brief.
type Campaign struct {
	ID       int64     `json:"id" example:"1"`
	Name     string    `json:"name" example:"Example array, spring"`
	Start    time.Time `json:"start" doc:"inclusive"`
	End      time.Time `json:"end" doc:"exclusive"`
	Live     bool      `json:"live" doc:"pages and control scripts serve this one"`
	Revision int64     `json:"revision" doc:"counts every change to anything of it" example:"12"`
}

func (a *API) listCampaigns(ctx context.Context, in *PageInput) (*listOutput[Campaign], error) {
	stored, err := a.store.Campaigns(ctx)
	if err != nil {
		return nil, err
	}
	all := make([]Campaign, 0, len(stored))
	for _, c := range stored {
		all = append(all, Campaign(c))
	}
	page, err := pageOf(all, *in, func(c *Campaign) string { return strconv.FormatInt(c.ID, 10) }, nil)
	return &listOutput[Campaign]{page}, err
}

type campaignInput struct {
	ID int64 `path:"id" minimum:"1" example:"1"`
}

func (a *API) campaignFile(ctx context.Context, in *campaignInput) (*fileOutput, error) {
	c, ref, err := a.store.LoadCampaign(ctx, in.ID)
	if err != nil {
		return nil, err
	}
	b, err := scheduler.WriteCampaign(c)
	return file("campaign-"+strconv.FormatInt(ref.ID, 10)+".json", b), err
}

// Entry is a line of the journal.
type Entry struct {
	ID      int64           `json:"id" example:"311"`
	At      time.Time       `json:"at"`
	Actor   string          `json:"actor" doc:"a person's name, or key and the key's name" example:"key BRM control"`
	Action  string          `json:"action" example:"report"`
	Subject string          `json:"subject" example:"scan 1042 of SIM J0412+1833 on BRM"`
	Before  json.RawMessage `json:"before,omitempty" doc:"what it was"`
	After   json.RawMessage `json:"after,omitempty" doc:"what it is now"`
}

func (a *API) journal(ctx context.Context, in *PageInput) (*listOutput[Entry], error) {
	ref, err := a.store.LiveCampaign(ctx)
	if err != nil {
		return nil, err
	}
	key, err := in.keyOf()
	if err != nil {
		return nil, err
	}
	var before int64 // 0: from the newest
	if key != "" {
		if before, err = strconv.ParseInt(key, 10, 64); err != nil || before < 1 {
			return nil, badCursor()
		}
	}
	// One more than wanted tells whether there is another page.
	lines, err := a.store.Journal(ctx, ref.ID, before, in.limit()+1)
	if err != nil {
		return nil, err
	}
	out := list[Entry]{Items: []Entry{}}
	for i, e := range lines {
		if i == in.limit() {
			out.Next = cursorOf(strconv.FormatInt(lines[i-1].ID, 10))
			break
		}
		out.Items = append(out.Items, Entry(e))
	}
	return &listOutput[Entry]{out}, nil
}
