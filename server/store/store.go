// Package store keeps everything in Postgres and is the only place that speaks
// SQL: the planner's vocabulary goes in and comes out. What must never be true
// (two live scans of one telescope at once, a dangling name, two live
// campaigns) is forbidden by the schema; a broken constraint comes back as a
// conflict that names its field. Every change is written with its line in the
// journal, in one transaction.
package store

import (
	"context"
	"errors"
	"time"

	"github.com/jackc/pgx/v5"
	"github.com/jackc/pgx/v5/pgtype"
	"github.com/jackc/pgx/v5/pgxpool"
)

// Store is the database. It may be used from several goroutines.
type Store struct {
	pool        *pgxpool.Pool
	clock       func() time.Time
	feedSilence time.Duration
}

// Options say how to open the store.
type Options struct {
	MaxConns int32
	// Clock gives the time of every transaction; nil: the system's.
	Clock func() time.Time
}

// statementTimeout bounds every statement: what takes longer is a fault.
const statementTimeout = "20000" // milliseconds

// Open connects to the database. It does not migrate.
func Open(ctx context.Context, dsn string, o Options) (*Store, error) {
	cfg, err := pgxpool.ParseConfig(dsn)
	if err != nil {
		return nil, errors.New("DATABASE_URL is not a connection string that Postgres understands") // the cause would show the password
	}
	if o.MaxConns > 0 {
		cfg.MaxConns = o.MaxConns
	}
	cfg.ConnConfig.RuntimeParams["application_name"] = "cadencewright"
	cfg.ConnConfig.RuntimeParams["statement_timeout"] = statementTimeout
	cfg.ConnConfig.RuntimeParams["idle_in_transaction_session_timeout"] = statementTimeout
	cfg.ConnConfig.ConnectTimeout = 5 * time.Second
	cfg.AfterConnect = func(_ context.Context, c *pgx.Conn) error {
		// timestamptz as UTC: pgx gives local time otherwise.
		c.TypeMap().RegisterType(&pgtype.Type{Name: "timestamptz", OID: pgtype.TimestamptzOID, Codec: &pgtype.TimestamptzCodec{ScanLocation: time.UTC}})
		registerRange(c)
		return nil
	}
	pool, err := pgxpool.NewWithConfig(ctx, cfg)
	if err != nil {
		return nil, fault("connect", err)
	}
	s := &Store{pool: pool, clock: o.Clock, feedSilence: feedSilence}
	if s.clock == nil {
		s.clock = time.Now
	}
	return s, nil
}

// registerRange gives tstzrange the UTC codec too.
func registerRange(c *pgx.Conn) {
	if t, ok := c.TypeMap().TypeForOID(pgtype.TimestamptzOID); ok {
		c.TypeMap().RegisterType(&pgtype.Type{Name: "tstzrange", OID: pgtype.TstzrangeOID, Codec: &pgtype.RangeCodec{ElementType: t}})
	}
}

// Close closes every connection.
func (s *Store) Close() { s.pool.Close() }

// Ping tells whether the database answers.
func (s *Store) Ping(ctx context.Context) error {
	if err := s.pool.Ping(ctx); err != nil {
		return fault("ping", err)
	}
	return nil
}

// Pool is for the job queue's driver, which needs connections of its own.
func (s *Store) Pool() *pgxpool.Pool { return s.pool }

// Stat is the pool's figures, for metrics.
func (s *Store) Stat() *pgxpool.Stat { return s.pool.Stat() }

// tx is one transaction: the only handle to the database in its scope, and one
// instant for all that it writes.
type tx struct {
	q   pgx.Tx
	now time.Time
}

// tx runs f in a transaction. The rollback survives the cancelling of ctx.
func (s *Store) tx(ctx context.Context, f func(*tx) error) error {
	return s.txWith(ctx, pgx.TxOptions{}, f)
}

// snapshot runs f in a transaction that sees one state of the database.
func (s *Store) snapshot(ctx context.Context, f func(*tx) error) error {
	return s.txWith(ctx, pgx.TxOptions{IsoLevel: pgx.RepeatableRead, AccessMode: pgx.ReadOnly}, f)
}

func (s *Store) txWith(ctx context.Context, o pgx.TxOptions, f func(*tx) error) error {
	q, err := s.pool.BeginTx(ctx, o)
	if err != nil {
		return fault("begin", err)
	}
	defer func() {
		c, cancel := context.WithTimeout(context.WithoutCancel(ctx), 5*time.Second)
		defer cancel()
		_ = q.Rollback(c) // after a commit it does nothing
	}()
	if err := f(&tx{q, s.clock().UTC().Truncate(time.Millisecond)}); err != nil {
		return classify(err)
	}
	if err := q.Commit(ctx); err != nil {
		return classify(err)
	}
	return nil
}
