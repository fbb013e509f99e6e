package main

import (
	"context"
	"errors"
	"flag"
	"fmt"
	"net"
	"os"
	"time"

	"cadencewright/scheduler"
	"cadencewright/server"
	"cadencewright/server/auth"
	"cadencewright/server/config"
	"cadencewright/server/demo"
	"cadencewright/server/pgembed"
	"cadencewright/server/store"
)

// serveCommand is the service as it is run in earnest: with no campaign it
// serves empty pages until one is imported.
var serveCommand = command{
	name:  "serve",
	short: "serve pages and the REST API",
	long: `Serves pages and the REST API until Ctrl-C. The database is the one that
DATABASE_URL names, or else a private Postgres in a data folder, which is made
at the first start and stopped with the program. Settings come from the
environment; --print-config lists them with their values.`,
	examples: []string{"cadencewright serve", "DATABASE_URL=postgres://plan@db/plan cadencewright serve", "cadencewright serve --print-config"},
	setup: func(flags *flag.FlagSet) action {
		show := flags.Bool("print-config", false, "list every setting with its value, secrets left out, and end")
		return func(ctx context.Context, std stdio, args []string) error {
			if err := exactly(args); err != nil {
				return err
			}
			if *show {
				config.Print(std.out, os.Getenv)
				return nil
			}
			return serve(ctx, std, false)
		}
	},
}

// demoCommand is serve with something to look at. It is also how to try the
// program on a machine where nothing but the Postgres programs is installed.
var demoCommand = command{
	name:  "demo",
	short: "serve a demonstration campaign, ready to look at",
	long: `Starts a private Postgres, loads an invented campaign if the database is empty,
plans this week and the next, prints a link to sign in with, and serves until
Ctrl-C. What you do in it is kept for the next start; --reset begins anew.`,
	examples: []string{"cadencewright demo", "cadencewright demo --reset"},
	setup: func(flags *flag.FlagSet) action {
		reset := flags.Bool("reset", false, "remove the private database first, with everything in it")
		return func(ctx context.Context, std stdio, args []string) error {
			if err := exactly(args); err != nil {
				return err
			}
			if *reset {
				cfg, err := readConfig()
				if err != nil {
					return err
				}
				// Somebody's real database is never emptied by a flag.
				if cfg.DatabaseURL != "" {
					return usagef("--reset removes the private database only, but DATABASE_URL is set")
				}
				if err := pgembed.Reset(cfg.DataDir); err != nil {
					return err
				}
			}
			return serve(ctx, std, true)
		}
	},
}

// serve starts everything and runs until ctx ends.
func serve(ctx context.Context, std stdio, withDemo bool) (err error) {
	cfg, err := readConfig()
	if err != nil {
		return err
	}
	l, err := server.Listen(cfg.Addr) // first, so that a port in use costs nothing
	if err != nil {
		return err
	}
	defer l.Close()
	db, err := openDatabase(ctx, std, cfg, true)
	if err != nil {
		return err
	}
	// In this order: the service stops before the store under it closes, and a
	// private Postgres stops last.
	defer func() { err = errors.Join(err, db.close()) }()
	s, err := newService(std, cfg, db)
	if err != nil {
		return err
	}
	if db.cluster != nil {
		fmt.Fprintln(std.err, "to look into the database:", db.cluster.Psql(databaseName))
	}
	return s.run(ctx, l, func(ctx context.Context) error {
		if withDemo {
			if err := s.prepareDemo(ctx, std, l); err != nil {
				return err
			}
		}
		fmt.Fprintln(std.out, "serving on", s.address(l))
		return nil
	})
}

// demoSeed makes the same demo campaign for everybody in the same week.
const demoSeed = 1

// prepareDemo loads the demo campaign into an empty database, asks for plans of
// this week and the next, and prints a link to sign in with.
func (s *service) prepareDemo(ctx context.Context, std stdio, l net.Listener) error {
	now := time.Now()
	list, err := s.db.store.Campaigns(ctx)
	if err != nil {
		return err
	}
	// A campaign that is there is left as it is, whatever its week: people may
	// have worked in it.
	if len(list) == 0 {
		if _, err := s.db.store.ImportCampaign(ctx, demo.Generate(demoSeed, now), "demo"); err != nil {
			return err
		}
	}
	ref, err := s.db.store.LiveCampaign(ctx)
	if err != nil {
		return err
	}
	// Planned in the background while the first pages are looked at.
	for _, at := range []time.Time{now, now.AddDate(0, 0, 7)} {
		h := scheduler.Horizon{From: scheduler.WeekStart(at), To: scheduler.WeekStart(at).AddDate(0, 0, 7)}
		plans, err := s.db.store.PlansOf(ctx, ref.ID, h, 1)
		if err != nil {
			return err
		}
		// Planned already, at an earlier start.
		if len(plans) > 0 {
			continue
		}
		if _, err := s.queue.Plan(ctx, ref.ID, h, demoSeed, "demo"); err != nil && !errors.Is(err, scheduler.ErrConflict) {
			return err
		}
	}
	link, err := s.signInLink(ctx, "demo coordinator", l)
	if err != nil {
		return err
	}
	fmt.Fprintln(std.out, "sign in once with", link)
	return nil
}

// linkLife is how long a printed sign-in link can be used.
const linkLife = 24 * time.Hour

// signInLink is a one-time link for a coordinator, who is made if need be.
func (s *service) signInLink(ctx context.Context, name string, l net.Listener) (string, error) {
	// Each start of the demo prints a new link for the same person.
	p, err := s.db.store.PersonByName(ctx, name)
	if errors.Is(err, scheduler.ErrNotFound) {
		p, err = s.db.store.AddPerson(ctx, name, string(auth.RoleCoordinator), nil, "", "demo")
	}
	if err != nil {
		return "", err
	}
	return oneTimeLink(ctx, s.db.store, p, s.address(l))
}

// oneTimeLink is a link under an address that signs a person in once. Only the
// hash of its secret is stored.
func oneTimeLink(ctx context.Context, st *store.Store, p store.Person, address string) (string, error) {
	token, err := auth.New(st, false).Link(ctx, p.ID, linkLife)
	return address + "/sign-in/" + token, err
}
