package store_test

import (
	"context"
	"errors"
	"fmt"
	"math"
	"reflect"
	"slices"
	"strings"
	"sync"
	"testing"
	"time"

	"cadencewright/scheduler"
	"cadencewright/server/store"
)

// Every state and every report: only the ways that are allowed are taken, and a
// refused report changes nothing.
func TestEveryTransition(t *testing.T) {
	t.Parallel()
	w := newWorld(t)
	states := []string{store.ScanPlanned, store.ScanObserving, store.ScanDone, store.ScanPartial, store.ScanLost, store.ScanDropped}
	allowed := map[string][]string{
		store.ScanPlanned:   {store.ScanObserving, store.ScanDone, store.ScanPartial, store.ScanLost},
		store.ScanObserving: {store.ScanDone, store.ScanPartial, store.ScanLost},
	}
	var scans []scheduler.Scan
	for i := range len(states) * len(states) {
		scans = append(scans, scan("a1", 5*i, 1, 5))
	}
	list := w.scans(w.issue(scans...))
	w.clock.set(monday.Add(12 * time.Hour))
	for i, from := range states {
		for j, to := range states {
			x := list[i*len(states)+j]
			switch from {
			case store.ScanPlanned:
			case store.ScanDropped:
				w.exec("update scan set live = false, state = 'dropped' where id = $1", x.ID)
			default:
				w.must(x.ID, from)
			}
			events := w.number("select count(*) from outcome where scan_id = $1", x.ID)
			_, err := w.report(x.ID, to)
			ok := slices.Contains(allowed[from], to)
			if ok != (err == nil) {
				t.Errorf("%s to %s: %v", from, to, err)
			}
			if err != nil && !errors.Is(err, scheduler.ErrConflict) && !errors.Is(err, scheduler.ErrInvalid) {
				t.Errorf("%s to %s is refused with %v", from, to, err)
			}
			wantState, wantEvents := from, events
			if ok {
				wantState, wantEvents = to, events+1
			}
			got, err := w.Scan(t.Context(), x.ID)
			if err != nil || got.State != wantState || w.number("select count(*) from outcome where scan_id = $1", x.ID) != wantEvents {
				t.Errorf("%s to %s: the scan is %s (%v)", from, to, got.State, err)
			}
		}
	}
	made := w.number("select count(*) from scan where state in ('done', 'partial')")
	if n := w.number("select count(*) from history"); n != made || n == 0 {
		t.Errorf("%d scans were made, %d are in the history", made, n)
	}
	if n := w.number("select revision from campaign"); n != 1+made {
		t.Errorf("the campaign's revision is %d after %d scans were made", n, made)
	}
}

// What a report may say.
func TestReportsThatAreRefused(t *testing.T) {
	t.Parallel()
	w := newWorld(t)
	x := w.scans(w.issue(scan("a1", 60, 1)))[0]
	at := func(min int) *time.Time { m := x.Start.Add(time.Duration(min) * time.Minute); return &m }
	num := func(v float64) *float64 { return &v }
	w.clock.set(*at(40))
	for _, c := range []struct {
		field string
		r     store.Report
	}{
		{"state", store.Report{State: "finished"}},
		{"state", store.Report{State: store.ScanPlanned}},
		{"state", store.Report{}},
		{"cause", store.Report{State: store.ScanLost}},
		{"cause", store.Report{State: store.ScanLost, Cause: "bad luck"}},
		{"cause", store.Report{State: store.ScanDone, Cause: "bad luck"}},
		{"snr", store.Report{State: store.ScanDone, SNR: num(0)}},
		{"snr", store.Report{State: store.ScanDone, SNR: num(-1)}},
		{"snr", store.Report{State: store.ScanDone, SNR: num(math.NaN())}},
		{"toa_us", store.Report{State: store.ScanDone, TOAUs: num(math.Inf(1))}},
		{"note", store.Report{State: store.ScanDone, Note: strings.Repeat("x", 2001)}},
		{"started_at", store.Report{State: store.ScanDone, StartedAt: at(-13 * 60)}},
		{"ended_at", store.Report{State: store.ScanDone, EndedAt: at(13 * 60)}},
		{"ended_at", store.Report{State: store.ScanDone, EndedAt: at(56)}}, // the future
		{"ended_at", store.Report{State: store.ScanDone, StartedAt: at(20), EndedAt: at(20)}},
		{"ended_at", store.Report{State: store.ScanDone, StartedAt: at(20), EndedAt: at(10)}},
		{"ended_at", store.Report{State: store.ScanDone, StartedAt: at(35)}}, // after its planned end
		{"ended_at", store.Report{State: store.ScanPartial}},
		{"ended_at", store.Report{State: store.ScanLost, Cause: "wind", StartedAt: at(20), EndedAt: at(10)}},
	} {
		_, err := w.ReportOutcome(t.Context(), x.ID, c.r, "key", "", store.Idempotency{})
		wantField(t, fmt.Sprintf("%+v", c.r), err, scheduler.ErrInvalid, c.field)
	}
	for name, c := range map[string]struct {
		scan      int64
		telescope string
		kind      error
	}{
		"a scan that is not there":      {4711, "AAA", scheduler.ErrNotFound},
		"a scan of another's telescope": {x.ID, "BBB", scheduler.ErrForbidden},
		"a scan of a draft":             {w.scans(w.draft(scan("a1", 0, 2)))[0].ID, "AAA", scheduler.ErrConflict},
	} {
		if _, err := w.ReportOutcome(t.Context(), c.scan, store.Report{State: store.ScanDone}, "key", c.telescope, store.Idempotency{}); !errors.Is(err, c.kind) {
			t.Errorf("%s: %v, want %v", name, err, c.kind)
		}
	}
	_, err := w.ReportOutcome(t.Context(), x.ID, store.Report{State: store.ScanDone, Note: "a\x00b"}, "key", "", store.Idempotency{})
	if !errors.Is(err, scheduler.ErrInvalid) {
		t.Errorf("a note that is no text: %v", err)
	}
	if n := w.number("select count(*) from outcome"); n != 0 {
		t.Errorf("%d refused reports are stored", n)
	}
}

