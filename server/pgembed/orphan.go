package pgembed

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"io/fs"
	"os"
	"os/exec"
	"path/filepath"
	"strconv"
	"strings"
	"syscall"
	"time"
)

// process is what is known of a process whose number the server's file names.
type process int

const (
	gone    process = iota // there is none of that number
	other                  // it is not the server of this folder
	server                 // it is
	unknown                // out of sight
)

// dyingTime is how long a server whose owner has died gets to stop by itself.
const dyingTime = 2 * time.Second

// orphan looks for what a killed run left behind: a server of this folder that
// still runs and answers is returned to be adopted. The pid file of one that is
// gone is Postgres's own business, for by it a new server finds out whether
// parts of the old one still run; it is removed only where its number is
// somebody else's by now, which Postgres would take for a running server. Where
// that is not certain nothing is done: two servers on one cluster destroy it.
func (c *Cluster) orphan(ctx context.Context) (pid int, err error) {
	for start := time.Now(); ; {
		lines, err := c.pidFile()
		if errors.Is(err, fs.ErrNotExist) {
			return 0, nil
		}
		if err != nil {
			return 0, folderError(c.dir, err)
		}
		pid, _ := strconv.Atoi(strings.TrimSpace(lines[0]))
		is := c.process(pid)
		switch waited := time.Since(start); {
		case is == gone:
			return 0, nil
		case is == other:
			return 0, c.removePidFile()
		case waited > dyingTime && c.answers():
			return pid, nil
		case waited > stopTimeout:
			return 0, fmt.Errorf("data folder %s: Postgres process %d is there but does not answer; end it and start again", c.dir, pid)
		}
		select {
		case <-ctx.Done():
			return 0, ctx.Err()
		case <-time.After(poll):
		}
	}
}

func (c *Cluster) removePidFile() error {
	if err := os.Remove(filepath.Join(c.dir, "data", "postmaster.pid")); err != nil && !errors.Is(err, fs.ErrNotExist) {
		return folderError(c.dir, err)
	}
	return nil
}

// endOrphan ends the server that a killed run has left behind, if there is one.
func (c *Cluster) endOrphan() error {
	ctx, cancel := context.WithTimeout(context.Background(), 2*stopTimeout)
	defer cancel()
	pid, err := c.orphan(ctx)
	if err != nil || pid == 0 {
		return err
	}
	c.adopt(pid)
	c.ending.Store(true)
	if err := c.end(); err != nil {
		return fmt.Errorf("stop Postgres process %d: %w", pid, err)
	}
	select {
	case <-c.done:
		return nil
	case <-ctx.Done():
		return fmt.Errorf("Postgres process %d has not stopped after %s", pid, stopTimeout)
	}
}

// process tells whether a process is the server of this data folder.
func (c *Cluster) process(pid int) process {
	if pid <= 0 { // a file that was cut short; Postgres would not start over it
		return other
	}
	if errors.Is(syscall.Kill(pid, 0), syscall.ESRCH) {
		return gone
	}
	data := filepath.Join(c.dir, "data")
	if _, err := os.Stat("/proc/self/cmdline"); err != nil {
		return processByPS(pid, data)
	}
	proc := filepath.Join("/proc", strconv.Itoa(pid))
	if at, err := os.Readlink(filepath.Join(proc, "cwd")); err == nil { // a server lives in its cluster
		if real, err := filepath.EvalSymlinks(data); err == nil && at == real {
			return server
		}
	}
	line, err := os.ReadFile(filepath.Join(proc, "cmdline"))
	switch {
	case errors.Is(err, fs.ErrNotExist):
		return gone // it has just ended
	case err != nil:
		return unknown
	case len(line) == 0:
		return other // a dead process that nobody has buried, or the kernel's own
	case bytes.Contains(line, []byte(data+"\x00")):
		return server
	}
	return other
}

// processByPS is process where there is no /proc.
func processByPS(pid int, data string) process {
	ctx, cancel := context.WithTimeout(context.Background(), toolTimeout)
	defer cancel()
	out, err := exec.CommandContext(ctx, "ps", "-p", strconv.Itoa(pid), "-o", "command=").Output()
	line := string(out)
	switch {
	case err != nil && strings.TrimSpace(line) == "":
		return gone // ps finds none
	case strings.Contains(line, data):
		return server
	case strings.Contains(line, "postgres"):
		return unknown
	}
	return other
}
