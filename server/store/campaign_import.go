package store

import (
	"context"
	"time"

	"github.com/jackc/pgx/v5"
	"github.com/jackc/pgx/v5/pgtype"

	"cadencewright/scheduler"
)

// Locks that are not on a row; any numbers that nothing else uses.
const (
	lockMigrate = 7264981723 // one copy of the program migrates
	lockLive    = 7264981724 // which campaign is live is decided by one at a time
)

const qLock = `select pg_advisory_xact_lock($1)`

// ImportCampaign stores a whole campaign under its name, in one transaction,
// and makes it live if none is. It fails with a conflict if the name is taken.
func (s *Store) ImportCampaign(ctx context.Context, c *scheduler.Campaign, actor string) (int64, error) {
	if err := c.Validate(); err != nil {
		return 0, err
	}
	c = c.Canonical()
	im := &importer{actor: actor, telescopes: map[string]int64{}, receivers: map[[2]string]int64{}, sources: map[string]int64{},
		blocks: map[string]blockRef{}}
	err := s.tx(ctx, func(t *tx) error {
		if _, err := t.q.Exec(ctx, qLock, lockLive); err != nil {
			return err
		}
		im.t = t
		if err := im.all(ctx, c); err != nil {
			return err
		}
		return t.note(ctx, im.id, actor, "import", "campaign "+c.Name, nil, map[string]int{
			"telescopes": len(c.Telescopes), "sources": len(c.Sources), "blocks": len(c.Blocks), "history": len(c.History)})
	})
	return im.id, err
}

// importer writes one campaign and remembers the ids of what it wrote.
type importer struct {
	t          *tx
	actor      string
	id         int64 // of the campaign
	telescopes map[string]int64
	receivers  map[[2]string]int64 // by telescope and code
	sources    map[string]int64
	blocks     map[string]blockRef
}

type blockRef struct {
	id        int64
	telescope string
}

const qCampaignAdd = `insert into campaign (name, starts_at, ends_at, grid_min, dut1_s, live, created_at)
values (@name, @start, @end, @grid, @dut1, not exists (select from campaign where live), @now) returning id`

func (im *importer) all(ctx context.Context, c *scheduler.Campaign) error {
	err := im.t.q.QueryRow(ctx, qCampaignAdd, pgx.NamedArgs{"name": c.Name, "start": c.Start, "end": c.End, "grid": c.GridMin,
		"dut1": c.DUT1S, "now": im.t.now}).Scan(&im.id)
	if err != nil {
		return err
	}
	for _, step := range []func(context.Context, *scheduler.Campaign) error{
		im.addTelescopes, im.addReceivers, im.addSources, im.addEphemerides, im.addGoals, im.addBlocks, im.addBlockParts, im.addPins, im.addHistory} {
		if err := step(ctx, c); err != nil {
			return err
		}
	}
	return nil
}

// send runs the statements of a batch, all in one round trip.
func (im *importer) send(ctx context.Context, b *pgx.Batch) error {
	return im.t.q.SendBatch(ctx, b).Close()
}

// keep gives the id that a statement of a batch returns to f.
func keep(f func(id int64)) func(pgx.Row) error {
	return func(row pgx.Row) error {
		var id int64
		if err := row.Scan(&id); err != nil {
			return err
		}
		f(id)
		return nil
	}
}

const qTelescopeAdd = `insert into telescope (campaign_id, code, name, longitude_deg, latitude_deg, height_m, timezone, mount,
    elevation_min_deg, elevation_max_deg, horizon, sun_min_deg, setup_s, cal_s, switch_s, settle_s,
    azimuth_lo_deg, azimuth_hi_deg, rate_az_deg_s, accel_az_deg_s2, rate_el_deg_s, accel_el_deg_s2,
    hour_angle_lo_h, hour_angle_hi_h, rate_ha_deg_s, accel_ha_deg_s2, rate_dec_deg_s, accel_dec_deg_s2, track_half_min)
values (@campaign, @code, @name, @lon, @lat, @height, @timezone, @mount,
    @el_min, @el_max, @horizon, @sun_min, @setup, @cal, @switch, @settle,
    @az_lo, @az_hi, @rate_az, @accel_az, @rate_el, @accel_el,
    @ha_lo, @ha_hi, @rate_ha, @accel_ha, @rate_dec, @accel_dec, @track) returning id`

