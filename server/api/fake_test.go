package api

import (
	"context"
	"encoding/json"
	"net/http"
	"net/http/httptest"
	"strings"
	"testing"
	"time"

	"github.com/go-chi/chi/v5"

	"cadencewright/scheduler"
	"cadencewright/server/auth"
	"cadencewright/server/httperr"
	"cadencewright/server/logline"
	"cadencewright/server/runsheet"
	"cadencewright/server/store"
)

// monday begins the week that the fake database has a plan for.
var monday = time.Date(2027, 1, 18, 0, 0, 0, 0, time.UTC)

// fake is a database, a queue and a maker of run sheets: it answers what it
// holds, or fails, and keeps what it was asked.
type fake struct {
	fail  error            // of every call
	fails map[string]error // of single ones, by name

	ref       store.CampaignRef
	campaign  *scheduler.Campaign
	now, next *store.StoredScan
	scans     []store.StoredScan
	plans     []store.PlanInfo
	plan      *scheduler.Plan
	job       *store.PlanJob
	entries   []store.Entry

	asked map[string][]any // the arguments of the last call, by name
}

// failing notes a call and is the error that it is to end with.
func (f *fake) failing(name string, args ...any) error {
	f.asked[name] = args
	if err := f.fails[name]; err != nil {
		return err
	}
	return f.fail
}

func (f *fake) LiveCampaign(context.Context) (store.CampaignRef, error) {
	return f.ref, f.failing("LiveCampaign")
}

func (f *fake) Campaigns(context.Context) ([]store.CampaignRef, error) {
	return []store.CampaignRef{f.ref, {ID: 9, Name: "Earlier"}}, f.failing("Campaigns")
}

func (f *fake) LoadCampaign(_ context.Context, id int64) (*scheduler.Campaign, store.CampaignRef, error) {
	return f.campaign, f.ref, f.failing("LoadCampaign", id)
}

func (f *fake) HasTelescope(_ context.Context, code string) (bool, error) {
	return f.campaign.TelescopeByCode(code) != nil, f.failing("HasTelescope", code)
}

func (f *fake) NowNext(_ context.Context, code string, at time.Time) (now, next *store.StoredScan, err error) {
	return f.now, f.next, f.failing("NowNext", code, at)
}

func (f *fake) LiveScans(_ context.Context, code string, from, to time.Time) ([]store.StoredScan, error) {
	return f.scans, f.failing("LiveScans", code, from, to)
}

func (f *fake) Scan(_ context.Context, id int64) (store.StoredScan, error) {
	err := f.failing("Scan", id)
	for _, x := range f.scans {
		if x.ID == id {
			return x, err
		}
	}
	if err == nil {
		err = scheduler.Errorf(scheduler.ErrNotFound, "there is no scan %d", id)
	}
	return store.StoredScan{}, err
}

func (f *fake) ReportOutcome(ctx context.Context, id int64, r store.Report, actor, only string, idem store.Idempotency) (store.StoredScan, error) {
	if err := f.failing("ReportOutcome", r, actor, only, idem); err != nil {
		return store.StoredScan{}, err
	}
	x, err := f.Scan(ctx, id)
	x.State = r.State
	return x, err
}

func (f *fake) PlansOf(_ context.Context, campaign int64, h scheduler.Horizon, limit int) ([]store.PlanInfo, error) {
	return f.plans, f.failing("PlansOf", campaign, h, limit)
}

func (f *fake) Plan(_ context.Context, id int64) (store.PlanInfo, *scheduler.Plan, []store.StoredScan, error) {
	return f.plans[0], f.plan, f.scans, f.failing("Plan", id)
}

func (f *fake) PlanFacts(_ context.Context, id int64) (store.PlanInfo, error) {
	return f.plans[0], f.failing("PlanFacts", id)
}

