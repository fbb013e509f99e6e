package store

import (
	"context"
	"time"

	"github.com/jackc/pgx/v5"
)

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
		return Person{}, missing(err, "the session has ended")
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

// EndSessions signs a person out everywhere.
func (s *Store) EndSessions(ctx context.Context, person int64, actor string) error {
	return s.tx(ctx, func(t *tx) error {
		p, err := t.lockPerson(ctx, person)
		if err != nil {
			return err
		}
		if err := t.signOut(ctx, person); err != nil {
			return err
		}
		return t.note(ctx, 0, actor, "sign out everywhere", "person "+p.Name, nil, nil)
	})
}

// keepLinks is how long a link that can no longer be used is kept.
const keepLinks = 30 * 24 * time.Hour

const qLinkSweep = `delete from sign_in_link where expires_at < $1`
const qLinkAdd = `insert into sign_in_link (token_hash, person_id, expires_at) values (@hash, @person, @expires)`
const qLinkUse = `update sign_in_link l set used_at = @now from person p
where l.token_hash = @hash and l.used_at is null and l.expires_at > @now and p.id = l.person_id and not p.disabled
returning p.id, p.name, p.role, p.telescopes, p.password_hash, p.disabled, p.version, p.created_at`

// AddLink makes a sign-in link that can be used once, until it expires.
func (s *Store) AddLink(ctx context.Context, tokenHash []byte, person int64, life time.Duration) error {
	return s.tx(ctx, func(t *tx) error {
		if _, err := t.q.Exec(ctx, qLinkSweep, t.now.Add(-keepLinks)); err != nil {
			return err
		}
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
		if p, err = pgx.CollectExactlyOneRow(rows, pgx.RowToStructByName[Person]); err != nil {
			return missing(err, "the sign-in link is unknown, used or too old")
		}
		return t.note(ctx, 0, p.Name, "sign in", "by link", nil, nil)
	})
	return p, err
}

// Only the beginning of a subject counts: names come from strangers.
const qFailureAdd = `insert into sign_in_failure (subject, at) values (left($1, 200), $2)`
const qFailures = `select count(*) from sign_in_failure where subject = left($1, 200) and at > $2`
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
