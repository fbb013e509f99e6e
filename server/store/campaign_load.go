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
	Start    time.Time
	End      time.Time
	Live     bool
	Revision int64 // counts every change to anything of it
}

const qCampaigns = `select id, name, starts_at, ends_at, live, revision from campaign order by live desc, id desc limit 200`

// Campaigns lists what is stored, the live one first.
func (s *Store) Campaigns(ctx context.Context) ([]CampaignRef, error) {
	rows, err := s.pool.Query(ctx, qCampaigns)
	if err != nil {
		return nil, fault("campaigns", err)
	}
	list, err := pgx.CollectRows(rows, pgx.RowToStructByPos[CampaignRef])
	return list, classify(err)
}

const qCampaignLive = `select id, name, starts_at, ends_at, live, revision from campaign where live`

// LiveCampaign is the campaign that pages and control scripts serve.
func (s *Store) LiveCampaign(ctx context.Context) (CampaignRef, error) {
	rows, err := s.pool.Query(ctx, qCampaignLive)
	if err != nil {
		return CampaignRef{}, fault("live campaign", err)
	}
	list, err := pgx.CollectRows(rows, pgx.RowToStructByPos[CampaignRef])
	if err != nil {
		return CampaignRef{}, classify(err)
	}
	if len(list) == 0 {
		return CampaignRef{}, scheduler.Errorf(scheduler.ErrNotFound, "no campaign is live yet: import one")
	}
	return list[0], nil
}

const qCampaignOne = `select name, starts_at, ends_at, grid_min, dut1_s, live, revision from campaign where id = $1`

// LoadCampaign reads a whole campaign as it stands at one moment.
func (s *Store) LoadCampaign(ctx context.Context, id int64) (*scheduler.Campaign, CampaignRef, error) {
	c, ref := &scheduler.Campaign{}, CampaignRef{ID: id}
	err := s.snapshot(ctx, func(t *tx) error {
		err := t.q.QueryRow(ctx, qCampaignOne, id).Scan(&c.Name, &c.Start, &c.End, &c.GridMin, &c.DUT1S, &ref.Live, &ref.Revision)
		if err != nil {
			return err
		}
		ref.Name, ref.Start, ref.End = c.Name, c.Start, c.End
		for _, step := range []func(context.Context, int64, *scheduler.Campaign) error{
			t.loadTelescopes, t.loadReceivers, t.loadSources, t.loadGoals, t.loadBlocks, t.loadLost, t.loadHistory, t.loadPins} {
			if err := step(ctx, id, c); err != nil {
				return err
			}
		}
		return nil
	})
	return c, ref, err
}

const qTelescopes = `select code, name, longitude_deg, latitude_deg, height_m, timezone, mount, elevation_min_deg, elevation_max_deg, horizon,
    sun_min_deg, setup_s, cal_s, switch_s, settle_s, drives from telescope where campaign_id = $1 order by position, id`

func (t *tx) loadTelescopes(ctx context.Context, id int64, c *scheduler.Campaign) error {
	rows, err := t.q.Query(ctx, qTelescopes, id)
	if err != nil {
		return err
	}
	c.Telescopes, err = pgx.CollectRows(rows, func(r pgx.CollectableRow) (scheduler.Telescope, error) {
		var x scheduler.Telescope
		var d drives
		err := r.Scan(&x.Code, &x.Name, &x.LongitudeDeg, &x.LatitudeDeg, &x.HeightM, &x.Timezone, &x.Mount, &x.ElevationMinDeg,
			&x.ElevationMaxDeg, &x.Horizon, &x.SunMinDeg, &x.SetupS, &x.CalS, &x.SwitchS, &x.SettleS, &d)
		if len(x.Horizon) == 0 {
			x.Horizon = nil
		}
		x.AzimuthRangeDeg, x.RateAzDegS, x.RateElDegS, x.AccelAzDegS2, x.AccelElDegS2 = d.AzimuthRangeDeg, d.RateAzDegS, d.RateElDegS, d.AccelAzDegS2, d.AccelElDegS2
		x.HourAngleRangeH, x.RateHADegS, x.RateDecDegS, x.AccelHADegS2, x.AccelDecDegS2 = d.HourAngleRangeH, d.RateHADegS, d.RateDecDegS, d.AccelHADegS2, d.AccelDecDegS2
		x.TrackHalfMin = d.TrackHalfMin
		return x, err
	})
	return err
}

const qReceivers = `select t.code, r.code, r.bands, r.freq_mhz, r.bandwidth_mhz, r.npol, r.trec_k, r.tatm_k, r.gain_k_per_jy, r.digitisation, r.rfi_loss
from receiver r join telescope t on t.id = r.telescope_id where t.campaign_id = $1 order by t.position, r.position, r.id`