func (f *fake) Issue(_ context.Context, plan, version int64, actor string) (store.PlanInfo, error) {
	if err := f.failing("Issue", plan, version, actor); err != nil {
		return store.PlanInfo{}, err
	}
	p := f.plans[0]
	if version != p.Version {
		return store.PlanInfo{}, &store.StaleError{What: "plan 17", Current: p.Version}
	}
	p.State, p.Version, p.Revision, p.IssuedBy, p.IssuedAt = store.PlanIssued, p.Version+1, 3, actor, monday
	return p, nil
}

func (f *fake) Job(_ context.Context, id int64) (store.PlanJob, error) {
	if err := f.failing("Job", id); err != nil {
		return store.PlanJob{}, err
	}
	return *f.job, nil
}

func (f *fake) LastJob(_ context.Context, campaign int64, h scheduler.Horizon) (*store.PlanJob, error) {
	return f.job, f.failing("LastJob", campaign, h)
}

func (f *fake) StopJob(_ context.Context, id int64, actor string) error {
	return f.failing("StopJob", id, actor)
}

func (f *fake) Journal(_ context.Context, campaign, before int64, limit int) ([]store.Entry, error) {
	return f.entries[:min(limit, len(f.entries))], f.failing("Journal", campaign, before, limit)
}

// planner and sheets are the fake in its other parts.
type (
	planner struct{ *fake }
	sheets  struct{ *fake }
)

func (p planner) Plan(_ context.Context, campaign int64, h scheduler.Horizon, seed int64, actor string) (store.PlanJob, error) {
	if err := p.failing("Planner", campaign, h, seed, actor); err != nil {
		return store.PlanJob{}, err
	}
	return *p.job, nil
}

func (s sheets) Sheet(_ context.Context, telescope, night string) (*runsheet.Sheet, error) {
	return &exampleSheet, s.failing("Sheet", telescope, night)
}

// stored is a scan of half an hour.
func stored(id int64, telescope string, start time.Time) store.StoredScan {
	return store.StoredScan{ID: id, PlanID: 17, Revision: 2, State: store.ScanPlanned, Live: true, Version: 1,
		Scan: scheduler.Scan{Block: "B1", Telescope: telescope, Source: "SIM J0412+1833", Receiver: "L1", Start: start, Minutes: 30, TOAUs: 0.8}}
}

// newFake holds one telescope, two sources, a draft, a job and two scans.
func newFake() *fake {
	at := monday.Add(20 * time.Hour)
	return &fake{fails: map[string]error{}, asked: map[string][]any{},
		ref:      store.CampaignRef{ID: 1, Name: "Array", Start: monday, End: monday.AddDate(0, 3, 0), Live: true, Revision: 12},
		campaign: small(),
		scans:    []store.StoredScan{stored(41, "BRM", at), stored(42, "BRM", at.Add(time.Hour)), stored(43, "QEB", at)},
		plans: []store.PlanInfo{{ID: 17, CampaignID: 1, From: monday, To: monday.AddDate(0, 0, 7), State: store.PlanDraft, Version: 4, Score: 3, Possible: 5, Bound: 4,
			MadeAt: monday, MadeBy: "Ada"}},
		plan:    &scheduler.Plan{Campaign: "Array", From: monday, To: monday.AddDate(0, 0, 7), Score: 3, Possible: 5, Bound: 4, Certificate: scheduler.Certificate{Bound: 4}},
		job:     &store.PlanJob{ID: 5, CampaignID: 1, From: monday, To: monday.AddDate(0, 0, 7), State: store.JobRunning, AskedBy: "Ada", AskedAt: monday},
		entries: []store.Entry{{ID: 9, At: monday, Actor: "Ada", Action: "issue"}, {ID: 7, At: monday, Actor: "Ada", Action: "draft"}, {ID: 3, At: monday, Actor: "Ada", Action: "import"}},
	}
}

