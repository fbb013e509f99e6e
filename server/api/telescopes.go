package api

import (
	"context"
	"fmt"
	"net/http"
	"strings"
	"time"

	"github.com/danielgtaylor/huma/v2"

	"cadencewright/scheduler"
	"cadencewright/server/runsheet"
)

// Telescope is a telescope in brief.
type Telescope struct {
	Code         string     `json:"code" example:"BRM"`
	Name         string     `json:"name"`
	LongitudeDeg float64    `json:"longitude_deg" doc:"east-positive"`
	LatitudeDeg  float64    `json:"latitude_deg" doc:"geodetic"`
	HeightM      float64    `json:"height_m"`
	Timezone     string     `json:"timezone"`
	Mount        string     `json:"mount" enum:"altaz,equatorial,transit"`
	Receivers    []Receiver `json:"receivers"`
}

// Receiver is a receiver in brief.
type Receiver struct {
	Code         string   `json:"code" example:"L1"`
	Bands        []string `json:"bands"`
	FreqMHz      float64  `json:"freq_mhz"`
	BandwidthMHz float64  `json:"bandwidth_mhz"`
}

// NowAnswer is what a telescope is to do at this moment.
type NowAnswer struct {
	Telescope  string    `json:"telescope"`
	ServerTime time.Time `json:"server_time" doc:"the service's clock: compare it with yours"`
	Now        *Scan     `json:"now" doc:"the scan under way or due; null: none"`
	Next       *Scan     `json:"next" doc:"the scan after that; null: none is planned"`
}

type nowInput struct {
	Code        string `path:"code" maxLength:"100" example:"BRM" doc:"a telescope's code"`
	IfNoneMatch string `header:"If-None-Match"`
}

type nowOutput struct {
	Status       int
	ETag         string `header:"ETag"`
	CacheControl string `header:"Cache-Control"`
	Body         *NowAnswer
}

func (a *API) telescopes(h huma.API) {
	huma.Register(h, operation(http.MethodGet, "/telescopes", "list-telescopes", "The campaign's telescopes", "All telescopes of the live campaign with their receivers.", 404), a.listTelescopes)
	huma.Register(h, operation(http.MethodGet, "/telescopes/{code}/now", "now", "What to do now and next",
		"The scan that is under way or due at the telescope, and the one after it. With If-None-Match the answer is 304 while neither has changed. A scan that was reported over is neither.", 404), a.now)
	huma.Register(h, operation(http.MethodGet, "/telescopes/{code}/run-sheets/{night}", "run-sheet", "A night's run sheet",
		"Local noon to local noon, named by the local date on which the night begins.", 404, 422), a.runSheet)
}

type listTelescopesOutput struct{ Body []Telescope }

func (a *API) listTelescopes(ctx context.Context, _ *struct{}) (*listTelescopesOutput, error) {
	ref, err := a.store.LiveCampaign(ctx)
	if err != nil {
		return nil, fail(err)
	}
	c, _, err := a.store.LoadCampaign(ctx, ref.ID)
	if err != nil {
		return nil, fail(err)
	}
	out := &listTelescopesOutput{Body: []Telescope{}}
	for i := range c.Telescopes {
		t := &c.Telescopes[i]
		v := Telescope{Code: t.Code, Name: t.Name, LongitudeDeg: t.LongitudeDeg, LatitudeDeg: t.LatitudeDeg, HeightM: t.HeightM, Timezone: t.Timezone, Mount: string(t.Mount)}
		for j := range t.Receivers {
			r := &t.Receivers[j]
			v.Receivers = append(v.Receivers, Receiver{r.Code, r.Bands, r.FreqMHz, r.BandwidthMHz})
		}
		out.Body = append(out.Body, v)
	}
	return out, nil
}

// now answers what a control script asks again and again.
func (a *API) now(ctx context.Context, in *nowInput) (*nowOutput, error) {
	at := a.clock().UTC()
	now, next, err := a.store.NowNext(ctx, in.Code, at)
	if err != nil {
		return nil, fail(err)
	}
	if now == nil && next == nil { // nothing planned, or no such telescope
		ok, err := a.store.HasTelescope(ctx, in.Code)
		if err != nil {
			return nil, fail(err)
		}
		if !ok {
			return nil, fail(scheduler.Errorf(scheduler.ErrNotFound, "there is no telescope %s in the live campaign", in.Code))
		}
	}
	body := &NowAnswer{Telescope: in.Code, ServerTime: at}
	tag := "n"
	if now != nil {
		v := scanView(now)
		body.Now, tag = &v, tag+fmt.Sprintf("%d.%d", v.ID, v.Version)
	}
	if next != nil {
		v := scanView(next)
		body.Next, tag = &v, tag+fmt.Sprintf("-%d.%d", v.ID, v.Version)
	}
	out := &nowOutput{Status: http.StatusOK, ETag: `"` + tag + `"`, CacheControl: "private, no-cache", Body: body}
	if matches(in.IfNoneMatch, out.ETag) {
		out.Status, out.Body = http.StatusNotModified, nil
	}
	return out, nil
}

// matches tells whether a header lists an ETag.
func matches(header, tag string) bool {
	for part := range strings.SplitSeq(header, ",") {
		part = strings.TrimPrefix(strings.TrimSpace(part), "W/")
		if part == tag || part == "*" {
			return true
		}
	}
	return false
}

type sheetInput struct {
	Code  string `path:"code" maxLength:"100" example:"BRM"`
	Night string `path:"night" example:"2027-01-18" doc:"local date on which the night begins"`
}

type sheetOutput struct{ Body *runsheet.Sheet }

func (a *API) runSheet(ctx context.Context, in *sheetInput) (*sheetOutput, error) {
	s, err := a.sheets.Sheet(ctx, in.Code, in.Night)
	if err != nil {
		return nil, fail(err)
	}
	return &sheetOutput{s}, nil
}
