package store

import (
	"context"
	"errors"
	"fmt"
	"io"
	"net"
	"strings"
	"testing"

	"github.com/jackc/pgx/v5"
	"github.com/jackc/pgx/v5/pgconn"

	"cadencewright/scheduler"
)

// Every error of the database has the kind that the service tells people by.
func TestClassify(t *testing.T) {
	pg := func(code, constraint string) error {
		return fmt.Errorf("while at work: %w", &pgconn.PgError{Code: code, ConstraintName: constraint, Message: "secret detail"})
	}
	known := scheduler.Errorf(scheduler.ErrForbidden, "no")
	for _, x := range []struct {
		name string
		err  error
		kind error
		says string
	}{
		{"nothing", nil, nil, ""},
		{"an error that has a kind", known, scheduler.ErrForbidden, "no"},
		{"no rows", pgx.ErrNoRows, scheduler.ErrNotFound, "no such thing"},
		{"a name taken", pg("23505", "person_name_unique"), scheduler.ErrConflict, "person of that name"},
		{"blocks that overlap", pg("23P01", "block_no_overlap"), scheduler.ErrConflict, "overlaps another block"},
		{"a constraint without words", pg("23514", "telescope_axes"), nil, "secret detail"},
		{"serialisation", pg("40001", ""), scheduler.ErrUnavailable, "try again"},
		{"deadlock", pg("40P01", ""), scheduler.ErrUnavailable, "try again"},
		{"no text", pg("22021", ""), scheduler.ErrInvalid, "character"},
		{"too slow", pg("57014", ""), scheduler.ErrUnavailable, "too long"},
		{"disk full", pg("53100", ""), scheduler.ErrUnavailable, "disk of the database is full"},
		{"too many connections", pg("53300", ""), scheduler.ErrUnavailable, "database is away"},
		{"stopping", pg("57P01", ""), scheduler.ErrUnavailable, "database is away"},
		{"starting", pg("57P03", ""), scheduler.ErrUnavailable, "database is away"},
		{"connection lost", pg("08006", ""), scheduler.ErrUnavailable, "database is away"},
		{"a standby", pg("25006", ""), scheduler.ErrUnavailable, "database is away"},
		{"a wrong query", pg("42703", ""), nil, "database"},
		{"end of the line", fmt.Errorf("read: %w", io.ErrUnexpectedEOF), scheduler.ErrUnavailable, "database is away"},
		{"network", &net.OpError{Op: "dial", Err: errors.New("refused")}, scheduler.ErrUnavailable, "database is away"},
		{"no time left", context.DeadlineExceeded, scheduler.ErrUnavailable, "database is away"},
		{"cancelled", context.Canceled, nil, "canceled"},
		{"anything else", errors.New("odd"), nil, "odd"},
	} {
		got := classify(x.err)
		if k := scheduler.KindOf(got); k != x.kind {
			t.Errorf("%s: kind %v, want %v", x.name, k, x.kind)
		}
		if x.err != nil && !strings.Contains(got.Error(), x.says) {
			t.Errorf("%s: %q does not say %q", x.name, got, x.says)
		}
		if x.kind != nil && strings.Contains(got.Error(), "secret") && x.name != "disk full" {
			t.Errorf("%s: %q tells what it must not", x.name, got)
		}
		if x.err == nil {
			continue
		}
		if f := fault("plans", x.err); scheduler.KindOf(f) != x.kind {
			t.Errorf("%s: as a fault its kind is %v, want %v", x.name, scheduler.KindOf(f), x.kind)
		}
	}
	if err := fault("plans", errors.New("odd")); err.Error() != "plans: odd" {
		t.Errorf("a fault without a kind says %q", err)
	}
	var cause *pgconn.PgError
	if err := classify(pg("57P01", "")); !errors.As(err, &cause) {
		t.Error("the cause is not kept for the log")
	}
}

