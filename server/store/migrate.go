package store

import (
	"context"
	"errors"
	"fmt"
	"time"

	"github.com/jackc/pgx/v5/pgxpool"
	"github.com/jackc/pgx/v5/stdlib"
	"github.com/pressly/goose/v3"
	"github.com/riverqueue/river/riverdriver/riverpgxv5"
	"github.com/riverqueue/river/rivermigrate"

	"cadencewright/migrations"
	"cadencewright/scheduler"
)

const (
	// QueueSchema is the schema of the job queue's own tables.
	QueueSchema = "river"
	// oldestServer is the oldest Postgres that the schema works on.
	oldestServer = 140000
	// migrateTimeout bounds a migration, the wait for another copy's included.
	migrateTimeout = 5 * time.Minute
)

const qServerVersion = `select current_setting('server_version_num')::integer`
const qSessionLock = `select pg_advisory_lock($1)`

// Migrate brings the schema up to date: ours, then the job queue's, under one
// lock, so that several copies may start at once. It reports how many steps it
// applied. A schema that is newer than the program is an error.
func (s *Store) Migrate(ctx context.Context) (int, error) {
	ctx, cancel := context.WithTimeout(ctx, migrateTimeout)
	defer cancel()
	// Connections of its own: the pool's bound every statement, and may be all
	// in use.
	cfg := s.pool.Config()
	cfg.ConnConfig.RuntimeParams["statement_timeout"] = "0"
	cfg.ConnConfig.RuntimeParams["idle_in_transaction_session_timeout"] = "0"
	cfg.MinConns, cfg.MaxConns = 0, 3
	pool, err := pgxpool.NewWithConfig(ctx, cfg)
	if err != nil {
		return 0, fault("migrate", err)
	}
	defer pool.Close()
	lock, err := pool.Acquire(ctx)
	if err != nil {
		return 0, fault("migrate", err)
	}
	// The lock goes with its connection, which is closed and not used again.
	defer func() { _ = lock.Hijack().Close(context.WithoutCancel(ctx)) }()
	var version int
	if err := lock.QueryRow(ctx, qServerVersion).Scan(&version); err != nil {
		return 0, fault("migrate", err)
	}
	if version < oldestServer {
		return 0, fmt.Errorf("the database server is Postgres %d; version %d or newer is needed", version/10000, oldestServer/10000)
	}
	if _, err := lock.Exec(ctx, qSessionLock, lockMigrate); err != nil {
		if ctx.Err() != nil {
			return 0, scheduler.Errorf(scheduler.ErrUnavailable, "another copy of the program is migrating the database and has not finished: %w", err)
		}
		return 0, fault("migrate", err)
	}
	ours, err := migrateOurs(ctx, pool)
	if err != nil {
		return 0, err
	}
	queues, err := migrateQueue(ctx, pool)
	return ours + queues, err
}

// migrateOurs applies the numbered files.
func migrateOurs(ctx context.Context, pool *pgxpool.Pool) (int, error) {
	db := stdlib.OpenDBFromPool(pool)
	defer db.Close()
	p, err := goose.NewProvider(goose.DialectPostgres, db, migrations.FS)
	if err != nil {
		return 0, fmt.Errorf("migrations: %w", err)
	}
	current, target, err := p.GetVersions(ctx)
	if err != nil {
		return 0, fault("migrate", err)
	}
	if current > target {
		return 0, fmt.Errorf("the database was made by a newer version of this program (schema %d, this one knows %d); use that version", current, target)
	}
	done, err := p.Up(ctx)
	if err != nil {
		var partial *goose.PartialError
		if errors.As(err, &partial) && partial.Failed != nil {
			return 0, fmt.Errorf("migration %s: %w", partial.Failed.Source.Path, partial.Err)
		}
		return 0, fault("migrate", err)
	}
	return len(done), nil
}

// migrateQueue lets the job queue bring its own tables up to date.
func migrateQueue(ctx context.Context, pool *pgxpool.Pool) (int, error) {
	m, err := rivermigrate.New(riverpgxv5.New(pool), &rivermigrate.Config{Schema: QueueSchema})
	if err != nil {
		return 0, fmt.Errorf("migrations of the job queue: %w", err)
	}
	res, err := m.Migrate(ctx, rivermigrate.DirectionUp, nil)
	if err != nil {
		return 0, fault("migrate the job queue", err)
	}
	return len(res.Versions), nil
}
