package store

import (
	"context"
	"crypto/sha256"
	"encoding/json"
	"fmt"
	"slices"
	"time"

	"github.com/jackc/pgx/v5"
	"github.com/jackc/pgx/v5/pgtype"

	"cadencewright/scheduler"
)

// Causes are the reasons for a loss that a report may give.
var Causes = []string{"wind", "snow", "fault", "receiver", "interference", "power", "operator", "target of opportunity", "other"}

// Report is what a telescope says of a scan.
type Report struct {
	State     string // observing, done, partial or lost
	Cause     string // one of Causes where lost
	StartedAt *time.Time
	EndedAt   *time.Time
	SNR       *float64
	TOAUs     *float64
	Note      string
}

// next are the states that a scan may go to from each state. A scan that is
// over stays over; a dropped one was never begun.
var next = map[string][]string{
	ScanPlanned:   {ScanObserving, ScanDone, ScanPartial, ScanLost},
	ScanObserving: {ScanDone, ScanPartial, ScanLost},
}

// countedShare is the part of a scan's planned time that makes a partial one
// good enough to count for its goals.
const countedShare = 0.5

// Idempotency names a request that may be sent more than once: the same key
// and body of the same actor get the same answer.
type Idempotency struct {
	Key  string // empty: none
	Body []byte
}

const qScanLock = `select s.state, s.span, s.minutes, s.live, s.version, t.code, t.campaign_id, s.source_name, s.receiver, s.telescope_id
from scan s join telescope t on t.id = s.telescope_id where s.id = $1 for update of s`
const qScanState = `update scan set state = $2, version = version + 1 where id = $1`
const qOutcomeAdd = `insert into outcome (scan_id, state, cause, started_at, ended_at, snr, toa_us, note, reported_by, reported_at)
values (@scan, @state, @cause, @started, @ended, @snr, @toa, @note, @actor, @now)`
const qHistoryAdd = `insert into history (campaign_id, source_id, telescope_id, receiver_id, starts_at, minutes, counted, scan_id)
select @campaign, s.id, @telescope, r.id, @start, @minutes, @counted, @scan from source s, receiver r
where s.campaign_id = @campaign and s.name = @source and r.telescope_id = @telescope and r.code = @receiver`

// lockedScan is a scan as a report finds it.
type lockedScan struct {
	state             string
	span              pgtype.Range[time.Time]
	minutes           int
	live              bool
	version           int64
	telescope, source string
	receiver          string
	campaign, telID   int64
}

// ReportOutcome enters a report: the scan's state moves on, and a scan that was
// made enters the history, all in one transaction. onlyTelescope, if not
// empty, refuses scans of any other.
func (s *Store) ReportOutcome(ctx context.Context, scan int64, r Report, actor, onlyTelescope string, idem Idempotency) (StoredScan, error) {
	if err := r.check(); err != nil {
		return StoredScan{}, err
	}
	err := s.tx(ctx, func(t *tx) error {
		again, err := t.seenBefore(ctx, actor, idem)
		if err != nil || again {
			return err
		}
		var x lockedScan
		err = t.q.QueryRow(ctx, qScanLock, scan).Scan(&x.state, &x.span, &x.minutes, &x.live, &x.version, &x.telescope, &x.campaign, &x.source, &x.receiver, &x.telID)
		if err != nil {
			return err
		}
		if onlyTelescope != "" && x.telescope != onlyTelescope {
			return scheduler.Errorf(scheduler.ErrForbidden, "scan %d belongs to telescope %s, this key to %s", scan, x.telescope, onlyTelescope)
		}
		if !x.live {
			return scheduler.Errorf(scheduler.ErrConflict, "scan %d is not part of the plan that is issued now", scan)
		}
		if !slices.Contains(next[x.state], r.State) {
			return scheduler.Errorf(scheduler.ErrConflict, "scan %d is %s and cannot become %s", scan, x.state, r.State)
		}
		return t.enter(ctx, scan, x, r, actor, idem)
	})
	if err != nil {
		return StoredScan{}, err
	}
	return s.Scan(ctx, scan)
}

