package store_test

import (
	"context"
	"errors"
	"fmt"
	"sync"
	"testing"
	"time"

	"github.com/jackc/pgx/v5"

	"cadencewright/scheduler"
	"cadencewright/server/store"
	"cadencewright/server/store/storetest"
)

// monday begins the week that tests plan.
var monday = time.Date(2027, 2, 22, 0, 0, 0, 0, time.UTC)

var week = scheduler.Horizon{From: monday, To: monday.Add(scheduler.Week)}

// clock is a clock that tests set.
type clock struct {
	mu sync.Mutex
	t  time.Time
}

func (c *clock) now() time.Time {
	c.mu.Lock()
	defer c.mu.Unlock()
	return c.t
}

func (c *clock) set(t time.Time) {
	c.mu.Lock()
	defer c.mu.Unlock()
	c.t = t
}

// array is a small campaign: telescopes AAA and BBB with two receivers each,
// three pulsars, and three blocks of half a day (see blockStart).
func array(name string) *scheduler.Campaign {
	c := &scheduler.Campaign{Name: name, Start: monday, End: monday.AddDate(0, 3, 0), GridMin: 5}
	for i, code := range []string{"AAA", "BBB"} {
		t := scheduler.Telescope{Code: code, Name: "Telescope " + code, LongitudeDeg: float64(20 * i), LatitudeDeg: 50, HeightM: 100,
			Timezone: "UTC", Mount: scheduler.MountAltAz, ElevationMinDeg: 10, ElevationMaxDeg: 85, SetupS: 600, CalS: 60, SwitchS: 60,
			SettleS: 10, AzimuthRangeDeg: [2]float64{-270, 270}, RateAzDegS: 1, RateElDegS: 0.5}
		for _, r := range []string{"L1", "S1"} {
			t.Receivers = append(t.Receivers, scheduler.Receiver{Code: r, Bands: []string{r[:1]}, FreqMHz: 1400, BandwidthMHz: 300, NPol: 2,
				TrecK: 20, TatmK: 2, GainKPerJy: 1.5, Digitisation: 1})
		}
		c.Telescopes = append(c.Telescopes, t)
	}
	for i, n := range []string{"SIM J0100+2000", "SIM J0200+2000", "SIM J0300+2000"} {
		c.Sources = append(c.Sources, scheduler.Source{Name: n, RADeg: float64(15 * (i + 1)), DecDeg: 20, PosEpochMJD: 51544.5, PeriodS: 0.003,
			DMPcCm3: 20, FluxMJy: 2, FluxFreqMHz: 1400, SpectralIdx: -1.6, WidthS: 0.0002, ScanMinutes: []int{30}})
		c.CadenceTargets = append(c.CadenceTargets, scheduler.CadenceTarget{Goal: scheduler.Goal{ID: fmt.Sprintf("c%d", i+1), Source: n,
			Bands: []string{"L"}, Priority: 1}, EveryD: 7, EarlyD: 1.75})
	}
	for id, start := range blockStart {
		c.Blocks = append(c.Blocks, scheduler.Block{ID: id, Telescope: blockTelescope[id], Start: start, End: start.Add(12 * time.Hour), Receivers: []string{"L1", "S1"}})
	}
	return c
}

var (
	blockStart = map[string]time.Time{"a1": monday, "a2": monday.AddDate(0, 0, 1), "b1": monday}

	blockTelescope = map[string]string{"a1": "AAA", "a2": "AAA", "b1": "BBB"}
)

// scan is half an hour, or so many minutes, of a source in a block.
func scan(block string, startMin, source int, minutes ...int) scheduler.Scan {
	x := scheduler.Scan{Block: block, Telescope: blockTelescope[block], Source: fmt.Sprintf("SIM J0%d00+2000", source), Receiver: "L1",
		Start: blockStart[block].Add(time.Duration(startMin) * time.Minute), Minutes: 30, TOAUs: 1.5,
		Earns: []scheduler.Earning{{Goal: fmt.Sprintf("c%d", source), Unit: fmt.Sprintf("c%d#1", source), Value: 1}}}
	if len(minutes) > 0 {
		x.Minutes = minutes[0]
	}
	return x
}