// small is a campaign with one telescope and two sources.
func small() *scheduler.Campaign {
	rx := scheduler.Receiver{Code: "L1", Bands: []string{"L"}, FreqMHz: 1400, BandwidthMHz: 300, NPol: 2, TrecK: 20, TatmK: 2, GainKPerJy: 1, Digitisation: 1}
	c := &scheduler.Campaign{Name: "Array", Start: monday.AddDate(0, -3, 0), End: monday.AddDate(0, 3, 0), GridMin: 5,
		Telescopes: []scheduler.Telescope{{Code: "BRM", Name: "Bramstead", LatitudeDeg: 53, Timezone: "Europe/London", Mount: scheduler.MountEquatorial,
			ElevationMaxDeg: 90, HourAngleRangeH: [2]float64{-6, 6}, RateHADegS: 1, RateDecDegS: 1, Receivers: []scheduler.Receiver{rx}}}}
	for _, name := range []string{"SIM J0412+1833", "SIM J0601+3011"} {
		c.Sources = append(c.Sources, scheduler.Source{Name: name, RADeg: 63, DecDeg: 18, PosEpochMJD: 58000, PeriodS: 0.005, FluxMJy: 1, FluxFreqMHz: 1400, WidthS: 0.0003, ScanMinutes: []int{30}})
		c.CadenceTargets = append(c.CadenceTargets, scheduler.CadenceTarget{Goal: scheduler.Goal{ID: "c" + name[5:9], Source: name, Bands: []string{"L"}, Priority: 2}, EveryD: 7, EarlyD: 1})
	}
	return c
}

// service is the API over a fake, without the layers that find out who asks.
type service struct {
	*fake
	t   *testing.T
	mux *chi.Mux
	who auth.Identity
	log *logline.Line // of the last request
	at  time.Time     // the clock
}

func serve(t *testing.T) *service {
	t.Helper()
	s := &service{fake: newFake(), t: t, mux: chi.NewMux(), who: auth.Identity{Name: "Ada", Role: auth.RoleCoordinator}, at: monday.Add(20 * time.Hour)}
	Register(s.mux, s.fake, planner{s.fake}, sheets{s.fake}, func() time.Time { return s.at }, "1")
	return s
}

// do sends a request; a body is JSON. Headers come in pairs.
func (s *service) do(method, path, body string, header ...string) *httptest.ResponseRecorder {
	s.t.Helper()
	r := httptest.NewRequest(method, Prefix+path, strings.NewReader(body))
	if body != "" {
		r.Header.Set("Content-Type", "application/json")
	}
	for i := 0; i+1 < len(header); i += 2 {
		r.Header.Set(header[i], header[i+1])
	}
	s.log = &logline.Line{ID: "r1"}
	w := httptest.NewRecorder()
	s.mux.ServeHTTP(w, r.WithContext(auth.With(logline.With(r.Context(), s.log), s.who)))
	return w
}

// get fetches JSON into v.
func (s *service) get(path string, v any) {
	s.t.Helper()
	w := s.do(http.MethodGet, path, "")
	if w.Code != http.StatusOK {
		s.t.Fatalf("GET %s: %d %s", path, w.Code, w.Body)
	}
	if err := json.Unmarshal(w.Body.Bytes(), v); err != nil {
		s.t.Fatalf("GET %s: %v: %s", path, err, w.Body)
	}
}

// problem reads a problem document.
func problem(t *testing.T, w *httptest.ResponseRecorder) httperr.Problem {
	t.Helper()
	var p httperr.Problem
	if err := json.Unmarshal(w.Body.Bytes(), &p); err != nil || w.Header().Get("Content-Type") != httperr.ContentType {
		t.Errorf("%d %s is no problem document: %s", w.Code, w.Header().Get("Content-Type"), w.Body)
	}
	return p
}

// wantProblem checks status, kind and, where one is given, the bad field.
func wantProblem(t *testing.T, what string, w *httptest.ResponseRecorder, status int, kind, field string) {
	t.Helper()
	p := problem(t, w)
	if w.Code != status || p.Status != status || !strings.HasSuffix(p.Type, "#"+kind) || p.Detail == "" || p.Title == "" || p.Instance != "r1" {
		t.Errorf("%s: %d %s, want %d %s", what, w.Code, w.Body, status, kind)
	}
	if field != "" && (len(p.Errors) == 0 || p.Errors[0].Pointer != field) {
		t.Errorf("%s: the bad fields are %v, want %s", what, p.Errors, field)
	}
}
