package api

import (
	"context"
	"net/http"

	"cadencewright/scheduler"
	"cadencewright/server/runsheet"
	"cadencewright/server/store"
)

// Telescope is a telescope as the API shows it.
type Telescope struct {
	Code            string     `json:"code" example:"BRM"`
	Name            string     `json:"name" example:"Bramstead"`
	LongitudeDeg    float64    `json:"longitude_deg" doc:"east-positive" example:"-2.31"`
	LatitudeDeg     float64    `json:"latitude_deg" example:"53.2"`
	HeightM         float64    `json:"height_m" doc:"above the ellipsoid" example:"80"`
	Timezone        string     `json:"timezone" example:"Europe/London"`
	Mount           string     `json:"mount" enum:"altaz,equatorial,transit"`
	ElevationMinDeg float64    `json:"elevation_min_deg" example:"15"`
	ElevationMaxDeg float64    `json:"elevation_max_deg" example:"85"`
	SunMinDeg       float64    `json:"sun_min_deg" doc:"least separation from the Sun" example:"10"`
	SetupS          float64    `json:"setup_s" doc:"before the first scan of a block" example:"300"`
	CalS            float64    `json:"cal_s" doc:"calibration before every scan" example:"60"`
	Receivers       []Receiver `json:"receivers" nullable:"false"`
}

// Receiver is a receiver as the API shows it.
type Receiver struct {
	Code         string   `json:"code" example:"L1"`
	Bands        []string `json:"bands" nullable:"false" example:"[\"L\"]"`
	FreqMHz      float64  `json:"freq_mhz" doc:"centre" example:"1400"`
	BandwidthMHz float64  `json:"bandwidth_mhz" example:"400"`
}

func telescopeView(t *scheduler.Telescope) Telescope {
	v := Telescope{Code: t.Code, Name: t.Name, LongitudeDeg: t.LongitudeDeg, LatitudeDeg: t.LatitudeDeg, HeightM: t.HeightM, Timezone: t.Timezone,
		Mount: string(t.Mount), ElevationMinDeg: t.ElevationMinDeg, ElevationMaxDeg: t.ElevationMaxDeg, SunMinDeg: t.SunMinDeg, SetupS: t.SetupS, CalS: t.CalS,
		Receivers: []Receiver{}}
	for i := range t.Receivers {
		r := &t.Receivers[i]
		v.Receivers = append(v.Receivers, Receiver{r.Code, r.Bands, r.FreqMHz, r.BandwidthMHz})
	}
	return v
}

func (a *API) telescopes() {
	register(a, operation("campaign", http.MethodGet, "/telescopes", "list-telescopes", "The campaign's telescopes",
		"All telescopes of the live campaign with their receivers.", 404, 422), exampleList(exampleTelescope), a.listTelescopes)
	register(a, operation("campaign", http.MethodGet, "/telescopes/{code}", "get-telescope", "One telescope", "A telescope of the live campaign.", 404), exampleTelescope, a.getTelescope)
	register(a, notModified(operation("control", http.MethodGet, "/telescopes/{code}/now", "now", "What to do now and next",
		"The scan that is under way or due at the telescope, and the one after it. With If-None-Match the answer is 304 while neither has changed. "+
			"A scan that was reported over is neither.", 404)), exampleNow, a.now)
	register(a, operation("control", http.MethodGet, "/telescopes/{code}/run-sheets/{night}", "run-sheet", "A night's run sheet",
		"Local noon to local noon, named by the local date on which the night begins. A sheet commands nothing: the operator on duty, local safety rules "+
			"and interlocks come first.", 404, 422), exampleSheet, a.runSheet)
}

// live is the live campaign as it stands.
func (a *API) live(ctx context.Context) (*scheduler.Campaign, store.CampaignRef, error) {
	ref, err := a.store.LiveCampaign(ctx)
	if err != nil {
		return nil, ref, err
	}
	return a.store.LoadCampaign(ctx, ref.ID)
}

func (a *API) listTelescopes(ctx context.Context, in *PageInput) (*listOutput[Telescope], error) {
	c, _, err := a.live(ctx)
	if err != nil {
		return nil, err
	}
	all := make([]Telescope, 0, len(c.Telescopes))
	for i := range c.Telescopes {
		all = append(all, telescopeView(&c.Telescopes[i]))
	}
	page, err := pageOf(all, *in, func(t *Telescope) string { return t.Code }, nil)
	return &listOutput[Telescope]{page}, err
}

// CodeInput names a telescope in a path.
type CodeInput struct {
	Code string `path:"code" maxLength:"100" example:"BRM" doc:"a telescope's code"`
}

type telescopeOutput struct{ Body Telescope }

func (a *API) getTelescope(ctx context.Context, in *CodeInput) (*telescopeOutput, error) {
	c, _, err := a.live(ctx)
	if err != nil {
		return nil, err
	}
	t := c.TelescopeByCode(in.Code)
	if t == nil {
		return nil, noTelescope(in.Code)
	}
	return &telescopeOutput{telescopeView(t)}, nil
}

func noTelescope(code string) error {
	return scheduler.Errorf(scheduler.ErrNotFound, "there is no telescope %.100q in the live campaign", code)
}

// known makes sure that there is such a telescope.
func (a *API) known(ctx context.Context, code string) error {
	ok, err := a.store.HasTelescope(ctx, code)
	if err == nil && !ok {
		err = noTelescope(code)
	}
	return err
}

type sheetInput struct {
	Code  string `path:"code" maxLength:"100" example:"BRM" doc:"a telescope's code"`
	Night string `path:"night" maxLength:"20" example:"2027-01-18" doc:"local date on which the night begins"`
}

type sheetOutput struct{ Body *runsheet.Sheet }

func (a *API) runSheet(ctx context.Context, in *sheetInput) (*sheetOutput, error) {
	s, err := a.sheets.Sheet(ctx, in.Code, in.Night)
	return &sheetOutput{s}, err
}
