package planning

import (
	"bytes"
	"context"
	"os"
	"sync"
	"testing"
	"time"

	"cadencewright/scheduler"
	"cadencewright/server/store"
	"cadencewright/server/store/storetest"
	"cadencewright/testdata"
)

func TestMain(m *testing.M) { storetest.Run(m) }

// campaignFile reads one of the test campaigns.
func campaignFile(t testing.TB, name string) *scheduler.Campaign {
	t.Helper()
	data, err := os.ReadFile(testdata.Path("campaigns", name+".json"))
	if err != nil {
		t.Fatal(err)
	}
	c, err := scheduler.ReadCampaign(data)
	if err != nil {
		t.Fatal(err)
	}
	return c
}

// noted is one call of JobProgress.
type noted struct {
	effort, of   int64
	score, bound float64
}

// fake is a database with one campaign and one job in it.
type fake struct {
	mu       sync.Mutex
	campaign *scheduler.Campaign
	job      store.PlanJob
	fails    map[string]error // by method
	progress func(n int) bool // called with 1, 2, …; tells whether to stop

	loaded int
	told   []noted
	plans  []store.PlanInfo // with what each holds
	issued *scheduler.Plan
	scans  []store.StoredScan
	saved  *scheduler.Plan
	meta   store.PlanMeta
	actor  string
	ended  string
	reason string
}

// newFake asks for a plan of all of a test campaign.
func newFake(t testing.TB, name string) *fake {
	c := campaignFile(t, name)
	return &fake{campaign: c, job: store.PlanJob{ID: 5, CampaignID: 3, From: c.Start, To: c.End, State: store.JobQueued, Seed: 7, AskedBy: "Ada"},
		fails: map[string]error{}}
}

func (f *fake) LoadCampaign(_ context.Context, id int64) (*scheduler.Campaign, store.CampaignRef, error) {
	f.mu.Lock()
	defer f.mu.Unlock()
	f.loaded++
	return f.campaign, store.CampaignRef{ID: id, Name: f.campaign.Name, Revision: 12}, f.fails["LoadCampaign"]
}

func (f *fake) SavePlan(_ context.Context, _ int64, p *scheduler.Plan, meta store.PlanMeta, actor string) (int64, error) {
	f.mu.Lock()
	defer f.mu.Unlock()
	if err := f.fails["SavePlan"]; err != nil {
		return 0, err
	}
	f.saved, f.meta, f.actor, f.job.State = p, meta, actor, store.JobDone
	return 17, nil
}

func (f *fake) PlansOf(context.Context, int64, scheduler.Horizon, int) ([]store.PlanInfo, error) {
	return f.plans, f.fails["PlansOf"]
}

func (f *fake) Plan(_ context.Context, id int64) (store.PlanInfo, *scheduler.Plan, []store.StoredScan, error) {
	return store.PlanInfo{ID: id}, f.issued, f.scans, f.fails["Plan"]
}

func (f *fake) Job(context.Context, int64) (store.PlanJob, error) {
	f.mu.Lock()
	defer f.mu.Unlock()
	return f.job, f.fails["Job"]
}

func (f *fake) JobProgress(_ context.Context, _, effort, of int64, score, bound float64) (bool, error) {
	f.mu.Lock()
	defer f.mu.Unlock()
	f.told = append(f.told, noted{effort, of, score, bound})
	f.job.State = store.JobRunning
	return f.progress != nil && f.progress(len(f.told)), f.fails["JobProgress"]
}

func (f *fake) EndJob(_ context.Context, _ int64, state, problem string) error {
	f.mu.Lock()
	defer f.mu.Unlock()
	f.ended, f.reason, f.job.State = state, problem, state
	return f.fails["EndJob"]
}

// untouched reports whether the job was neither ended nor given a plan.
func (f *fake) untouched() bool { return f.saved == nil && f.ended == "" }

// run carries the fake's job out within a minute.
func (f *fake) run(t *testing.T, effort int64) error {
	t.Helper()
	ctx, cancel := context.WithTimeout(t.Context(), time.Minute)
	defer cancel()
	return (&Planner{Store: f, Effort: effort, Workers: 2}).Run(ctx, f.job.ID)
}

// written is a plan as a file.
func written(t *testing.T, p *scheduler.Plan) []byte {
	t.Helper()
	b, err := scheduler.WritePlan(p)
	if err != nil {
		t.Fatal(err)
	}
	return bytes.TrimSpace(b)
}
