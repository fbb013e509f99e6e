package store

import (
	"context"

	"github.com/jackc/pgx/v5"

	"cadencewright/scheduler"
)

const qSourceAdd = `insert into source (campaign_id, name, period_s, dm_pc_cm3, flux_mjy, flux_freq_mhz, spectral_index, width_s,
    scatter_1ghz_s, jitter_us_1h, sun_min_deg, scan_minutes)
values (@campaign, @name, @period, @dm, @flux, @flux_freq, @index, @width, @scatter, @jitter, @sun_min, @scan_minutes) returning id`

func (im *importer) addSources(ctx context.Context, c *scheduler.Campaign) error {
	batch := &pgx.Batch{}
	for i := range c.Sources {
		s := &c.Sources[i]
		batch.Queue(qSourceAdd, pgx.NamedArgs{"campaign": im.id, "name": s.Name, "period": s.PeriodS, "dm": s.DMPcCm3,
			"flux": s.FluxMJy, "flux_freq": s.FluxFreqMHz, "index": s.SpectralIdx, "width": s.WidthS, "scatter": s.Scatter1GHzS,
			"jitter": s.JitterUs1h, "sun_min": s.SunMinDeg, "scan_minutes": s.ScanMinutes}).
			QueryRow(keep(func(id int64) { im.sources[s.Name] = id }))
	}
	return im.send(ctx, batch)
}

// ephemerisRow is where a source stands and how it orbits, as the table has it.
type ephemerisRow struct {
	RADeg       float64
	DecDeg      float64
	PosEpochMJD float64
	PMRAMasYr   float64
	PMDecMasYr  float64
	BinaryModel *string
	PbD         *float64
	A1Ls        *float64
	Pbdot       *float64
	Ecc         *float64
	OmDeg       *float64
	T0MJD       *float64
	OmdotDegYr  *float64
	TascMJD     *float64
	Eps1        *float64
	Eps2        *float64
	M2Msun      *float64
	Sini        *float64
}

// ephemerisColumns are the fields of an ephemerisRow, in its order.
const ephemerisColumns = `ra_deg, dec_deg, pos_epoch_mjd, pm_ra_mas_yr, pm_dec_mas_yr, binary_model, pb_d, a1_ls, pbdot,
    ecc, om_deg, t0_mjd, omdot_deg_yr, tasc_mjd, eps1, eps2, m2_msun, sini`

const qEphemerisAdd = `insert into ephemeris (source_id, number, revision, created_at, created_by, ` + ephemerisColumns + `)
values (@source, 1, 1, @now, @actor, @ra, @dec, @epoch, @pmra, @pmdec, @model, @pb, @a1, @pbdot,
    @ecc, @om, @t0, @omdot, @tasc, @eps1, @eps2, @m2, @sini)`

func (im *importer) addEphemerides(ctx context.Context, c *scheduler.Campaign) error {
	batch := &pgx.Batch{}
	for i := range c.Sources {
		r := ephemerisOf(&c.Sources[i])
		batch.Queue(qEphemerisAdd, pgx.NamedArgs{"source": im.sources[c.Sources[i].Name], "now": im.t.now, "actor": im.actor,
			"ra": r.RADeg, "dec": r.DecDeg, "epoch": r.PosEpochMJD, "pmra": r.PMRAMasYr, "pmdec": r.PMDecMasYr, "model": r.BinaryModel,
			"pb": r.PbD, "a1": r.A1Ls, "pbdot": r.Pbdot, "ecc": r.Ecc, "om": r.OmDeg, "t0": r.T0MJD, "omdot": r.OmdotDegYr,
			"tasc": r.TascMJD, "eps1": r.Eps1, "eps2": r.Eps2, "m2": r.M2Msun, "sini": r.Sini})
	}
	return im.send(ctx, batch)
}

