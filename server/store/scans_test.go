package store_test

import (
	"context"
	"errors"
	"strings"
	"testing"
	"time"

	"cadencewright/scheduler"
	"cadencewright/server/store"
)

// At every minute of a night, what a telescope is to do is what a look through
// all of its scans finds.
func TestNowNextIsWhatASearchFinds(t *testing.T) {
	t.Parallel()
	w := newWorld(t)
	plan := w.issue(scan("a1", 0, 1), scan("a1", 30, 2), scan("a1", 75, 3), scan("a1", 120, 1, 90), scan("a2", 0, 2), scan("b1", 10, 3))
	list := w.scans(plan)
	w.clock.set(monday.Add(40 * time.Minute))
	w.must(list[0].ID, store.ScanObserving)
	w.must(list[1].ID, store.ScanDone)
	w.must(list[2].ID, store.ScanLost)
	list = w.scans(plan)
	for min := -20; min < 26*60; min += 5 {
		at := monday.Add(time.Duration(min) * time.Minute)
		for _, telescope := range []string{"AAA", "BBB"} {
			var wantNow, wantNext int64
			for i := len(list) - 1; i >= 0; i-- { // in order of start, so the last found is the first
				x := &list[i]
				if x.Telescope != telescope || x.State != store.ScanPlanned && x.State != store.ScanObserving || !x.End().After(at) {
					continue
				}
				if x.Start.After(at) {
					wantNext = x.ID
				} else {
					wantNow = x.ID
				}
			}
			now, next, err := w.NowNext(t.Context(), telescope, at)
			if err != nil {
				t.Fatal(err)
			}
			if got := idOf(now); got != wantNow {
				t.Errorf("%s at %s: now is %d, want %d", telescope, at.Format("Mon 15:04"), got, wantNow)
			}
			if got := idOf(next); got != wantNext {
				t.Errorf("%s at %s: next is %d, want %d", telescope, at.Format("Mon 15:04"), got, wantNext)
			}
		}
	}
}

func idOf(x *store.StoredScan) int64 {
	if x == nil {
		return 0
	}
	return x.ID
}

// Telescopes of campaigns that are not live, and unknown ones, have nothing to
// do.
func TestOnlyTheLiveCampaignIsDone(t *testing.T) {
	t.Parallel()
	w := newWorld(t)
	w.issue(scan("a1", 0, 1))
	other, err := w.ImportCampaign(t.Context(), array("Other"), "ada")
	if err != nil {
		t.Fatal(err)
	}
	look := func() (now *store.StoredScan, scans int, known bool) {
		t.Helper()
		now, _, err := w.NowNext(t.Context(), "AAA", monday)
		if err != nil {
			t.Fatal(err)
		}
		list, err := w.LiveScans(t.Context(), "", week.From, week.To)
		if err != nil {
			t.Fatal(err)
		}
		if known, err = w.HasTelescope(t.Context(), "AAA"); err != nil {
			t.Fatal(err)
		}
		return now, len(list), known
	}
	if now, n, known := look(); now == nil || n != 1 || !known {
		t.Errorf("now %v, %d scans, known %v", now, n, known)
	}
	if err := w.SetLive(t.Context(), other, "ada"); err != nil {
		t.Fatal(err)
	}
	if now, n, known := look(); now != nil || n != 0 || !known {
		t.Errorf("of a campaign that is not live: now %v, %d scans, known %v", now, n, known)
	}
	if now, next, err := w.NowNext(t.Context(), "ZZZ", monday); now != nil || next != nil || err != nil {
		t.Errorf("an unknown telescope: %v, %v, %v", now, next, err)
	}
	if known, err := w.HasTelescope(t.Context(), "ZZZ"); known || err != nil {
		t.Errorf("an unknown telescope is known: %v", err)
	}
}