func (im *importer) addTelescopes(ctx context.Context, c *scheduler.Campaign) error {
	batch := &pgx.Batch{}
	for i := range c.Telescopes {
		t := &c.Telescopes[i]
		batch.Queue(qTelescopeAdd, im.telescopeArgs(t)).QueryRow(keep(func(id int64) { im.telescopes[t.Code] = id }))
	}
	return im.send(ctx, batch)
}

// telescopeArgs are a telescope's columns; those of axes that its mount has not
// are null.
func (im *importer) telescopeArgs(t *scheduler.Telescope) pgx.NamedArgs {
	altaz, equatorial, transit := t.Mount == scheduler.MountAltAz, t.Mount == scheduler.MountEquatorial, t.Mount == scheduler.MountTransit
	horizon := make([][2]float64, len(t.Horizon))
	for i, p := range t.Horizon {
		horizon[i] = [2]float64{p.AzimuthDeg, p.ElevationDeg}
	}
	return pgx.NamedArgs{"campaign": im.id, "code": t.Code, "name": t.Name, "lon": t.LongitudeDeg, "lat": t.LatitudeDeg,
		"height": t.HeightM, "timezone": t.Timezone, "mount": string(t.Mount), "el_min": t.ElevationMinDeg, "el_max": t.ElevationMaxDeg,
		"horizon": horizon, "sun_min": t.SunMinDeg, "setup": t.SetupS, "cal": t.CalS, "switch": t.SwitchS, "settle": t.SettleS,
		"az_lo": only(altaz, t.AzimuthRangeDeg[0]), "az_hi": only(altaz, t.AzimuthRangeDeg[1]),
		"rate_az": only(altaz, t.RateAzDegS), "accel_az": only(altaz, t.AccelAzDegS2),
		"rate_el": only(!equatorial, t.RateElDegS), "accel_el": only(!equatorial, t.AccelElDegS2),
		"ha_lo": only(equatorial, t.HourAngleRangeH[0]), "ha_hi": only(equatorial, t.HourAngleRangeH[1]),
		"rate_ha": only(equatorial, t.RateHADegS), "accel_ha": only(equatorial, t.AccelHADegS2),
		"rate_dec": only(equatorial, t.RateDecDegS), "accel_dec": only(equatorial, t.AccelDecDegS2),
		"track": only(transit, t.TrackHalfMin)}
}

// only is the value where it belongs, else null.
func only[T any](belongs bool, v T) *T {
	if !belongs {
		return nil
	}
	return &v
}

const qReceiverAdd = `insert into receiver (telescope_id, code, bands, freq_mhz, bandwidth_mhz, npol, trec_k, tatm_k, gain_k_per_jy, digitisation, rfi_loss)
values (@telescope, @code, @bands, @freq, @bandwidth, @npol, @trec, @tatm, @gain, @digitisation, @rfi) returning id`

func (im *importer) addReceivers(ctx context.Context, c *scheduler.Campaign) error {
	batch := &pgx.Batch{}
	for i := range c.Telescopes {
		t := &c.Telescopes[i]
		for j := range t.Receivers {
			r := &t.Receivers[j]
			batch.Queue(qReceiverAdd, pgx.NamedArgs{"telescope": im.telescopes[t.Code], "code": r.Code, "bands": r.Bands, "freq": r.FreqMHz,
				"bandwidth": r.BandwidthMHz, "npol": r.NPol, "trec": r.TrecK, "tatm": r.TatmK, "gain": r.GainKPerJy,
				"digitisation": r.Digitisation, "rfi": notNil(r.RFILoss)}).
				QueryRow(keep(func(id int64) { im.receivers[[2]string{t.Code, r.Code}] = id }))
		}
	}
	return im.send(ctx, batch)
}

