package store_test

import (
	"context"
	"encoding/json"
	"errors"
	"fmt"
	"slices"
	"strings"
	"sync"
	"testing"
	"time"

	"cadencewright/scheduler"
	"cadencewright/server/store"
)

// Everything that is done stands in the journal once: who, when, what.
func TestJournalOfAWeek(t *testing.T) {
	t.Parallel()
	w := newWorld(t)
	ctx := t.Context()
	plan := w.issue(scan("a1", 0, 1))
	w.clock.set(monday)
	x := w.scans(plan)[0]
	w.must(x.ID, store.ScanDone)
	if _, err := w.report(x.ID, store.ScanLost); err == nil {
		t.Fatal("done and lost")
	}
	person, err := w.AddPerson(ctx, "Bo", "reader", nil, "", "ada")
	if err != nil {
		t.Fatal(err)
	}
	if _, err := w.SetAccess(ctx, person.ID, 1, "observer", []string{"AAA"}, "ada"); err != nil {
		t.Fatal(err)
	}
	lines, err := w.Journal(ctx, w.id, 0, 100)
	if err != nil {
		t.Fatal(err)
	}
	var got []string
	for _, l := range slices.Backward(lines) {
		got = append(got, l.Actor+" "+l.Action+" "+l.Subject)
	}
	want := []string{"ada import campaign Array", fmt.Sprintf("ada draft plan %d of 2027-W08", plan), "ada issue plan of 2027-W08",
		fmt.Sprintf("key AAA report scan %d of SIM J0100+2000 on AAA", x.ID), "ada add person Bo", "ada access person Bo"}
	if !slices.Equal(got, want) {
		t.Errorf("the journal says\n%s\nwant\n%s", strings.Join(got, "\n"), strings.Join(want, "\n"))
	}
	if !lines[2].At.Equal(monday) || string(lines[2].Before) != `{"state": "planned"}` || !strings.Contains(string(lines[2].After), `"done"`) {
		t.Errorf("the report is %s, before %s, after %s", lines[2].At, lines[2].Before, lines[2].After)
	}
	var before, after map[string]any
	if err := errors.Join(json.Unmarshal(lines[0].Before, &before), json.Unmarshal(lines[0].After, &after)); err != nil || before["role"] != "reader" || after["role"] != "observer" {
		t.Errorf("the change of access is %s to %s (%v)", lines[0].Before, lines[0].After, err)
	}
	// A page at a time it is the same.
	var paged []int64
	for last := int64(0); ; {
		page, err := w.Journal(ctx, w.id, last, 2)
		if err != nil {
			t.Fatal(err)
		}
		if len(page) == 0 {
			break
		}
		for _, l := range page {
			paged = append(paged, l.ID)
		}
		last = page[len(page)-1].ID
	}
	for i := range lines {
		if i >= len(paged) || paged[i] != lines[i].ID {
			t.Fatalf("by pages %v", paged)
		}
	}
	other, err := w.ImportCampaign(ctx, array("Other"), "ada")
	if err != nil {
		t.Fatal(err)
	}
	if list, err := w.Journal(ctx, other, 0, 100); err != nil || len(list) != 3 { // its own, and what concerns people
		t.Errorf("the other campaign's journal: %+v, %v", list, err)
	}
}

// The history of a source by pages, the newest first, with scans that began at
// the same instant in it.
func TestHistoryOfASource(t *testing.T) {
	t.Parallel()
	w := newWorld(t)
	c := array("Old")
	for i := range 25 {
		for _, tel := range []string{"AAA", "BBB"} {
			c.History = append(c.History, scheduler.HistoryScan{Source: "SIM J0200+2000", Telescope: tel, Receiver: "S1",
				Start: monday.AddDate(0, 0, -i), Minutes: 20.5, Counted: i%2 == 0})
		}
	}
	id, err := w.ImportCampaign(t.Context(), c, "ada")
	if err != nil {
		t.Fatal(err)
	}
	var all []store.MadeScan
	for cursor := (store.HistoryCursor{}); ; {
		page, err := w.SourceHistory(t.Context(), id, "SIM J0200+2000", cursor, 7)
		if err != nil {
			t.Fatal(err)
		}
		if len(page) == 0 {
			break
		}
		all = append(all, page...)
		cursor = store.HistoryCursor{Start: page[len(page)-1].Start, ID: page[len(page)-1].ID}
	}
	if len(all) != 50 {
		t.Fatalf("%d scans by pages, want 50", len(all))
	}
	for i, h := range all {
		if day := i / 2; !h.Start.Equal(monday.AddDate(0, 0, -day)) || h.Minutes != 20.5 || h.Counted != (day%2 == 0) || h.Receiver != "S1" ||
			h.ScanID != 0 || h.SNR != nil || h.Expected != nil || h.Note != "" {
			t.Errorf("scan %d is %+v", i, h)
		}
	}
	if list, err := w.SourceHistory(t.Context(), id, "SIM J0300+2000", store.HistoryCursor{}, 10); err != nil || len(list) != 0 {
		t.Errorf("a source that was never observed: %v, %v", list, err)
	}
	if _, err := w.SourceHistory(t.Context(), id, "SIM J0900+2000", store.HistoryCursor{}, 10); !errors.Is(err, scheduler.ErrNotFound) {
		t.Errorf("a source that is not there: %v", err)
	}
}

