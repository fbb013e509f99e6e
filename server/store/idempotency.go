package store

import (
	"context"
	"crypto/sha256"
	"encoding/json"
	"slices"
	"strconv"
	"time"

	"github.com/jackc/pgx/v5"

	"cadencewright/scheduler"
)

// Idempotency names a request that may be sent more than once: the same key and
// body of the same actor get the same answer.
type Idempotency struct {
	Key  string // empty: none
	Body []byte
}

const (
	// maxKey is the longest key that is taken, in bytes.
	maxKey = 200
	// keepAnswers is how long an answer is kept: a script that was cut off
	// sends its reports again within days.
	keepAnswers = 14 * 24 * time.Hour
)

const qIdemLock = `select pg_advisory_xact_lock(hashtextextended($1, 0))`
const qIdemGet = `select request_hash, answer from idempotency where actor = $1 and key = $2`
const qIdemAdd = `insert into idempotency (actor, key, request_hash, answer, at) values (@actor, @key, @hash, @answer, @now)`
const qIdemSweep = `delete from idempotency where at < $1`

// request is one request that may be repeated: who sends what to which thing.
type request struct {
	actor string
	idem  Idempotency
	hash  []byte
}

func newRequest(actor, operation string, thing int64, idem Idempotency) request {
	h := sha256.New()
	h.Write([]byte(operation + "\x00" + strconv.FormatInt(thing, 10) + "\x00"))
	h.Write(idem.Body)
	return request{actor, idem, h.Sum(nil)}
}

// seenBefore reads the answer to a request that was carried out already into
// answer. Another request under the same key is an error. Two of the same that
// come at once take turns.
func (t *tx) seenBefore(ctx context.Context, r request, answer any) (bool, error) {
	if r.idem.Key == "" {
		return false, nil
	}
	if len(r.idem.Key) > maxKey {
		return false, &FieldError{"Idempotency-Key", "the key is longer than " + strconv.Itoa(maxKey) + " bytes", scheduler.ErrInvalid}
	}
	if _, err := t.q.Exec(ctx, qIdemLock, r.actor+"\n"+r.idem.Key); err != nil {
		return false, err
	}
	rows, err := t.q.Query(ctx, qIdemGet, r.actor, r.idem.Key)
	if err != nil {
		return false, err
	}
	type kept struct {
		hash   []byte
		answer json.RawMessage
	}
	list, err := pgx.CollectRows(rows, func(row pgx.CollectableRow) (k kept, err error) { return k, row.Scan(&k.hash, &k.answer) })
	if err != nil || len(list) == 0 {
		return false, err
	}
	if !slices.Equal(list[0].hash, r.hash) {
		return false, &FieldError{"Idempotency-Key", "this key was used before with another request", scheduler.ErrInvalid}
	}
	return true, json.Unmarshal(list[0].answer, answer)
}

// remember keeps the answer to a request, and forgets those of long ago.
func (t *tx) remember(ctx context.Context, r request, answer any) error {
	if r.idem.Key == "" {
		return nil
	}
	b, err := json.Marshal(answer)
	if err != nil {
		return err
	}
	if _, err := t.q.Exec(ctx, qIdemSweep, t.now.Add(-keepAnswers)); err != nil {
		return err
	}
	_, err = t.q.Exec(ctx, qIdemAdd, pgx.NamedArgs{"actor": r.actor, "key": r.idem.Key, "hash": r.hash, "answer": b, "now": t.now})
	return err
}
