package pgembed

import (
	"context"
	"errors"
	"fmt"
	"io"
	"net"
	"os"
	"os/exec"
	"path/filepath"
	"strconv"
	"strings"
	"syscall"
	"time"
)

// initdb makes the cluster in a folder of its own and then gives it its name:
// one that was stopped halfway would look whole.
func (c *Cluster) initdb(ctx context.Context, bin binaries, acct account, unsafe bool) error {
	tmp := filepath.Join(c.dir, "data.init-"+strconv.Itoa(os.Getpid()))
	if old, _ := filepath.Glob(filepath.Join(c.dir, "data.init-*")); len(old) > 0 { // left by a start that was killed
		for _, d := range old {
			if err := os.RemoveAll(d); err != nil {
				return fmt.Errorf("data folder: %w", err)
			}
		}
	}
	args := []string{"-D", tmp, "-U", "postgres", "-E", "UTF8", "--locale=C", "--auth-local=peer", "--auth-host=scram-sha-256"}
	if unsafe {
		args = append(args, "-N")
	}
	cmd := exec.CommandContext(ctx, filepath.Join(bin.dir, "initdb"), args...)
	cmd.SysProcAttr, cmd.Dir = acct.attr(), "/"
	if out, err := cmd.CombinedOutput(); err != nil {
		os.RemoveAll(tmp)
		return fmt.Errorf("initdb in %s: %w: %s", c.dir, err, lastLines(string(out), 3))
	}
	if err := os.Rename(tmp, filepath.Join(c.dir, "data")); err != nil {
		return fmt.Errorf("data folder: %w", err)
	}
	return nil
}

// access writes who may connect: the server's own user, ours and root, all as
// the database's superuser, over the socket only.
func (c *Cluster) access(acct account) error {
	names := map[string]bool{acct.name: true, "root": true}
	if mine, err := accountName(); err == nil {
		names[mine] = true
	}
	ident := ""
	for _, n := range []string{acct.name, "root"} {
		names[n] = true
	}
	for n := range names {
		ident += "own " + quoteIdent(n) + " postgres\n"
	}
	for name, text := range map[string]string{"pg_hba.conf": "local all all peer map=own\n", "pg_ident.conf": ident} {
		file := filepath.Join(c.dir, "data", name)
		if err := os.WriteFile(file, []byte(text), 0o600); err != nil {
			return fmt.Errorf("data folder: %w", err)
		}
		if acct.other {
			if err := os.Chown(file, acct.uid, acct.gid); err != nil {
				return fmt.Errorf("data folder: %w", err)
			}
		}
	}
	return nil
}

func quoteIdent(s string) string { return `"` + strings.ReplaceAll(s, `"`, `""`) + `"` }

// watch is the shell line that starts the server and stops it when the pipe
// from this program closes, which the system does even if we are killed.
const watch = `exec 3<&0; "$@" 3<&- </dev/null & p=$!; { read -r _ <&3; kill -INT $p; } & wait $p`

// launch starts the server.
func (c *Cluster) launch(bin binaries, acct account, unsafe bool) error {
	args := []string{"-c", watch, "pgwatch", filepath.Join(bin.dir, "postgres"), "-D", filepath.Join(c.dir, "data"),
		"-k", c.socket, "-c", "listen_addresses=", "-c", "unix_socket_permissions=0700", "-p", "5432", "-c", "max_connections=200"}
	if unsafe {
		args = append(args, "-c", "fsync=off", "-c", "synchronous_commit=off", "-c", "full_page_writes=off")
	}
	r, w, err := os.Pipe()
	if err != nil {
		return err
	}
	defer r.Close()
	log, err := os.OpenFile(filepath.Join(c.dir, "postgres.log"), os.O_CREATE|os.O_WRONLY|os.O_TRUNC, 0o600)
	if err != nil {
		w.Close()
		return fmt.Errorf("data folder: %w", err)
	}
	defer log.Close()
	cmd := exec.Command("/bin/sh", args...)
	cmd.Stdin, cmd.Stdout, cmd.Stderr, cmd.Dir, cmd.SysProcAttr = r, log, log, "/", acct.attr()
	if err := cmd.Start(); err != nil {
		w.Close()
		return fmt.Errorf("start Postgres: %w", err)
	}
	c.stdin, c.done = w, make(chan struct{})
	go func() {
		err := cmd.Wait()
		if c.ending.Load() {
			err = nil
		} else if err == nil {
			err = errors.New("it ended by itself")
		}
		if err != nil {
			c.err = fmt.Errorf("private Postgres: %w: %s", err, c.logEnd())
		}
		close(c.done)
	}()
	return nil
}

// logEnd is the end of the server's log.
func (c *Cluster) logEnd() string {
	b, err := os.ReadFile(filepath.Join(c.dir, "postgres.log"))
	if err != nil {
		return err.Error()
	}
	return lastLines(string(b), 5)
}

