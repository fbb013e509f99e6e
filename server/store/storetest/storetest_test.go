package storetest

import (
	"context"
	"os"
	"path/filepath"
	"syscall"
	"testing"
	"time"

	"github.com/jackc/pgx/v5"
)

func TestMain(m *testing.M) { Run(m) }

// query runs a statement that answers with one number.
func query(t *testing.T, dsn, sql string) int {
	t.Helper()
	c, err := pgx.Connect(t.Context(), dsn)
	if err != nil {
		t.Fatal(err)
	}
	defer c.Close(context.Background())
	var n int
	if err := c.QueryRow(t.Context(), sql).Scan(&n); err != nil {
		t.Fatal(err)
	}
	return n
}

// Tests at the same time have databases of their own, all migrated.
func TestDatabasesAreApart(t *testing.T) {
	dsns := make([]string, 4)
	t.Run("group", func(t *testing.T) {
		for i := range dsns {
			t.Run("", func(t *testing.T) {
				t.Parallel()
				dsns[i] = DSN(t)
				if n := query(t, dsns[i], "select count(*) from person"); n != 0 {
					t.Errorf("%d people in a fresh database", n)
				}
				add := "insert into person (name, role, created_at) values ('x', 'reader', now()) returning id"
				if id := query(t, dsns[i], add); id != 1 {
					t.Errorf("the first person has id %d", id)
				}
			})
		}
	})
	left := query(t, Cluster().DSN("postgres"), "select count(*) from pg_database where datname ~ '^t[0-9]'")
	if left != 0 {
		t.Errorf("%d databases are left after their tests", left)
	}
}

func TestEmptyAndSchema(t *testing.T) {
	const tables = "select count(*) from pg_tables where schemaname = 'public'"
	if n := query(t, EmptyDSN(t), tables); n != 0 {
		t.Errorf("%d tables in an empty database", n)
	}
	if n := query(t, SchemaDSN(t), tables); n < 20 {
		t.Errorf("%d tables by schema.sql", n)
	}
}

// Folders of test binaries that were killed go; those in use, those just made
// and those of others stay.
func TestSweep(t *testing.T) {
	t.Setenv("TMPDIR", t.TempDir())
	old := time.Now().Add(-time.Hour)
	for _, name := range []string{folders + "dead", folders + "bare", folders + "held", folders + "new", "another"} {
		d := filepath.Join(os.TempDir(), name)
		if err := os.Mkdir(d, 0o755); err != nil {
			t.Fatal(err)
		}
		if name != folders+"bare" {
			if err := os.WriteFile(filepath.Join(d, "owner.lock"), nil, 0o600); err != nil {
				t.Fatal(err)
			}
		}
		if name != folders+"new" {
			if err := os.Chtimes(d, old, old); err != nil {
				t.Fatal(err)
			}
		}
	}
	f, err := os.Open(filepath.Join(os.TempDir(), folders+"held", "owner.lock"))
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	if err := syscall.Flock(int(f.Fd()), syscall.LOCK_EX); err != nil {
		t.Fatal(err)
	}
	sweep()
	for name, stays := range map[string]bool{folders + "dead": false, folders + "bare": false, folders + "held": true, folders + "new": true, "another": true} {
		if _, err := os.Stat(filepath.Join(os.TempDir(), name)); (err == nil) != stays {
			t.Errorf("%s: there is %v, want %v", name, err == nil, stays)
		}
	}
}
