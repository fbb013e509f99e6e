package store

import (
	"context"
	"encoding/json"
	"errors"
	"time"

	"github.com/jackc/pgx/v5"
)

// Change is a line of the change feed: something that pages and scripts want
// to know of at once. It says what to read again, not what it says now.
type Change struct {
	Kind      string `json:"kind"` // draft, issued, outcome, job
	Campaign  int64  `json:"campaign"`
	Week      string `json:"week,omitempty"`
	Telescope string `json:"telescope,omitempty"`
	Plan      int64  `json:"plan,omitempty"`
	Revision  int    `json:"revision,omitempty"`
	Scan      int64  `json:"scan,omitempty"`
	Job       int64  `json:"job,omitempty"`
}

const channel = "cadencewright_change"

// tell puts a change on the feed; it goes out when the transaction commits.
func (t *tx) tell(ctx context.Context, c Change) error {
	b, err := json.Marshal(c)
	if err != nil {
		return err
	}
	_, err = t.q.Exec(ctx, "select pg_notify($1, $2)", channel, string(b))
	return err
}

// Listen calls f for every change by any copy of the program until ctx ends.
// After a lost connection it connects again, and calls f with an empty change
// once: something may have been missed, so read everything again.
func (s *Store) Listen(ctx context.Context, f func(Change)) {
	wait := 100 * time.Millisecond
	for ctx.Err() == nil {
		start := time.Now()
		_ = s.listen(ctx, f) // it ends only by a lost connection or ctx
		if ctx.Err() != nil {
			return
		}
		if time.Since(start) > time.Minute {
			wait = 100 * time.Millisecond
		}
		select {
		case <-ctx.Done():
		case <-time.After(wait):
		}
		wait = min(2*wait, 10*time.Second)
	}
}

func (s *Store) listen(ctx context.Context, f func(Change)) error {
	pooled, err := s.pool.Acquire(ctx)
	if err != nil {
		return err
	}
	conn := pooled.Hijack() // its own: a listener must not go back to the pool
	defer func() {
		c, cancel := context.WithTimeout(context.WithoutCancel(ctx), time.Second)
		defer cancel()
		conn.Close(c)
	}()
	if _, err := conn.Exec(ctx, "listen "+pgx.Identifier{channel}.Sanitize()); err != nil {
		return err
	}
	f(Change{})
	for {
		n, err := conn.WaitForNotification(ctx)
		if err != nil {
			return err
		}
		var c Change
		if err := json.Unmarshal([]byte(n.Payload), &c); err != nil {
			return errors.Join(errors.New("change feed"), err)
		}
		f(c)
	}
}