func lastLines(s string, n int) string {
	lines := strings.Split(strings.TrimSpace(s), "\n")
	return strings.Join(lines[max(0, len(lines)-n):], " | ")
}

// answers tells whether a server listens on the socket.
func (c *Cluster) answers() bool {
	conn, err := net.DialTimeout("unix", filepath.Join(c.socket, ".s.PGSQL.5432"), time.Second)
	if err != nil {
		return false
	}
	defer conn.Close()
	// An SSL request is answered by one byte as soon as the postmaster runs;
	// one that is still starting up answers it as well, and then refuses.
	conn.SetDeadline(time.Now().Add(time.Second))
	if _, err := conn.Write([]byte{0, 0, 0, 8, 4, 210, 22, 47}); err != nil {
		return false
	}
	var b [1]byte
	_, err = io.ReadFull(conn, b[:])
	return err == nil
}

// awaitReady waits until the server takes connections.
func (c *Cluster) awaitReady(ctx context.Context, limit time.Duration) error {
	ctx, cancel := context.WithTimeout(ctx, limit)
	defer cancel()
	for {
		if c.answers() && c.accepts() {
			return nil
		}
		select {
		case <-ctx.Done():
			return fmt.Errorf("private Postgres in %s does not answer after %s: %s", c.dir, limit, c.logEnd())
		case <-c.done:
			return c.err
		case <-time.After(15 * time.Millisecond):
		}
	}
}

// accepts tells whether the server has written into its pid file that it is
// ready, as it does once recovery is over.
func (c *Cluster) accepts() bool {
	lines, err := c.pidFile()
	return err == nil && len(lines) >= 8 && strings.TrimSpace(lines[7]) == "ready"
}

func (c *Cluster) pidFile() ([]string, error) {
	b, err := os.ReadFile(filepath.Join(c.dir, "data", "postmaster.pid"))
	if err != nil {
		return nil, err
	}
	return strings.Split(string(b), "\n"), nil
}

// orphan looks for what a killed run left behind: a server that still answers
// is adopted, a pid file whose process is none of Postgres is removed (its
// number may have been given to somebody else since).
func (c *Cluster) orphan() (adopted bool, err error) {
	lines, err := c.pidFile()
	if errors.Is(err, os.ErrNotExist) {
		return false, nil
	}
	if err != nil {
		return false, fmt.Errorf("data folder: %w", err)
	}
	pid, _ := strconv.Atoi(strings.TrimSpace(lines[0]))
	// A server whose owner has just died stops by itself: wait for that.
	for deadline := time.Now().Add(stopTimeout); pid > 0 && isPostgres(pid); time.Sleep(20 * time.Millisecond) {
		if time.Now().After(deadline) {
			if c.answers() {
				c.pid = pid
				return true, nil
			}
			return false, fmt.Errorf("data folder %s: Postgres process %d is there but does not answer; end it and start again", c.dir, pid)
		}
		if c.answers() && time.Until(deadline) < stopTimeout-2*time.Second {
			c.pid = pid
			return true, nil
		}
	}
	if err := os.Remove(filepath.Join(c.dir, "data", "postmaster.pid")); err != nil && !errors.Is(err, os.ErrNotExist) {
		return false, fmt.Errorf("data folder: %w", err)
	}
	return false, nil
}

// isPostgres tells whether a process is there and is a Postgres server.
func isPostgres(pid int) bool {
	if err := syscall.Kill(pid, 0); err != nil && !errors.Is(err, syscall.EPERM) {
		return false
	}
	if b, err := os.ReadFile(fmt.Sprintf("/proc/%d/comm", pid)); err == nil {
		return strings.HasPrefix(strings.TrimSpace(string(b)), "postgres")
	}
	out, err := exec.Command("ps", "-p", strconv.Itoa(pid), "-o", "comm=").Output() // no /proc: macOS
	return err == nil && strings.Contains(string(out), "postgres")
}

// Stop stops the server if this program owns it, waiting until it has ended,
// and gives up the folder.
func (c *Cluster) Stop() error {
	if !c.owner {
		return nil
	}
	defer c.lock.Close()
	if c.pid != 0 {
		return c.stopAdopted()
	}
	if c.done == nil {
		return nil
	}
	if !c.ending.Swap(true) {
		c.stdin.Close()
	}
	select {
	case <-c.done:
		return nil
	case <-time.After(stopTimeout):
		return fmt.Errorf("private Postgres in %s has not stopped after %s", c.dir, stopTimeout)
	}
}

func (c *Cluster) stopAdopted() error {
	if err := syscall.Kill(c.pid, syscall.SIGINT); err != nil {
		return fmt.Errorf("stop Postgres process %d: %w", c.pid, err)
	}
	for deadline := time.Now().Add(stopTimeout); time.Now().Before(deadline); time.Sleep(20 * time.Millisecond) {
		if !isPostgres(c.pid) {
			return nil
		}
	}
	return fmt.Errorf("Postgres process %d has not stopped after %s", c.pid, stopTimeout)
}