func TestLiveScansOfARange(t *testing.T) {
	t.Parallel()
	w := newWorld(t)
	plan := w.issue(scan("a1", 0, 1), scan("a1", 30, 2), scan("b1", 15, 3), scan("a2", 0, 1, 600))
	w.draft(scan("a1", 300, 1))
	ids := w.scans(plan)
	minute := func(n int) time.Time { return monday.Add(time.Duration(n) * time.Minute) }
	for _, x := range []struct {
		name, telescope string
		from, to        time.Time
		want            []int
	}{
		{"all", "", week.From, week.To, []int{0, 2, 1, 3}},
		{"one telescope", "BBB", week.From, week.To, []int{2}},
		{"the end of one and the start of the next", "AAA", minute(29), minute(31), []int{0, 1}},
		{"an end is not in it", "AAA", minute(30), minute(31), []int{1}},
		{"nor is a start at its end", "AAA", minute(0), minute(30), []int{0}},
		{"in the middle of a long one", "", minute(24*60 + 500), minute(24*60 + 501), []int{3}},
		{"before all", "", minute(-100), minute(0), nil},
		{"after all", "", minute(24*60 + 600), week.To, nil},
	} {
		list, err := w.LiveScans(t.Context(), x.telescope, x.from, x.to)
		if err != nil || len(list) != len(x.want) {
			t.Errorf("%s: %d scans, want %d (%v)", x.name, len(list), len(x.want), err)
			continue
		}
		for i := range list {
			if list[i].ID != ids[x.want[i]].ID || !list[i].Live || list[i].Revision != 1 {
				t.Errorf("%s: %d is %+v, want scan %d", x.name, i, list[i], x.want[i])
			}
		}
	}
	_, err := w.LiveScans(t.Context(), "", week.To, week.From)
	wantField(t, "a range from back to front", err, scheduler.ErrInvalid, "to")
	if _, err := w.Scan(t.Context(), 4711); !errors.Is(err, scheduler.ErrNotFound) || !strings.Contains(err.Error(), "4711") {
		t.Errorf("a scan that is not there: %v", err)
	}
}

// With thousands of scans a list says that it is too long rather than being cut
// short, and what a telescope is to do is looked up in its index.
func TestThousandsOfScans(t *testing.T) {
	t.Parallel()
	w := newWorld(t)
	w.issue(scan("a1", 0, 1))
	w.exec(`insert into scan (campaign_id, plan_id, telescope_id, source_id, receiver_id, ephemeris_id, block_code, source_name, receiver, span, minutes, pinned, toa_us, live)
		select s.campaign_id, s.plan_id, s.telescope_id, s.source_id, s.receiver_id, s.ephemeris_id, s.block_code, s.source_name, s.receiver,
			tstzrange($1::timestamptz + n * interval '1 minute', $1::timestamptz + (n + 1) * interval '1 minute'), 1, false, 1, true
		from scan s, generate_series(1000, 999 + $2::integer) n`, monday, store.MaxScans)
	from, to := monday, monday.AddDate(0, 0, 14)
	_, err := w.LiveScans(t.Context(), "", from, to)
	if !errors.Is(err, scheduler.ErrTooLarge) {
		t.Errorf("%d scans and one: %v", store.MaxScans, err)
	}
	list, err := w.LiveScans(t.Context(), "", from.Add(time.Hour), to)
	if err != nil || len(list) != store.MaxScans {
		t.Errorf("%d scans, want %d (%v)", len(list), store.MaxScans, err)
	}
	w.exec("analyze")
	plan := explain(t, w, store.QueryNowNext, map[string]any{"telescope": "AAA", "at": monday.AddDate(0, 0, 2)})
	if strings.Count(plan, "Index Scan using scan_to_do")+strings.Count(plan, "Index Scan Backward using scan_to_do")+
		strings.Count(plan, "Index Only Scan using scan_to_do") < 2 || strings.Contains(plan, "Seq Scan on scan ") {
		t.Errorf("now and next are looked for like this:\n%s", plan)
	}
	now, next, err := w.NowNext(t.Context(), "AAA", monday.AddDate(0, 0, 1))
	if err != nil || now == nil || next == nil || !next.Start.Equal(now.End()) {
		t.Errorf("now %v, next %v, %v", now, next, err)
	}
}

// explain is how Postgres goes about a query.
func explain(t *testing.T, w *world, query string, args map[string]any) string {
	t.Helper()
	rows, err := w.Pool().Query(context.Background(), "explain "+query, named(args))
	if err != nil {
		t.Fatal(err)
	}
	defer rows.Close()
	var lines []string
	for rows.Next() {
		var s string
		if err := rows.Scan(&s); err != nil {
			t.Fatal(err)
		}
		lines = append(lines, s)
	}
	if err := rows.Err(); err != nil {
		t.Fatal(err)
	}
	return strings.Join(lines, "\n")
}
