package pgembed

import (
	"context"
	"fmt"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"syscall"
	"testing"
	"time"

	"github.com/jackc/pgx/v5"
)

func TestKilledOwnerLeavesNoServer(t *testing.T) {
	needPostgres(t)
	dir := madeDir(t)
	p := begin(t, "hold", dir, -1)
	if s := p.says(t); s != "ready true" {
		t.Fatalf("the other program says %q", s)
	}
	pid := serverOf(t, dir)
	p.kill(t)
	awaitEnd(t, dir, pid)
	again := start(t, dir)
	if got := query(t, again, "select 'back'"); got != "back" {
		t.Errorf("got %q", got)
	}
}

func TestStartRightAfterTheOwnerWasKilled(t *testing.T) {
	needPostgres(t)
	dir := madeDir(t)
	p := begin(t, "hold", dir, -1)
	if s := p.says(t); s != "ready true" {
		t.Fatalf("the other program says %q", s)
	}
	p.kill(t)
	c := start(t, dir) // waits for the old server to go, or adopts it
	if got := query(t, c, "select 'back'"); got != "back" {
		t.Errorf("got %q", got)
	}
}

func TestKilledServerIsReported(t *testing.T) {
	dir := madeDir(t)
	c := start(t, dir)
	if err := syscall.Kill(serverOf(t, dir), syscall.SIGKILL); err != nil {
		t.Fatal(err)
	}
	if err := awaitDone(t, c); err == nil || !strings.Contains(err.Error(), dir) {
		t.Errorf("the reason for the end of the server is %v", err)
	}
	again := start2(t, c)
	if got := query(t, again, "select 'recovered'"); got != "recovered" {
		t.Errorf("got %q", got)
	}
}

// A part of a killed server that is still at work is waited for: a server beside
// it would destroy the cluster.
func TestBusyPartOfAKilledServerIsWaitedFor(t *testing.T) {
	dir := madeDir(t)
	c := start(t, dir)
	conn, err := pgx.Connect(t.Context(), c.DSN("postgres"))
	if err != nil {
		t.Fatal(err)
	}
	defer conn.Close(context.Background())
	var pid int
	if err := conn.QueryRow(t.Context(), "select pg_backend_pid()").Scan(&pid); err != nil {
		t.Fatal(err)
	}
	worked := make(chan error, 1)
	go func() { // no statement of SQL looks up from this one
		_, err := conn.Exec(context.Background(), "select sum(sqrt(n)) from generate_series(1, 6000000) n")
		worked <- err
	}()
	for query(t, c, fmt.Sprintf("select state from pg_stat_activity where pid = %d", pid)) != "active" {
		time.Sleep(time.Millisecond)
	}
	if err := syscall.Kill(serverOf(t, dir), syscall.SIGKILL); err != nil {
		t.Fatal(err)
	}
	if err := awaitDone(t, c); err == nil {
		t.Error("no reason for the end of the server")
	}
	again := start2(t, c)
	// A dead process that nobody has buried yet has no command line.
	if line, err := os.ReadFile(fmt.Sprintf("/proc/%d/cmdline", pid)); err == nil && len(line) > 0 {
		t.Errorf("the new server runs beside a part of the old one: %q", line)
	}
	<-worked
	if got := query(t, again, "select 'whole'"); got != "whole" {
		t.Errorf("got %q", got)
	}
}

// start2 starts the cluster again once its owner has let go.
func start2(t *testing.T, c *Cluster) *Cluster {
	t.Helper()
	if err := c.Stop(); err != nil {
		t.Fatal(err)
	}
	return start(t, c.dir)
}

// An orphan is a server whose owner, and whoever watched it, are gone.
func TestOrphanIsAdopted(t *testing.T) {
	dir := madeDir(t)
	c := start(t, dir)
	orphan := leaveOrphan(t, c)
	again := start2(t, c)
	if !again.Owner() || serverOf(t, dir) != orphan {
		t.Fatalf("the server is %d, want the orphan %d", serverOf(t, dir), orphan)
	}
	if got := query(t, again, "select 'adopted'"); got != "adopted" {
		t.Errorf("got %q", got)
	}
	if err := again.Stop(); err != nil {
		t.Fatal(err)
	}
	awaitEnd(t, dir, orphan)
	if err := awaitDone(t, again); err != nil {
		t.Errorf("after Stop: %v", err)
	}
}

