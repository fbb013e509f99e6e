package main

import (
	"bufio"
	"context"
	"errors"
	"flag"
	"fmt"
	"io"
	"net/http"
	"strings"
	"time"

	"cadencewright/scheduler"
	"cadencewright/server/auth"
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
			o, err := openOutput(std, *out)
			if err != nil {
				return err
			}
			defer o.discard()
			return withDatabase(ctx, std, func(db *database, _ config.Config) error {
				id := *number
				if id == 0 {
					ref, err := db.store.LiveCampaign(ctx)
					if err != nil {
						return err
					}
					id = ref.ID
				}
				c, _, err := db.store.LoadCampaign(ctx, id)
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

var userCommand = command{
	name: "user", args: "NAME", short: "add a person, or make them a new sign-in link",
	long: `Adds a person with a role, or finds the one of that name, and prints a link that
signs them in once within a day. --password reads a password from standard input
instead, for signing in by name. The first coordinator is made this way.`,
	examples: []string{"cadencewright user \"Ada Example\" --role coordinator", "cadencewright user \"Bo Example\" --role observer --telescope BRM"},
	setup: func(flags *flag.FlagSet) action {
		role := flags.String("role", string(auth.RoleReader), "`ROLE` of a new person: coordinator, observer or reader")
		tel := flags.String("telescope", "", "`CODE` of the telescope of a new observer; all if left out")
		password := flags.Bool("password", false, "read a password from standard input")
		return func(ctx context.Context, std stdio, args []string) error {
			if err := exactly(args, "NAME"); err != nil {
				return err
			}
			if err := oneOf("role", *role, "coordinator", "observer", "reader"); err != nil {
				return err
			}
			return withDatabase(ctx, std, func(db *database, cfg config.Config) error {
				return addUser(ctx, std, db, cfg, args[0], *role, *tel, *password)
			})
		}
	},
}

func addUser(ctx context.Context, std stdio, db *database, cfg config.Config, name, role, tel string, password bool) error {
	p, err := db.store.PersonByName(ctx, name)
	if errors.Is(err, scheduler.ErrNotFound) {
		var tels []string
		if tel != "" {
			tels = []string{tel}
		}
		p, err = db.store.AddPerson(ctx, name, role, tels, "", "command line")
		if err == nil {
			fmt.Fprintf(std.out, "%s is a %s now\n", name, role)
		}
	}
	if err != nil {
		return err
	}
	if password {
		line, err := readLine(std.in)
		if err != nil {
			return err
		}
		hash, err := auth.HashPassword(line)
		if err != nil {
			return err
		}
		if err := db.store.SetPassword(ctx, p.ID, hash, "command line"); err != nil {
			return err
		}
		fmt.Fprintln(std.out, "the password is set, and all sessions of", name, "have ended")
		return nil
	}
	address := cfg.BaseURL
	if address == "" {
		address = "http://" + cfg.Addr
	}
	link, err := oneTimeLink(ctx, db.store, p, address)
	if err == nil {
		fmt.Fprintln(std.out, "sign in once with", link)
	}
	return err
}

var keyCommand = command{
	name: "key", args: "NAME", short: "make or revoke a control script's key",
	long: `Makes a key for the control script of one telescope and shows it once; only its
hash is kept. --revoke ends the key of that name.`,
	examples: []string{"cadencewright key \"BRM control\" --telescope BRM", "cadencewright key \"BRM control\" --revoke"},
	setup: func(flags *flag.FlagSet) action {
		tel := flags.String("telescope", "", "`CODE` of the telescope that the key is for")
		revoke := flags.Bool("revoke", false, "end the key")
		return func(ctx context.Context, std stdio, args []string) error {
			if err := exactly(args, "NAME"); err != nil {
				return err
			}
			if *tel == "" && !*revoke {
				return usagef("--telescope is missing: a key is for one telescope")
			}
			return withDatabase(ctx, std, func(db *database, _ config.Config) error {
				if *revoke {
					err := db.store.RevokeKey(ctx, args[0], "command line")
					if err == nil {
						fmt.Fprintln(std.out, "the key is revoked")
					}
					return err
				}
				if ok, err := db.store.HasTelescope(ctx, *tel); err != nil {
					return err
				} else if !ok {
					return fmt.Errorf("there is no telescope %q in the live campaign", *tel)
				}
				token, hash := auth.NewToken()
				if _, err := db.store.AddKey(ctx, args[0], *tel, hash, "command line"); err != nil {
					return err
				}
				fmt.Fprintf(std.out, "key for %s, shown only now:\n%s\n", *tel, token)
				return nil
			})
		}
	},
}

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
			if *addr == "" {
				*addr = cfg.Addr
			}
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

// readLine reads one line, such as a password.
func readLine(r io.Reader) (string, error) {
	line, err := bufio.NewReader(io.LimitReader(r, 4096)).ReadString('\n')
	if err != nil && !errors.Is(err, io.EOF) {
		return "", fmt.Errorf("standard input: %w", err)
	}
	return strings.TrimRight(line, "\r\n"), nil
}