// Jobs asked for at once: one for each week.
func TestJobsAtOnce(t *testing.T) {
	t.Parallel()
	w := newWorld(t)
	next := scheduler.Horizon{From: week.To, To: week.To.Add(scheduler.Week)}
	var group sync.WaitGroup
	results := make(chan error, 16)
	for i := range 16 {
		group.Go(func() {
			_, err := w.AddJob(context.Background(), w.id, []scheduler.Horizon{week, next}[i%2], 1, "somebody", notQueued)
			results <- err
		})
	}
	group.Wait()
	close(results)
	won := 0
	for err := range results {
		if err == nil {
			won++
		} else {
			wantField(t, "a job", err, scheduler.ErrConflict, "week")
		}
	}
	if won != 2 {
		t.Errorf("%d jobs were taken, want 2", won)
	}
}

// Jobs that cannot be, and ends that are none.
func TestJobsThatAreRefused(t *testing.T) {
	t.Parallel()
	w := newWorld(t)
	ctx := t.Context()
	if _, err := w.AddJob(ctx, 4711, week, 1, "ada", notQueued); !errors.Is(err, scheduler.ErrNotFound) {
		t.Errorf("a campaign that is not there: %v", err)
	}
	_, err := w.AddJob(ctx, w.id, scheduler.Horizon{From: week.To, To: week.From}, 1, "ada", notQueued)
	wantField(t, "a week from back to front", err, scheduler.ErrInvalid, "to")
	if j, err := w.LastJob(ctx, w.id, week); j != nil || err != nil {
		t.Errorf("a job that was refused is there: %+v, %v", j, err)
	}
	if _, err := w.Job(ctx, 4711); !errors.Is(err, scheduler.ErrNotFound) || !strings.Contains(err.Error(), "4711") {
		t.Errorf("a job that is not there: %v", err)
	}
	job, err := w.AddJob(ctx, w.id, week, 1, "ada", notQueued)
	if err != nil {
		t.Fatal(err)
	}
	for _, state := range []string{store.JobDone, store.JobRunning, "finished"} {
		if err := w.EndJob(ctx, job.ID, state, ""); err == nil {
			t.Errorf("ended as %s without a plan", state)
		}
	}
	if err := w.EndJob(ctx, job.ID, store.JobCancelled, "not wanted"); err != nil {
		t.Fatal(err)
	}
	for what, f := range map[string]func() error{
		"end":      func() error { return w.EndJob(ctx, job.ID, store.JobFailed, "x") },
		"progress": func() error { _, err := w.JobProgress(ctx, job.ID, 1, 2, 3, 4); return err },
		"stop":     func() error { return w.StopJob(ctx, job.ID, "ada") },
	} {
		if err := f(); !errors.Is(err, scheduler.ErrNotFound) {
			t.Errorf("%s of a job that has ended: %v", what, err)
		}
	}
	if j, err := w.Job(ctx, job.ID); err != nil || j.State != store.JobCancelled || j.Problem != "not wanted" || j.Active() {
		t.Errorf("it is %+v, %v", j, err)
	}
}