// leaveOrphan stops the cluster and starts its server without anybody who
// watches it.
func leaveOrphan(t *testing.T, c *Cluster) int {
	t.Helper()
	if err := c.Stop(); err != nil {
		t.Fatal(err)
	}
	acct, err := accountFor(filepath.Join(c.dir, "data"))
	if err != nil {
		t.Fatal(err)
	}
	bin, err := find(os.Getenv("CADENCEWRIGHT_PG_BIN"), 0)
	if err != nil {
		t.Fatal(err)
	}
	cmd := exec.Command(filepath.Join(bin.dir, "postgres"), "-D", filepath.Join(c.dir, "data"), "-k", c.socket, "-c", "listen_addresses=")
	cmd.SysProcAttr, cmd.Dir = acct.attr(), "/"
	if err := cmd.Start(); err != nil {
		t.Fatal(err)
	}
	gone := make(chan struct{})
	go func() { _ = cmd.Wait(); close(gone) }() // it is told to end in many ways
	t.Cleanup(func() { _ = cmd.Process.Kill(); <-gone })
	for deadline := time.Now().Add(20 * time.Second); !c.ready(); time.Sleep(20 * time.Millisecond) {
		if time.Now().After(deadline) {
			t.Fatal("the server without an owner does not start")
		}
	}
	return cmd.Process.Pid
}

func TestEndOfAnAdoptedServerIsReported(t *testing.T) {
	dir := madeDir(t)
	c := start(t, dir)
	orphan := leaveOrphan(t, c)
	again := start2(t, c)
	if err := syscall.Kill(orphan, syscall.SIGKILL); err != nil {
		t.Fatal(err)
	}
	if err := awaitDone(t, again); err == nil {
		t.Error("no reason for the end of the server")
	}
}

func TestResetEndsAnOrphan(t *testing.T) {
	dir := madeDir(t)
	c := start(t, dir)
	orphan := leaveOrphan(t, c)
	if err := Reset(dir); err != nil {
		t.Fatal(err)
	}
	awaitEnd(t, dir, orphan)
	if _, err := os.Stat(filepath.Join(dir, "data")); !os.IsNotExist(err) {
		t.Error("the data are still there")
	}
}

// A pid file whose number belongs to somebody else by now: to a process that is
// no Postgres, to the server of another folder, to nobody; or that is no number.
func TestStalePidFile(t *testing.T) {
	dir, otherDir := madeDir(t), madeDir(t)
	another := start(t, otherDir)
	ended := exec.Command("/bin/true")
	if err := ended.Run(); err != nil {
		t.Fatal(err)
	}
	c := start(t, dir)
	acct, err := accountFor(filepath.Join(dir, "data"))
	if err != nil {
		t.Fatal(err)
	}
	for name, pid := range map[string]string{"us": fmt.Sprint(os.Getpid()), "another server": fmt.Sprint(serverOf(t, otherDir)),
		"nobody": fmt.Sprint(ended.Process.Pid), "no number": "", "init": "1"} {
		if err := c.Stop(); err != nil {
			t.Fatal(err)
		}
		stale := fmt.Sprintf("%s\n%s/data\n1\n5432\n%s/run\n\n\nready\n", pid, dir, dir)
		file := filepath.Join(dir, "data", "postmaster.pid")
		if err := os.WriteFile(file, []byte(stale), 0o600); err != nil {
			t.Fatal(err)
		}
		if err := acct.give(file); err != nil {
			t.Fatal(err)
		}
		c = start(t, dir)
		if got := query(t, c, "select 'fine'"); got != "fine" {
			t.Errorf("pid of %s: got %q", name, got)
		}
	}
	if got := query(t, another, "select 'untouched'"); got != "untouched" {
		t.Errorf("the other server: %q", got)
	}
}

// A server that cannot be told from ours is not given a second one beside it.
func TestServerOutOfSightIsLeftAlone(t *testing.T) {
	dir := madeDir(t)
	c := start(t, dir)
	if got := c.process(serverOf(t, dir)); got != server {
		t.Errorf("our own server is %d", got)
	}
	if got := processByPS(serverOf(t, dir), filepath.Join(dir, "data")); got != server {
		t.Errorf("our own server by ps is %d", got)
	}
	if got := processByPS(serverOf(t, dir), "/another/data"); got != unknown {
		t.Errorf("a server of who knows whom is %d, want unknown", got)
	}
	if got := processByPS(os.Getpid(), filepath.Join(dir, "data")); got != other {
		t.Errorf("this test is %d", got)
	}
	if got := processByPS(1<<22+1, filepath.Join(dir, "data")); got != gone {
		t.Errorf("a process that cannot be is %d", got)
	}
}

// Whoever gives up waiting is not kept, and the folder is free again.
func TestStartGivesUpWithItsContext(t *testing.T) {
	needPostgres(t)
	dir := tempDir(t)
	ctx, cancel := context.WithCancel(t.Context())
	cancel()
	if _, err := Start(ctx, Options{Dir: dir, Unsafe: true}); err == nil {
		t.Fatal("started without time")
	}
	left, _ := filepath.Glob(filepath.Join(dir, "data*"))
	if len(left) > 0 {
		t.Errorf("left behind: %v", left)
	}
	start(t, dir)
}
