package store

import (
	"context"
	"time"

	"github.com/jackc/pgx/v5"
	"github.com/jackc/pgx/v5/pgtype"

	"cadencewright/scheduler"
)

// ImportCampaign stores a whole campaign under its name, in one transaction,
// and makes it live if none is. It fails with a conflict if the name is taken.
func (s *Store) ImportCampaign(ctx context.Context, c *scheduler.Campaign, actor string) (int64, error) {
	if err := c.Validate(); err != nil {
		return 0, err
	}
	var id int64
	err := s.tx(ctx, func(t *tx) error {
		im := &importer{t: t, tel: map[string]int64{}, rx: map[[2]string]int64{}, src: map[string]int64{}, block: map[string]int64{}, blockTel: map[string]string{}}
		var err error
		if id, err = im.all(ctx, c); err != nil {
			return err
		}
		return t.note(ctx, id, actor, "import", "campaign "+c.Name, nil, map[string]int{
			"telescopes": len(c.Telescopes), "sources": len(c.Sources), "blocks": len(c.Blocks), "history": len(c.History)})
	})
	return id, err
}

// importer writes one campaign and remembers the ids of what it wrote.
type importer struct {
	t        *tx
	id       int64
	tel      map[string]int64
	rx       map[[2]string]int64
	src      map[string]int64
	block    map[string]int64
	blockTel map[string]string
}

const qCampaignAdd = `insert into campaign (name, starts_at, ends_at, grid_min, dut1_s, live, created_at)
values (@name, @start, @end, @grid, @dut1, not exists (select from campaign where live), @now) returning id`

func (im *importer) all(ctx context.Context, c *scheduler.Campaign) (int64, error) {
	err := im.t.q.QueryRow(ctx, qCampaignAdd, pgx.NamedArgs{"name": c.Name, "start": c.Start, "end": c.End, "grid": c.GridMin,
		"dut1": c.DUT1S, "now": im.t.now}).Scan(&im.id)
	if err != nil {
		return 0, err
	}
	for _, step := range []func(context.Context, *scheduler.Campaign) error{im.telescopes, im.sources, im.goals, im.blocks, im.pins, im.history} {
		if err := step(ctx, c); err != nil {
			return 0, err
		}
	}
	return im.id, nil
}

// drives is what a mount's drives can do, as the database keeps it.
type drives struct {
	AzimuthRangeDeg [2]float64
	RateAzDegS      float64
	RateElDegS      float64
	AccelAzDegS2    float64
	AccelElDegS2    float64
	HourAngleRangeH [2]float64
	RateHADegS      float64
	RateDecDegS     float64
	AccelHADegS2    float64
	AccelDecDegS2   float64
	TrackHalfMin    float64
}

const qTelescopeAdd = `insert into telescope (campaign_id, code, name, position, longitude_deg, latitude_deg, height_m, timezone, mount,
    elevation_min_deg, elevation_max_deg, horizon, sun_min_deg, setup_s, cal_s, switch_s, settle_s, drives)
values (@campaign, @code, @name, @position, @lon, @lat, @height, @timezone, @mount,
    @el_min, @el_max, @horizon, @sun_min, @setup, @cal, @switch, @settle, @drives) returning id`

const qReceiverAdd = `insert into receiver (telescope_id, code, position, bands, freq_mhz, bandwidth_mhz, npol, trec_k, tatm_k, gain_k_per_jy, digitisation, rfi_loss)
values (@telescope, @code, @position, @bands, @freq, @bandwidth, @npol, @trec, @tatm, @gain, @digitisation, @rfi) returning id`

func (im *importer) telescopes(ctx context.Context, c *scheduler.Campaign) error {
	for i := range c.Telescopes {
		t := &c.Telescopes[i]
		horizon := t.Horizon
		if horizon == nil {
			horizon = []scheduler.HorizonPoint{}
		}
		var id int64
		err := im.t.q.QueryRow(ctx, qTelescopeAdd, pgx.NamedArgs{"campaign": im.id, "code": t.Code, "name": t.Name, "position": i,
			"lon": t.LongitudeDeg, "lat": t.LatitudeDeg, "height": t.HeightM, "timezone": t.Timezone, "mount": string(t.Mount),
			"el_min": t.ElevationMinDeg, "el_max": t.ElevationMaxDeg, "horizon": horizon, "sun_min": t.SunMinDeg,
			"setup": t.SetupS, "cal": t.CalS, "switch": t.SwitchS, "settle": t.SettleS,
			"drives": drives{t.AzimuthRangeDeg, t.RateAzDegS, t.RateElDegS, t.AccelAzDegS2, t.AccelElDegS2, t.HourAngleRangeH,
				t.RateHADegS, t.RateDecDegS, t.AccelHADegS2, t.AccelDecDegS2, t.TrackHalfMin}}).Scan(&id)
		if err != nil {
			return err
		}
		im.tel[t.Code] = id
		for j := range t.Receivers {
			r := &t.Receivers[j]
			var rid int64
			err := im.t.q.QueryRow(ctx, qReceiverAdd, pgx.NamedArgs{"telescope": id, "code": r.Code, "position": j, "bands": r.Bands,
				"freq": r.FreqMHz, "bandwidth": r.BandwidthMHz, "npol": r.NPol, "trec": r.TrecK, "tatm": r.TatmK, "gain": r.GainKPerJy,
				"digitisation": r.Digitisation, "rfi": notNil(r.RFILoss)}).Scan(&rid)
			if err != nil {
				return err
			}
			im.rx[[2]string{t.Code, r.Code}] = rid
		}
	}
	return nil
}

