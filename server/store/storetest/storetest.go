// Package storetest gives tests a real Postgres: one private cluster a test
// binary, migrated once into a template, and a fresh copy of it for each test.
package storetest

import (
	"context"
	"fmt"
	"os"
	"sync"
	"sync/atomic"
	"testing"
	"time"

	"github.com/jackc/pgx/v5"

	"cadencewright/migrations"
	"cadencewright/server/pgembed"
	"cadencewright/server/store"
)

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
		}
		os.RemoveAll(dir)
	}
	os.Exit(code)
}

// DSN is a fresh, migrated database for one test. Without Postgres on the
// machine the test is skipped, or fails where CI=true.
func DSN(t testing.TB) string {
	t.Helper()
	once.Do(func() { failure = begin() })
	if failure != nil {
		if os.Getenv("CI") == "true" {
			t.Fatal(failure)
		}
		t.Skip(failure)
	}
	name := fmt.Sprintf("t%d", count.Add(1))
	if err := exec("create database " + name + " template tpl"); err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() {
		if err := exec("drop database if exists " + name + " with (force)"); err != nil {
			t.Error(err)
		}
	})
	return cluster.DSN(name)
}

// SchemaDSN is a fresh database made by schema.sql instead of the migrations.
func SchemaDSN(t testing.TB) string {
	t.Helper()
	DSN(t) // the cluster, or the reason why there is none
	name := fmt.Sprintf("s%d", count.Add(1))
	if err := exec("create database " + name); err != nil {
		t.Fatal(err)
	}
	ctx := context.Background()
	c, err := pgx.Connect(ctx, cluster.DSN(name))
	if err != nil {
		t.Fatal(err)
	}
	defer c.Close(ctx)
	if _, err := c.Exec(ctx, migrations.Schema); err != nil {
		t.Fatalf("schema.sql: %v", err)
	}
	return cluster.DSN(name)
}

// Open is a store on a fresh database with the given clock (nil: the system's).
func Open(t testing.TB, clock func() time.Time) *store.Store {
	t.Helper()
	s, err := store.Open(context.Background(), DSN(t), store.Options{Clock: clock, MaxConns: 8})
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(s.Close)
	return s
}

// Cluster is the cluster under the tests, once a database was asked for.
func Cluster() *pgembed.Cluster { return cluster }

func begin() error {
	var err error
	if dir, err = os.MkdirTemp("", "cwdb"); err != nil {
		return err
	}
	if err := os.Chmod(dir, 0o755); err != nil {
		return err
	}
	ctx, cancel := context.WithTimeout(context.Background(), time.Minute)
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

// admin serialises what is done to whole databases: copying one wants nobody
// else in it.
var admin sync.Mutex

func exec(sql string) error {
	admin.Lock()
	defer admin.Unlock()
	ctx, cancel := context.WithTimeout(context.Background(), 30*time.Second)
	defer cancel()
	c, err := pgx.Connect(ctx, cluster.DSN("postgres"))
	if err != nil {
		return err
	}
	defer c.Close(ctx)
	_, err = c.Exec(ctx, sql)
	return err
}
