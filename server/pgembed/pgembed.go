// Package pgembed runs a private Postgres server in a data folder: for people
// who want to start the program and nothing else. It uses the Postgres
// programs of the system, listens on a socket in that folder only, and needs
// no password: the system says who is at the other end.
//
// The program that holds the folder's lock owns the server and stops it; a
// second program attaches to the running one. If the owner dies, however
// suddenly, its server stops too. The package touches only folders that it has
// made itself, and says so of any other.
package pgembed

import (
	"context"
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"strconv"
	"strings"
	"sync/atomic"
	"syscall"
	"time"
)

// Options say where the cluster is and how to run it.
type Options struct {
	Dir    string // data folder; empty: DefaultDir
	BinDir string // folder of initdb and postgres; empty: looked for
	// Exclusive refuses to attach to a server that another program owns.
	Exclusive bool
	// Unsafe trades durability for speed; for tests only.
	Unsafe bool
	// Log, if set, gets a line for a person at each step that takes time.
	Log func(string)
}

// Cluster is a running server.
type Cluster struct {
	dir    string
	socket string // folder of the server's socket
	lock   *os.File
	owner  bool
	end    func() error  // asks the server to stop; nil if attached
	ending atomic.Bool   // Stop has been called
	done   chan struct{} // closed when the server has ended; nil if attached
	err    error         // why it ended; read after done
}

// HeldError says that another program holds the data folder.
type HeldError struct {
	Dir string
	PID int // 0: unknown
}

func (e *HeldError) Error() string {
	who := "another program"
	if e.PID != 0 {
		who = fmt.Sprintf("process %d", e.PID)
	}
	return fmt.Sprintf("data folder %s is held by %s; stop that one first, or choose another folder with CADENCEWRIGHT_DATA", e.Dir, who)
}

const (
	startTimeout  = 60 * time.Second // of the server, after a crash with much to replay
	initTimeout   = 2 * time.Minute  // of making a cluster
	attachTimeout = 30 * time.Second // of another program that is starting the server
	stopTimeout   = 30 * time.Second
	poll          = 15 * time.Millisecond
)

// Start starts the server, makes the cluster first where there is none, or
// attaches to the server of another program.
func Start(ctx context.Context, o Options) (*Cluster, error) {
	dir, err := folder(o.Dir)
	if err != nil {
		return nil, err
	}
	if err := claim(dir); err != nil {
		return nil, err
	}
	major, err := clusterMajor(filepath.Join(dir, "data"))
	if err != nil {
		return nil, folderError(dir, err)
	}
	if major == 0 { // before anything is made
		if _, err := find(o.BinDir, 0); err != nil {
			return nil, err
		}
	}
	acct, err := accountFor(filepath.Join(dir, "data"))
	if err != nil {
		return nil, err
	}
	if err := acct.prepare(dir); err != nil {
		return nil, err
	}
	c := &Cluster{dir: dir}
	if c.socket, err = acct.socketDir(dir); err != nil {
		return nil, err
	}
	if attached, err := c.takeOrAttach(ctx, o.Exclusive); err != nil || attached {
		return c, err
	}
	if err := c.own(ctx, o, acct); err != nil {
		c.lock.Close()
		return nil, err
	}
	return c, nil
}

// takeOrAttach takes the folder's lock, or else waits until the server of the
// program that has it is ready. If that program ends meanwhile, the lock is
// ours after all.
func (c *Cluster) takeOrAttach(ctx context.Context, exclusive bool) (attached bool, err error) {
	deadline := time.Now().Add(attachTimeout)
	for {
		err := c.takeLock()
		var held *HeldError
		switch {
		case err == nil:
			return false, nil
		case !errors.As(err, &held) || exclusive:
			return false, err
		case c.ready():
			return true, nil
		case time.Now().After(deadline):
			return false, fmt.Errorf("%w (its database does not answer after %s)", err, attachTimeout)
		}
		select {
		case <-ctx.Done():
			return false, ctx.Err()
		case <-time.After(poll):
		}
	}
}

