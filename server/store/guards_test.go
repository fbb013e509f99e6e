package store_test

import (
	"context"
	"errors"
	"testing"

	"github.com/jackc/pgx/v5/pgconn"

	"cadencewright/server/store"
)

// What must never be true is refused by the schema itself, whoever writes.
func TestSchemaGuards(t *testing.T) {
	t.Parallel()
	w := newWorld(t)
	w.issue(scan("a1", 0, 1), scan("a1", 60, 2))
	if _, err := w.ImportCampaign(t.Context(), array("Other"), "ada"); err != nil {
		t.Fatal(err)
	}
	for _, x := range []struct{ constraint, sql string }{
		{"campaign_one_live", `update campaign set live = true where name = 'Other'`},
		{"campaign_grid", `update campaign set grid_min = 7`},
		{"finite", `update campaign set dut1_s = 'NaN'`},
		{"finite", `update source set flux_mjy = 'infinity'`},
		{"telescope_axes", `update telescope set mount = 'transit'`},
		{"telescope_axes", `update telescope set rate_az_deg_s = null`},
		{"telescope_azimuth", `update telescope set azimuth_lo_deg = 300`},
		{"telescope_elevation", `update telescope set elevation_max_deg = 5`},
		{"receiver_rfi", `update receiver set rfi_loss = array[0.5]`},
		{"receiver_rfi", `update receiver set rfi_loss = array_fill('NaN'::double precision, array[24])`},
		{"source_scan_minutes", `update source set scan_minutes = '{}'`},
		{"source_scan_minutes", `update source set scan_minutes = '{30,0}'`},
		{"ephemeris_orbit", `update ephemeris set pb_d = 3`},
		{"ephemeris_orbit", `update ephemeris set binary_model = 'kepler'`},
		{"ephemeris_number_unique", `insert into ephemeris (source_id, number, revision, ra_deg, dec_deg, pos_epoch_mjd, pm_ra_mas_yr, pm_dec_mas_yr, created_at, created_by) select source_id, 1, 2, 0, 0, 51544.5, 0, 0, now(), '' from ephemeris limit 1`},
		{"goal_fields", `update goal set kind = 'phase'`},
		{"goal_fields", `update goal set count = 2`},
		{"goal_early", `update goal set early_d = every_d`},
		{"goal_code", `update goal set code = 'c#1' where code = 'c1'`},
		{"goal_source", `update goal set source_id = (select s.id from source s join campaign c on c.id = s.campaign_id where c.name = 'Other' limit 1) where campaign_id = (select id from campaign where name = 'Array')`},
		{"goal_telescope_telescope", `insert into goal_telescope select g.id, 0, g.campaign_id, t.id from goal g, telescope t where t.campaign_id <> g.campaign_id limit 1`},
		{"phase_window_span", `insert into phase_window select id, 0, 0.9, 0.1, 1 from goal limit 1`},
		{"block_no_overlap", `update block set span = tstzrange(lower(span), upper(span) + interval '1 day') where code = 'a1'`},
		{"block_span", `update block set span = 'empty' where code = 'a1'`},
		{"block_receiver_receiver", `update block_receiver set receiver_id = (select r.id from receiver r where r.telescope_id <> block_receiver.telescope_id limit 1)`},
		{"block_lost_span", `insert into block_lost (block_id, span) select id, 'empty' from block limit 1`},
		{"plan_issue", `update plan set state = 'draft'`},
		{"plan_superseded", `update plan set state = 'superseded'`},
		{"plan_horizon", `update plan set horizon = 'empty'`},
		{"plan_one_issued", `insert into plan (campaign_id, horizon, state, revision, campaign_revision, score, possible, bound, made_at, made_by, issued_at, issued_by) select campaign_id, horizon, state, 2, 1, 0, 0, 0, made_at, made_by, issued_at, issued_by from plan`},
		{"scan_no_overlap", `update scan set span = tstzrange(lower(span), upper(span) + interval '1 hour'), minutes = minutes + 60`},
		{"scan_minutes", `update scan set minutes = 31`},
		{"scan_live", `update scan set state = 'dropped'`},
		{"scan_source", `update scan set source_id = (select s.id from source s where s.campaign_id <> scan.campaign_id limit 1)`},
		{"scan_receiver", `update scan set receiver_id = (select r.id from receiver r where r.telescope_id <> scan.telescope_id limit 1)`},
		{"scan_ephemeris", `update scan set ephemeris_id = (select e.id from ephemeris e where e.source_id <> scan.source_id limit 1)`},
		{"outcome_cause", `insert into outcome (scan_id, state, reported_by, reported_at) select id, 'lost', '', now() from scan limit 1`},
		{"outcome_span", `insert into outcome (scan_id, state, started_at, ended_at, reported_by, reported_at) select id, 'done', now(), now(), '', now() from scan limit 1`},
		{"history_receiver", `insert into history (campaign_id, source_id, telescope_id, receiver_id, starts_at, minutes, counted) select s.campaign_id, s.source_id, s.telescope_id, r.id, now(), 30, true from scan s, receiver r where r.telescope_id <> s.telescope_id limit 1`},
		{"plan_job_one_active", `insert into plan_job (campaign_id, horizon, state, seed, asked_by, asked_at, changed_at) select campaign_id, horizon, s, 0, '', now(), now() from plan, (values ('queued'), ('running')) x(s)`},
	} {
		_, err := w.Pool().Exec(context.Background(), x.sql)
		var pg *pgconn.PgError
		if !errors.As(err, &pg) || pg.ConstraintName != x.constraint {
			t.Errorf("%s\n is not refused by %s: %v", x.sql, x.constraint, err)
		}
	}
	// What others refer to cannot be deleted; several things do.
	for _, table := range []string{"campaign", "telescope", "receiver", "source", "ephemeris"} {
		_, err := w.Pool().Exec(context.Background(), "delete from "+table)
		var pg *pgconn.PgError
		if !errors.As(err, &pg) || pg.Code != "23503" {
			t.Errorf("deleting every %s: %v", table, err)
		}
	}
	if c, _, err := w.LoadCampaign(t.Context(), w.id); err != nil || !c.Equal(array("Array")) {
		t.Errorf("after all that the campaign is another: %v", err)
	}
}

// Taking a block away leaves the plans that used it readable.
func TestBlockTakenAway(t *testing.T) {
	t.Parallel()
	w := newWorld(t)
	plan := w.issue(scan("a1", 0, 1), scan("b1", 0, 2))
	w.exec("delete from block where code = 'a1'")
	if list := w.want("its plan", plan, "planned live", "planned live"); list[0].Block != "a1" {
		t.Errorf("the scan's block is %q", list[0].Block)
	}
	if _, err := w.SavePlan(t.Context(), w.id, planOf("Array", scan("a1", 0, 1)), store.PlanMeta{}, "ada"); err == nil {
		t.Error("a new plan may use it")
	}
}
