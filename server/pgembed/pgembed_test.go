package pgembed

import (
	"errors"
	"fmt"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"syscall"
	"testing"
)

func TestStartStopStartAgain(t *testing.T) {
	dir := filepath.Join(tempDir(t), "made", "by", "us")
	c := start(t, dir)
	if !c.Owner() || c.Dir() != dir {
		t.Errorf("owner %v, dir %s", c.Owner(), c.Dir())
	}
	for sql, want := range map[string]string{
		"show listen_addresses":     "",
		"show server_encoding":      "UTF8",
		"select current_user::text": "postgres",
		"select datcollate::text from pg_database where datname = 'postgres'": "C",
		"select lo_from_bytea(4711, 'kept')::text":                            "4711",
	} {
		if got := query(t, c, sql); got != want {
			t.Errorf("%s: %q, want %q", sql, got, want)
		}
	}
	pid := serverOf(t, dir)
	if group, err := syscall.Getpgid(pid); err != nil || group == syscall.Getpgrp() {
		t.Errorf("the server is in our group of processes (%d, %v): Ctrl-C would reach it", group, err)
	}
	for range 2 {
		if err := c.Stop(); err != nil {
			t.Fatal(err)
		}
	}
	awaitEnd(t, dir, pid)
	if err := awaitDone(t, c); err != nil {
		t.Errorf("after Stop: %v", err)
	}
	again := start(t, dir)
	if got := query(t, again, "select convert_from(lo_get(4711), 'UTF8')"); got != "kept" {
		t.Errorf("what was stored came back as %q", got)
	}
	if _, err := os.Stat(filepath.Join(dir, logName+".old")); err != nil {
		t.Errorf("the log of the run before is gone: %v", err)
	}
}

// Only the socket's folder lets anybody in, and only its owner's account.
func TestFoldersAreClosed(t *testing.T) {
	dir := madeDir(t)
	start(t, dir)
	for name, want := range map[string]os.FileMode{"data": 0o700, "run": 0o700} {
		info, err := os.Stat(filepath.Join(dir, name))
		if err != nil {
			t.Fatal(err)
		}
		if got := info.Mode().Perm(); got != want {
			t.Errorf("%s has mode %o, want %o", name, got, want)
		}
	}
	if info, err := os.Stat(filepath.Join(dir, logName)); err != nil || info.Mode().Perm() != 0o600 {
		t.Errorf("the log: %v, %v", info.Mode(), err)
	}
}

func TestSecondProgramAttaches(t *testing.T) {
	dir := madeDir(t)
	c := start(t, dir)
	second, err := Start(t.Context(), Options{Dir: dir})
	if err != nil {
		t.Fatal(err)
	}
	if second.Owner() || second.Done() != nil {
		t.Error("two owners")
	}
	if got := query(t, second, "select 'two'"); got != "two" {
		t.Errorf("got %q", got)
	}
	if err := second.Stop(); err != nil {
		t.Fatal(err)
	}
	if got := query(t, c, "select 'still'"); got != "still" {
		t.Error("the server was stopped by a program that does not own it")
	}
	_, err = Start(t.Context(), Options{Dir: dir, Exclusive: true})
	var held *HeldError
	if !errors.As(err, &held) || held.PID != os.Getpid() || held.Dir != dir {
		t.Errorf("an exclusive start says %v; wanted who holds %s", err, dir)
	}
	if !strings.Contains(err.Error(), fmt.Sprint(os.Getpid())) || !strings.Contains(err.Error(), dir) {
		t.Errorf("the message does not say who holds what: %v", err)
	}
	if err := Reset(dir); !errors.As(err, &held) {
		t.Errorf("reset of a held folder says %v", err)
	}
}

// Several cold starts at once: one makes the cluster, the others attach.
func TestColdStartsAtOnce(t *testing.T) {
	needPostgres(t)
	dir := tempDir(t)
	owners := 0
	var all []*program
	for range 3 {
		all = append(all, begin(t, "hold", dir, -1))
	}
	for _, p := range all {
		switch says := p.says(t); says {
		case "ready true":
			owners++
			defer fmt.Fprintln(p.in, "stop")
		case "ready false":
		default:
			t.Errorf("a program says %q", says)
		}
	}
	if owners != 1 {
		t.Errorf("%d owners, want 1", owners)
	}
}

// A program that waits for the server of another takes over when that one is
// gone.
func TestWaitingProgramTakesOver(t *testing.T) {
	needPostgres(t)
	dir := madeDir(t)
	first := &Cluster{dir: dir}
	if err := first.takeLock(); err != nil { // and never starts a server
		t.Fatal(err)
	}
	p := begin(t, "try", dir, -1)
	said := make(chan string, 1)
	go func() { said <- p.says(t) }()
	select {
	case s := <-said:
		t.Fatalf("the second program did not wait: %q", s)
	default:
	}
	first.lock.Close()
	if s := <-said; s != "ready true" {
		t.Errorf("the second program says %q", s)
	}
}

// Settings of the person's own Postgres must not reach the private one.
func TestEnvironmentOfAnotherPostgres(t *testing.T) {
	needPostgres(t)
	for _, v := range []string{"PGDATA=/nowhere", "PGPORT=1234", "PGUSER=x", "LC_ALL=xx_YY.wrong", "LANG=xx_YY.wrong"} {
		name, value, _ := strings.Cut(v, "=")
		t.Setenv(name, value)
	}
	c := start(t, tempDir(t)) // made under these too
	if got := query(t, c, "show lc_messages"); got != "C" {
		t.Errorf("lc_messages is %q", got)
	}
}

// Any name of a folder will do.
func TestOddFolders(t *testing.T) {
	for _, name := range []string{"with space", "comma,quote'double\"dollar$back`tick", "é☉", strings.Repeat("long", 25)} {
		t.Run(name[:4], func(t *testing.T) {
			dir := filepath.Join(tempDir(t), name)
			if err := os.Rename(madeDir(t), dir); err != nil {
				t.Fatal(err)
			}
			c := start(t, dir)
			t.Cleanup(func() { os.RemoveAll(c.socket) })
			if got := query(t, c, "select 'reached'"); got != "reached" {
				t.Errorf("got %q", got)
			}
			psql, err := exec.LookPath("psql")
			if err != nil {
				t.Skip("no psql: install the Postgres client to check the command that people are shown")
			}
			out, err := exec.Command("/bin/sh", "-c", strings.Replace(c.Psql("postgres"), "psql", psql, 1)+" -XAtc 'select 4711'").CombinedOutput()
			if err != nil || strings.TrimSpace(string(out)) != "4711" {
				t.Errorf("%s: %v %s", c.Psql("postgres"), err, out)
			}
		})
	}
}