// A scan cannot be made before its time; losing it can be known before.
func TestReportsBeforeTheirTime(t *testing.T) {
	t.Parallel()
	w := newWorld(t)
	list := w.scans(w.issue(scan("a1", 60, 1), scan("a1", 90, 2)))
	w.clock.set(list[0].Start.Add(-16 * time.Minute))
	for _, state := range []string{store.ScanObserving, store.ScanDone, store.ScanPartial} {
		if _, err := w.report(list[0].ID, state); !errors.Is(err, scheduler.ErrConflict) && !errors.Is(err, scheduler.ErrInvalid) {
			t.Errorf("%s 16 minutes before: %v", state, err)
		}
	}
	w.must(list[1].ID, store.ScanLost)
	w.clock.set(list[0].Start.Add(-14 * time.Minute))
	w.must(list[0].ID, store.ScanObserving)
}

// What was really observed enters the history: by the report, by the one
// before, or as planned; less than half of a scan does not count.
func TestWhatWasMade(t *testing.T) {
	t.Parallel()
	w := newWorld(t)
	for i, c := range []struct {
		name               string
		begun, start, end  int // minutes from the planned start; -99: not said
		state              string
		wantStart, wantMin float64
		counted            bool
	}{
		{"as planned", -99, -99, -99, store.ScanDone, 0, 30, true},
		{"late", -99, 5, -99, store.ScanDone, 5, 25, true},
		{"long", -99, -99, 40, store.ScanDone, 0, 40, true},
		{"moved", -99, 10, 40, store.ScanDone, 10, 30, true},
		{"begun late as said before", 8, -99, -99, store.ScanDone, 8, 22, true},
		{"begun as said now", 8, 2, -99, store.ScanDone, 2, 28, true},
		{"half", -99, -99, 15, store.ScanPartial, 0, 15, true},
		{"less than half", -99, -99, 14, store.ScanPartial, 0, 14, false},
		{"the end of it", -99, 20, -99, store.ScanPartial, 20, 10, false},
		{"broken off", 3, -99, 20, store.ScanPartial, 3, 17, true},
		{"hardly done", -99, -99, 1, store.ScanDone, 0, 1, false},
	} {
		x := w.scans(w.issue(scan("a1", 60*i, 1+i%3)))[0]
		at := func(min int) *time.Time {
			if min == -99 {
				return nil
			}
			m := x.Start.Add(time.Duration(min) * time.Minute)
			return &m
		}
		w.clock.set(x.Start.Add(45 * time.Minute))
		if c.begun != -99 {
			if _, err := w.ReportOutcome(t.Context(), x.ID, store.Report{State: store.ScanObserving, StartedAt: at(c.begun)}, "key", "AAA", store.Idempotency{}); err != nil {
				t.Fatalf("%s: %v", c.name, err)
			}
		}
		snr, toa := 55.5, 0.8
		got, err := w.ReportOutcome(t.Context(), x.ID, store.Report{State: c.state, StartedAt: at(c.start), EndedAt: at(c.end), SNR: &snr, TOAUs: &toa, Note: c.name},
			"key", "AAA", store.Idempotency{})
		if err != nil {
			t.Fatalf("%s: %v", c.name, err)
		}
		if o := got.Outcome; got.State != c.state || o == nil || o.State != c.state || *o.SNR != snr || *o.TOAUs != toa || o.Note != c.name ||
			o.ReportedBy != "key" || !o.ReportedAt.Equal(w.clock.now()) {
			t.Errorf("%s: the answer is %+v with %+v", c.name, got, o)
		}
		list, err := w.SourceHistory(t.Context(), w.id, x.Source, store.HistoryCursor{}, 1)
		if err != nil || len(list) != 1 {
			t.Fatalf("%s: %d scans, %v", c.name, len(list), err)
		}
		h := list[0]
		if h.ScanID != x.ID || h.Start.Sub(x.Start).Minutes() != c.wantStart || h.Minutes != c.wantMin || h.Counted != c.counted ||
			h.Telescope != "AAA" || h.Receiver != "L1" || *h.SNR != snr || *h.TOAUs != toa || *h.Expected != 1.5 || h.Note != c.name {
			t.Errorf("%s: the history has %+v", c.name, h)
		}
	}
}