// What a person may do is changed by one at a time; a new password and a shut
// door end sessions and links.
func TestAccess(t *testing.T) {
	t.Parallel()
	w := newWorld(t)
	ctx := t.Context()
	p, err := w.AddPerson(ctx, "Ada", "reader", nil, "hash", "root")
	if err != nil {
		t.Fatal(err)
	}
	q, err := w.SetAccess(ctx, p.ID, p.Version, "observer", []string{"AAA", "BBB"}, "root")
	if err != nil || q.Version != p.Version+1 {
		t.Fatalf("%+v, %v", q, err)
	}
	if got, err := w.Person(ctx, p.ID); err != nil || got.Role != "observer" || !slices.Equal(got.Telescopes, q.Telescopes) || got.Version != q.Version {
		t.Errorf("stored %+v, %v", got, err)
	}
	var stale *store.StaleError
	if _, err := w.SetAccess(ctx, p.ID, p.Version, "coordinator", nil, "root"); !errors.As(err, &stale) || stale.Current != q.Version {
		t.Errorf("by an old version: %v", err)
	}
	_, err = w.SetAccess(ctx, p.ID, q.Version, "king", nil, "root")
	wantField(t, "a role that is none", err, scheduler.ErrInvalid, "role")
	for name, end := range map[string]func() error{
		"password":   func() error { return w.SetPassword(ctx, p.ID, "other", "root") },
		"disabled":   func() error { return w.SetDisabled(ctx, p.ID, true, "root") },
		"enabled":    func() error { return w.SetDisabled(ctx, p.ID, false, "root") },
		"everywhere": func() error { return w.EndSessions(ctx, p.ID, "root") },
	} {
		session, link := []byte("session "+name), []byte("link "+name)
		if err := errors.Join(w.AddSession(ctx, session, p.ID), w.AddLink(ctx, link, p.ID, time.Hour), end()); err != nil {
			t.Fatal(err)
		}
		if _, err := w.SessionPerson(ctx, session); !errors.Is(err, scheduler.ErrNotFound) {
			t.Errorf("%s: the session goes on: %v", name, err)
		}
		if _, err := w.UseLink(ctx, link); !errors.Is(err, scheduler.ErrNotFound) {
			t.Errorf("%s: the link can be used: %v", name, err)
		}
	}
	for name, f := range map[string]func() error{
		"person":     func() error { _, err := w.Person(ctx, 4711); return err },
		"access":     func() error { _, err := w.SetAccess(ctx, 4711, 1, "reader", nil, "root"); return err },
		"password":   func() error { return w.SetPassword(ctx, 4711, "x", "root") },
		"disabled":   func() error { return w.SetDisabled(ctx, 4711, true, "root") },
		"everywhere": func() error { return w.EndSessions(ctx, 4711, "root") },
	} {
		if err := f(); !errors.Is(err, scheduler.ErrNotFound) || !strings.Contains(err.Error(), "person 4711") {
			t.Errorf("%s of nobody: %v", name, err)
		}
	}
}

// A link is used by one of many who come at once.
func TestLinkUsedAtOnce(t *testing.T) {
	t.Parallel()
	w := newWorld(t)
	p, err := w.AddPerson(t.Context(), "Ada", "reader", nil, "", "root")
	if err != nil {
		t.Fatal(err)
	}
	if err := w.AddLink(t.Context(), []byte("link"), p.ID, time.Hour); err != nil {
		t.Fatal(err)
	}
	var group sync.WaitGroup
	used := make(chan bool, 16)
	for range 16 {
		group.Go(func() {
			_, err := w.UseLink(context.Background(), []byte("link"))
			if err != nil && !errors.Is(err, scheduler.ErrNotFound) {
				t.Error(err)
			}
			used <- err == nil
		})
	}
	group.Wait()
	close(used)
	n := 0
	for ok := range used {
		if ok {
			n++
		}
	}
	if n != 1 {
		t.Errorf("the link was used %d times", n)
	}
}

// A stranger's name of any length costs no more than another.
func TestFailuresOfLongNames(t *testing.T) {
	t.Parallel()
	w := newWorld(t)
	long := strings.Repeat("n", 100_000)
	if err := w.NoteFailure(t.Context(), long); err != nil {
		t.Fatal(err)
	}
	if n, err := w.Failures(t.Context(), long+"m", time.Hour); err != nil || n != 1 {
		t.Errorf("%d failures, %v", n, err)
	}
	if n := w.number("select max(length(subject)) from sign_in_failure"); n != 200 {
		t.Errorf("%d characters are stored", n)
	}
	w.clock.set(w.clock.now().AddDate(0, 0, 2))
	if err := w.NoteFailure(t.Context(), "x"); err != nil {
		t.Fatal(err)
	}
	if n := w.number("select count(*) from sign_in_failure"); n != 1 {
		t.Errorf("%d failures are kept for ever", n)
	}
}
