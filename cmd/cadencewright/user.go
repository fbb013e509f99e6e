package main

import (
	"bufio"
	"context"
	"errors"
	"flag"
	"fmt"
	"io"
	"strings"

	"cadencewright/scheduler"
	"cadencewright/server/auth"
	"cadencewright/server/config"
	"cadencewright/server/store"
)

// userCommand lets people in. There is no sign-up page: an array's people are
// few and known, and who may reach the database's machine may add them. Running it
// again for somebody who is there makes a new link, which is also what to do about
// a forgotten password.
var userCommand = command{
	name: "user", args: "NAME", short: "add a person, or make them a new sign-in link",
	long: `Adds a person with a role, or finds the one of that name, and prints a link that
signs them in once within a day. --password reads a password from standard input
instead, for signing in by name. The first coordinator is made this way. An
observer reports for the telescopes that are named. --list lists everybody.`,
	examples: []string{"cadencewright user \"Ada Example\" --role coordinator", "cadencewright user \"Bo Example\" --role observer --telescope BRM,KAV",
		"cadencewright user --list"},
	setup: func(flags *flag.FlagSet) action {
		u := newUser{}
		flags.StringVar(&u.role, "role", "", "`ROLE` of a new person: coordinator, observer or reader (reader if left out)")
		tels := flags.String("telescope", "", "`CODES` of the telescopes that a new observer reports for, with commas between them")
		flags.BoolVar(&u.password, "password", false, "read a password from standard input")
		list := flags.Bool("list", false, "list everybody")
		return func(ctx context.Context, std stdio, args []string) error {
			if *list {
				if err := exactly(args); err != nil {
					return err
				}
				return withDatabase(ctx, std, func(db *database, _ config.Config) error { return listUsers(ctx, std, db) })
			}
			if err := exactly(args, "NAME"); err != nil {
				return err
			}
			u.name = strings.TrimSpace(args[0])
			for code := range strings.SplitSeq(*tels, ",") {
				if code = strings.TrimSpace(code); code != "" {
					u.telescopes = append(u.telescopes, code)
				}
			}
			if err := u.check(); err != nil {
				return err
			}
			return withDatabase(ctx, std, func(db *database, cfg config.Config) error { return u.add(ctx, std, db, cfg) })
		}
	},
}

// newUser is what the command line says of a person.
type newUser struct {
	// The flags as given; telescopes without blanks and empty codes.
	name, role string // role empty: not said
	telescopes []string
	password   bool
}

// check reports what does not go together. Only an observer is named for
// telescopes: a coordinator reports for all, a reader for none.
func (u *newUser) check() error {
	if u.role != "" {
		if err := oneOf("role", u.role, "coordinator", "observer", "reader"); err != nil {
			return err
		}
	}
	switch observer := u.role == string(auth.RoleObserver); {
	case u.name == "":
		return usagef("NAME is empty")
	case observer && len(u.telescopes) == 0:
		return usagef("--telescope is missing: an observer reports for the telescopes that are named")
	case !observer && len(u.telescopes) > 0:
		return usagef("--telescope is for observers; the role is %q", u.role)
	}
	return nil
}

// add adds the person if need be and lets them in. What can be wrong is looked
// at before anything is written.
func (u *newUser) add(ctx context.Context, std stdio, db *database, cfg config.Config) error {
	hash := ""
	// Not from a flag: command lines are seen by other users of a machine and
	// kept in histories.
	if u.password {
		line, err := readLine(std.in)
		if err != nil {
			return err
		}
		if hash, err = auth.HashPassword(line); err != nil {
			return err
		}
	}
	p, err := u.find(ctx, std, db)
	if err != nil {
		return err
	}
	if u.password {
		if err := db.store.SetPassword(ctx, p.ID, hash, "command line"); err != nil {
			return err
		}
		_, err := fmt.Fprintf(std.out, "the password is set, and all sessions of %s have ended\n", p.Name)
		return err
	}
	// The address that people use is known only from the configuration.
	address := cfg.BaseURL
	if address == "" {
		address = "http://" + cfg.Addr
	}
	link, err := oneTimeLink(ctx, db.store, p, address)
	if err != nil {
		return err
	}
	_, err = fmt.Fprintln(std.out, "sign in once with", link)
	return err
}

// find is the person of the name, who is added if there is none.
func (u *newUser) find(ctx context.Context, std stdio, db *database) (store.Person, error) {
	p, err := db.store.PersonByName(ctx, u.name)
	// A role changes what somebody may do and is no side effect of a new link.
	if err == nil && u.role != "" && u.role != p.Role {
		return p, fmt.Errorf("%s has the role %s already; the role of somebody who is there does not change this way", p.Name, p.Role)
	}
	if !errors.Is(err, scheduler.ErrNotFound) {
		return p, err
	}
	// A mistyped code would leave an observer who can report for nothing.
	for _, code := range u.telescopes {
		if err := telescopeThere(ctx, db, code); err != nil {
			return p, err
		}
	}
	role := u.role
	if role == "" {
		role = string(auth.RoleReader)
	}
	if p, err = db.store.AddPerson(ctx, u.name, role, u.telescopes, "", "command line"); err == nil {
		fmt.Fprintf(std.out, "%s is added as %s\n", p.Name, p.Role)
	}
	return p, err
}

// telescopeThere makes sure that the live campaign has a telescope.
func telescopeThere(ctx context.Context, db *database, code string) error {
	// Live, because control scripts and reports reach no other campaign.
	ok, err := db.store.HasTelescope(ctx, code)
	if err == nil && !ok {
		err = fmt.Errorf("there is no telescope %q in the live campaign", code)
	}
	return err
}

// listUsers writes a line a person: role, telescopes, whether there is a
// password, and who may not sign in any more.
func listUsers(ctx context.Context, std stdio, db *database) error {
	people, err := db.store.People(ctx)
	if err != nil {
		return err
	}
	for i := range people {
		p := &people[i]
		note := ""
		if len(p.Telescopes) > 0 {
			note = " for " + strings.Join(p.Telescopes, ", ")
		}
		if p.PasswordHash == nil {
			note += ", by link only"
		}
		if p.Disabled {
			note += ", shut out"
		}
		if _, err := fmt.Fprintf(std.out, "%s: %s%s\n", p.Name, p.Role, note); err != nil {
			return err
		}
	}
	return nil
}

// readLine reads one line, such as a password.
func readLine(r io.Reader) (string, error) {
	// Far longer than any password that is taken; the end of the input ends
	// the line too.
	line, err := bufio.NewReader(io.LimitReader(r, 4096)).ReadString('\n')
	if err != nil && !errors.Is(err, io.EOF) {
		return "", fmt.Errorf("standard input: %w", err)
	}
	return strings.TrimRight(line, "\r\n"), nil
}
