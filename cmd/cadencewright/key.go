package main

import (
	"context"
	"flag"
	"fmt"
	"strings"
	"time"

	"cadencewright/server/auth"
	"cadencewright/server/config"
)

// keyCommand manages the keys by which telescopes' control scripts call the API.
// A key belongs to one telescope: a script that is mistaken, or a key that leaks,
// cannot report for another. Several keys of one telescope may be valid at once,
// so that one can be replaced without a gap.
var keyCommand = command{
	name: "key", args: "NAME", short: "make or revoke a control script's key",
	long: `Makes a key for the control script of one telescope and shows it once; only its
hash is kept. --revoke ends the key of that name. --list lists all keys.`,
	examples: []string{"cadencewright key \"BRM control\" --telescope BRM", "cadencewright key \"BRM control\" --revoke", "cadencewright key --list"},
	setup: func(flags *flag.FlagSet) action {
		tel := flags.String("telescope", "", "`CODE` of the telescope that the key is for")
		revoke := flags.Bool("revoke", false, "end the key")
		list := flags.Bool("list", false, "list all keys")
		return func(ctx context.Context, std stdio, args []string) error {
			if *list {
				if err := exactly(args); err != nil {
					return err
				}
				return withDatabase(ctx, std, func(db *database, _ config.Config) error { return listKeys(ctx, std, db) })
			}
			if err := exactly(args, "NAME"); err != nil {
				return err
			}
			name := strings.TrimSpace(args[0])
			switch {
			case name == "":
				return usagef("NAME is empty")
			// A key for all telescopes does not exist, and so no default.
			case *tel == "" && !*revoke:
				return usagef("--telescope is missing: a key is for one telescope")
			case *tel != "" && *revoke:
				return usagef("--telescope and --revoke do not go together")
			}
			return withDatabase(ctx, std, func(db *database, _ config.Config) error {
				if *revoke {
					return revokeKey(ctx, std, db, name)
				}
				return addKey(ctx, std, db, name, *tel)
			})
		}
	},
}

// revokeKey ends a key: the next request with it is refused.
func revokeKey(ctx context.Context, std stdio, db *database, name string) error {
	if err := db.store.RevokeKey(ctx, name, "command line"); err != nil {
		return err
	}
	_, err := fmt.Fprintln(std.out, "the key is revoked")
	return err
}

// addKey makes a key of random characters for a telescope of the live campaign.
// The database keeps only its hash, so it can be shown only here.
func addKey(ctx context.Context, std stdio, db *database, name, telescope string) error {
	if err := telescopeThere(ctx, db, telescope); err != nil {
		return err
	}
	token, hash := auth.NewToken()
	if _, err := db.store.AddKey(ctx, name, telescope, hash, "command line"); err != nil {
		return err
	}
	_, err := fmt.Fprintf(std.out, "key for %s, shown only now:\n%s\n", telescope, token)
	return err
}

// listKeys writes a line a key, the revoked ones too. A key that was never used
// or not for a long time is one that can go.
func listKeys(ctx context.Context, std stdio, db *database) error {
	keys, err := db.store.Keys(ctx)
	if err != nil {
		return err
	}
	for i := range keys {
		k := &keys[i]
		used := "never used"
		if k.LastUsedAt != nil {
			used = "last used " + k.LastUsedAt.UTC().Format(time.RFC3339)
		}
		if k.RevokedAt != nil {
			used += ", revoked " + k.RevokedAt.UTC().Format(time.RFC3339)
		}
		if _, err := fmt.Fprintf(std.out, "%s: telescope %s, %s\n", k.Name, k.Telescope, used); err != nil {
			return err
		}
	}
	return nil
}
