// Package pgembed runs a private Postgres server in a data folder: for people
// who want to start the program and nothing else. It uses the Postgres
// programs of the system, listens on a socket in that folder only, and needs
// no password: the system says who is at the other end.
//
// The program that holds the folder's lock owns the server and stops it; a
// second program attaches to the running one. If the owner dies, however
// suddenly, its server stops too.
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
	socket string
	owner  bool
	lock   *os.File
	pid    int           // of an adopted server; else 0
	stdin  *os.File      // closing it stops the server
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
	attachTimeout = 30 * time.Second
	stopTimeout   = 30 * time.Second
)

// Start starts the server, makes the cluster first where there is none, or
// attaches to the server of another program.
func Start(ctx context.Context, o Options) (*Cluster, error) {
	dir, err := folder(o.Dir)
	if err != nil {
		return nil, err
	}
	data := filepath.Join(dir, "data")
	major, err := clusterMajor(data)
	if err != nil {
		return nil, fmt.Errorf("data folder: %w", err)
	}
	acct, err := accountFor(data)
	if err != nil {
		return nil, err
	}
	if err := acct.prepare(dir); err != nil {
		return nil, err
	}
	socket, err := acct.socketDir(dir)
	if err != nil {
		return nil, err
	}
	c := &Cluster{dir: dir, socket: socket}
	if err := c.takeLock(); err != nil {
		var held *HeldError
		if errors.As(err, &held) && !o.Exclusive {
			return c, c.awaitReady(ctx, attachTimeout)
		}
		return nil, err
	}
	bin, err := find(o.BinDir, major)
	if err == nil {
		err = c.own(ctx, o, bin, acct, major == 0)
	}
	if err != nil {
		c.lock.Close()
		return nil, err
	}
	return c, nil
}

// folder is the data folder as a whole path.
func folder(dir string) (string, error) {
	if dir == "" {
		var err error
		if dir, err = DefaultDir(); err != nil {
			return "", err
		}
	}
	abs, err := filepath.Abs(dir)
	if err != nil {
		return "", fmt.Errorf("data folder %s: %w", dir, err)
	}
	return abs, nil
}

// takeLock takes the folder's lock, or says who has it.
func (c *Cluster) takeLock() error {
	name := filepath.Join(c.dir, "owner.lock")
	f, err := os.OpenFile(name, os.O_RDWR|os.O_CREATE, 0o644)
	if err != nil {
		return fmt.Errorf("data folder: %w", err)
	}
	if err := syscall.Flock(int(f.Fd()), syscall.LOCK_EX|syscall.LOCK_NB); err != nil {
		defer f.Close()
		if !errors.Is(err, syscall.EWOULDBLOCK) {
			return fmt.Errorf("data folder: lock %s: %w", name, err)
		}
		b, _ := os.ReadFile(name) // only to name the holder
		pid, _ := strconv.Atoi(strings.TrimSpace(string(b)))
		return &HeldError{Dir: c.dir, PID: pid}
	}
	if err := f.Truncate(0); err == nil {
		_, err = f.WriteAt([]byte(strconv.Itoa(os.Getpid())+"\n"), 0)
	}
	if err != nil {
		f.Close()
		return fmt.Errorf("data folder: %s: %w", name, err)
	}
	c.lock, c.owner = f, true
	return nil
}

// own makes and starts the server as its owner.
func (c *Cluster) own(ctx context.Context, o Options, bin binaries, acct account, fresh bool) error {
	say := o.Log
	if say == nil {
		say = func(string) {}
	}
	if fresh {
		say("making a private Postgres " + strconv.Itoa(bin.major) + " cluster in " + c.dir)
		if err := c.initdb(ctx, bin, acct, o.Unsafe); err != nil {
			return err
		}
	}
	if err := c.access(acct); err != nil {
		return err
	}
	adopted, err := c.orphan()
	if err != nil {
		return err
	}
	if !adopted {
		if err := c.launch(bin, acct, o.Unsafe); err != nil {
			return err
		}
	}
	if err := c.awaitReady(ctx, startTimeout); err != nil {
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

// Psql is the command with which a person looks into the database.
func (c *Cluster) Psql(database string) string {
	return fmt.Sprintf("psql \"host=%s user=postgres dbname=%s\"", c.socket, database)
}

// Dir is the data folder.
func (c *Cluster) Dir() string { return c.dir }

// Owner tells whether this program started the server and will stop it.
func (c *Cluster) Owner() bool { return c.owner }

// Done is closed when the server has ended, by itself or by Stop; it is nil,
// and so never ready, for a server that this program did not start.
func (c *Cluster) Done() <-chan struct{} { return c.done }

// Err is why the server ended, after Done is closed: nil after Stop.
func (c *Cluster) Err() error { return c.err }
