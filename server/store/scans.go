package store

import (
	"context"
	"time"

	"github.com/jackc/pgx/v5"
	"github.com/jackc/pgx/v5/pgtype"

	"cadencewright/scheduler"
)

// The states of a scan.
const (
	ScanPlanned   = "planned"
	ScanObserving = "observing"
	ScanDone      = "done"
	ScanPartial   = "partial"
	ScanLost      = "lost"
	ScanDropped   = "dropped" // of a superseded plan, never begun
)

// StoredScan is a scan of a stored plan with what has become of it.
type StoredScan struct {
	ID int64
	scheduler.Scan
	State    string
	Live     bool // of the issued plan: what the telescope does
	Version  int64
	PlanID   int64
	Revision int // of the plan
	Outcome  *Outcome
}

// Outcome is what was last reported of a scan.
type Outcome struct {
	State      string
	Cause      string
	StartedAt  *time.Time
	EndedAt    *time.Time
	SNR        *float64
	TOAUs      *float64
	Note       string
	ReportedBy string
	ReportedAt time.Time
}

const scanColumns = `s.id, s.block_code, t.code, s.source_name, s.receiver, s.span, s.minutes, s.motor_az_deg, s.pinned, s.toa_us, s.earns,
    s.state, s.live, s.version, s.plan_id, coalesce(p.revision, 0),
    o.state, o.cause, o.started_at, o.ended_at, o.snr, o.toa_us, o.note, o.reported_by, o.reported_at`

func scanStored(r pgx.CollectableRow) (StoredScan, error) {
	var x StoredScan
	var span pgtype.Range[time.Time]
	var o Outcome
	var state, cause, note, by *string
	var at *time.Time
	err := r.Scan(&x.ID, &x.Block, &x.Telescope, &x.Source, &x.Receiver, &span, &x.Minutes, &x.MotorAzDeg, &x.Pinned, &x.TOAUs, &x.Earns,
		&x.State, &x.Live, &x.Version, &x.PlanID, &x.Revision,
		&state, &cause, &o.StartedAt, &o.EndedAt, &o.SNR, &o.TOAUs, &note, &by, &at)
	x.Start = span.Lower
	if len(x.Earns) == 0 {
		x.Earns = nil
	}
	if state != nil {
		o.State, o.Cause, o.Note, o.ReportedBy, o.ReportedAt = *state, *cause, *note, *by, *at
		x.Outcome = &o
	}
	return x, err
}

const qNowNext = `select ` + scanColumns + ` from scan s
join telescope t on t.id = s.telescope_id join campaign c on c.id = t.campaign_id and c.live join plan p on p.id = s.plan_id
left join lateral (select * from outcome o where o.scan_id = s.id order by o.id desc limit 1) o on true
where t.code = @telescope and s.live and upper(s.span) > @at and lower(s.span) > @at - interval '2 days'
    and s.state in ('planned', 'observing')
order by lower(s.span) limit 2`

// NowNext is what a telescope of the live campaign is to do at an instant, and
// after that: the scan under way or due, and the one that follows. Either may
// be nil. A scan that is over, by its report or by the clock, is neither.
func (s *Store) NowNext(ctx context.Context, telescope string, at time.Time) (now, next *StoredScan, err error) {
	rows, err := s.pool.Query(ctx, qNowNext, pgx.NamedArgs{"telescope": telescope, "at": at})
	if err != nil {
		return nil, nil, fault("now", err)
	}
	list, err := pgx.CollectRows(rows, scanStored)
	if err != nil {
		return nil, nil, classify(err)
	}
	if len(list) > 0 && !list[0].Start.After(at) {
		now, list = &list[0], list[1:]
	}
	if len(list) > 0 {
		next = &list[0]
	}
	return now, next, nil
}

const qLiveScans = `select ` + scanColumns + ` from scan s
join telescope t on t.id = s.telescope_id join campaign c on c.id = t.campaign_id and c.live join plan p on p.id = s.plan_id
left join lateral (select * from outcome o where o.scan_id = s.id order by o.id desc limit 1) o on true
where (@telescope = '' or t.code = @telescope) and s.live and s.span && @span
order by lower(s.span), s.id limit @limit`

// MaxScans is the most scans that one call lists.
const MaxScans = 5000

// LiveScans lists the scans of the live campaign's issued plans that touch
// [from, to), of one telescope or, with an empty code, of all.
func (s *Store) LiveScans(ctx context.Context, telescope string, from, to time.Time) ([]StoredScan, error) {
	if !from.Before(to) {
		return nil, &FieldError{"to", "the end is not after the start", scheduler.ErrInvalid}
	}
	rows, err := s.pool.Query(ctx, qLiveScans, pgx.NamedArgs{"telescope": telescope, "span": spanOf(from, to), "limit": MaxScans})
	if err != nil {
		return nil, fault("scans", err)
	}
	list, err := pgx.CollectRows(rows, scanStored)
	return list, classify(err)
}

const qScan = `select ` + scanColumns + ` from scan s
join telescope t on t.id = s.telescope_id join plan p on p.id = s.plan_id
left join lateral (select * from outcome o where o.scan_id = s.id order by o.id desc limit 1) o on true
where s.id = $1`

// Scan is one scan of any plan.
func (s *Store) Scan(ctx context.Context, id int64) (StoredScan, error) {
	rows, err := s.pool.Query(ctx, qScan, id)
	if err != nil {
		return StoredScan{}, fault("scan", err)
	}
	x, err := pgx.CollectExactlyOneRow(rows, scanStored)
	return x, classify(err)
}

const qTelescopeKnown = `select exists (select from telescope t join campaign c on c.id = t.campaign_id and c.live where t.code = $1)`

// HasTelescope tells whether the live campaign has a telescope.
func (s *Store) HasTelescope(ctx context.Context, code string) (bool, error) {
	var ok bool
	if err := s.pool.QueryRow(ctx, qTelescopeKnown, code).Scan(&ok); err != nil {
		return false, fault("telescope", err)
	}
	return ok, nil
}