// notNil is the list, empty rather than null.
func notNil[T any](x []T) []T {
	if x == nil {
		return []T{}
	}
	return x
}

const qBlockAdd = `insert into block (campaign_id, telescope_id, code, span, label)
values (@campaign, @telescope, @code, @span, @label) returning id`

func (im *importer) addBlocks(ctx context.Context, c *scheduler.Campaign) error {
	batch := &pgx.Batch{}
	for i := range c.Blocks {
		b := &c.Blocks[i]
		batch.Queue(qBlockAdd, pgx.NamedArgs{"campaign": im.id, "telescope": im.telescopes[b.Telescope], "code": b.ID,
			"span": spanOf(b.Start, b.End), "label": b.Label}).
			QueryRow(keep(func(id int64) { im.blocks[b.ID] = blockRef{id, b.Telescope} }))
	}
	return im.send(ctx, batch)
}

const qBlockReceiverAdd = `insert into block_receiver (block_id, number, telescope_id, receiver_id) values (@block, @number, @telescope, @receiver)`
const qLostAdd = `insert into block_lost (block_id, span) values (@block, @span)`

func (im *importer) addBlockParts(ctx context.Context, c *scheduler.Campaign) error {
	batch := &pgx.Batch{}
	for i := range c.Blocks {
		b := &c.Blocks[i]
		id := im.blocks[b.ID].id
		for j, code := range b.Receivers {
			batch.Queue(qBlockReceiverAdd, pgx.NamedArgs{"block": id, "number": j, "telescope": im.telescopes[b.Telescope],
				"receiver": im.receivers[[2]string{b.Telescope, code}]})
		}
		for _, l := range b.Lost {
			batch.Queue(qLostAdd, pgx.NamedArgs{"block": id, "span": spanOf(l.Start, l.End)})
		}
	}
	return im.send(ctx, batch)
}

// spanOf is [start, end) as a range.
func spanOf(start, end time.Time) pgtype.Range[time.Time] {
	return pgtype.Range[time.Time]{Lower: start, Upper: end, LowerType: pgtype.Inclusive, UpperType: pgtype.Exclusive, Valid: true}
}

const qPinAdd = `insert into pin (campaign_id, telescope_id, block_id, source_id, receiver_id, starts_at, minutes)
values (@campaign, @telescope, @block, @source, @receiver, @start, @minutes)`

func (im *importer) addPins(ctx context.Context, c *scheduler.Campaign) error {
	batch := &pgx.Batch{}
	for _, p := range c.Pins {
		b := im.blocks[p.Block]
		batch.Queue(qPinAdd, pgx.NamedArgs{"campaign": im.id, "telescope": im.telescopes[b.telescope], "block": b.id,
			"source": im.sources[p.Source], "receiver": im.receivers[[2]string{b.telescope, p.Receiver}], "start": p.Start, "minutes": p.Minutes})
	}
	return im.send(ctx, batch)
}

func (im *importer) addHistory(ctx context.Context, c *scheduler.Campaign) error {
	columns := []string{"campaign_id", "source_id", "telescope_id", "receiver_id", "starts_at", "minutes", "counted"}
	_, err := im.t.q.CopyFrom(ctx, pgx.Identifier{"history"}, columns, pgx.CopyFromSlice(len(c.History), func(i int) ([]any, error) {
		h := &c.History[i]
		return []any{im.id, im.sources[h.Source], im.telescopes[h.Telescope], im.receivers[[2]string{h.Telescope, h.Receiver}],
			h.Start, h.Minutes, h.Counted}, nil
	}))
	return err
}
