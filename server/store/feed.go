package store

import (
	"context"
	"encoding/json"
	"fmt"
	"time"

	"github.com/jackc/pgx/v5"
)

// Change is a line of the change feed: something that pages and scripts want
// to know of at once. It says what to read again, not what it says now.
type Change struct {
	Kind      string `json:"kind"` // campaign, draft, issued, outcome, job; empty: anything may have changed
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

// A listener that hears nothing for a while asks whether the connection still
// stands, and how long it waits for the answer: a connection that died without
// a word would be silent for ever.
const (
	feedSilence = 20 * time.Second
	feedAnswer  = 5 * time.Second
)

// Listen calls f for every change by any copy of the program until ctx ends.
// When it begins, and again after every lost connection, it calls f with an
// empty change: something may have been missed, so read everything again.
func (s *Store) Listen(ctx context.Context, f func(Change)) {
	const shortest, longest = 100 * time.Millisecond, 10 * time.Second
	wait := shortest
	for ctx.Err() == nil {
		heard := false
		_ = s.listen(ctx, func(c Change) { heard = true; f(c) }) // it ends only by a lost connection or ctx
		if heard {
			wait = shortest
		}
		select {
		case <-ctx.Done():
		case <-time.After(wait):
		}
		wait = min(2*wait, longest)
	}
}

// listen hears changes on one connection until it is lost.
func (s *Store) listen(ctx context.Context, f func(Change)) error {
	pooled, err := s.pool.Acquire(ctx)
	if err != nil {
		return err
	}
	conn := pooled.Hijack() // its own: a listener must not go back to the pool
	defer func() {
		c, cancel := context.WithTimeout(context.WithoutCancel(ctx), time.Second)
		defer cancel()
		_ = conn.Close(c) // nothing was left to be done on it
	}()
	if _, err := conn.Exec(ctx, "listen "+pgx.Identifier{channel}.Sanitize()); err != nil {
		return err
	}
	f(Change{})
	for {
		c, err := s.hear(ctx, conn)
		if err != nil {
			return err
		}
		if c != nil {
			f(*c)
		}
	}
}

// hear waits for the next change; nil if there was none for a while and the
// connection stands.
func (s *Store) hear(ctx context.Context, conn *pgx.Conn) (*Change, error) {
	quiet, cancel := context.WithTimeout(ctx, s.feedSilence)
	defer cancel()
	n, err := conn.WaitForNotification(quiet)
	if err != nil {
		if ctx.Err() != nil || quiet.Err() == nil {
			return nil, err
		}
		answer, cancel := context.WithTimeout(ctx, feedAnswer)
		defer cancel()
		return nil, conn.Ping(answer)
	}
	var c Change
	if err := json.Unmarshal([]byte(n.Payload), &c); err != nil {
		return nil, fmt.Errorf("change feed: %w", err)
	}
	return &c, nil
}