// A report sent twice is entered once and gets the same answer, whatever has
// happened since; another report under the same key is refused.
func TestReportsSentTwice(t *testing.T) {
	t.Parallel()
	w := newWorld(t)
	list := w.scans(w.issue(scan("a1", 0, 1), scan("a1", 60, 2)))
	w.clock.set(list[1].Start.Add(time.Hour))
	ctx := t.Context()
	send := func(scan int64, state, actor, key, body string) (store.StoredScan, error) {
		return w.ReportOutcome(ctx, scan, store.Report{State: state}, actor, "", store.Idempotency{Key: key, Body: []byte(body)})
	}
	first, err := send(list[0].ID, store.ScanObserving, "one", "k", "b")
	if err != nil {
		t.Fatal(err)
	}
	w.must(list[0].ID, store.ScanDone)
	again, err := send(list[0].ID, store.ScanObserving, "one", "k", "b")
	if err != nil || !reflect.DeepEqual(again, first) || again.State != store.ScanObserving {
		t.Errorf("sent again: %+v, %v, want %+v", again, err, first)
	}
	for name, f := range map[string]func() (store.StoredScan, error){
		"another body": func() (store.StoredScan, error) { return send(list[0].ID, store.ScanObserving, "one", "k", "c") },
		"another scan": func() (store.StoredScan, error) { return send(list[1].ID, store.ScanObserving, "one", "k", "b") },
		"too long a key": func() (store.StoredScan, error) {
			return send(list[1].ID, store.ScanObserving, "one", strings.Repeat("k", 201), "b")
		},
	} {
		_, err := f()
		wantField(t, name, err, scheduler.ErrInvalid, "Idempotency-Key")
	}
	if _, err := send(list[1].ID, store.ScanObserving, "two", "k", "c"); err != nil {
		t.Errorf("another's key of the same name: %v", err)
	}
	// A refused report is not remembered: corrected, it may have the same key.
	if _, err := send(list[1].ID, store.ScanObserving, "two", "k2", "b"); !errors.Is(err, scheduler.ErrConflict) {
		t.Errorf("observing twice: %v", err)
	}
	if _, err := send(list[1].ID, store.ScanDone, "two", "k2", "c"); err != nil {
		t.Errorf("corrected: %v", err)
	}
	// Long after, the key is free again.
	w.clock.set(w.clock.now().AddDate(0, 0, 15))
	third := w.scans(w.issue(scan("a1", 600, 3)))[0] // over: dropped
	if _, err := send(third.ID, store.ScanDone, "three", "k", "b"); !errors.Is(err, scheduler.ErrConflict) {
		t.Errorf("a dropped scan: %v", err)
	}
	if n := w.number("select count(*) from idempotency"); n != 3 {
		t.Errorf("%d answers are kept, want 3", n)
	}
}

// The same report many times at once is one event: with a key all get its
// answer, without one the others are told that it is too late.
func TestReportsAtOnce(t *testing.T) {
	t.Parallel()
	w := newWorld(t)
	x := w.scans(w.issue(scan("a1", 0, 1)))[0]
	w.clock.set(monday)
	for _, c := range []struct {
		state, key string
		want       int
	}{{store.ScanObserving, "k", 16}, {store.ScanDone, "", 1}} {
		var group sync.WaitGroup
		results := make(chan error, 16)
		for range 16 {
			group.Go(func() {
				_, err := w.ReportOutcome(context.Background(), x.ID, store.Report{State: c.state}, "key", "AAA", store.Idempotency{Key: c.key, Body: []byte(c.state)})
				results <- err
			})
		}
		group.Wait()
		close(results)
		done := 0
		for err := range results {
			if err == nil {
				done++
			} else if !errors.Is(err, scheduler.ErrConflict) {
				t.Errorf("%s: %v", c.state, err)
			}
		}
		if done != c.want {
			t.Errorf("%s: %d were taken, want %d", c.state, done, c.want)
		}
		if n := w.number("select count(*) from outcome where state = $1", c.state); n != 1 {
			t.Errorf("%s: %d events", c.state, n)
		}
	}
	if n := w.number("select count(*) from history"); n != 1 {
		t.Errorf("%d scans in the history", n)
	}
}
