package store

import (
	"context"
	"time"

	"github.com/jackc/pgx/v5"

	"cadencewright/scheduler"
)

// MadeScan is a scan of the history with what was observed.
type MadeScan struct {
	ID        int64
	Telescope string
	Receiver  string
	Start     time.Time
	Minutes   float64
	Counted   bool
	ScanID    int64    // the planned scan; 0: brought in from a file
	SNR       *float64 // as reported
	TOAUs     *float64
	Expected  *float64 // the planned scan's predicted TOA uncertainty, microseconds
	Note      string
}

const qSourceHistory = `select h.id, t.code, r.code, h.starts_at, h.minutes, h.counted, coalesce(h.scan_id, 0), o.snr, o.toa_us, s.toa_us, coalesce(o.note, '')
from history h join telescope t on t.id = h.telescope_id join receiver r on r.id = h.receiver_id
left join scan s on s.id = h.scan_id
left join lateral (select * from outcome o where o.scan_id = h.scan_id order by o.id desc limit 1) o on true
where h.source_id = @source and (h.starts_at, h.id) < (@before, @id)
order by h.starts_at desc, h.id desc limit @limit`
const qSourceID = `select id from source where campaign_id = $1 and name = $2`

// HistoryCursor is a place in a source's history: the start and id of a scan.
// The zero cursor is its newest end.
type HistoryCursor struct {
	Start time.Time
	ID    int64
}

// SourceHistory lists the scans of a source before a place in its history, the
// newest first, at most 1000.
func (s *Store) SourceHistory(ctx context.Context, campaign int64, source string, before HistoryCursor, limit int) ([]MadeScan, error) {
	if before.Start.IsZero() {
		before = HistoryCursor{scheduler.EndInstant, 0}
	}
	var list []MadeScan
	err := s.snapshot(ctx, func(t *tx) error {
		var id int64
		if err := t.q.QueryRow(ctx, qSourceID, campaign, source).Scan(&id); err != nil {
			return missing(err, "campaign %d has no source %q", campaign, source)
		}
		rows, err := t.q.Query(ctx, qSourceHistory, pgx.NamedArgs{"source": id, "before": before.Start, "id": before.ID, "limit": min(max(limit, 1), 1000)})
		if err != nil {
			return err
		}
		list, err = pgx.CollectRows(rows, pgx.RowToStructByPos[MadeScan])
		return err
	})
	return list, err
}
