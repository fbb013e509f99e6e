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

// answer is a question's answer, which may be out of reach.
type answer int

const (
	no answer = iota
	yes
	unknown
)

// dyingTime is how long a server whose owner has died gets to stop by itself.
const dyingTime = 2 * time.Second

// orphan looks for what a killed run left behind: a server of this folder that
// still runs and answers is returned to be adopted; the pid file of one that is
// gone is removed, for its number may be somebody else's by now. The file is
// left alone where it is not certain that its server is gone: two servers on
// one cluster destroy it.
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
		runs := c.runs(pid)
		switch waited := time.Since(start); {
		case runs == no:
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

// runs tells whether a process is the server of this data folder.
func (c *Cluster) runs(pid int) answer {
	if pid <= 0 || errors.Is(syscall.Kill(pid, 0), syscall.ESRCH) {
		return no
	}
	data := filepath.Join(c.dir, "data")
	if _, err := os.Stat("/proc/self/cmdline"); err != nil {
		return runsByPS(pid, data)
	}
	proc := filepath.Join("/proc", strconv.Itoa(pid))
	if at, err := os.Readlink(filepath.Join(proc, "cwd")); err == nil { // a server lives in its cluster
		if real, err := filepath.EvalSymlinks(data); err == nil && at == real {
			return yes
		}
	}
	line, err := os.ReadFile(filepath.Join(proc, "cmdline"))
	switch {
	case errors.Is(err, fs.ErrNotExist):
		return no // it has just ended
	case err != nil:
		return unknown
	case len(line) == 0:
		return no // a dead process that nobody has buried, or the kernel's own
	case bytes.Contains(line, []byte(data+"\x00")):
		return yes
	}
	return no
}

// runsByPS is runs where there is no /proc.
func runsByPS(pid int, data string) answer {
	ctx, cancel := context.WithTimeout(context.Background(), toolTimeout)
	defer cancel()
	out, err := exec.CommandContext(ctx, "ps", "-p", strconv.Itoa(pid), "-o", "command=").Output()
	line := string(out)
	switch {
	case err != nil && strings.TrimSpace(line) == "":
		return no // ps finds none
	case strings.Contains(line, data):
		return yes
	case strings.Contains(line, "postgres"):
		return unknown
	}
	return no
}
