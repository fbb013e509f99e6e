package store

import (
	"context"
	"time"

	"github.com/jackc/pgx/v5"

	"cadencewright/scheduler"
)

// Person is somebody who can sign in.
type Person struct {
	ID           int64
	Name         string
	Role         string   // coordinator, observer or reader
	Telescopes   []string // an observer's; empty: all
	PasswordHash *string  // nil: by link only
	Disabled     bool
	Version      int64
	CreatedAt    time.Time
}

const personColumns = `id, name, role, telescopes, password_hash, disabled, version, created_at`
const qPersonAdd = `insert into person (name, role, telescopes, password_hash, created_at)
values (@name, @role, @telescopes, @hash, @now) returning ` + personColumns
const qPersonByName = `select ` + personColumns + ` from person where lower(name) = lower($1)`
const qPeople = `select ` + personColumns + ` from person order by lower(name) limit 1000`
const qPasswordSet = `update person set password_hash = $2, version = version + 1 where id = $1`
const qSessionsEnd = `delete from session where person_id = $1`
const qPersonDisable = `update person set disabled = $2, version = version + 1 where id = $1`

// AddPerson makes a person; hash may be empty for one who signs in by link.
func (s *Store) AddPerson(ctx context.Context, name, role string, telescopes []string, hash, actor string) (Person, error) {
	var p Person
	err := s.tx(ctx, func(t *tx) error {
		var h *string
		if hash != "" {
			h = &hash
		}
		rows, err := t.q.Query(ctx, qPersonAdd, pgx.NamedArgs{"name": name, "role": role, "telescopes": notNil(telescopes), "hash": h, "now": t.now})
		if err != nil {
			return err
		}
		if p, err = pgx.CollectExactlyOneRow(rows, pgx.RowToStructByPos[Person]); err != nil {
			return err
		}
		return t.note(ctx, 0, actor, "add", "person "+name, nil, map[string]any{"role": role, "telescopes": telescopes})
	})
	return p, err
}

// PersonByName is the person of a name, whatever its capitals.
func (s *Store) PersonByName(ctx context.Context, name string) (Person, error) {
	rows, err := s.pool.Query(ctx, qPersonByName, name)
	if err != nil {
		return Person{}, fault("person", err)
	}
	p, err := pgx.CollectExactlyOneRow(rows, pgx.RowToStructByPos[Person])
	return p, classify(err)
}

// People lists everybody.
func (s *Store) People(ctx context.Context) ([]Person, error) {
	rows, err := s.pool.Query(ctx, qPeople)
	if err != nil {
		return nil, fault("people", err)
	}
	list, err := pgx.CollectRows(rows, pgx.RowToStructByPos[Person])
	return list, classify(err)
}

// SetPassword gives a person a new password and ends all of their sessions.
func (s *Store) SetPassword(ctx context.Context, person int64, hash, actor string) error {
	return s.tx(ctx, func(t *tx) error {
		if _, err := t.q.Exec(ctx, qPasswordSet, person, hash); err != nil {
			return err
		}
		if _, err := t.q.Exec(ctx, qSessionsEnd, person); err != nil {
			return err
		}
		return t.note(ctx, 0, actor, "password", "person", nil, map[string]int64{"person": person})
	})
}

// SetDisabled shuts a person out, or lets them in again.
func (s *Store) SetDisabled(ctx context.Context, person int64, disabled bool, actor string) error {
	return s.tx(ctx, func(t *tx) error {
		if _, err := t.q.Exec(ctx, qPersonDisable, person, disabled); err != nil {
			return err
		}
		if _, err := t.q.Exec(ctx, qSessionsEnd, person); err != nil {
			return err
		}
		return t.note(ctx, 0, actor, "disable", "person", nil, map[string]any{"person": person, "disabled": disabled})
	})
}

// sessionLife and sessionIdle bound a session: in all, and without a request.
const (
	sessionLife = 30 * 24 * time.Hour
	sessionIdle = 7 * 24 * time.Hour
	// sessionTouch is how old the last noted request may be before another is
	// noted: not every request writes.
	sessionTouch = 5 * time.Minute
)

