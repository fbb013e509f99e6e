package store

import (
	"context"
	"time"

	"github.com/jackc/pgx/v5"
)

// Person is somebody who can sign in.
type Person struct {
	ID           int64
	Name         string
	Role         string   // coordinator, observer or reader
	Telescopes   []string // an observer's; empty: none
	PasswordHash *string  // nil: by link only
	Disabled     bool
	Version      int64
	CreatedAt    time.Time
}

const personColumns = `id, name, role, telescopes, password_hash, disabled, version, created_at`
const qPersonAdd = `insert into person (name, role, telescopes, password_hash, created_at)
values (@name, @role, @telescopes, @hash, @now) returning ` + personColumns
const qPerson = `select ` + personColumns + ` from person where id = $1`
const qPersonByName = `select ` + personColumns + ` from person where lower(name) = lower($1)`
const qPeople = `select ` + personColumns + ` from person order by lower(name) limit 1000`
const qPersonLock = `select ` + personColumns + ` from person where id = $1 for update`
const qPersonSet = `update person set role = @role, telescopes = @telescopes, version = version + 1 where id = @id`
const qPasswordSet = `update person set password_hash = $2, version = version + 1 where id = $1`
const qPersonDisable = `update person set disabled = $2, version = version + 1 where id = $1`
const qSessionsEnd = `delete from session where person_id = $1`
const qLinksEnd = `delete from sign_in_link where person_id = $1`

// AddPerson makes a person; hash may be empty for one who signs in by link.
func (s *Store) AddPerson(ctx context.Context, name, role string, telescopes []string, hash, actor string) (Person, error) {
	var p Person
	err := s.tx(ctx, func(t *tx) error {
		rows, err := t.q.Query(ctx, qPersonAdd, pgx.NamedArgs{"name": name, "role": role, "telescopes": notNil(telescopes),
			"hash": only(hash != "", hash), "now": t.now})
		if err != nil {
			return err
		}
		if p, err = pgx.CollectExactlyOneRow(rows, pgx.RowToStructByName[Person]); err != nil {
			return err
		}
		return t.note(ctx, 0, actor, "add", "person "+name, nil, accessDoc{role, notNil(telescopes)})
	})
	return p, err
}

// accessDoc is what a person may do, as the journal keeps it.
type accessDoc struct {
	Role       string   `json:"role"`
	Telescopes []string `json:"telescopes"`
}

// Person is the person with an id.
func (s *Store) Person(ctx context.Context, id int64) (Person, error) {
	rows, err := s.pool.Query(ctx, qPerson, id)
	if err != nil {
		return Person{}, fault("person", err)
	}
	p, err := pgx.CollectExactlyOneRow(rows, pgx.RowToStructByName[Person])
	return p, missing(err, "there is no person %d", id)
}

// PersonByName is the person of a name, whatever its capitals.
func (s *Store) PersonByName(ctx context.Context, name string) (Person, error) {
	rows, err := s.pool.Query(ctx, qPersonByName, name)
	if err != nil {
		return Person{}, fault("person", err)
	}
	p, err := pgx.CollectExactlyOneRow(rows, pgx.RowToStructByName[Person])
	return p, missing(err, "there is no person named %q", name)
}

// People lists everybody, at most 1000.
func (s *Store) People(ctx context.Context) ([]Person, error) {
	rows, err := s.pool.Query(ctx, qPeople)
	if err != nil {
		return nil, fault("people", err)
	}
	list, err := pgx.CollectRows(rows, pgx.RowToStructByName[Person])
	return list, classify(err)
}

// lockPerson reads a person whom the transaction is going to change.
func (t *tx) lockPerson(ctx context.Context, id int64) (Person, error) {
	rows, err := t.q.Query(ctx, qPersonLock, id)
	if err != nil {
		return Person{}, err
	}
	p, err := pgx.CollectExactlyOneRow(rows, pgx.RowToStructByName[Person])
	return p, missing(err, "there is no person %d", id)
}

// SetAccess changes what a person may do. The version must be the given one, or
// the error is a *StaleError. Sessions go on, with the new role.
func (s *Store) SetAccess(ctx context.Context, person, version int64, role string, telescopes []string, actor string) (Person, error) {
	var p Person
	err := s.tx(ctx, func(t *tx) error {
		var err error
		if p, err = t.lockPerson(ctx, person); err != nil {
			return err
		}
		if p.Version != version {
			return &StaleError{"person " + p.Name, p.Version}
		}
		if _, err := t.q.Exec(ctx, qPersonSet, pgx.NamedArgs{"id": person, "role": role, "telescopes": notNil(telescopes)}); err != nil {
			return err
		}
		before := accessDoc{p.Role, p.Telescopes}
		p.Role, p.Telescopes, p.Version = role, notNil(telescopes), p.Version+1
		return t.note(ctx, 0, actor, "access", "person "+p.Name, before, accessDoc{p.Role, p.Telescopes})
	})
	return p, err
}

// SetPassword gives a person a new password and ends all of their sessions and
// sign-in links.
func (s *Store) SetPassword(ctx context.Context, person int64, hash, actor string) error {
	return s.changePerson(ctx, person, actor, "password", nil, qPasswordSet, hash)
}

// SetDisabled shuts a person out, or lets them in again; either way their
// sessions and sign-in links end.
func (s *Store) SetDisabled(ctx context.Context, person int64, disabled bool, actor string) error {
	return s.changePerson(ctx, person, actor, "disable", map[string]bool{"disabled": disabled}, qPersonDisable, disabled)
}

// changePerson sets one thing of a person and signs them out everywhere.
func (s *Store) changePerson(ctx context.Context, person int64, actor, action string, after any, query string, value any) error {
	return s.tx(ctx, func(t *tx) error {
		p, err := t.lockPerson(ctx, person)
		if err != nil {
			return err
		}
		if _, err := t.q.Exec(ctx, query, person, value); err != nil {
			return err
		}
		if err := t.signOut(ctx, person); err != nil {
			return err
		}
		return t.note(ctx, 0, actor, action, "person "+p.Name, nil, after)
	})
}

// signOut ends every session and sign-in link of a person.
func (t *tx) signOut(ctx context.Context, person int64) error {
	for _, q := range []string{qSessionsEnd, qLinksEnd} {
		if _, err := t.q.Exec(ctx, q, person); err != nil {
			return err
		}
	}
	return nil
}
