package store

import (
	"context"
	"time"

	"github.com/jackc/pgx/v5"
	"github.com/jackc/pgx/v5/pgtype"

	"cadencewright/scheduler"
)

// CampaignRef names a stored campaign in a certain state.
type CampaignRef struct {
	ID       int64
	Name     string
	Start    time.Time `db:"starts_at"`
	End      time.Time `db:"ends_at"`
	Live     bool
	Revision int64 // counts every change to anything of it
}

const campaignColumns = `id, name, starts_at, ends_at, live, revision`
const qCampaigns = `select ` + campaignColumns + ` from campaign order by live desc, id desc limit 200`

// Campaigns lists what is stored, at most 200, the live one first.
func (s *Store) Campaigns(ctx context.Context) ([]CampaignRef, error) {
	rows, err := s.pool.Query(ctx, qCampaigns)
	if err != nil {
		return nil, fault("campaigns", err)
	}
	list, err := pgx.CollectRows(rows, pgx.RowToStructByName[CampaignRef])
	return list, classify(err)
}

const qCampaignLive = `select ` + campaignColumns + ` from campaign where live`

// LiveCampaign is the campaign that pages and control scripts serve.
func (s *Store) LiveCampaign(ctx context.Context) (CampaignRef, error) {
	rows, err := s.pool.Query(ctx, qCampaignLive)
	if err != nil {
		return CampaignRef{}, fault("live campaign", err)
	}
	ref, err := pgx.CollectExactlyOneRow(rows, pgx.RowToStructByName[CampaignRef])
	return ref, missing(err, "no campaign is live yet: import one")
}

const qLiveEnd = `update campaign set live = false where live and id <> $1`
const qLiveBegin = `update campaign set live = true where id = $1 returning ` + campaignColumns

// SetLive makes another campaign the one that pages and control scripts serve.
func (s *Store) SetLive(ctx context.Context, campaign int64, actor string) error {
	return s.tx(ctx, func(t *tx) error {
		if _, err := t.q.Exec(ctx, qLock, lockLive); err != nil {
			return err
		}
		if _, err := t.q.Exec(ctx, qLiveEnd, campaign); err != nil {
			return err
		}
		rows, err := t.q.Query(ctx, qLiveBegin, campaign)
		if err != nil {
			return err
		}
		ref, err := pgx.CollectExactlyOneRow(rows, pgx.RowToStructByName[CampaignRef])
		if err != nil {
			return missing(err, "there is no campaign %d", campaign)
		}
		if err := t.note(ctx, campaign, actor, "live", "campaign "+ref.Name, nil, nil); err != nil {
			return err
		}
		return t.tell(ctx, Change{Kind: "campaign", Campaign: campaign})
	})
}

const qCampaignOne = `select name, starts_at, ends_at, grid_min, dut1_s, live, revision from campaign where id = $1`

// LoadCampaign reads a whole campaign as it stands at one moment, in canonical
// order.
func (s *Store) LoadCampaign(ctx context.Context, id int64) (*scheduler.Campaign, CampaignRef, error) {
	var c *scheduler.Campaign
	var ref CampaignRef
	err := s.snapshot(ctx, func(t *tx) error {
		var err error
		c, ref, err = t.loadCampaign(ctx, id)
		return err
	})
	return c, ref, err
}

func (t *tx) loadCampaign(ctx context.Context, id int64) (*scheduler.Campaign, CampaignRef, error) {
	c, ref := &scheduler.Campaign{}, CampaignRef{ID: id}
	err := t.q.QueryRow(ctx, qCampaignOne, id).Scan(&c.Name, &c.Start, &c.End, &c.GridMin, &c.DUT1S, &ref.Live, &ref.Revision)
	if err != nil {
		return nil, ref, missing(err, "there is no campaign %d", id)
	}
	ref.Name, ref.Start, ref.End = c.Name, c.Start, c.End
	for _, step := range []func(context.Context, int64, *scheduler.Campaign) error{
		t.loadTelescopes, t.loadReceivers, t.loadSources, t.loadGoals, t.loadBlocks, t.loadLost, t.loadHistory, t.loadPins} {
		if err := step(ctx, id, c); err != nil {
			return nil, ref, err
		}
	}
	return c.Canonical(), ref, nil
}

const qTelescopes = `select code, name, longitude_deg, latitude_deg, height_m, timezone, mount, elevation_min_deg, elevation_max_deg, horizon,
    sun_min_deg, setup_s, cal_s, switch_s, settle_s,
    coalesce(azimuth_lo_deg, 0), coalesce(azimuth_hi_deg, 0), coalesce(rate_az_deg_s, 0), coalesce(accel_az_deg_s2, 0),
    coalesce(rate_el_deg_s, 0), coalesce(accel_el_deg_s2, 0), coalesce(hour_angle_lo_h, 0), coalesce(hour_angle_hi_h, 0),
    coalesce(rate_ha_deg_s, 0), coalesce(accel_ha_deg_s2, 0), coalesce(rate_dec_deg_s, 0), coalesce(accel_dec_deg_s2, 0),
    coalesce(track_half_min, 0)
from telescope where campaign_id = $1 order by id`

