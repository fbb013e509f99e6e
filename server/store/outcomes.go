package store

import (
	"context"
	"fmt"
	"slices"
	"time"

	"github.com/jackc/pgx/v5"
	"github.com/jackc/pgx/v5/pgtype"

	"cadencewright/scheduler"
)

const (
	// countedShare is the part of a scan's planned time that makes one good
	// enough to count for its goals.
	countedShare = 0.5
	// earliest is how long before its planned start a scan may be reported as
	// begun or made: telescopes start a little early, and clocks differ.
	earliest = 15 * time.Minute
)

// next are the states that a scan may go to from each state. A scan that is
// over stays over; a dropped one was never begun.
var next = map[string][]string{
	ScanPlanned:   {ScanObserving, ScanDone, ScanPartial, ScanLost},
	ScanObserving: {ScanDone, ScanPartial, ScanLost},
}

const qScanCampaign = `select c.id from campaign c where c.id = (select campaign_id from scan where id = $1) for no key update`
const qScanLock = `select s.id, s.state, s.span, s.minutes, s.live, t.code, s.campaign_id, s.source_name, s.source_id, s.receiver_id, s.telescope_id,
    (select o.started_at from outcome o where o.scan_id = s.id order by o.id desc limit 1)
from scan s join telescope t on t.id = s.telescope_id where s.id = (select coalesce(carried_to, id) from scan where id = $1) for update of s`
const qScanState = `update scan set state = $2, version = version + 1 where id = $1`
const qOutcomeAdd = `insert into outcome (scan_id, state, cause, started_at, ended_at, snr, toa_us, note, reported_by, reported_at)
values (@scan, @state, @cause, @started, @ended, @snr, @toa, @note, @actor, @now)`
const qHistoryAdd = `insert into history (campaign_id, source_id, telescope_id, receiver_id, starts_at, minutes, counted, scan_id)
values (@campaign, @source, @telescope, @receiver, @start, @minutes, @counted, @scan)`
const qBumpCampaign = `update campaign set revision = revision + 1 where id = $1`

// lockedScan is a scan as a report finds it.
type lockedScan struct {
	id         int64
	state      string
	span       pgtype.Range[time.Time]
	minutes    int
	live       bool
	telescope  string
	campaign   int64
	source     string
	sourceID   int64
	receiverID int64
	telID      int64
	begun      *time.Time // as reported before
}

// ReportOutcome enters a report: the scan's state moves on, and a scan that was
// made enters the history, all in one transaction. The report of a scan that a
// later plan holds too is entered there, and the answer is that one.
// onlyTelescope, if not empty, refuses scans of any other.
func (s *Store) ReportOutcome(ctx context.Context, scan int64, r Report, actor, onlyTelescope string, idem Idempotency) (StoredScan, error) {
	if err := r.check(); err != nil {
		return StoredScan{}, err
	}
	var answer StoredScan
	err := s.tx(ctx, func(t *tx) error {
		request := newRequest(actor, "outcome", scan, idem)
		if again, err := t.seenBefore(ctx, request, &answer); err != nil || again {
			return err
		}
		x, err := t.lockScan(ctx, scan)
		if err != nil {
			return err
		}
		if err := x.allows(scan, r, t.now, onlyTelescope); err != nil {
			return err
		}
		if err := t.enter(ctx, x, r, actor); err != nil {
			return err
		}
		rows, err := t.q.Query(ctx, qScan, x.id)
		if err != nil {
			return err
		}
		if answer, err = pgx.CollectExactlyOneRow(rows, scanStored); err != nil {
			return err
		}
		return t.remember(ctx, request, answer)
	})
	if err != nil {
		return StoredScan{}, err
	}
	return answer, nil
}

// lockScan takes the campaign first, as the issue of a plan does, so that the
// two take turns, and then the scan, or the one that it was carried to.
func (t *tx) lockScan(ctx context.Context, scan int64) (lockedScan, error) {
	var x lockedScan
	var campaign int64
	if err := t.q.QueryRow(ctx, qScanCampaign, scan).Scan(&campaign); err != nil {
		return x, missing(err, "there is no scan %d", scan)
	}
	err := t.q.QueryRow(ctx, qScanLock, scan).Scan(&x.id, &x.state, &x.span, &x.minutes, &x.live, &x.telescope, &x.campaign,
		&x.source, &x.sourceID, &x.receiverID, &x.telID, &x.begun)
	return x, err
}

// allows tells why a report cannot be entered.
func (x *lockedScan) allows(asked int64, r Report, now time.Time, onlyTelescope string) error {
	if onlyTelescope != "" && x.telescope != onlyTelescope {
		return scheduler.Errorf(scheduler.ErrForbidden, "scan %d belongs to telescope %s, this key to %s", asked, x.telescope, onlyTelescope)
	}
	if !x.live {
		return scheduler.Errorf(scheduler.ErrConflict, "scan %d is not part of the plan that is issued now", asked)
	}
	if !slices.Contains(next[x.state], r.State) {
		return scheduler.Errorf(scheduler.ErrConflict, "scan %d is %s and cannot become %s", asked, x.state, r.State)
	}
	if r.State != ScanLost && now.Before(x.span.Lower.Add(-earliest)) {
		return scheduler.Errorf(scheduler.ErrConflict, "scan %d starts at %s and cannot be %s at %s", asked,
			x.span.Lower.Format(time.RFC3339), r.State, now.Format(time.RFC3339))
	}
	return r.checkTimes(x, now)
}

// enter writes a report that is allowed.
func (t *tx) enter(ctx context.Context, x lockedScan, r Report, actor string) error {
	if _, err := t.q.Exec(ctx, qScanState, x.id, r.State); err != nil {
		return err
	}
	if r.StartedAt == nil {
		r.StartedAt = x.begun
	}
	_, err := t.q.Exec(ctx, qOutcomeAdd, pgx.NamedArgs{"scan": x.id, "state": r.State, "cause": r.Cause, "started": r.StartedAt, "ended": r.EndedAt,
		"snr": r.SNR, "toa": r.TOAUs, "note": r.Note, "actor": actor, "now": t.now})
	if err != nil {
		return err
	}
	if r.State == ScanDone || r.State == ScanPartial {
		if err := t.made(ctx, x, r); err != nil {
			return err
		}
	}
	subject := fmt.Sprintf("scan %d of %s on %s", x.id, x.source, x.telescope)
	if err := t.note(ctx, x.campaign, actor, "report", subject, map[string]string{"state": x.state}, r.doc()); err != nil {
		return err
	}
	return t.tell(ctx, Change{Kind: "outcome", Campaign: x.campaign, Week: scheduler.WeekName(x.span.Lower), Telescope: x.telescope, Scan: x.id})
}

// made enters a scan that was made into the history, which changes what is due.
func (t *tx) made(ctx context.Context, x lockedScan, r Report) error {
	start, end := r.stretch(&x)
	minutes := end.Sub(start).Minutes()
	_, err := t.q.Exec(ctx, qHistoryAdd, pgx.NamedArgs{"campaign": x.campaign, "source": x.sourceID, "telescope": x.telID, "receiver": x.receiverID,
		"start": start, "minutes": minutes, "counted": minutes >= countedShare*float64(x.minutes), "scan": x.id})
	if err != nil {
		return err
	}
	_, err = t.q.Exec(ctx, qBumpCampaign, x.campaign)
	return err
}
