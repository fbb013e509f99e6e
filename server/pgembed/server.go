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
	"strings"
	"syscall"
	"time"
)

// watch is the shell line that starts the server and stops it when the pipe
// from this program closes, which the system does even if we are killed.
const watch = `exec 3<&0; "$@" 3<&- </dev/null & p=$!; { read -r _ <&3; kill -INT $p; } & r=$!; wait $p; s=$?; kill $r 2>/dev/null; exit $s`

// launch starts the server.
func (c *Cluster) launch(bin binaries, acct account, unsafe bool) error {
	args := []string{"-c", watch, "pgwatch", filepath.Join(bin.dir, "postgres"), "-D", filepath.Join(c.dir, "data"), "-p", "5432",
		"-c", "unix_socket_directories=" + quoteIdent(c.socket), "-c", "unix_socket_permissions=0700", "-c", "listen_addresses=",
		"-c", "max_connections=200",
		// What statements do wrong is told to the program, which knows better
		// what to make of it; the log is about the server.
		"-c", "log_min_messages=log", "-c", "log_checkpoints=off"}
	if unsafe {
		args = append(args, "-c", "fsync=off", "-c", "synchronous_commit=off", "-c", "full_page_writes=off")
	}
	log, err := c.newLog()
	if err != nil {
		return folderError(c.dir, err)
	}
	defer log.Close()
	r, w, err := os.Pipe()
	if err != nil {
		return fmt.Errorf("start Postgres: %w", err)
	}
	defer r.Close()
	cmd := exec.Command("/bin/sh", args...)
	cmd.Stdin, cmd.Stdout, cmd.Stderr, cmd.Dir, cmd.SysProcAttr, cmd.Env = r, log, log, "/", acct.attr(), environment()
	if err := cmd.Start(); err != nil {
		w.Close()
		return fmt.Errorf("start Postgres: %w", err)
	}
	c.end = w.Close
	c.watchFor(cmd.Wait)
	return nil
}

// newLog opens the server's log; that of the run before is kept beside it.
func (c *Cluster) newLog() (*os.File, error) {
	name := filepath.Join(c.dir, logName)
	if err := os.Rename(name, name+".old"); err != nil && !errors.Is(err, os.ErrNotExist) {
		return nil, err
	}
	return os.OpenFile(name, os.O_CREATE|os.O_WRONLY|os.O_TRUNC, 0o600)
}

// watchFor closes done when wait returns, with the reason if nobody wanted the
// server to end.
func (c *Cluster) watchFor(wait func() error) {
	c.done = make(chan struct{})
	go func() {
		err := wait()
		switch {
		case c.ending.Load():
			err = nil
		case err == nil:
			err = errors.New("it ended by itself")
		}
		if err != nil {
			end := c.logEnd()
			c.err = fmt.Errorf("the private Postgres in %s has ended: %w: %s", c.dir, cause(err, end), end)
		}
		close(c.done)
	}()
}

// begin starts the server and waits until it is ready. Parts of a server that
// was killed may outlive it for a moment, and a new one refuses to start beside
// them: then it is tried again.
func (c *Cluster) begin(ctx context.Context, bin binaries, acct account, unsafe bool) error {
	for start := time.Now(); ; {
		if err := c.launch(bin, acct, unsafe); err != nil {
			return err
		}
		err := c.awaitReady(ctx, startTimeout)
		if err == nil || !strings.Contains(c.logEnd(), "pre-existing shared memory block") || time.Since(start) > stopTimeout {
			return err
		}
		select {
		case <-ctx.Done():
			return ctx.Err()
		case <-time.After(200 * time.Millisecond):
		}
	}
}

// adopt takes over a server that a killed run has left behind.
func (c *Cluster) adopt(pid int) {
	c.end = func() error {
		if err := syscall.Kill(pid, syscall.SIGINT); !errors.Is(err, syscall.ESRCH) {
			return err
		}
		return nil // it has just ended by itself
	}
	c.watchFor(func() error {
		for c.process(pid) == server {
			time.Sleep(200 * time.Millisecond)
		}
		return nil
	})
}

// logEnd is the end of the server's log.
func (c *Cluster) logEnd() string {
	b, err := os.ReadFile(filepath.Join(c.dir, logName))
	if err != nil {
		return err.Error()
	}
	return lastLines(string(b), 5)
}

// cause is why a server's program failed: a full disk, if that is what it says,
// else the error that running it gave.
func cause(err error, says string) error {
	if strings.Contains(says, "No space left on device") {
		return syscall.ENOSPC
	}
	return err
}

// ready tells whether the server takes connections: it answers, and has written
// into its pid file that recovery is over.
func (c *Cluster) ready() bool {
	if lines, err := c.pidFile(); err != nil || len(lines) < 8 || strings.TrimSpace(lines[7]) != "ready" {
		return false
	}
	return c.answers()
}

// pidFile is what the server writes about itself, by lines: process number,
// data folder, start, port, socket folder, addresses, shared memory, status.
func (c *Cluster) pidFile() ([]string, error) {
	b, err := os.ReadFile(filepath.Join(c.dir, "data", "postmaster.pid"))
	if err != nil {
		return nil, err
	}
	return strings.Split(string(b), "\n"), nil
}

// answers tells whether a server listens on the socket.
func (c *Cluster) answers() bool {
	conn, err := net.DialTimeout("unix", filepath.Join(c.socket, socketName), time.Second)
	if err != nil {
		return false
	}
	defer conn.Close()
	// An SSL request is answered by one byte as soon as the postmaster runs.
	if err := conn.SetDeadline(time.Now().Add(time.Second)); err != nil {
		return false
	}
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
	for !c.ready() {
		select {
		case <-ctx.Done():
			return fmt.Errorf("private Postgres in %s does not answer: %w: %s", c.dir, ctx.Err(), c.logEnd())
		case <-c.done:
			return c.err
		case <-time.After(poll):
		}
	}
	return nil
}
