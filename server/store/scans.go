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
	ScanDropped   = "dropped" // taken out by a later plan, or over before its plan was issued
)

// StoredScan is a scan of a stored plan with what has become of it.
type StoredScan struct {
	ID int64
	scheduler.Scan
	State     string
	Live      bool  // what the telescope does, or did
	CarriedTo int64 // the same scan in a later plan, live in its stead; 0: none
	Version   int64
	PlanID    int64
	Revision  int // of the plan
	Outcome   *Outcome
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

// scanColumns and scanTables read scans. What has become of one is read where
// it was carried to, if it was.
const scanColumns = `s.id, s.block_code, t.code, s.source_name, s.receiver, s.span, s.minutes, s.motor_az_deg, s.pinned, s.toa_us, s.earns,
    coalesce(k.state, s.state), s.live, coalesce(s.carried_to, 0), s.version, s.plan_id, coalesce(p.revision, 0),
    o.state, o.cause, o.started_at, o.ended_at, o.snr, o.toa_us, o.note, o.reported_by, o.reported_at`
const scanTables = `
from scan s join telescope t on t.id = s.telescope_id join plan p on p.id = s.plan_id left join scan k on k.id = s.carried_to
left join lateral (select * from outcome o where o.scan_id = coalesce(s.carried_to, s.id) order by o.id desc limit 1) o on true`

func scanStored(r pgx.CollectableRow) (StoredScan, error) {
	var x StoredScan
	var span pgtype.Range[time.Time]
	var earns []earningDoc
	var o Outcome
	var state, cause, note, by *string
	var at *time.Time
	err := r.Scan(&x.ID, &x.Block, &x.Telescope, &x.Source, &x.Receiver, &span, &x.Minutes, &x.MotorAzDeg, &x.Pinned, &x.TOAUs, &earns,
		&x.State, &x.Live, &x.CarriedTo, &x.Version, &x.PlanID, &x.Revision,
		&state, &cause, &o.StartedAt, &o.EndedAt, &o.SNR, &o.TOAUs, &note, &by, &at)
	x.Start, x.Earns = span.Lower, earningsOf(earns)
	if state != nil {
		o.State, o.Cause, o.Note, o.ReportedBy, o.ReportedAt = *state, orZero(cause), orZero(note), orZero(by), orZero(at)
		x.Outcome = &o
	}
	return x, err
}

// Scans that are to be done never overlap, so the one that began last is the
// only one that can be under way: two look-ups in one index.
const qNowNext = `with at_telescope as (
    select t.id from telescope t join campaign c on c.id = t.campaign_id and c.live where t.code = @telescope
), wanted as (
    (select s.id from scan s where s.telescope_id = (select id from at_telescope) and s.live and s.state in ('planned', 'observing')
        and lower(s.span) <= @at order by lower(s.span) desc limit 1)
    union all
    (select s.id from scan s where s.telescope_id = (select id from at_telescope) and s.live and s.state in ('planned', 'observing')
        and lower(s.span) > @at order by lower(s.span) limit 1)
) select ` + scanColumns + scanTables + ` join wanted w on w.id = s.id where upper(s.span) > @at order by lower(s.span)`

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
	for i := range list {
		if list[i].Start.After(at) {
			next = &list[i]
		} else {
			now = &list[i]
		}
	}
	return now, next, nil
}

// A scan lies in a block, so none that began 14 days before can still be on:
// that bounds the stretch of the index.
const qLiveScans = `select ` + scanColumns + scanTables + ` join campaign c on c.id = t.campaign_id and c.live
where (@telescope = '' or t.code = @telescope) and s.live
    and lower(s.span) < @to and lower(s.span) > @from::timestamptz - interval '14 days' and upper(s.span) > @from
order by lower(s.span), s.id limit @limit`

// MaxScans is the most scans that one call lists.
const MaxScans = 5000

// LiveScans lists the scans of the live campaign that telescopes do or did by
// issued plans, and that touch [from, to): of one telescope or, with an empty
// code, of all. More than MaxScans of them are an error of kind ErrTooLarge.
func (s *Store) LiveScans(ctx context.Context, telescope string, from, to time.Time) ([]StoredScan, error) {
	if !from.Before(to) {
		return nil, &FieldError{"to", "the end is not after the start", scheduler.ErrInvalid}
	}
	rows, err := s.pool.Query(ctx, qLiveScans, pgx.NamedArgs{"telescope": telescope, "from": from, "to": to, "limit": MaxScans + 1})
	if err != nil {
		return nil, fault("scans", err)
	}
	list, err := pgx.CollectRows(rows, scanStored)
	if err == nil && len(list) > MaxScans {
		return nil, scheduler.Errorf(scheduler.ErrTooLarge, "there are more than %d scans between %s and %s; ask for a shorter time or for one telescope",
			MaxScans, from.Format(time.RFC3339), to.Format(time.RFC3339))
	}
	return list, classify(err)
}

const qScan = `select ` + scanColumns + scanTables + ` where s.id = $1`

// Scan is one scan of any plan.
func (s *Store) Scan(ctx context.Context, id int64) (StoredScan, error) {
	rows, err := s.pool.Query(ctx, qScan, id)
	if err != nil {
		return StoredScan{}, fault("scan", err)
	}
	x, err := pgx.CollectExactlyOneRow(rows, scanStored)
	return x, missing(err, "there is no scan %d", id)
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