func notNil[T any](x []T) []T {
	if x == nil {
		return []T{}
	}
	return x
}

const qSourceAdd = `insert into source (campaign_id, name, position, period_s, dm_pc_cm3, flux_mjy, flux_freq_mhz, spectral_idx, width_s,
    scatter_1ghz_s, jitter_us_1h, sun_min_deg, scan_minutes)
values (@campaign, @name, @position, @period, @dm, @flux, @flux_freq, @idx, @width, @scatter, @jitter, @sun_min, @scan_minutes) returning id`

const qEphemerisAdd = `insert into ephemeris (source_id, number, valid_from, ra_deg, dec_deg, pos_epoch_mjd, pm_ra_mas_yr, pm_dec_mas_yr, binary_model, orbit, created_at)
values (@source, 1, @from, @ra, @dec, @epoch, @pmra, @pmdec, @model, @orbit, @now)`

func (im *importer) sources(ctx context.Context, c *scheduler.Campaign) error {
	batch := &pgx.Batch{}
	for i := range c.Sources {
		s := &c.Sources[i]
		batch.Queue(qSourceAdd, pgx.NamedArgs{"campaign": im.id, "name": s.Name, "position": i, "period": s.PeriodS, "dm": s.DMPcCm3,
			"flux": s.FluxMJy, "flux_freq": s.FluxFreqMHz, "idx": s.SpectralIdx, "width": s.WidthS, "scatter": s.Scatter1GHzS,
			"jitter": s.JitterUs1h, "sun_min": s.SunMinDeg, "scan_minutes": s.ScanMinutes}).QueryRow(func(row pgx.Row) error {
			var id int64
			err := row.Scan(&id)
			im.src[s.Name] = id
			return err
		})
	}
	if err := im.t.q.SendBatch(ctx, batch).Close(); err != nil {
		return err
	}
	batch = &pgx.Batch{}
	for i := range c.Sources {
		s := &c.Sources[i]
		var model *string
		if s.Binary != nil {
			m := string(s.Binary.Model)
			model = &m
		}
		batch.Queue(qEphemerisAdd, pgx.NamedArgs{"source": im.src[s.Name], "from": c.Start, "ra": s.RADeg, "dec": s.DecDeg,
			"epoch": s.PosEpochMJD, "pmra": s.PMRAMasYr, "pmdec": s.PMDecMasYr, "model": model, "orbit": s.Binary, "now": im.t.now})
	}
	return im.t.q.SendBatch(ctx, batch).Close()
}

const qBlockAdd = `insert into block (campaign_id, telescope_id, code, position, span, receivers, label)
values (@campaign, @telescope, @code, @position, @span, @receivers, @label) returning id`

const qLostAdd = `insert into block_lost (block_id, span) values (@block, @span)`

func (im *importer) blocks(ctx context.Context, c *scheduler.Campaign) error {
	batch := &pgx.Batch{}
	for i := range c.Blocks {
		b := &c.Blocks[i]
		im.blockTel[b.ID] = b.Telescope
		batch.Queue(qBlockAdd, pgx.NamedArgs{"campaign": im.id, "telescope": im.tel[b.Telescope], "code": b.ID, "position": i,
			"span": spanOf(b.Start, b.End), "receivers": b.Receivers, "label": b.Label}).QueryRow(func(row pgx.Row) error {
			var id int64
			err := row.Scan(&id)
			im.block[b.ID] = id
			return err
		})
	}
	if err := im.t.q.SendBatch(ctx, batch).Close(); err != nil {
		return err
	}
	batch = &pgx.Batch{}
	for i := range c.Blocks {
		for _, l := range c.Blocks[i].Lost {
			batch.Queue(qLostAdd, pgx.NamedArgs{"block": im.block[c.Blocks[i].ID], "span": spanOf(l.Start, l.End)})
		}
	}
	return im.t.q.SendBatch(ctx, batch).Close()
}

// spanOf is [start, end) as a range.
func spanOf(start, end time.Time) pgtype.Range[time.Time] {
	return pgtype.Range[time.Time]{Lower: start, Upper: end, LowerType: pgtype.Inclusive, UpperType: pgtype.Exclusive, Valid: true}
}

const qPinAdd = `insert into pin (campaign_id, block_id, source_id, receiver_id, starts_at, minutes)
values (@campaign, @block, @source, @receiver, @start, @minutes)`

func (im *importer) pins(ctx context.Context, c *scheduler.Campaign) error {
	batch := &pgx.Batch{}
	for _, p := range c.Pins {
		batch.Queue(qPinAdd, pgx.NamedArgs{"campaign": im.id, "block": im.block[p.Block], "source": im.src[p.Source],
			"receiver": im.rx[[2]string{im.blockTel[p.Block], p.Receiver}], "start": p.Start, "minutes": p.Minutes})
	}
	return im.t.q.SendBatch(ctx, batch).Close()
}

func (im *importer) history(ctx context.Context, c *scheduler.Campaign) error {
	cols := []string{"campaign_id", "source_id", "telescope_id", "receiver_id", "starts_at", "minutes", "counted"}
	_, err := im.t.q.CopyFrom(ctx, pgx.Identifier{"history"}, cols, pgx.CopyFromSlice(len(c.History), func(i int) ([]any, error) {
		h := &c.History[i]
		return []any{im.id, im.src[h.Source], im.tel[h.Telescope], im.rx[[2]string{h.Telescope, h.Receiver}], h.Start, h.Minutes, h.Counted}, nil
	}))
	return err
}