// enter writes a report that is allowed.
func (t *tx) enter(ctx context.Context, scan int64, x lockedScan, r Report, actor string, idem Idempotency) error {
	if _, err := t.q.Exec(ctx, qScanState, scan, r.State); err != nil {
		return err
	}
	_, err := t.q.Exec(ctx, qOutcomeAdd, pgx.NamedArgs{"scan": scan, "state": r.State, "cause": r.Cause, "started": r.StartedAt, "ended": r.EndedAt,
		"snr": r.SNR, "toa": r.TOAUs, "note": r.Note, "actor": actor, "now": t.now})
	if err != nil {
		return err
	}
	if r.State == ScanDone || r.State == ScanPartial {
		start, minutes := r.made(x)
		if minutes > 0 {
			counted := r.State == ScanDone || minutes >= countedShare*float64(x.minutes)
			_, err := t.q.Exec(ctx, qHistoryAdd, pgx.NamedArgs{"campaign": x.campaign, "telescope": x.telID, "start": start, "minutes": minutes,
				"counted": counted, "scan": scan, "source": x.source, "receiver": x.receiver})
			if err != nil {
				return err
			}
			if _, err := t.q.Exec(ctx, qBumpCampaign, x.campaign); err != nil {
				return err
			}
		}
	}
	if err := t.note(ctx, x.campaign, actor, "report", fmt.Sprintf("scan %d of %s on %s", scan, x.source, x.telescope), map[string]string{"state": x.state}, r); err != nil {
		return err
	}
	if err := t.remember(ctx, actor, idem, 200, map[string]int64{"scan": scan}); err != nil {
		return err
	}
	return t.tell(ctx, Change{Kind: "outcome", Campaign: x.campaign, Week: scheduler.WeekName(x.span.Lower), Telescope: x.telescope, Scan: scan})
}

// made is when a scan was really made, by the report or else as planned.
func (r *Report) made(x lockedScan) (time.Time, float64) {
	start, end := x.span.Lower, x.span.Upper
	if r.StartedAt != nil {
		start = *r.StartedAt
	}
	if r.EndedAt != nil {
		end = *r.EndedAt
	}
	return start, end.Sub(start).Minutes()
}

// check is what a report must be like before the database sees it.
func (r *Report) check() error {
	if !slices.Contains(next[ScanPlanned], r.State) {
		return &FieldError{"state", fmt.Sprintf("state %q: must be observing, done, partial or lost", r.State), scheduler.ErrInvalid}
	}
	if r.State == ScanLost && !slices.Contains(Causes, r.Cause) {
		return &FieldError{"cause", fmt.Sprintf("cause %q: a lost scan needs one of %v", r.Cause, Causes), scheduler.ErrInvalid}
	}
	if r.Cause != "" && !slices.Contains(Causes, r.Cause) {
		return &FieldError{"cause", fmt.Sprintf("cause %q: must be one of %v", r.Cause, Causes), scheduler.ErrInvalid}
	}
	if len(r.Note) > 2000 {
		return &FieldError{"note", "the note is longer than 2000 bytes", scheduler.ErrInvalid}
	}
	return nil
}

const qIdemLock = `select pg_advisory_xact_lock(hashtextextended($1, 0))`
const qIdemGet = `select request_hash from idempotency where actor = $1 and key = $2`
const qIdemAdd = `insert into idempotency (actor, key, request_hash, status, answer, at) values (@actor, @key, @hash, @status, @answer, @now)`

// seenBefore tells whether a request was carried out already. Another body
// under the same key is an error.
func (t *tx) seenBefore(ctx context.Context, actor string, idem Idempotency) (bool, error) {
	if idem.Key == "" {
		return false, nil
	}
	if len(idem.Key) > 200 {
		return false, &FieldError{"Idempotency-Key", "the key is longer than 200 bytes", scheduler.ErrInvalid}
	}
	if _, err := t.q.Exec(ctx, qIdemLock, actor+"|"+idem.Key); err != nil {
		return false, err
	}
	rows, err := t.q.Query(ctx, qIdemGet, actor, idem.Key)
	if err != nil {
		return false, err
	}
	list, err := pgx.CollectRows(rows, pgx.RowTo[[]byte])
	if err != nil || len(list) == 0 {
		return false, err
	}
	if sum := sha256.Sum256(idem.Body); !slices.Equal(list[0], sum[:]) {
		return false, &FieldError{"Idempotency-Key", "this key was used before with another request", scheduler.ErrInvalid}
	}
	return true, nil
}

func (t *tx) remember(ctx context.Context, actor string, idem Idempotency, status int, answer any) error {
	if idem.Key == "" {
		return nil
	}
	b, err := json.Marshal(answer)
	if err != nil {
		return err
	}
	sum := sha256.Sum256(idem.Body)
	_, err = t.q.Exec(ctx, qIdemAdd, pgx.NamedArgs{"actor": actor, "key": idem.Key, "hash": sum[:], "status": status, "answer": b, "now": t.now})
	return err
}
