package store

import (
	"context"
	"time"

	"github.com/jackc/pgx/v5"

	"cadencewright/scheduler"
)

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
		if k, err = pgx.CollectExactlyOneRow(rows, pgx.RowToStructByName[Key]); err != nil {
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
	k, err := pgx.CollectExactlyOneRow(rows, pgx.RowToStructByName[Key])
	if err != nil {
		return Key{}, missing(err, "the key is unknown or revoked")
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
	list, err := pgx.CollectRows(rows, pgx.RowToStructByName[Key])
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
