package api

import (
	"context"
	"fmt"
	"net/http"
	"strings"
	"time"

	"cadencewright/server/logline"
)

// NowAnswer is what a telescope is to do now and after that.
type NowAnswer struct {
	Telescope    string    `json:"telescope" example:"BRM"`
	ServerTime   time.Time `json:"server_time" doc:"the service's clock: compare it with yours"`
	PlanRevision int       `json:"plan_revision" doc:"of the issued plan that now, or else next, is part of; 0 with neither" example:"2"`
	Now          *Scan     `json:"now,omitempty" doc:"the scan under way or due; left out: none"`
	Next         *Scan     `json:"next,omitempty" doc:"the scan after that; left out: none is planned"`
}

type nowInput struct {
	CodeInput
	IfNoneMatch string `header:"If-None-Match" maxLength:"400" doc:"ETag of the last answer"`
}

type nowOutput struct {
	Status       int
	ETag         string `header:"ETag"`
	CacheControl string `header:"Cache-Control"`
	Body         *NowAnswer
}

// now answers what a control script asks again and again: one query.
func (a *API) now(ctx context.Context, in *nowInput) (*nowOutput, error) {
	logline.From(ctx).Set("telescope", in.Code)
	at := a.clock().UTC()
	now, next, err := a.store.NowNext(ctx, in.Code, at)
	if err != nil {
		return nil, err
	}
	if now == nil && next == nil { // nothing planned, or no such telescope
		if err := a.known(ctx, in.Code); err != nil {
			return nil, err
		}
	}
	body := &NowAnswer{Telescope: in.Code, ServerTime: at.Truncate(time.Millisecond)}
	// The tag names both scans with their places and versions: the clock alone
	// moves a scan from next to now, a new plan brings other scans.
	tag := "n"
	if next != nil {
		v := scanView(next)
		body.Next, body.PlanRevision = &v, v.Revision
	}
	if now != nil {
		v := scanView(now)
		body.Now, body.PlanRevision = &v, v.Revision
		tag += fmt.Sprintf("%d.%d", v.ID, v.Version)
	}
	if next != nil {
		tag += fmt.Sprintf("-%d.%d", body.Next.ID, body.Next.Version)
	}
	out := &nowOutput{Status: http.StatusOK, ETag: `"` + tag + `"`, CacheControl: "private, no-cache", Body: body}
	if matches(in.IfNoneMatch, out.ETag) {
		out.Status, out.Body = http.StatusNotModified, nil
	}
	return out, nil
}

// matches tells whether an If-None-Match header lists an ETag. A weak tag is
// the same answer in another encoding, which is the same here.
func matches(header, tag string) bool {
	for part := range strings.SplitSeq(header, ",") {
		part = strings.TrimPrefix(strings.TrimSpace(part), "W/")
		if part == tag || part == "*" {
			return true
		}
	}
	return false
}
