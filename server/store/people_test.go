package store_test

import (
	"context"
	"errors"
	"testing"
	"time"

	"github.com/jackc/pgx/v5"

	"cadencewright/scheduler"
	"cadencewright/server/store"
	"cadencewright/server/store/storetest"
)

func TestPeopleAndSessions(t *testing.T) {
	now := time.Date(2027, 1, 1, 0, 0, 0, 0, time.UTC)
	s := storetest.Open(t, func() time.Time { return now })
	ctx := t.Context()
	p, err := s.AddPerson(ctx, "Ada Example", "coordinator", nil, "hash", "tester")
	if err != nil {
		t.Fatal(err)
	}
	if _, err := s.AddPerson(ctx, "ADA EXAMPLE", "reader", nil, "", "tester"); !errors.Is(err, scheduler.ErrConflict) {
		t.Errorf("the same name in capitals: %v", err)
	}
	var field *store.FieldError
	if _, err := s.AddPerson(ctx, "Bo", "king", nil, "", "tester"); !errors.As(err, &field) || field.Field != "role" {
		t.Errorf("a role that is none: %v", err)
	}
	if got, err := s.PersonByName(ctx, "ada example"); err != nil || got.ID != p.ID || *got.PasswordHash != "hash" {
		t.Errorf("found %+v, %v", got, err)
	}
	if _, err := s.PersonByName(ctx, "nobody"); !errors.Is(err, scheduler.ErrNotFound) {
		t.Errorf("nobody: %v", err)
	}
	token := []byte("a hash of thirty-two bytes length")
	if err := s.AddSession(ctx, token, p.ID); err != nil {
		t.Fatal(err)
	}
	for _, step := range []struct {
		name  string
		after time.Duration
		ok    bool
	}{{"at once", 0, true}, {"six days later", 6 * 24 * time.Hour, true}, {"six more", 6 * 24 * time.Hour, true}, {"after eight idle days", 8 * 24 * time.Hour, false}} {
		now = now.Add(step.after)
		if _, err := s.SessionPerson(ctx, token); (err == nil) != step.ok {
			t.Errorf("%s: %v", step.name, err)
		}
	}
	if err := s.AddSession(ctx, []byte("two"), p.ID); err != nil {
		t.Fatal(err)
	}
	if err := s.SetPassword(ctx, p.ID, "new", "tester"); err != nil {
		t.Fatal(err)
	}
	if _, err := s.SessionPerson(ctx, []byte("two")); !errors.Is(err, scheduler.ErrNotFound) {
		t.Errorf("a session outlives its person's password: %v", err)
	}
	if err := s.AddSession(ctx, []byte("three"), p.ID); err != nil {
		t.Fatal(err)
	}
	if err := s.EndSession(ctx, []byte("three")); err != nil {
		t.Fatal(err)
	}
	if _, err := s.SessionPerson(ctx, []byte("three")); !errors.Is(err, scheduler.ErrNotFound) {
		t.Errorf("an ended session: %v", err)
	}
	if err := s.SetDisabled(ctx, p.ID, true, "tester"); err != nil {
		t.Fatal(err)
	}
	if list, err := s.People(ctx); err != nil || len(list) != 1 || !list[0].Disabled {
		t.Errorf("people %+v, %v", list, err)
	}
}

func TestLinksWorkOnce(t *testing.T) {
	now := time.Date(2027, 1, 1, 0, 0, 0, 0, time.UTC)
	s := storetest.Open(t, func() time.Time { return now })
	ctx := t.Context()
	p, err := s.AddPerson(ctx, "Ada", "reader", nil, "", "tester")
	if err != nil {
		t.Fatal(err)
	}
	for _, name := range []string{"used", "late"} {
		if err := s.AddLink(ctx, []byte(name), p.ID, time.Hour); err != nil {
			t.Fatal(err)
		}
	}
	if got, err := s.UseLink(ctx, []byte("used")); err != nil || got.ID != p.ID {
		t.Errorf("the first use: %v", err)
	}
	now = now.Add(2 * time.Hour)
	for _, name := range []string{"used", "late", "unknown"} {
		if _, err := s.UseLink(ctx, []byte(name)); !errors.Is(err, scheduler.ErrNotFound) {
			t.Errorf("link %s: %v", name, err)
		}
	}
}

func TestKeys(t *testing.T) {
	s := storetest.Open(t, nil)
	ctx := t.Context()
	k, err := s.AddKey(ctx, "control", "BRM", []byte("hash"), "tester")
	if err != nil {
		t.Fatal(err)
	}
	if _, err := s.AddKey(ctx, "Control", "KAV", []byte("other"), "tester"); !errors.Is(err, scheduler.ErrConflict) {
		t.Errorf("the same name: %v", err)
	}
	if got, err := s.KeyByHash(ctx, []byte("hash")); err != nil || got.ID != k.ID || got.Telescope != "BRM" {
		t.Errorf("%+v, %v", got, err)
	}
	if list, err := s.Keys(ctx); err != nil || len(list) != 1 || list[0].LastUsedAt == nil {
		t.Errorf("keys %+v, %v", list, err)
	}
	if err := s.RevokeKey(ctx, "CONTROL", "tester"); err != nil {
		t.Fatal(err)
	}
	if _, err := s.KeyByHash(ctx, []byte("hash")); !errors.Is(err, scheduler.ErrNotFound) {
		t.Errorf("a revoked key: %v", err)
	}
	if err := s.RevokeKey(ctx, "control", "tester"); !errors.Is(err, scheduler.ErrNotFound) {
		t.Errorf("revoked twice: %v", err)
	}
	if _, err := s.AddKey(ctx, "control", "KAV", []byte("third"), "tester"); err != nil {
		t.Errorf("the name of a revoked key: %v", err)
	}
}

