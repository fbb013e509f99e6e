package pgembed

import (
	"context"
	"errors"
	"fmt"
	"os"
	"os/exec"
	"path/filepath"
	"strconv"
	"strings"
	"testing"
	"time"

	"github.com/jackc/pgx/v5"
)

// holdEnv makes the test binary hold a cluster until it is killed.
const holdEnv = "CADENCEWRIGHT_TEST_HOLD"

func TestMain(m *testing.M) {
	if dir := os.Getenv(holdEnv); dir != "" {
		c, err := Start(context.Background(), Options{Dir: dir, Unsafe: true, Exclusive: true})
		if err != nil {
			fmt.Println("error:", err)
			os.Exit(1)
		}
		fmt.Println("ready")
		<-c.Done()
		os.Exit(0)
	}
	os.Exit(m.Run())
}

// tempDir is a folder that the account of the server can reach.
func tempDir(t *testing.T) string {
	t.Helper()
	if _, err := find(os.Getenv("CADENCEWRIGHT_PG_BIN"), 0); err != nil {
		if os.Getenv("CI") == "true" {
			t.Fatal(err)
		}
		t.Skip(err)
	}
	dir, err := os.MkdirTemp("", "cwpg")
	if err != nil {
		t.Fatal(err)
	}
	if err := os.Chmod(dir, 0o755); err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { os.RemoveAll(dir) })
	return dir
}

func start(t *testing.T, dir string) *Cluster {
	t.Helper()
	c, err := Start(t.Context(), Options{Dir: dir, Unsafe: true})
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() {
		if err := c.Stop(); err != nil {
			t.Error(err)
		}
	})
	return c
}

func query(t *testing.T, c *Cluster, sql string) string {
	t.Helper()
	conn, err := pgx.Connect(t.Context(), c.DSN("postgres"))
	if err != nil {
		t.Fatal(err)
	}
	defer conn.Close(context.Background())
	var s string
	if err := conn.QueryRow(t.Context(), sql).Scan(&s); err != nil {
		t.Fatal(err)
	}
	return s
}

func pidOf(t *testing.T, c *Cluster) int {
	t.Helper()
	lines, err := c.pidFile()
	if err != nil {
		t.Fatal(err)
	}
	pid, err := strconv.Atoi(lines[0])
	if err != nil {
		t.Fatal(err)
	}
	return pid
}

func awaitEnd(t *testing.T, pid int) {
	t.Helper()
	for deadline := time.Now().Add(20 * time.Second); isPostgres(pid); time.Sleep(20 * time.Millisecond) {
		if time.Now().After(deadline) {
			t.Fatalf("Postgres process %d is still there", pid)
		}
	}
}

func TestStartStopStartAgain(t *testing.T) {
	dir := tempDir(t)
	c := start(t, dir)
	if got := query(t, c, "select 'here'"); got != "here" {
		t.Errorf("got %q", got)
	}
	if got := query(t, c, "show listen_addresses"); got != "" {
		t.Errorf("the server listens on %q; only the socket is wanted", got)
	}
	pid := pidOf(t, c)
	if err := c.Stop(); err != nil {
		t.Fatal(err)
	}
	awaitEnd(t, pid)
	if c.Err() != nil {
		t.Errorf("after Stop: %v", c.Err())
	}
	again := start(t, dir)
	if got := query(t, again, "select 'here'"); got != "here" {
		t.Errorf("got %q", got)
	}
}

