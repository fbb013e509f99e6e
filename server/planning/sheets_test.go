package planning

import (
	"context"
	"errors"
	"slices"
	"strconv"
	"testing"
	"time"

	"github.com/jackc/pgx/v5"

	"cadencewright/scheduler"
	"cadencewright/server/store"
	"cadencewright/server/store/storetest"
)

// issued is a real database with small-1 live, and its week planned by a job
// and issued.
func issued(t *testing.T) (*store.Store, *scheduler.Campaign, store.PlanInfo) {
	t.Helper()
	s, ctx := storetest.Open(t, nil), t.Context()
	c := campaignFile(t, "small-1")
	id, err := s.ImportCampaign(ctx, c, "test")
	if err != nil {
		t.Fatal(err)
	}
	h := scheduler.Horizon{From: c.Start, To: c.End}
	job, err := s.AddJob(ctx, id, h, 3, "Ada", func(context.Context, pgx.Tx, int64) error { return nil })
	if err != nil {
		t.Fatal(err)
	}
	if err := (&Planner{Store: s, Effort: 50, Workers: 1}).Run(ctx, job.ID); err != nil {
		t.Fatal(err)
	}
	if job, err = s.Job(ctx, job.ID); err != nil || job.State != store.JobDone || job.PlanID == 0 || job.Score <= 0 || job.Bound == nil {
		t.Fatalf("the job is %+v, %v", job, err)
	}
	facts, err := s.PlanFacts(ctx, job.PlanID)
	if err != nil {
		t.Fatal(err)
	}
	if facts, err = s.Issue(ctx, facts.ID, facts.Version, "Ada"); err != nil {
		t.Fatal(err)
	}
	return s, c, facts
}

// Every scan of an issued week stands on exactly one sheet, with the plan's
// revision on it.
func TestSheetsOfAnIssuedWeek(t *testing.T) {
	s, c, facts := issued(t)
	_, plan, scans, err := s.Plan(t.Context(), facts.ID)
	if err != nil || len(plan.Scans) == 0 {
		t.Fatalf("%d scans, %v", len(plan.Scans), err)
	}
	seen := map[string]int{}
	for i := range c.Telescopes {
		for d := -1; d < 9; d++ {
			night := c.Start.AddDate(0, 0, d).Format(time.DateOnly)
			sheet, err := Sheets{s}.Sheet(t.Context(), c.Telescopes[i].Code, night)
			if err != nil {
				t.Fatal(err)
			}
			for _, b := range sheet.Blocks {
				for _, x := range b.Scans {
					seen[x.ID]++
					if sheet.PlanRevision != 1 || sheet.IssuedBy != "Ada" {
						t.Errorf("%s: revision %d by %q", night, sheet.PlanRevision, sheet.IssuedBy)
					}
				}
			}
		}
	}
	for i := range scans {
		if id := strconv.FormatInt(scans[i].ID, 10); seen[id] != 1 {
			t.Errorf("scan %s stands on %d sheets", id, seen[id])
		}
	}
}

// sheetStore is a live campaign with one block of telescope BRM on the night of
// the 18th, and scans that only partly belong on its sheet.
type sheetStore struct {
	fails  map[string]error
	scans  []store.StoredScan
	asked  [2]time.Time
	planID int64
}

var evening = time.Date(2027, 1, 18, 20, 0, 0, 0, time.UTC)

func (s *sheetStore) LiveCampaign(context.Context) (store.CampaignRef, error) {
	return store.CampaignRef{ID: 1}, s.fails["LiveCampaign"]
}

func (s *sheetStore) LoadCampaign(context.Context, int64) (*scheduler.Campaign, store.CampaignRef, error) {
	t := scheduler.Telescope{Code: "BRM", Name: "Bramstead", LatitudeDeg: 53, Timezone: "Europe/London", Mount: scheduler.MountEquatorial,
		ElevationMinDeg: 5, ElevationMaxDeg: 89, HourAngleRangeH: [2]float64{-12, 12}, RateHADegS: 1, RateDecDegS: 1,
		Receivers: []scheduler.Receiver{{Code: "L1", Bands: []string{"L"}, FreqMHz: 1400, BandwidthMHz: 300, NPol: 2, TrecK: 20, TatmK: 2, GainKPerJy: 1, Digitisation: 1}}}
	c := &scheduler.Campaign{Name: "one", Start: evening.AddDate(0, 0, -1), End: evening.AddDate(0, 0, 7), GridMin: 5, Telescopes: []scheduler.Telescope{t},
		Sources: []scheduler.Source{{Name: "SIM J0412+7033", RADeg: 63, DecDeg: 70, PeriodS: 0.005, FluxMJy: 2, FluxFreqMHz: 1400, WidthS: 0.0003, ScanMinutes: []int{30}}}}
	for i, id := range []string{"night", "morning"} {
		start := evening.Add(time.Duration(i) * 18 * time.Hour)
		c.Blocks = append(c.Blocks, scheduler.Block{ID: id, Telescope: "BRM", Start: start, End: start.Add(8 * time.Hour), Receivers: []string{"L1"}})
	}
	return c, store.CampaignRef{ID: 1}, s.fails["LoadCampaign"]
}