func (t *tx) loadReceivers(ctx context.Context, id int64, c *scheduler.Campaign) error {
	rows, err := t.q.Query(ctx, qReceivers, id)
	if err != nil {
		return err
	}
	var tel string
	var x scheduler.Receiver
	_, err = pgx.ForEachRow(rows, []any{&tel, &x.Code, &x.Bands, &x.FreqMHz, &x.BandwidthMHz, &x.NPol, &x.TrecK, &x.TatmK, &x.GainKPerJy,
		&x.Digitisation, &x.RFILoss}, func() error {
		r := x
		r.Bands = append([]string(nil), x.Bands...)
		r.RFILoss = append([]float64(nil), x.RFILoss...)
		tt := c.TelescopeByCode(tel)
		tt.Receivers = append(tt.Receivers, r)
		return nil
	})
	return err
}

const qSources = `select s.name, s.period_s, s.dm_pc_cm3, s.flux_mjy, s.flux_freq_mhz, s.spectral_idx, s.width_s, s.scatter_1ghz_s, s.jitter_us_1h,
    s.sun_min_deg, s.scan_minutes, e.ra_deg, e.dec_deg, e.pos_epoch_mjd, e.pm_ra_mas_yr, e.pm_dec_mas_yr, e.orbit
from source s join lateral (select * from ephemeris e where e.source_id = s.id order by e.number desc limit 1) e on true
where s.campaign_id = $1 order by s.position, s.id`

func (t *tx) loadSources(ctx context.Context, id int64, c *scheduler.Campaign) error {
	rows, err := t.q.Query(ctx, qSources, id)
	if err != nil {
		return err
	}
	c.Sources, err = pgx.CollectRows(rows, func(r pgx.CollectableRow) (scheduler.Source, error) {
		var x scheduler.Source
		err := r.Scan(&x.Name, &x.PeriodS, &x.DMPcCm3, &x.FluxMJy, &x.FluxFreqMHz, &x.SpectralIdx, &x.WidthS, &x.Scatter1GHzS, &x.JitterUs1h,
			&x.SunMinDeg, &x.ScanMinutes, &x.RADeg, &x.DecDeg, &x.PosEpochMJD, &x.PMRAMasYr, &x.PMDecMasYr, &x.Binary)
		return x, err
	})
	return err
}

const qBlocks = `select b.code, t.code, b.span, b.receivers, b.label from block b join telescope t on t.id = b.telescope_id
where b.campaign_id = $1 order by lower(b.span), b.position, b.id`

func (t *tx) loadBlocks(ctx context.Context, id int64, c *scheduler.Campaign) error {
	rows, err := t.q.Query(ctx, qBlocks, id)
	if err != nil {
		return err
	}
	c.Blocks, err = pgx.CollectRows(rows, func(r pgx.CollectableRow) (scheduler.Block, error) {
		var x scheduler.Block
		var span pgtype.Range[time.Time]
		err := r.Scan(&x.ID, &x.Telescope, &span, &x.Receivers, &x.Label)
		x.Start, x.End = span.Lower, span.Upper
		return x, err
	})
	return err
}

const qLost = `select b.code, l.span from block_lost l join block b on b.id = l.block_id where b.campaign_id = $1 order by lower(l.span), l.id`

func (t *tx) loadLost(ctx context.Context, id int64, c *scheduler.Campaign) error {
	rows, err := t.q.Query(ctx, qLost, id)
	if err != nil {
		return err
	}
	ix := scheduler.NewIndex(c)
	var code string
	var span pgtype.Range[time.Time]
	_, err = pgx.ForEachRow(rows, []any{&code, &span}, func() error {
		b := ix.Block(code)
		b.Lost = append(b.Lost, scheduler.Span{Start: span.Lower, End: span.Upper})
		return nil
	})
	return err
}

const qHistory = `select s.name, t.code, r.code, h.starts_at, h.minutes, h.counted
from history h join source s on s.id = h.source_id join telescope t on t.id = h.telescope_id join receiver r on r.id = h.receiver_id
where h.campaign_id = $1 order by h.starts_at, h.id`

func (t *tx) loadHistory(ctx context.Context, id int64, c *scheduler.Campaign) error {
	rows, err := t.q.Query(ctx, qHistory, id)
	if err != nil {
		return err
	}
	c.History, err = pgx.CollectRows(rows, pgx.RowToStructByPos[scheduler.HistoryScan])
	if len(c.History) == 0 {
		c.History = nil
	}
	return err
}

const qPins = `select b.code, s.name, r.code, p.starts_at, p.minutes
from pin p join block b on b.id = p.block_id join source s on s.id = p.source_id join receiver r on r.id = p.receiver_id
where p.campaign_id = $1 order by p.starts_at, b.code`

func (t *tx) loadPins(ctx context.Context, id int64, c *scheduler.Campaign) error {
	rows, err := t.q.Query(ctx, qPins, id)
	if err != nil {
		return err
	}
	c.Pins, err = pgx.CollectRows(rows, pgx.RowToStructByPos[scheduler.Pin])
	if len(c.Pins) == 0 {
		c.Pins = nil
	}
	return err
}