func TestSecondProgramAttaches(t *testing.T) {
	dir := tempDir(t)
	c := start(t, dir)
	second, err := Start(t.Context(), Options{Dir: dir})
	if err != nil {
		t.Fatal(err)
	}
	if second.Owner() {
		t.Error("two owners")
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
	if err := Reset(dir); !errors.As(err, &held) {
		t.Errorf("reset of a held folder says %v", err)
	}
}

// hold starts another process that owns the cluster.
func hold(t *testing.T, dir string) *exec.Cmd {
	t.Helper()
	cmd := exec.Command(os.Args[0])
	cmd.Env = append(os.Environ(), holdEnv+"="+dir)
	out, err := cmd.StdoutPipe()
	if err != nil {
		t.Fatal(err)
	}
	if err := cmd.Start(); err != nil {
		t.Fatal(err)
	}
	buf := make([]byte, 200)
	n, _ := out.Read(buf)
	if got := string(buf[:n]); got != "ready\n" {
		t.Fatalf("the other process says %q", got)
	}
	return cmd
}

func TestKilledOwnerLeavesNoServer(t *testing.T) {
	dir := tempDir(t)
	cmd := hold(t, dir)
	c := &Cluster{dir: dir}
	pid := pidOf(t, c)
	if err := cmd.Process.Kill(); err != nil {
		t.Fatal(err)
	}
	cmd.Wait()
	awaitEnd(t, pid)
	again := start(t, dir)
	if got := query(t, again, "select 'back'"); got != "back" {
		t.Errorf("got %q", got)
	}
}

func TestStartRightAfterTheOwnerWasKilled(t *testing.T) {
	dir := tempDir(t)
	cmd := hold(t, dir)
	if err := cmd.Process.Kill(); err != nil {
		t.Fatal(err)
	}
	cmd.Wait()
	c := start(t, dir) // waits for the old server to go, or adopts it
	if got := query(t, c, "select 'back'"); got != "back" {
		t.Errorf("got %q", got)
	}
}

func TestKilledServerIsReported(t *testing.T) {
	dir := tempDir(t)
	c := start(t, dir)
	p, err := os.FindProcess(pidOf(t, c))
	if err != nil {
		t.Fatal(err)
	}
	if err := p.Kill(); err != nil {
		t.Fatal(err)
	}
	select {
	case <-c.Done():
	case <-time.After(20 * time.Second):
		t.Fatal("the end of the server went unnoticed")
	}
	if c.Err() == nil {
		t.Error("no reason for the end of the server")
	}
}

func TestStalePidFile(t *testing.T) {
	dir := tempDir(t)
	c := start(t, dir)
	if err := c.Stop(); err != nil {
		t.Fatal(err)
	}
	// The number of a process that is there but is no Postgres: our own.
	stale := fmt.Sprintf("%d\n%s/data\n1\n5432\n%s/run\n\n\nready\n", os.Getpid(), dir, dir)
	if err := os.WriteFile(filepath.Join(dir, "data", "postmaster.pid"), []byte(stale), 0o600); err != nil {
		t.Fatal(err)
	}
	again := start(t, dir)
	if got := query(t, again, "select 'fine'"); got != "fine" {
		t.Errorf("got %q", got)
	}
}

func TestReset(t *testing.T) {
	dir := tempDir(t)
	c := start(t, dir)
	if err := c.Stop(); err != nil {
		t.Fatal(err)
	}
	mine := filepath.Join(dir, "notes.txt")
	if err := os.WriteFile(mine, []byte("keep"), 0o600); err != nil {
		t.Fatal(err)
	}
	if err := Reset(dir); err != nil {
		t.Fatal(err)
	}
	if _, err := os.Stat(filepath.Join(dir, "data")); !errors.Is(err, os.ErrNotExist) {
		t.Error("the data are still there")
	}
	if _, err := os.Stat(mine); err != nil {
		t.Error("reset removed a file that is not its own")
	}
	if err := Reset(filepath.Join(dir, "nowhere")); err != nil {
		t.Errorf("reset of nothing: %v", err)
	}
}

func TestLongPath(t *testing.T) {
	dir := filepath.Join(tempDir(t), strings.Repeat("long", 25))
	c := start(t, dir)
	if got := query(t, c, "select 'short socket'"); got != "short socket" {
		t.Errorf("got %q", got)
	}
	t.Cleanup(func() { os.RemoveAll(c.socket) })
}

func TestRefusals(t *testing.T) {
	dir := tempDir(t)
	if _, err := Start(t.Context(), Options{Dir: dir, BinDir: dir}); err == nil || !strings.Contains(err.Error(), "initdb") {
		t.Errorf("a folder without programs: %v", err)
	}
	file := filepath.Join(dir, "file")
	if err := os.WriteFile(file, nil, 0o600); err != nil {
		t.Fatal(err)
	}
	if _, err := Start(t.Context(), Options{Dir: filepath.Join(file, "sub")}); err == nil || !strings.Contains(err.Error(), "data folder") {
		t.Errorf("a folder inside a file: %v", err)
	}
	if os.Geteuid() == 0 {
		hidden := filepath.Join(dir, "hidden")
		if err := os.Mkdir(hidden, 0o700); err != nil {
			t.Fatal(err)
		}
		if _, err := Start(t.Context(), Options{Dir: filepath.Join(hidden, "data")}); err == nil || !strings.Contains(err.Error(), hidden) {
			t.Errorf("a folder that the database's user cannot reach: %v", err)
		}
	}
	if err := os.MkdirAll(filepath.Join(dir, "old", "data"), 0o755); err != nil {
		t.Fatal(err)
	}
	if err := os.WriteFile(filepath.Join(dir, "old", "data", "PG_VERSION"), []byte("9.6\n"), 0o600); err != nil {
		t.Fatal(err)
	}
	if _, err := Start(t.Context(), Options{Dir: filepath.Join(dir, "old")}); err == nil || !strings.Contains(err.Error(), "Postgres 9") {
		t.Errorf("a cluster of a version that is not there: %v", err)
	}
}
