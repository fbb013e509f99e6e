// Package storetest gives tests a real Postgres: one private cluster a test
// binary, migrated once into a template, and a fresh copy of it for each test.
// Packages share nothing, so that they may be tested at the same time, and the
// cluster ends with its test binary, however that ends.
package storetest

import (
	"context"
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"sync"
	"sync/atomic"
	"syscall"
	"testing"
	"time"

	"github.com/jackc/pgx/v5"

	"cadencewright/migrations"
	"cadencewright/server/pgembed"
	"cadencewright/server/store"
)

// folders is the pattern of the clusters' folders in the system's temporary
// one.
const folders = "cadencewright-test-"

var (
	once    sync.Once
	cluster *pgembed.Cluster
	failure error
	dir     string
	count   atomic.Int64
)

// Run runs the tests of a package and stops the cluster after them: call it
// from TestMain.
func Run(m *testing.M) {
	code := m.Run()
	if cluster != nil {
		if err := cluster.Stop(); err != nil {
			fmt.Fprintln(os.Stderr, err)
			code = max(code, 1)
		}
	}
	if dir != "" {
		os.RemoveAll(dir)
	}
	os.Exit(code)
}

// need begins the cluster. Without Postgres on the machine the test is skipped,
// or fails where CI=true; any other trouble fails it everywhere.
func need(t testing.TB) {
	t.Helper()
	once.Do(func() { failure = begin() })
	switch {
	case failure == nil:
	case errors.Is(failure, pgembed.ErrNoBinaries) && os.Getenv("CI") != "true":
		t.Skip(failure)
	default:
		t.Fatal(failure)
	}
}

// DSN is a fresh, migrated database for one test.
func DSN(t testing.TB) string {
	t.Helper()
	return database(t, "template tpl")
}

// database makes a database for the length of the test.
func database(t testing.TB, how string) string {
	t.Helper()
	need(t)
	name := fmt.Sprintf("t%d", count.Add(1))
	if err := exec("create database " + name + " " + how); err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() {
		if err := exec("drop database if exists " + name + " with (force)"); err != nil {
			t.Error(err)
		}
	})
	return cluster.DSN(name)
}

// EmptyDSN is a database that nobody has migrated yet.
func EmptyDSN(t testing.TB) string {
	t.Helper()
	return database(t, "")
}

// SchemaDSN is a fresh database made by schema.sql instead of the migrations.
func SchemaDSN(t testing.TB) string {
	t.Helper()
	dsn := database(t, "")
	ctx := context.Background()
	c, err := pgx.Connect(ctx, dsn)
	if err != nil {
		t.Fatal(err)
	}
	defer c.Close(ctx)
	if _, err := c.Exec(ctx, migrations.Schema); err != nil {
		t.Fatalf("schema.sql: %v", err)
	}
	return dsn
}

// Open is a store on a fresh database with the given clock (nil: the system's).
func Open(t testing.TB, clock func() time.Time) *store.Store {
	t.Helper()
	return OpenDSN(t, DSN(t), clock)
}

// OpenDSN is a store on a database, as another copy of the program has it.
func OpenDSN(t testing.TB, dsn string, clock func() time.Time) *store.Store {
	t.Helper()
	s, err := store.Open(context.Background(), dsn, store.Options{Clock: clock, MaxConns: 8})
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(s.Close)
	return s
}

// Cluster is the cluster under the tests, once a database was asked for.
func Cluster() *pgembed.Cluster { return cluster }

// begin starts the cluster and makes the template.
func begin() error {
	sweep()
	var err error
	if dir, err = os.MkdirTemp("", folders); err != nil {
		return err
	}
	if err := os.Chmod(dir, 0o755); err != nil { // root's server runs as another user
		return err
	}
	ctx, cancel := context.WithTimeout(context.Background(), 2*time.Minute)
	defer cancel()
	if cluster, err = pgembed.Start(ctx, pgembed.Options{Dir: dir, Unsafe: true, BinDir: os.Getenv("CADENCEWRIGHT_PG_BIN")}); err != nil {
		return err
	}
	if err := exec("create database tpl"); err != nil {
		return err
	}
	s, err := store.Open(ctx, cluster.DSN("tpl"), store.Options{})
	if err != nil {
		return err
	}
	defer s.Close()
	_, err = s.Migrate(ctx)
	return err
}

// sweep removes the folders of test binaries that were killed before they could
// do so: those of ours whose lock nobody holds any more.
func sweep() {
	list, _ := filepath.Glob(filepath.Join(os.TempDir(), folders+"*")) // the pattern is well-formed
	for _, d := range list {
		info, err := os.Stat(d)
		if err != nil || time.Since(info.ModTime()) < time.Minute { // one that is just starting has no lock yet
			continue
		}
		if st, ok := info.Sys().(*syscall.Stat_t); !ok || int(st.Uid) != os.Geteuid() {
			continue
		}
		if f, err := os.OpenFile(filepath.Join(d, "owner.lock"), os.O_RDWR, 0); err == nil {
			held := syscall.Flock(int(f.Fd()), syscall.LOCK_EX|syscall.LOCK_NB) != nil
			f.Close()
			if held {
				continue
			}
		}
		os.RemoveAll(d)
	}
}

// admin serialises what is done to whole databases: copying one wants nobody
// else in it.
var admin sync.Mutex

func exec(sql string) error {
	admin.Lock()
	defer admin.Unlock()
	ctx, cancel := context.WithTimeout(context.Background(), time.Minute)
	defer cancel()
	c, err := pgx.Connect(ctx, cluster.DSN("postgres"))
	if err != nil {
		return err
	}
	defer c.Close(ctx)
	_, err = c.Exec(ctx, sql)
	return err
}