// The words for constraints are whole, and are about constraints that exist;
// and every way in which two people's changes can clash has its words.
func TestConstraintsHaveWords(t *testing.T) {
	ctx := context.Background()
	conn, err := pgx.Connect(ctx, testDSN(t))
	if err != nil {
		t.Fatal(err)
	}
	defer conn.Close(ctx)
	rows, err := conn.Query(ctx, `select conname, contype = any('{u,x}') from pg_constraint where connamespace = 'public'::regnamespace
		union select indexname, true from pg_indexes where schemaname = 'public' and indexdef like 'CREATE UNIQUE%'`)
	if err != nil {
		t.Fatal(err)
	}
	clashes := map[string]bool{}
	var name string
	var clash bool
	if _, err := pgx.ForEachRow(rows, []any{&name, &clash}, func() error { clashes[name] = clashes[name] || clash; return nil }); err != nil {
		t.Fatal(err)
	}
	for name, f := range constraints {
		if _, ok := clashes[name]; !ok {
			t.Errorf("there is no constraint %s", name)
		}
		if f.Field == "" || f.Message == "" || f.kind == nil {
			t.Errorf("constraint %s: %+v", name, f)
		}
	}
	for name, clash := range clashes {
		// Keys of rows and of parts, which nobody chooses.
		chosen := clash && !strings.HasSuffix(name, "_pkey") && !strings.Contains(name, "_of_") && !strings.HasPrefix(name, "goose") && name != "api_key_token_hash_key"
		if _, ok := constraints[name]; chosen && !ok {
			t.Errorf("two changes may clash in %s, which has no words", name)
		}
	}
}

// A transaction that fails, or whose context ends, gives its connection back
// whole; all that it writes is of one instant.
func TestTransactions(t *testing.T) {
	s, err := Open(t.Context(), testDSN(t), Options{MaxConns: 1})
	if err != nil {
		t.Fatal(err)
	}
	defer s.Close()
	count := func() (n int) {
		t.Helper()
		if err := s.pool.QueryRow(t.Context(), "select count(*) from journal").Scan(&n); err != nil {
			t.Fatal(err)
		}
		return n
	}
	odd := errors.New("odd")
	err = s.tx(t.Context(), func(tx *tx) error {
		if err := tx.note(t.Context(), 0, "ada", "add", "x", nil, nil); err != nil {
			return err
		}
		return odd
	})
	if !errors.Is(err, odd) || count() != 0 {
		t.Errorf("a failing transaction says %v and leaves %d lines", err, count())
	}
	ctx, cancel := context.WithCancel(t.Context())
	err = s.tx(ctx, func(tx *tx) error {
		err := tx.note(ctx, 0, "ada", "add", "x", nil, nil)
		cancel()
		return err
	})
	if !errors.Is(err, context.Canceled) || count() != 0 {
		t.Errorf("a cancelled transaction says %v and leaves %d lines", err, count())
	}
	err = s.tx(t.Context(), func(tx *tx) error {
		for range 2 {
			if err := tx.note(t.Context(), 0, "ada", "add", "x", nil, nil); err != nil {
				return err
			}
		}
		return nil
	})
	if err != nil || count() != 2 {
		t.Errorf("a transaction says %v and leaves %d lines", err, count())
	}
	lines, err := s.Journal(t.Context(), 0, 0, 10)
	if err != nil || len(lines) != 2 || !lines[0].At.Equal(lines[1].At) || lines[0].At.Nanosecond()%1e6 != 0 {
		t.Errorf("lines %+v, %v", lines, err)
	}
	if err := s.snapshot(t.Context(), func(tx *tx) error { return tx.note(t.Context(), 0, "ada", "add", "x", nil, nil) }); err == nil {
		t.Error("a reader may write")
	}
	func() {
		defer func() {
			if recover() == nil {
				t.Error("the panic is gone")
			}
		}()
		_ = s.tx(t.Context(), func(*tx) error { panic("odd") })
	}()
	if count() != 2 {
		t.Error("after a panic the connection is of no use")
	}
}