const qSessionAdd = `insert into session (token_hash, person_id, created_at, seen_at, expires_at) values (@hash, @person, @now, @now, @expires)`
const qSessionGet = `select p.id, p.name, p.role, p.telescopes, p.password_hash, p.disabled, p.version, p.created_at, s.seen_at
from session s join person p on p.id = s.person_id
where s.token_hash = @hash and s.expires_at > @now and s.seen_at > @idle and not p.disabled`
const qSessionTouch = `update session set seen_at = $2 where token_hash = $1`
const qSessionEnd = `delete from session where token_hash = $1`
const qSessionSweep = `delete from session where expires_at < $1 or seen_at < $2`

// AddSession begins a session under the hash of its token.
func (s *Store) AddSession(ctx context.Context, tokenHash []byte, person int64) error {
	return s.tx(ctx, func(t *tx) error {
		if _, err := t.q.Exec(ctx, qSessionSweep, t.now, t.now.Add(-sessionIdle)); err != nil {
			return err
		}
		_, err := t.q.Exec(ctx, qSessionAdd, pgx.NamedArgs{"hash": tokenHash, "person": person, "now": t.now, "expires": t.now.Add(sessionLife)})
		return err
	})
}

// SessionPerson is whose session it is; ErrNotFound if it has ended.
func (s *Store) SessionPerson(ctx context.Context, tokenHash []byte) (Person, error) {
	now := s.clock()
	var p Person
	var seen time.Time
	err := s.pool.QueryRow(ctx, qSessionGet, pgx.NamedArgs{"hash": tokenHash, "now": now, "idle": now.Add(-sessionIdle)}).Scan(
		&p.ID, &p.Name, &p.Role, &p.Telescopes, &p.PasswordHash, &p.Disabled, &p.Version, &p.CreatedAt, &seen)
	if err != nil {
		return Person{}, classify(err)
	}
	if now.Sub(seen) > sessionTouch {
		if _, err := s.pool.Exec(ctx, qSessionTouch, tokenHash, now); err != nil {
			return Person{}, fault("session", err)
		}
	}
	return p, nil
}

// EndSession ends one session.
func (s *Store) EndSession(ctx context.Context, tokenHash []byte) error {
	_, err := s.pool.Exec(ctx, qSessionEnd, tokenHash)
	return classify(err)
}

const qLinkAdd = `insert into sign_in_link (token_hash, person_id, expires_at) values (@hash, @person, @expires)`
const qLinkUse = `update sign_in_link l set used_at = @now from person p
where l.token_hash = @hash and l.used_at is null and l.expires_at > @now and p.id = l.person_id and not p.disabled
returning p.id, p.name, p.role, p.telescopes, p.password_hash, p.disabled, p.version, p.created_at`

// AddLink makes a sign-in link that can be used once, until it expires.
func (s *Store) AddLink(ctx context.Context, tokenHash []byte, person int64, life time.Duration) error {
	return s.tx(ctx, func(t *tx) error {
		_, err := t.q.Exec(ctx, qLinkAdd, pgx.NamedArgs{"hash": tokenHash, "person": person, "expires": t.now.Add(life)})
		return err
	})
}

// UseLink uses a link up; ErrNotFound if it is unknown, used or too old.
func (s *Store) UseLink(ctx context.Context, tokenHash []byte) (Person, error) {
	var p Person
	err := s.tx(ctx, func(t *tx) error {
		rows, err := t.q.Query(ctx, qLinkUse, pgx.NamedArgs{"hash": tokenHash, "now": t.now})
		if err != nil {
			return err
		}
		if p, err = pgx.CollectExactlyOneRow(rows, pgx.RowToStructByPos[Person]); err != nil {
			return err
		}
		return t.note(ctx, 0, p.Name, "sign in", "by link", nil, nil)
	})
	return p, err
}

const qFailureAdd = `insert into sign_in_failure (subject, at) values ($1, $2)`
const qFailures = `select count(*) from sign_in_failure where subject = $1 and at > $2`
const qFailureSweep = `delete from sign_in_failure where at < $1`