// takeLock takes the folder's lock, or says who has it. The system frees it
// when its holder ends, however suddenly.
func (c *Cluster) takeLock() error {
	name := filepath.Join(c.dir, lockName)
	f, err := os.OpenFile(name, os.O_RDWR|os.O_CREATE, 0o644)
	if err != nil {
		return folderError(c.dir, err)
	}
	if err := syscall.Flock(int(f.Fd()), syscall.LOCK_EX|syscall.LOCK_NB); err != nil {
		defer f.Close()
		if !errors.Is(err, syscall.EWOULDBLOCK) {
			return folderError(c.dir, fmt.Errorf("lock %s: %w", name, err))
		}
		b, _ := os.ReadFile(name) // only to name the holder
		pid, _ := strconv.Atoi(strings.TrimSpace(string(b)))
		return &HeldError{Dir: c.dir, PID: pid}
	}
	err = f.Truncate(0)
	if err == nil {
		_, err = f.WriteAt([]byte(strconv.Itoa(os.Getpid())+"\n"), 0)
	}
	if err != nil {
		f.Close()
		return folderError(c.dir, err)
	}
	c.lock, c.owner = f, true
	return nil
}

// own makes and starts the server as its owner. The version of a cluster is
// looked at again: another program may have made one while we waited.
func (c *Cluster) own(ctx context.Context, o Options, acct account) error {
	major, err := clusterMajor(filepath.Join(c.dir, "data"))
	if err != nil {
		return folderError(c.dir, err)
	}
	bin, err := find(o.BinDir, major)
	if err != nil {
		return err
	}
	if major == 0 {
		if o.Log != nil {
			o.Log("making a private Postgres " + strconv.Itoa(bin.major) + " cluster in " + c.dir)
		}
		if err := c.initdb(ctx, bin, acct, o.Unsafe); err != nil {
			return err
		}
	}
	if err := acct.makeRun(c.dir); err != nil {
		return err
	}
	if err := c.access(acct); err != nil {
		return err
	}
	pid, err := c.orphan(ctx)
	if err != nil {
		return err
	}
	if pid != 0 {
		c.adopt(pid)
		err = c.awaitReady(ctx, startTimeout)
	} else {
		err = c.begin(ctx, bin, acct, o.Unsafe)
	}
	if err != nil {
		return errors.Join(err, c.Stop())
	}
	return nil
}

// DSN is the connection string of a database in the cluster.
func (c *Cluster) DSN(database string) string {
	return fmt.Sprintf("host=%s port=5432 user=postgres dbname=%s", quoteDSN(c.socket), quoteDSN(database))
}

func quoteDSN(s string) string {
	return "'" + strings.NewReplacer(`\`, `\\`, `'`, `\'`).Replace(s) + "'"
}

// Psql is the command with which a person looks into a database, for a shell.
func (c *Cluster) Psql(database string) string {
	dsn := fmt.Sprintf("host=%s user=postgres dbname=%s", quoteDSN(c.socket), quoteDSN(database))
	return `psql "` + strings.NewReplacer(`\`, `\\`, `"`, `\"`, "$", `\$`, "`", "\\`").Replace(dsn) + `"`
}

// Dir is the data folder.
func (c *Cluster) Dir() string { return c.dir }

// Owner tells whether this program owns the server and will stop it.
func (c *Cluster) Owner() bool { return c.owner }

// Done is closed when the server has ended, by itself or by Stop; it is nil,
// and so never ready, for the server of another program.
func (c *Cluster) Done() <-chan struct{} { return c.done }

// Err is why the server ended, after Done is closed: nil after Stop.
func (c *Cluster) Err() error { return c.err }

// Stop stops the server if this program owns it, waiting until it has ended,
// and gives up the folder. Stopping twice does nothing more.
func (c *Cluster) Stop() error {
	if !c.owner {
		return nil
	}
	defer c.lock.Close()
	if c.done == nil {
		return nil
	}
	if !c.ending.Swap(true) {
		if err := c.end(); err != nil {
			return fmt.Errorf("stop the private Postgres: %w", err)
		}
	}
	select {
	case <-c.done:
		return nil
	case <-time.After(stopTimeout):
		return fmt.Errorf("private Postgres in %s has not stopped after %s", c.dir, stopTimeout)
	}
}
