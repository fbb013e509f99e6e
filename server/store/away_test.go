package store_test

import (
	"context"
	"errors"
	"os"
	"os/exec"
	"strings"
	"syscall"
	"testing"
	"time"

	"cadencewright/scheduler"
	"cadencewright/server/pgembed"
	"cadencewright/server/store"
	"cadencewright/server/store/storetest"
)

// The database is killed under the store, and comes back: meanwhile everything
// says that it is away, after that everything goes on by itself, and what was
// acknowledged is there.
func TestDatabaseKilledAndBack(t *testing.T) {
	storetest.DSN(t) // skips where there is no Postgres
	dir, err := os.MkdirTemp("", "cadencewright-away-")
	if err != nil {
		t.Fatal(err)
	}
	if err := os.Chmod(dir, 0o755); err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { os.RemoveAll(dir) })
	begin := func() *pgembed.Cluster {
		t.Helper()
		c, err := pgembed.Start(context.Background(), pgembed.Options{Dir: dir, BinDir: os.Getenv("CADENCEWRIGHT_PG_BIN")})
		if err != nil {
			t.Fatal(err)
		}
		t.Cleanup(func() { _ = c.Stop() }) // it may have been killed
		return c
	}
	c := begin()
	s, err := store.Open(t.Context(), c.DSN("postgres"), store.Options{MaxConns: 4})
	if err != nil {
		t.Fatal(err)
	}
	defer s.Close()
	if _, err := s.Migrate(t.Context()); err != nil {
		t.Fatal(err)
	}
	heard := make(chan store.Change, 100)
	go s.Listen(t.Context(), func(c store.Change) { heard <- c })
	<-heard
	id, err := s.ImportCampaign(t.Context(), array("Array"), "ada")
	if err != nil {
		t.Fatal(err)
	}
	kill(t, dir)
	<-c.Done()
	for deadline := time.Now().Add(20 * time.Second); s.Ping(t.Context()) == nil; { // parts of it may live a little longer
		if time.Now().After(deadline) {
			t.Fatal("the server that was killed still answers")
		}
	}
	for what, f := range map[string]func() error{
		"ping":   func() error { return s.Ping(t.Context()) },
		"read":   func() error { _, err := s.LiveCampaign(t.Context()); return err },
		"load":   func() error { _, _, err := s.LoadCampaign(t.Context(), id); return err },
		"now":    func() error { _, _, err := s.NowNext(t.Context(), "AAA", monday); return err },
		"write":  func() error { _, err := s.ImportCampaign(t.Context(), array("Other"), "ada"); return err },
		"report": func() error { return s.NoteFailure(t.Context(), "x") },
		"people": func() error { _, err := s.People(t.Context()); return err },
	} {
		if err := f(); !errors.Is(err, scheduler.ErrUnavailable) || !strings.Contains(err.Error(), "away") {
			t.Errorf("%s while the database is gone: %v", what, err)
		}
	}
	if err := c.Stop(); err != nil {
		t.Fatal(err)
	}
	begin()
	back, _, err := s.LoadCampaign(t.Context(), id)
	if err != nil || !back.Equal(array("Array")) {
		t.Errorf("the campaign after the crash: %v", err)
	}
	for deadline := time.After(30 * time.Second); ; {
		select {
		case c := <-heard:
			if c.Kind == "" {
				return // it listens again and says that something may have been missed
			}
		case <-deadline:
			t.Fatal("the listener does not come back")
		}
	}
}

// kill ends a server as kill -9 does.
func kill(t *testing.T, dir string) {
	t.Helper()
	out, err := exec.Command("head", "-1", dir+"/data/postmaster.pid").Output()
	if err != nil {
		t.Fatal(err)
	}
	pid := 0
	for _, d := range strings.TrimSpace(string(out)) {
		pid = 10*pid + int(d-'0')
	}
	if err := syscall.Kill(pid, syscall.SIGKILL); err != nil {
		t.Fatal(err)
	}
}