func TestFailuresAreCounted(t *testing.T) {
	now := time.Date(2027, 1, 1, 0, 0, 0, 0, time.UTC)
	s := storetest.Open(t, func() time.Time { return now })
	for range 3 {
		if err := s.NoteFailure(t.Context(), "name ada"); err != nil {
			t.Fatal(err)
		}
		now = now.Add(10 * time.Minute)
	}
	for within, want := range map[time.Duration]int{15 * time.Minute: 1, 25 * time.Minute: 2, time.Hour: 3} {
		if n, err := s.Failures(t.Context(), "name ada", within); err != nil || n != want {
			t.Errorf("within %s: %d, want %d (%v)", within, n, want, err)
		}
	}
}

func TestPlanJobs(t *testing.T) {
	now := time.Date(2027, 2, 22, 0, 0, 0, 0, time.UTC)
	s, c, plans := planned(t, func() time.Time { return now })
	ctx := t.Context()
	id, h := plans[0].CampaignID, scheduler.Horizon{From: c.Start, To: c.End}
	none := func(context.Context, pgx.Tx, int64) error { return nil }
	j, err := s.AddJob(ctx, id, h, 1, "ada", none)
	if err != nil || !j.Active() {
		t.Fatalf("%+v, %v", j, err)
	}
	if _, err := s.AddJob(ctx, id, h, 1, "bo", none); !errors.Is(err, scheduler.ErrConflict) {
		t.Errorf("a second job for the week: %v", err)
	}
	if stop, err := s.JobProgress(ctx, j.ID, 5, 10, 3.5, 9); err != nil || stop {
		t.Errorf("progress: %v, %v", stop, err)
	}
	if err := s.StopJob(ctx, j.ID, "ada"); err != nil {
		t.Fatal(err)
	}
	if stop, err := s.JobProgress(ctx, j.ID, 6, 10, 3.5, 0); err != nil || !stop {
		t.Errorf("a wanted stop is not told: %v", err)
	}
	if last, err := s.LastJob(ctx, id, h); err != nil || last.State != store.JobRunning || last.Effort != 6 || last.Bound != nil || !last.StopWanted {
		t.Errorf("%+v, %v", last, err)
	}
	// The program that worked on it is silent: another may begin anew.
	now = now.Add(5 * time.Minute)
	k, err := s.AddJob(ctx, id, h, 1, "bo", none)
	if err != nil {
		t.Fatalf("after the silence: %v", err)
	}
	if dead, err := s.Job(ctx, j.ID); err != nil || dead.State != store.JobFailed || dead.Problem == "" {
		t.Errorf("the silent job is %+v, %v", dead, err)
	}
	if err := s.EndJob(ctx, k.ID, store.JobFailed, "no blocks"); err != nil {
		t.Fatal(err)
	}
	if err := s.EndJob(ctx, k.ID, store.JobFailed, "again"); !errors.Is(err, scheduler.ErrNotFound) {
		t.Errorf("a job ended twice: %v", err)
	}
	failing := errors.New("the queue is away")
	if _, err := s.AddJob(ctx, id, h, 1, "bo", func(context.Context, pgx.Tx, int64) error { return failing }); !errors.Is(err, failing) {
		t.Errorf("a job that cannot be queued: %v", err)
	}
	if last, err := s.LastJob(ctx, id, h); err != nil || last.ID != k.ID {
		t.Errorf("a job that was not queued is there: %+v, %v", last, err)
	}
}

// A transaction that is cut off in its middle leaves nothing behind.
func TestCutOffImportLeavesNothing(t *testing.T) {
	s := storetest.Open(t, nil)
	ctx, cancel := context.WithCancel(t.Context())
	go func() {
		time.Sleep(30 * time.Millisecond)
		cancel()
	}()
	_, err := s.ImportCampaign(ctx, campaign(t, "large-1"), "tester")
	list, lerr := s.Campaigns(t.Context())
	if lerr != nil {
		t.Fatal(lerr)
	}
	if (err == nil) != (len(list) == 1) {
		t.Errorf("the import says %v, and %d campaigns are there", err, len(list))
	}
	lines, lerr := s.Journal(t.Context(), 0, 0, 10)
	if lerr != nil || len(lines) != len(list) {
		t.Errorf("%d lines in the journal for %d campaigns (%v)", len(lines), len(list), lerr)
	}
}