// planOf is a plan of the week that holds scans.
func planOf(campaign string, scans ...scheduler.Scan) *scheduler.Plan {
	return &scheduler.Plan{Campaign: campaign, From: week.From, To: week.To, Score: float64(len(scans)), Possible: 10, Bound: 9, Scans: scans,
		Certificate: scheduler.Certificate{Prices: map[string]float64{"c1#1": 0.5}, Bound: 9}}
}

// world is a store with the small campaign live in it.
type world struct {
	testing.TB
	*store.Store
	clock *clock
	dsn   string
	id    int64 // of the campaign
}

func newWorld(t testing.TB) *world {
	t.Helper()
	w := &world{TB: t, clock: &clock{t: monday.Add(-48 * time.Hour)}, dsn: storetest.DSN(t)}
	w.Store = storetest.OpenDSN(t, w.dsn, w.clock.now)
	var err error
	if w.id, err = w.ImportCampaign(context.Background(), array("Array"), "ada"); err != nil {
		t.Fatal(err)
	}
	return w
}

// draft stores a plan with scans.
func (w *world) draft(scans ...scheduler.Scan) int64 {
	w.Helper()
	id, err := w.SavePlan(context.Background(), w.id, planOf("Array", scans...), store.PlanMeta{}, "ada")
	if err != nil {
		w.Fatal(err)
	}
	return id
}

// issue stores a plan with scans and issues it.
func (w *world) issue(scans ...scheduler.Scan) int64 {
	w.Helper()
	id := w.draft(scans...)
	if _, err := w.Issue(context.Background(), id, 1, "ada"); err != nil {
		w.Fatal(err)
	}
	return id
}

// scans are the scans of a plan in its order.
func (w *world) scans(plan int64) []store.StoredScan {
	w.Helper()
	_, _, list, err := w.Plan(context.Background(), plan)
	if err != nil {
		w.Fatal(err)
	}
	return list
}

// report reports a state of a scan, with a cause where it is lost.
func (w *world) report(scan int64, state string) (store.StoredScan, error) {
	r := store.Report{State: state}
	if state == store.ScanLost {
		r.Cause = "wind"
	}
	if state == store.ScanPartial {
		x, err := w.Scan(context.Background(), scan)
		if err != nil {
			return x, err
		}
		end := x.Start.Add(10 * time.Minute)
		r.EndedAt = &end
	}
	return w.ReportOutcome(context.Background(), scan, r, "key AAA", "", store.Idempotency{})
}

// must reports a state that has to be accepted.
func (w *world) must(scan int64, state string) store.StoredScan {
	w.Helper()
	x, err := w.report(scan, state)
	if err != nil {
		w.Fatal(err)
	}
	return x
}

// exec runs SQL past the store.
func (w *world) exec(sql string, args ...any) {
	w.Helper()
	if _, err := w.Pool().Exec(context.Background(), sql, args...); err != nil {
		w.Fatal(err)
	}
}

// number runs SQL that answers with one number.
func (w *world) number(sql string, args ...any) int {
	w.Helper()
	var n int
	if err := w.Pool().QueryRow(context.Background(), sql, args...).Scan(&n); err != nil {
		w.Fatal(err)
	}
	return n
}

// wantField fails the test unless the error is of a kind and names a field.
func wantField(t testing.TB, what string, err, kind error, field string) {
	t.Helper()
	var f *store.FieldError
	if !errors.Is(err, kind) || !errors.As(err, &f) || f.Field != field || f.Message == "" {
		t.Errorf("%s: %v, want %v in field %s", what, err, kind, field)
	}
}

// notQueued is for jobs that no worker is to take.
func notQueued(context.Context, pgx.Tx, int64) error { return nil }

// named are the arguments of a query by name.
func named(args map[string]any) pgx.NamedArgs { return args }