func (s *sheetStore) LiveScans(_ context.Context, _ string, from, to time.Time) ([]store.StoredScan, error) {
	s.asked = [2]time.Time{from, to}
	return s.scans, s.fails["LiveScans"]
}

func (s *sheetStore) PlanFacts(_ context.Context, id int64) (store.PlanInfo, error) {
	s.planID = id
	return store.PlanInfo{ID: id, Revision: 4, IssuedAt: evening.AddDate(0, 0, -2), IssuedBy: "Ada"}, s.fails["PlanFacts"]
}

// stored is a scan of half an hour in a block.
func stored(id, plan int64, block string, after time.Duration, state string, o *store.Outcome) store.StoredScan {
	return store.StoredScan{ID: id, PlanID: plan, State: state, Outcome: o, Scan: scheduler.Scan{Block: block, Telescope: "BRM", Source: "SIM J0412+7033",
		Receiver: "L1", Start: evening.Add(after), Minutes: 30}}
}

// A sheet holds the scans of the night's blocks that are still to be done or
// were done, with what was reported, under the newest plan's revision.
func TestWhatStandsOnASheet(t *testing.T) {
	s := &sheetStore{scans: []store.StoredScan{
		stored(1, 16, "night", time.Hour, store.ScanPartial, &store.Outcome{State: store.ScanPartial, Cause: "wind", Note: "parked for a while"}),
		stored(2, 17, "night", 2*time.Hour, store.ScanDropped, nil),
		stored(3, 17, "night", 3*time.Hour, store.ScanPlanned, nil),
		stored(4, 18, "morning", 19*time.Hour, store.ScanPlanned, nil),
	}}
	sheet, err := Sheets{s}.Sheet(t.Context(), "BRM", "2027-01-18")
	if err != nil {
		t.Fatal(err)
	}
	var ids []string
	for _, b := range sheet.Blocks {
		for _, x := range b.Scans {
			ids = append(ids, x.ID)
		}
	}
	if !slices.Equal(ids, []string{"1", "3"}) || s.planID != 17 || sheet.PlanRevision != 4 || sheet.IssuedBy != "Ada" {
		t.Errorf("scans %v of plan %d, revision %d", ids, s.planID, sheet.PlanRevision)
	}
	if notes := sheet.Blocks[0].Scans[0].Notes; !slices.Contains(notes, "partial: wind") || !slices.Contains(notes, "parked for a while") {
		t.Errorf("notes %q", notes)
	}
	noon := time.Date(2027, 1, 18, 12, 0, 0, 0, time.UTC)
	if !s.asked[0].Equal(noon) || !s.asked[1].Equal(noon.Add(48*time.Hour)) {
		t.Errorf("asked for scans from %s to %s", s.asked[0], s.asked[1])
	}
	s.scans = nil
	if sheet, err = (Sheets{s}).Sheet(t.Context(), "BRM", "2027-01-18"); err != nil || sheet.PlanRevision != 0 || sheet.Scans() != 0 || len(sheet.Blocks) != 1 {
		t.Errorf("a night that nothing is planned for: %+v, %v", sheet, err)
	}
}

func TestSheetsThatCannotBe(t *testing.T) {
	away := errors.New("away")
	for _, c := range []struct {
		name, telescope, night, fails string
		kind                          error
	}{
		{"another telescope", "ZZZ", "2027-01-18", "", scheduler.ErrNotFound},
		{"no date", "BRM", "tonight", "", scheduler.ErrInvalid},
		{"no such date", "BRM", "2027-02-30", "", scheduler.ErrInvalid},
		{"no live campaign", "BRM", "2027-01-18", "LiveCampaign", away},
		{"no campaign", "BRM", "2027-01-18", "LoadCampaign", away},
		{"no scans", "BRM", "2027-01-18", "LiveScans", away},
		{"no plan", "BRM", "2027-01-18", "PlanFacts", away},
	} {
		s := &sheetStore{fails: map[string]error{c.fails: away}, scans: []store.StoredScan{stored(1, 16, "night", time.Hour, store.ScanPlanned, nil)}}
		if sheet, err := (Sheets{s}).Sheet(t.Context(), c.telescope, c.night); !errors.Is(err, c.kind) || sheet != nil {
			t.Errorf("%s: %v", c.name, err)
		}
	}
}
