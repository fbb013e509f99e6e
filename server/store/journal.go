package store

import (
	"context"
	"encoding/json"
	"fmt"
	"time"

	"github.com/jackc/pgx/v5"
)

// Entry is a line of the journal.
type Entry struct {
	ID      int64
	At      time.Time
	Actor   string
	Action  string
	Subject string
	Before  json.RawMessage
	After   json.RawMessage
}

const qJournalAdd = `insert into journal (campaign_id, at, actor, action, subject, before, after)
values (@campaign, @at, @actor, @action, @subject, @before, @after)`

// note writes a line of the journal in the transaction of the change.
func (t *tx) note(ctx context.Context, campaign int64, actor, action, subject string, before, after any) error {
	b, err := asJSON(before)
	if err != nil {
		return err
	}
	a, err := asJSON(after)
	if err != nil {
		return err
	}
	var camp *int64
	if campaign != 0 {
		camp = &campaign
	}
	_, err = t.q.Exec(ctx, qJournalAdd, pgx.NamedArgs{"campaign": camp, "at": t.now, "actor": actor, "action": action,
		"subject": subject, "before": b, "after": a})
	return err
}

func asJSON(v any) ([]byte, error) {
	if v == nil {
		return nil, nil
	}
	b, err := json.Marshal(v)
	if err != nil {
		return nil, fmt.Errorf("journal: %w", err)
	}
	return b, nil
}

const qJournal = `select id, at, actor, action, subject, before, after from journal
where (@campaign::bigint = 0 or campaign_id = @campaign or campaign_id is null) and (@before::bigint = 0 or id < @before)
order by id desc limit @limit`

// Journal lists the lines before an id (0: the newest first), at most limit.
func (s *Store) Journal(ctx context.Context, campaign, before int64, limit int) ([]Entry, error) {
	rows, err := s.pool.Query(ctx, qJournal, pgx.NamedArgs{"campaign": campaign, "before": before, "limit": min(max(limit, 1), 500)})
	if err != nil {
		return nil, fault("journal", err)
	}
	list, err := pgx.CollectRows(rows, pgx.RowToStructByName[Entry])
	return list, classify(err)
}