// ephemerisOf is the part of a source that the table of ephemerides keeps.
func ephemerisOf(s *scheduler.Source) ephemerisRow {
	r := ephemerisRow{RADeg: s.RADeg, DecDeg: s.DecDeg, PosEpochMJD: s.PosEpochMJD, PMRAMasYr: s.PMRAMasYr, PMDecMasYr: s.PMDecMasYr}
	b := s.Binary
	if b == nil {
		return r
	}
	model, kepler, ell1 := string(b.Model), b.Model == scheduler.BinaryKepler, b.Model == scheduler.BinaryELL1
	r.BinaryModel, r.PbD, r.A1Ls, r.Pbdot = &model, &b.PbD, &b.A1Ls, &b.Pbdot
	r.Ecc, r.OmDeg, r.T0MJD, r.OmdotDegYr = only(kepler, b.Ecc), only(kepler, b.OmDeg), only(kepler, b.T0MJD), only(kepler, b.OmdotDegYr)
	r.TascMJD, r.Eps1, r.Eps2 = only(ell1, b.TascMJD), only(ell1, b.Eps1), only(ell1, b.Eps2)
	r.M2Msun, r.Sini = only(b.M2Msun != 0, b.M2Msun), only(b.Sini != 0, b.Sini)
	return r
}

// into gives a source its place and its orbit.
func (r *ephemerisRow) into(s *scheduler.Source) {
	s.RADeg, s.DecDeg, s.PosEpochMJD, s.PMRAMasYr, s.PMDecMasYr = r.RADeg, r.DecDeg, r.PosEpochMJD, r.PMRAMasYr, r.PMDecMasYr
	if r.BinaryModel == nil {
		return
	}
	s.Binary = &scheduler.Binary{Model: scheduler.BinaryModel(*r.BinaryModel), PbD: orZero(r.PbD), A1Ls: orZero(r.A1Ls),
		Pbdot: orZero(r.Pbdot), Ecc: orZero(r.Ecc), OmDeg: orZero(r.OmDeg), T0MJD: orZero(r.T0MJD), OmdotDegYr: orZero(r.OmdotDegYr),
		TascMJD: orZero(r.TascMJD), Eps1: orZero(r.Eps1), Eps2: orZero(r.Eps2), M2Msun: orZero(r.M2Msun), Sini: orZero(r.Sini)}
}

// orZero is the value, or zero for null.
func orZero[T any](p *T) T {
	var v T
	if p != nil {
		v = *p
	}
	return v
}

// The newest ephemeris of each source is the one in force.
const qSources = `select s.name, s.period_s, s.dm_pc_cm3, s.flux_mjy, s.flux_freq_mhz, s.spectral_index, s.width_s, s.scatter_1ghz_s,
    s.jitter_us_1h, s.sun_min_deg, s.scan_minutes, ` + ephemerisColumns + `
from source s join lateral (select * from ephemeris e where e.source_id = s.id order by e.number desc limit 1) e on true
where s.campaign_id = $1 order by s.id`

func (t *tx) loadSources(ctx context.Context, id int64, c *scheduler.Campaign) error {
	rows, err := t.q.Query(ctx, qSources, id)
	if err != nil {
		return err
	}
	c.Sources, err = pgx.CollectRows(rows, func(row pgx.CollectableRow) (scheduler.Source, error) {
		var x scheduler.Source
		var e ephemerisRow
		err := row.Scan(&x.Name, &x.PeriodS, &x.DMPcCm3, &x.FluxMJy, &x.FluxFreqMHz, &x.SpectralIdx, &x.WidthS, &x.Scatter1GHzS,
			&x.JitterUs1h, &x.SunMinDeg, &x.ScanMinutes, &e.RADeg, &e.DecDeg, &e.PosEpochMJD, &e.PMRAMasYr, &e.PMDecMasYr, &e.BinaryModel,
			&e.PbD, &e.A1Ls, &e.Pbdot, &e.Ecc, &e.OmDeg, &e.T0MJD, &e.OmdotDegYr, &e.TascMJD, &e.Eps1, &e.Eps2, &e.M2Msun, &e.Sini)
		e.into(&x)
		return x, err
	})
	return err
}