// NoteFailure notes a failed attempt to sign in.
func (s *Store) NoteFailure(ctx context.Context, subject string) error {
	return s.tx(ctx, func(t *tx) error {
		if _, err := t.q.Exec(ctx, qFailureSweep, t.now.Add(-24*time.Hour)); err != nil {
			return err
		}
		_, err := t.q.Exec(ctx, qFailureAdd, subject, t.now)
		return err
	})
}

// Failures counts the failed attempts of the last stretch of time.
func (s *Store) Failures(ctx context.Context, subject string, within time.Duration) (int, error) {
	var n int
	err := s.pool.QueryRow(ctx, qFailures, subject, s.clock().Add(-within)).Scan(&n)
	return n, classify(err)
}

// Key is a control script's key.
type Key struct {
	ID         int64
	Name       string
	Telescope  string
	CreatedAt  time.Time
	CreatedBy  string
	LastUsedAt *time.Time
	RevokedAt  *time.Time
}

const keyColumns = `id, name, telescope, created_at, created_by, last_used_at, revoked_at`
const qKeyAdd = `insert into api_key (name, token_hash, telescope, created_at, created_by) values (@name, @hash, @telescope, @now, @actor) returning ` + keyColumns
const qKeyGet = `select ` + keyColumns + ` from api_key where token_hash = $1 and revoked_at is null`
const qKeyTouch = `update api_key set last_used_at = $2 where id = $1`
const qKeys = `select ` + keyColumns + ` from api_key order by revoked_at is not null, lower(name), id limit 1000`
const qKeyRevoke = `update api_key set revoked_at = $2 where lower(name) = lower($1) and revoked_at is null`

// AddKey stores a key by its hash.
func (s *Store) AddKey(ctx context.Context, name, telescope string, tokenHash []byte, actor string) (Key, error) {
	var k Key
	err := s.tx(ctx, func(t *tx) error {
		rows, err := t.q.Query(ctx, qKeyAdd, pgx.NamedArgs{"name": name, "hash": tokenHash, "telescope": telescope, "now": t.now, "actor": actor})
		if err != nil {
			return err
		}
		if k, err = pgx.CollectExactlyOneRow(rows, pgx.RowToStructByPos[Key]); err != nil {
			return err
		}
		return t.note(ctx, 0, actor, "add", "key "+name, nil, map[string]string{"telescope": telescope})
	})
	return k, err
}

// KeyByHash is the key of a token; ErrNotFound if there is none or it is revoked.
func (s *Store) KeyByHash(ctx context.Context, tokenHash []byte) (Key, error) {
	rows, err := s.pool.Query(ctx, qKeyGet, tokenHash)
	if err != nil {
		return Key{}, fault("key", err)
	}
	k, err := pgx.CollectExactlyOneRow(rows, pgx.RowToStructByPos[Key])
	if err != nil {
		return Key{}, classify(err)
	}
	if now := s.clock(); k.LastUsedAt == nil || now.Sub(*k.LastUsedAt) > sessionTouch {
		if _, err := s.pool.Exec(ctx, qKeyTouch, k.ID, now); err != nil {
			return Key{}, fault("key", err)
		}
	}
	return k, nil
}

// Keys lists all keys, those in force first.
func (s *Store) Keys(ctx context.Context) ([]Key, error) {
	rows, err := s.pool.Query(ctx, qKeys)
	if err != nil {
		return nil, fault("keys", err)
	}
	list, err := pgx.CollectRows(rows, pgx.RowToStructByPos[Key])
	return list, classify(err)
}

// RevokeKey ends a key.
func (s *Store) RevokeKey(ctx context.Context, name, actor string) error {
	return s.tx(ctx, func(t *tx) error {
		tag, err := t.q.Exec(ctx, qKeyRevoke, name, t.now)
		if err != nil {
			return err
		}
		if tag.RowsAffected() == 0 {
			return scheduler.Errorf(scheduler.ErrNotFound, "there is no key %q in force", name)
		}
		return t.note(ctx, 0, actor, "revoke", "key "+name, nil, nil)
	})
}