func (t *tx) loadTelescopes(ctx context.Context, id int64, c *scheduler.Campaign) error {
	rows, err := t.q.Query(ctx, qTelescopes, id)
	if err != nil {
		return err
	}
	c.Telescopes, err = pgx.CollectRows(rows, func(r pgx.CollectableRow) (scheduler.Telescope, error) {
		var x scheduler.Telescope
		var horizon [][2]float64
		err := r.Scan(&x.Code, &x.Name, &x.LongitudeDeg, &x.LatitudeDeg, &x.HeightM, &x.Timezone, &x.Mount, &x.ElevationMinDeg,
			&x.ElevationMaxDeg, &horizon, &x.SunMinDeg, &x.SetupS, &x.CalS, &x.SwitchS, &x.SettleS,
			&x.AzimuthRangeDeg[0], &x.AzimuthRangeDeg[1], &x.RateAzDegS, &x.AccelAzDegS2, &x.RateElDegS, &x.AccelElDegS2,
			&x.HourAngleRangeH[0], &x.HourAngleRangeH[1], &x.RateHADegS, &x.AccelHADegS2, &x.RateDecDegS, &x.AccelDecDegS2, &x.TrackHalfMin)
		for _, p := range horizon {
			x.Horizon = append(x.Horizon, scheduler.HorizonPoint{AzimuthDeg: p[0], ElevationDeg: p[1]})
		}
		return x, err
	})
	return err
}

const qReceivers = `select t.code as telescope, r.code, r.bands, r.freq_mhz, r.bandwidth_mhz, r.npol, r.trec_k, r.tatm_k, r.gain_k_per_jy, r.digitisation, r.rfi_loss
from receiver r join telescope t on t.id = r.telescope_id where t.campaign_id = $1 order by r.id`

func (t *tx) loadReceivers(ctx context.Context, id int64, c *scheduler.Campaign) error {
	rows, err := t.q.Query(ctx, qReceivers, id)
	if err != nil {
		return err
	}
	defer rows.Close()
	of := scheduler.NewIndex(c)
	for rows.Next() {
		var telescope string
		var x scheduler.Receiver
		if err := rows.Scan(&telescope, &x.Code, &x.Bands, &x.FreqMHz, &x.BandwidthMHz, &x.NPol, &x.TrecK, &x.TatmK, &x.GainKPerJy,
			&x.Digitisation, &x.RFILoss); err != nil {
			return err
		}
		at := of.Telescope(telescope)
		at.Receivers = append(at.Receivers, x)
	}
	return rows.Err()
}

const qBlocks = `select b.code, t.code as telescope, b.span, b.label,
    array(select r.code from block_receiver x join receiver r on r.id = x.receiver_id where x.block_id = b.id order by x.number) as receivers
from block b join telescope t on t.id = b.telescope_id where b.campaign_id = $1 order by b.id`

func (t *tx) loadBlocks(ctx context.Context, id int64, c *scheduler.Campaign) error {
	rows, err := t.q.Query(ctx, qBlocks, id)
	if err != nil {
		return err
	}
	c.Blocks, err = pgx.CollectRows(rows, func(r pgx.CollectableRow) (scheduler.Block, error) {
		var x scheduler.Block
		var span pgtype.Range[time.Time]
		err := r.Scan(&x.ID, &x.Telescope, &span, &x.Label, &x.Receivers)
		x.Start, x.End = span.Lower, span.Upper
		return x, err
	})
	return err
}

const qLost = `select b.code, l.span from block_lost l join block b on b.id = l.block_id where b.campaign_id = $1 order by l.id`

func (t *tx) loadLost(ctx context.Context, id int64, c *scheduler.Campaign) error {
	rows, err := t.q.Query(ctx, qLost, id)
	if err != nil {
		return err
	}
	of := scheduler.NewIndex(c)
	var code string
	var span pgtype.Range[time.Time]
	_, err = pgx.ForEachRow(rows, []any{&code, &span}, func() error {
		b := of.Block(code)
		b.Lost = append(b.Lost, scheduler.Span{Start: span.Lower, End: span.Upper})
		return nil
	})
	return err
}

const qHistory = `select s.name as source, t.code as telescope, r.code as receiver, h.starts_at, h.minutes, h.counted
from history h join source s on s.id = h.source_id join telescope t on t.id = h.telescope_id join receiver r on r.id = h.receiver_id
where h.campaign_id = $1 order by h.starts_at, h.id`

func (t *tx) loadHistory(ctx context.Context, id int64, c *scheduler.Campaign) error {
	rows, err := t.q.Query(ctx, qHistory, id)
	if err != nil {
		return err
	}
	c.History, err = pgx.CollectRows(rows, func(r pgx.CollectableRow) (scheduler.HistoryScan, error) {
		var x scheduler.HistoryScan
		err := r.Scan(&x.Source, &x.Telescope, &x.Receiver, &x.Start, &x.Minutes, &x.Counted)
		return x, err
	})
	return err
}

const qPins = `select b.code as block, s.name as source, r.code as receiver, p.starts_at, p.minutes
from pin p join block b on b.id = p.block_id join source s on s.id = p.source_id join receiver r on r.id = p.receiver_id
where p.campaign_id = $1 order by p.id`

func (t *tx) loadPins(ctx context.Context, id int64, c *scheduler.Campaign) error {
	rows, err := t.q.Query(ctx, qPins, id)
	if err != nil {
		return err
	}
	c.Pins, err = pgx.CollectRows(rows, func(r pgx.CollectableRow) (scheduler.Pin, error) {
		var x scheduler.Pin
		err := r.Scan(&x.Block, &x.Source, &x.Receiver, &x.Start, &x.Minutes)
		return x, err
	})
	return err
}
