package main

import (
	"context"
	"errors"
	"flag"
	"fmt"
	"net/http"
	"time"

	"cadencewright/scheduler"
	"cadencewright/server/config"
)

// withDatabase runs a command on the database, attaching to a private one that
// a running program holds.
func withDatabase(ctx context.Context, std stdio, f func(*database, config.Config) error) (err error) {
	cfg, err := readConfig()
	if err != nil {
		return err
	}
	db, err := openDatabase(ctx, std, cfg, false)
	if err != nil {
		return err
	}
	defer func() { err = errors.Join(err, db.close()) }()
	return f(db, cfg)
}

// migrateCommand opens the database, which migrates it, and does nothing else:
// for a deployment that brings the schema up to date before it starts several
// copies of the service.
var migrateCommand = command{
	name: "migrate", short: "bring the database's schema up to date",
	long:     "Brings the schema up to date and ends. serve and demo do the same when they start; several may do it at once.",
	examples: []string{"cadencewright migrate"},
	setup: func(*flag.FlagSet) action {
		return func(ctx context.Context, std stdio, args []string) error {
			if err := exactly(args); err != nil {
				return err
			}
			return withDatabase(ctx, std, func(*database, config.Config) error {
				fmt.Fprintln(std.out, "the schema is up to date")
				return nil
			})
		}
	},
}

// importCommand stores a campaign file. The file is read and checked before the
// database is opened, so that a wrong one does not start a private Postgres.
var importCommand = command{
	name: "import", args: "CAMPAIGN.json", short: "store a campaign file in the database",
	long:     "Checks a campaign file and stores all of it, or nothing. The first campaign stored is the live one, which pages and control scripts serve.",
	examples: []string{"cadencewright import campaign.json"},
	setup: func(*flag.FlagSet) action {
		return func(ctx context.Context, std stdio, args []string) error {
			if err := exactly(args, "CAMPAIGN.json"); err != nil {
				return err
			}
			c, err := readCampaign(std, args[0])
			if err != nil {
				return err
			}
			return withDatabase(ctx, std, func(db *database, _ config.Config) error {
				id, err := db.store.ImportCampaign(ctx, c, "command line")
				if err == nil {
					fmt.Fprintf(std.out, "campaign %q is stored as number %d\n", c.Name, id)
				}
				return err
			})
		}
	},
}

// exportCommand is the way back from the database to a file: what it writes can
// be planned and checked by the commands that need no database.
var exportCommand = command{
	name: "export", short: "write the live campaign as a file",
	long:     "Writes the live campaign, history and all, as a campaign file in canonical order.",
	examples: []string{"cadencewright export --out campaign.json", "cadencewright export --campaign 2 > old.json"},
	setup: func(flags *flag.FlagSet) action {
		out := flags.String("out", "-", "`FILE` to write to; - is standard output")
		number := flags.Int64("campaign", 0, "`NUMBER` of the campaign; the live one if left out")
		return func(ctx context.Context, std stdio, args []string) error {
			if err := exactly(args); err != nil {
				return err
			}
			// As everywhere, a place that cannot be written to is known before any work.
			o, err := openOutput(std, *out)
			if err != nil {
				return err
			}
			defer o.discard()
			return withDatabase(ctx, std, func(db *database, _ config.Config) error {
				// 0 is no number of a campaign: the flag was left out.
				id := *number
				if id == 0 {
					ref, err := db.store.LiveCampaign(ctx)
					if err != nil {
						return err
					}
					id = ref.ID
				}
				c, _, err := db.store.LoadCampaign(ctx, id)
				// The store's own words are for the service's clients.
				if errors.Is(err, scheduler.ErrNotFound) {
					return fmt.Errorf("there is no campaign number %d", id)
				}
				if err != nil {
					return err
				}
				b, err := scheduler.WriteCampaign(c)
				if err != nil {
					return err
				}
				return o.commit(b)
			})
		}
	},
}

// healthCommand asks /readyz: the service answers 200 there only while it
// reaches its database and takes requests.
var healthCommand = command{
	name: "health", short: "ask a running service whether it is well",
	long:     "Asks the service at an address whether it can answer, and ends with exit code 0 or 1: for a container's health check.",
	examples: []string{"cadencewright health --addr 127.0.0.1:8080"},
	setup: func(flags *flag.FlagSet) action {
		addr := flags.String("addr", "", "`HOST:PORT` of the service; that of CADENCEWRIGHT_ADDR if left out")
		return func(ctx context.Context, std stdio, args []string) error {
			if err := exactly(args); err != nil {
				return err
			}
			cfg, err := readConfig()
			if err != nil {
				return err
			}
			// Inside a container both come from the same environment.
			if *addr == "" {
				*addr = cfg.Addr
			}
			// Shorter than what containers usually allow a health check, so that the
			// reason is printed before the check itself is ended.
			ctx, cancel := context.WithTimeout(ctx, 3*time.Second)
			defer cancel()
			req, err := http.NewRequestWithContext(ctx, http.MethodGet, "http://"+*addr+"/readyz", nil)
			if err != nil {
				return usagef("--addr is %q: %v", *addr, err)
			}
			res, err := http.DefaultClient.Do(req)
			if err != nil {
				return err
			}
			defer res.Body.Close()
			if res.StatusCode != http.StatusOK {
				return fmt.Errorf("the service answers %s", res.Status)
			}
			fmt.Fprintln(std.out, "well")
			return nil
		}
	},
}
