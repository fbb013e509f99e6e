package main

import (
	"context"
	"errors"
	"fmt"
	"log/slog"
	"net"
	"os"
	"time"

	"cadencewright/server"
	"cadencewright/server/config"
	"cadencewright/server/jobs"
	"cadencewright/server/pgembed"
	"cadencewright/server/planning"
	"cadencewright/server/store"
)

// database is the store with the private cluster under it, if there is one.
type database struct {
	store   *store.Store
	cluster *pgembed.Cluster // nil: DATABASE_URL names the server
}

// databaseName is the database in the private cluster: the one that is always
// there.
const databaseName = "postgres"

// openDatabase connects to DATABASE_URL, or starts a private Postgres, and
// brings the schema up to date. With exclusive a private cluster that another
// program runs is refused.
func openDatabase(ctx context.Context, std stdio, cfg config.Config, exclusive bool) (*database, error) {
	db := &database{}
	// The private cluster is for one machine and for trying things out; a
	// service of several copies needs a database that they share.
	dsn := cfg.DatabaseURL
	if dsn == "" {
		c, err := pgembed.Start(ctx, pgembed.Options{Dir: cfg.DataDir, BinDir: cfg.PGBin, Exclusive: exclusive,
			Log: func(s string) { fmt.Fprintln(std.err, s) }})
		if err != nil {
			return nil, err
		}
		db.cluster, dsn = c, c.DSN(databaseName)
	}
	// Several programs may migrate at once: the database lets one do it and
	// the others wait.
	s, err := store.Open(ctx, dsn, store.Options{MaxConns: int32(cfg.MaxConns)})
	if err == nil {
		db.store = s
		_, err = s.Migrate(ctx)
	}
	if err != nil {
		return nil, errors.Join(err, db.close())
	}
	return db, nil
}

// close lets go of the database, and stops a cluster of our own.
func (db *database) close() error {
	if db.store != nil {
		db.store.Close()
	}
	if db.cluster != nil {
		return db.cluster.Stop()
	}
	return nil
}

// readConfig reads the environment.
func readConfig() (config.Config, error) {
	cfg, err := config.FromEnviron(os.Environ())
	if err != nil {
		return cfg, inputError{err}
	}
	return cfg, nil
}

// service is the running program.
type service struct {
	// The queue makes plans in this program too; several copies of it share one
	// queue in the database.
	cfg   config.Config
	db    *database
	queue *jobs.Queue
	http  *server.Server
	log   *slog.Logger
}

// newService builds the service on a database.
func newService(std stdio, cfg config.Config, db *database) (*service, error) {
	log := cfg.Logger(std.err)
	planner := &planning.Planner{Store: db.store, Effort: cfg.PlanEffort, Workers: cfg.Workers, Clock: time.Now}
	queue, err := jobs.New(db.store, planner, log)
	if err != nil {
		return nil, err
	}
	// Metrics cost a little with every request, so they are off unless asked
	// for.
	var metrics *server.Metrics
	if cfg.MetricsAddr != "" {
		metrics = server.NewMetrics(db.store)
	}
	h := server.New(server.Deps{Store: db.store, Planner: queue, Log: log, Secure: cfg.Secure(), BaseURL: cfg.BaseURL, Version: versionLine(), Metrics: metrics})
	return &service{cfg: cfg, db: db, queue: queue, http: h, log: log}, nil
}

// serveMetrics serves the metrics on an address of their own, until ctx ends.
func (s *service) serveMetrics(ctx context.Context) error {
	if s.cfg.MetricsAddr == "" {
		return nil
	}
	l, err := server.ListenMetrics(s.cfg.MetricsAddr)
	if err != nil {
		return err
	}
	// Metrics that cannot be served are no reason to stop planning.
	go func() {
		if err := s.http.ServeMetrics(ctx, l); err != nil {
			s.log.Warn("serving metrics", "error", err)
		}
	}()
	return nil
}

// run serves until ctx ends or the private Postgres does. before is called once
// jobs are being taken, before the first request is answered.
func (s *service) run(ctx context.Context, l net.Listener, before func(context.Context) error) error {
	ctx, cancel := context.WithCancelCause(ctx)
	defer cancel(nil)
	// A private Postgres that ends by itself takes the service with it: nobody
	// else would start it again.
	if s.db.cluster != nil && s.db.cluster.Done() != nil {
		go func() {
			select {
			case <-s.db.cluster.Done():
				cancel(s.db.cluster.Err())
			case <-ctx.Done():
			}
		}()
	}
	if err := s.serveMetrics(ctx); err != nil {
		return err
	}
	// Without ctx's end: jobs are handed back in order below, not cut off.
	if err := s.queue.Start(context.WithoutCancel(ctx)); err != nil {
		return err
	}
	defer func() {
		stop, done := context.WithTimeout(context.WithoutCancel(ctx), s.cfg.StopAfter)
		defer done()
		if err := s.queue.Stop(stop); err != nil {
			s.log.Warn("stopping the job queue", "error", err)
		}
	}()
	if before != nil {
		if err := before(ctx); err != nil {
			return err
		}
	}
	if err := s.http.Serve(ctx, l, s.cfg.StopAfter); err != nil {
		return err
	}
	// Ctrl-C is a good end; a database that went away is not.
	if cause := context.Cause(ctx); cause != nil && !errors.Is(cause, context.Canceled) {
		return cause
	}
	return nil
}

// address is where people reach the service.
func (s *service) address(l net.Listener) string {
	// Behind a proxy the address that is listened on is nobody's to open.
	if s.cfg.BaseURL != "" {
		return s.cfg.BaseURL
	}
	return "http://" + l.Addr().String()
}
