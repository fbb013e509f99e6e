-- The whole schema as it stands after every migration, for reading. The program
-- runs the numbered files; a test checks that this file makes the same database.

create extension if not exists btree_gist;
create schema if not exists river;

-- A number that is one: neither NaN nor infinite.
create domain finite as double precision constraint finite check (value > '-infinity' and value < 'infinity');

-- What a campaign has and wants. Several may be stored; one is live: pages and
-- control scripts serve that one. revision counts every change to anything of
-- the campaign, so that a plan knows what it was made from.
--
-- In all tables: version counts the changes of a row that people edit, so that
-- two of them cannot overwrite each other unawares; instants are UTC; units
-- stand in the names. References carry the campaign along, so that nothing can
-- refer to a thing of another campaign. Only parts go with their whole when it
-- is deleted; a thing that others refer to cannot be deleted.
create table campaign (
    id         bigint generated always as identity primary key,
    name       text not null constraint campaign_name_filled check (name <> ''),
    starts_at  timestamptz not null,
    ends_at    timestamptz not null,
    grid_min   smallint not null constraint campaign_grid check (grid_min in (1, 2, 5, 10)),
    dut1_s     finite not null constraint campaign_dut1 check (dut1_s between -1 and 1),
    live       boolean not null default false,
    revision   bigint not null default 1,
    created_at timestamptz not null,
    constraint campaign_name_unique unique (name),
    constraint campaign_span check (starts_at < ends_at)
);
create unique index campaign_one_live on campaign (live) where live;

-- A site, a mount with its limits and drives. The drives' columns are null
-- where the mount has no such axis; an acceleration of 0 means that the axis
-- has its rate at once. horizon is [[azimuth_deg, elevation_deg], ...].
create table telescope (
    id                bigint generated always as identity primary key,
    campaign_id       bigint not null references campaign,
    code              text not null constraint telescope_code_filled check (code <> ''),
    name              text not null,
    longitude_deg     finite not null constraint telescope_longitude check (longitude_deg between -180 and 360),
    latitude_deg      finite not null constraint telescope_latitude check (latitude_deg between -90 and 90),
    height_m          finite not null,
    timezone          text not null,
    mount             text not null constraint telescope_mount check (mount in ('altaz', 'equatorial', 'transit')),
    elevation_min_deg finite not null,
    elevation_max_deg finite not null,
    horizon           jsonb not null default '[]' constraint telescope_horizon check (jsonb_typeof(horizon) = 'array'),
    sun_min_deg       finite not null constraint telescope_sun check (sun_min_deg between 0 and 180),
    setup_s           finite not null constraint telescope_setup check (setup_s >= 0),
    cal_s             finite not null constraint telescope_cal check (cal_s >= 0),
    switch_s          finite not null constraint telescope_switch check (switch_s >= 0),
    settle_s          finite not null constraint telescope_settle check (settle_s >= 0),
    azimuth_lo_deg    finite,
    azimuth_hi_deg    finite,
    rate_az_deg_s     finite constraint telescope_rate_az check (rate_az_deg_s > 0),
    accel_az_deg_s2   finite constraint telescope_accel_az check (accel_az_deg_s2 >= 0),
    rate_el_deg_s     finite constraint telescope_rate_el check (rate_el_deg_s > 0),
    accel_el_deg_s2   finite constraint telescope_accel_el check (accel_el_deg_s2 >= 0),
    hour_angle_lo_h   finite,
    hour_angle_hi_h   finite,
    rate_ha_deg_s     finite constraint telescope_rate_ha check (rate_ha_deg_s > 0),
    accel_ha_deg_s2   finite constraint telescope_accel_ha check (accel_ha_deg_s2 >= 0),
    rate_dec_deg_s    finite constraint telescope_rate_dec check (rate_dec_deg_s > 0),
    accel_dec_deg_s2  finite constraint telescope_accel_dec check (accel_dec_deg_s2 >= 0),
    track_half_min    finite constraint telescope_track check (track_half_min > 0),
    version           bigint not null default 1,
    constraint telescope_code_unique unique (campaign_id, code),
    constraint telescope_of_campaign unique (campaign_id, id),
    constraint telescope_elevation check (elevation_min_deg >= 0 and elevation_min_deg < elevation_max_deg and elevation_max_deg <= 90),
    constraint telescope_azimuth check (azimuth_lo_deg < azimuth_hi_deg),
    constraint telescope_hour_angle check (hour_angle_lo_h < hour_angle_hi_h),
    constraint telescope_axes check (
        num_nonnulls(azimuth_lo_deg, azimuth_hi_deg, rate_az_deg_s, accel_az_deg_s2) = case mount when 'altaz' then 4 else 0 end
        and num_nonnulls(rate_el_deg_s, accel_el_deg_s2) = case mount when 'equatorial' then 0 else 2 end
        and num_nonnulls(hour_angle_lo_h, hour_angle_hi_h, rate_ha_deg_s, accel_ha_deg_s2, rate_dec_deg_s, accel_dec_deg_s2)
            = case mount when 'equatorial' then 6 else 0 end
        and num_nonnulls(track_half_min) = case mount when 'transit' then 1 else 0 end)
);

-- A front end of a telescope; its version is the telescope's. rfi_loss is empty
-- or the part of the band lost in each local hour.
create table receiver (
    id            bigint generated always as identity primary key,
    telescope_id  bigint not null references telescope on delete cascade,
    code          text not null constraint receiver_code_filled check (code <> ''),
    bands         text[] not null constraint receiver_bands check (cardinality(bands) > 0),
    freq_mhz      finite not null constraint receiver_freq check (freq_mhz > 0),
    bandwidth_mhz finite not null constraint receiver_bandwidth check (bandwidth_mhz > 0),
    npol          smallint not null constraint receiver_npol check (npol in (1, 2)),
    trec_k        finite not null constraint receiver_trec check (trec_k > 0),
    tatm_k        finite not null constraint receiver_tatm check (tatm_k >= 0),
    gain_k_per_jy finite not null constraint receiver_gain check (gain_k_per_jy > 0),
    digitisation  finite not null constraint receiver_digitisation check (digitisation >= 1),
    rfi_loss      double precision[] not null default '{}'
        constraint receiver_rfi check (cardinality(rfi_loss) in (0, 24) and 0 <= all (rfi_loss) and 1 > all (rfi_loss)),
    constraint receiver_code_unique unique (telescope_id, code),
    constraint receiver_of_telescope unique (telescope_id, id)
);

-- A pulsar.
create table source (
    id             bigint generated always as identity primary key,
    campaign_id    bigint not null references campaign,
    name           text not null constraint source_name_filled check (name <> ''),
    period_s       finite not null constraint source_period check (period_s > 0),
    dm_pc_cm3      finite not null constraint source_dm check (dm_pc_cm3 >= 0),
    flux_mjy       finite not null constraint source_flux check (flux_mjy > 0),
    flux_freq_mhz  finite not null constraint source_flux_freq check (flux_freq_mhz > 0),
    spectral_index finite not null,
    width_s        finite not null constraint source_width check (width_s > 0),
    scatter_1ghz_s finite not null constraint source_scatter check (scatter_1ghz_s >= 0),
    jitter_us_1h   finite not null constraint source_jitter check (jitter_us_1h >= 0),
    sun_min_deg    finite not null constraint source_sun check (sun_min_deg between 0 and 180),
    scan_minutes   integer[] not null constraint source_scan_minutes check (cardinality(scan_minutes) > 0 and 0 < all (scan_minutes)),
    version        bigint not null default 1,
    constraint source_name_unique unique (campaign_id, name),
    constraint source_of_campaign unique (campaign_id, id)
);

-- Where a source stands and how it orbits, by version: a new ephemeris is a new
-- row, in force from that revision of the campaign on, and a plan keeps the one
-- that it was made with. valid_from and valid_to say for which dates the
-- solution holds, where its maker says so. Epochs are TDB at the barycentre; of
-- the orbit, m2_msun and sini are null where unknown.
create table ephemeris (
    id            bigint generated always as identity primary key,
    source_id     bigint not null references source on delete cascade,
    number        integer not null constraint ephemeris_number check (number > 0),
    revision      bigint not null,
    valid_from    timestamptz,
    valid_to      timestamptz,
    ra_deg        finite not null constraint ephemeris_ra check (ra_deg between 0 and 360),
    dec_deg       finite not null constraint ephemeris_dec check (dec_deg between -90 and 90),
    pos_epoch_mjd finite not null,
    pm_ra_mas_yr  finite not null,
    pm_dec_mas_yr finite not null,
    binary_model  text constraint ephemeris_model check (binary_model in ('kepler', 'ell1')),
    pb_d          finite constraint ephemeris_pb check (pb_d > 0),
    a1_ls         finite constraint ephemeris_a1 check (a1_ls >= 0),
    pbdot         finite,
    ecc           finite constraint ephemeris_ecc check (ecc >= 0 and ecc < 1),
    om_deg        finite,
    t0_mjd        finite,
    omdot_deg_yr  finite,
    tasc_mjd      finite,
    eps1          finite,
    eps2          finite,
    m2_msun       finite constraint ephemeris_m2 check (m2_msun > 0),
    sini          finite constraint ephemeris_sini check (sini > 0 and sini <= 1),
    created_at    timestamptz not null,
    created_by    text not null,
    constraint ephemeris_number_unique unique (source_id, number),
    constraint ephemeris_of_source unique (source_id, id),
    constraint ephemeris_validity check (valid_from < valid_to),
    constraint ephemeris_orbit check (
        num_nonnulls(pb_d, a1_ls, pbdot) = case when binary_model is null then 0 else 3 end
        and num_nonnulls(ecc, om_deg, t0_mjd, omdot_deg_yr) = case binary_model when 'kepler' then 4 else 0 end
        and num_nonnulls(tasc_mjd, eps1, eps2) = case binary_model when 'ell1' then 3 else 0 end
        and (binary_model is not null or num_nonnulls(m2_msun, sini) = 0))
);

-- What is wanted of a source. Every kind has its own columns; those of the
-- other kinds are null. Without rows in goal_telescope all telescopes serve.
create table goal (
    id          bigint generated always as identity primary key,
    campaign_id bigint not null references campaign,
    code        text not null constraint goal_code check (code <> '' and code !~ '[#@]'),
    kind        text not null constraint goal_kind check (kind in ('cadence', 'phase', 'overlap', 'pair')),
    source_id   bigint not null,
    bands       text[] not null constraint goal_bands check (cardinality(bands) > 0),
    priority    finite not null constraint goal_priority check (priority > 0),
    every_d     finite constraint goal_every check (every_d > 0),
    early_d     finite constraint goal_early check (early_d between 0 and every_d / 2),
    toa_us      finite constraint goal_toa check (toa_us > 0),
    reference   text constraint goal_reference check (reference in ('periastron', 'node', 'conjunction')),
    dwell_min   finite constraint goal_dwell check (dwell_min > 0),
    per_horizon integer constraint goal_per_horizon check (per_horizon > 0),
    count       integer constraint goal_count check (count >= 2),
    overlap_min finite constraint goal_overlap check (overlap_min > 0),
    within_h    finite constraint goal_within check (within_h between 0 and every_d * 12),
    version     bigint not null default 1,
    constraint goal_code_unique unique (campaign_id, code),
    constraint goal_of_campaign unique (campaign_id, id),
    constraint goal_source foreign key (campaign_id, source_id) references source (campaign_id, id),
    constraint goal_fields check (
        (every_d is null) = (kind = 'phase')
        and (early_d is not null) = (kind = 'cadence')
        and (toa_us is null or kind = 'cadence')
        and num_nonnulls(reference, dwell_min, per_horizon) = case kind when 'phase' then 3 else 0 end
        and num_nonnulls(count, overlap_min) = case kind when 'overlap' then 2 else 0 end
        and (within_h is not null) = (kind = 'pair')
        and (kind <> 'pair' or cardinality(bands) = 2))
);
create index goal_of_source on goal (source_id);

create table goal_telescope (
    goal_id      bigint not null,
    number       smallint not null,
    campaign_id  bigint not null,
    telescope_id bigint not null,
    primary key (goal_id, number),
    constraint goal_telescope_goal foreign key (campaign_id, goal_id) references goal (campaign_id, id) on delete cascade,
    constraint goal_telescope_telescope foreign key (campaign_id, telescope_id) references telescope (campaign_id, id)
);

-- The windows of a phase goal, numbered from 0 as in the names of their units;
-- cycles of the orbit from the goal's reference.
create table phase_window (
    goal_id    bigint not null references goal on delete cascade,
    number     smallint not null,
    from_cycle finite not null constraint phase_window_from check (from_cycle >= 0 and from_cycle < 1),
    to_cycle   finite not null,
    need       integer not null constraint phase_window_need check (need > 0),
    primary key (goal_id, number),
    constraint phase_window_span check (from_cycle < to_cycle and to_cycle <= from_cycle + 1)
);

-- Awarded time at a telescope. Two blocks of one telescope never overlap.
create table block (
    id           bigint generated always as identity primary key,
    campaign_id  bigint not null references campaign,
    telescope_id bigint not null,
    code         text not null constraint block_code_filled check (code <> ''),
    span         tstzrange not null constraint block_span check (not isempty(span) and lower_inc(span) and not upper_inc(span)
        and lower(span) is not null and upper(span) is not null),
    label        text not null default '',
    version      bigint not null default 1,
    constraint block_code_unique unique (campaign_id, code),
    constraint block_of_telescope unique (telescope_id, id),
    constraint block_telescope foreign key (campaign_id, telescope_id) references telescope (campaign_id, id),
    constraint block_no_overlap exclude using gist (telescope_id with =, span with &&)
);
create index block_by_time on block (campaign_id, lower(span));

-- The receivers that a block may use, all of them its telescope's.
create table block_receiver (
    block_id     bigint not null,
    number       smallint not null,
    telescope_id bigint not null,
    receiver_id  bigint not null,
    primary key (block_id, number),
    constraint block_receiver_block foreign key (telescope_id, block_id) references block (telescope_id, id) on delete cascade,
    constraint block_receiver_receiver foreign key (telescope_id, receiver_id) references receiver (telescope_id, id)
);

-- Parts of a block that cannot be used.
create table block_lost (
    id       bigint generated always as identity primary key,
    block_id bigint not null references block on delete cascade,
    span     tstzrange not null constraint block_lost_span check (not isempty(span) and lower(span) is not null and upper(span) is not null),
    cause    text not null default ''
);
create index block_lost_of on block_lost (block_id);

-- Scans that must stand in every plan as they are.
create table pin (
    id           bigint generated always as identity primary key,
    campaign_id  bigint not null,
    telescope_id bigint not null,
    block_id     bigint not null,
    source_id    bigint not null,
    receiver_id  bigint not null,
    starts_at    timestamptz not null,
    minutes      integer not null constraint pin_minutes check (minutes > 0),
    version      bigint not null default 1,
    constraint pin_telescope foreign key (campaign_id, telescope_id) references telescope (campaign_id, id),
    constraint pin_block foreign key (telescope_id, block_id) references block (telescope_id, id) on delete cascade,
    constraint pin_source foreign key (campaign_id, source_id) references source (campaign_id, id),
    constraint pin_receiver foreign key (telescope_id, receiver_id) references receiver (telescope_id, id)
);
create index pin_of_block on pin (block_id);

-- A plan is a draft until it is issued, and never changes after that; a later
-- one of the same stretch of time supersedes it from an instant on. revision
-- counts the issued plans of a horizon from 1. version counts what changes a
-- draft, the issue of another plan that it would now supersede included.
--
-- What a plan says beside its scans is one document, written and read whole:
-- prices {unit: price}, unmet [{goal, unit, weight, reasons: [{code, text, count}]}].
create table plan (
    id                bigint generated always as identity primary key,
    campaign_id       bigint not null references campaign,
    horizon           tstzrange not null constraint plan_horizon check (not isempty(horizon) and lower_inc(horizon) and not upper_inc(horizon)
        and lower(horizon) is not null and upper(horizon) is not null),
    state             text not null constraint plan_state check (state in ('draft', 'issued', 'superseded')),
    revision          integer,
    version           bigint not null default 1,
    campaign_revision bigint not null,
    score             finite not null,
    possible          finite not null,
    bound             finite not null,
    prices            jsonb not null default '{}',
    unmet             jsonb not null default '[]',
    seed              bigint not null default 0,
    effort            bigint not null default 0,
    status            text not null default '',
    made_at           timestamptz not null,
    made_by           text not null,
    issued_at         timestamptz,
    issued_by         text,
    superseded_at     timestamptz,
    superseded_by     bigint references plan,
    constraint plan_of_campaign unique (campaign_id, id),
    constraint plan_revision_unique unique (campaign_id, horizon, revision),
    constraint plan_issue check ((state = 'draft') = (issued_at is null)
        and (issued_at is null) = (revision is null) and (issued_at is null) = (issued_by is null)),
    constraint plan_superseded check ((state = 'superseded') = (superseded_at is not null)
        and (superseded_at is null) = (superseded_by is null)),
    constraint plan_one_issued exclude using gist (campaign_id with =, horizon with &&) where (state = 'issued')
);
create index plan_by_horizon on plan (campaign_id, horizon, id desc);

-- A scan of a plan. live: it is what the telescope does, or did; of those that
-- are still to end, no two of one telescope overlap. The names are kept beside
-- the references so that an old plan reads as it was issued, and ephemeris_id
-- is the one it was made with. Where a later plan holds the same scan, that one
-- is live in its stead: carried_to points to it, and state and outcome are read
-- and reported there. earns is [{goal, unit, value}].
create table scan (
    id           bigint generated always as identity primary key,
    campaign_id  bigint not null,
    plan_id      bigint not null,
    telescope_id bigint not null,
    block_id     bigint references block on delete set null,
    source_id    bigint not null,
    receiver_id  bigint not null,
    ephemeris_id bigint not null,
    block_code   text not null,
    source_name  text not null,
    receiver     text not null,
    span         tstzrange not null constraint scan_span check (not isempty(span) and lower_inc(span) and not upper_inc(span)),
    minutes      integer not null constraint scan_minutes check (minutes > 0 and upper(span) - lower(span) = minutes * interval '1 minute'),
    motor_az_deg finite,
    pinned       boolean not null,
    toa_us       finite not null constraint scan_toa check (toa_us >= 0),
    earns        jsonb not null default '[]',
    live         boolean not null default false,
    state        text not null default 'planned'
        constraint scan_state check (state in ('planned', 'observing', 'done', 'partial', 'lost', 'dropped')),
    carried_to   bigint references scan,
    version      bigint not null default 1,
    constraint scan_plan foreign key (campaign_id, plan_id) references plan (campaign_id, id) on delete cascade,
    constraint scan_telescope foreign key (campaign_id, telescope_id) references telescope (campaign_id, id),
    constraint scan_source foreign key (campaign_id, source_id) references source (campaign_id, id),
    constraint scan_receiver foreign key (telescope_id, receiver_id) references receiver (telescope_id, id),
    constraint scan_ephemeris foreign key (source_id, ephemeris_id) references ephemeris (source_id, id),
    constraint scan_live check (not live or (state <> 'dropped' and carried_to is null)),
    constraint scan_no_overlap exclude using gist (telescope_id with =, span with &&) where (live and state in ('planned', 'observing'))
);
create index scan_of_plan on scan (plan_id);
create index scan_of_block on scan (block_id);
create index scan_carried on scan (carried_to) where carried_to is not null;
create index scan_live_by_time on scan (telescope_id, lower(span)) where live;
-- What control scripts ask for all the time: the scan under way and the next.
create index scan_to_do on scan (telescope_id, lower(span)) where live and state in ('planned', 'observing');

-- What was reported of a scan, every report an event; the last one counts.
create table outcome (
    id          bigint generated always as identity primary key,
    scan_id     bigint not null references scan on delete cascade,
    state       text not null constraint outcome_state check (state in ('observing', 'done', 'partial', 'lost')),
    cause       text not null default '',
    started_at  timestamptz,
    ended_at    timestamptz,
    snr         finite constraint outcome_snr check (snr > 0),
    toa_us      finite constraint outcome_toa check (toa_us > 0),
    note        text not null default '',
    reported_by text not null,
    reported_at timestamptz not null,
    constraint outcome_span check (started_at < ended_at),
    constraint outcome_cause check (state <> 'lost' or cause <> '')
);
create index outcome_of_scan on outcome (scan_id, id desc);

-- Scans that were made: brought in from a file, or from the report of a scan.
-- They are what a campaign has got for its time, so nothing that they refer to
-- can be deleted.
create table history (
    id           bigint generated always as identity primary key,
    campaign_id  bigint not null references campaign,
    source_id    bigint not null,
    telescope_id bigint not null,
    receiver_id  bigint not null,
    starts_at    timestamptz not null,
    minutes      finite not null constraint history_minutes check (minutes > 0),
    counted      boolean not null,
    scan_id      bigint references scan,
    constraint history_scan_unique unique (scan_id),
    constraint history_source foreign key (campaign_id, source_id) references source (campaign_id, id),
    constraint history_telescope foreign key (campaign_id, telescope_id) references telescope (campaign_id, id),
    constraint history_receiver foreign key (telescope_id, receiver_id) references receiver (telescope_id, id)
);
create index history_by_time on history (campaign_id, starts_at);
create index history_of_source on history (source_id, starts_at);

-- Somebody who can sign in: by password, or without one by link only.
-- telescopes are those that an observer may report for; empty: none.
create table person (
    id            bigint generated always as identity primary key,
    name          text not null constraint person_name_filled check (name <> ''),
    role          text not null constraint person_role check (role in ('coordinator', 'observer', 'reader')),
    telescopes    text[] not null default '{}',
    password_hash text,
    disabled      boolean not null default false,
    version       bigint not null default 1,
    created_at    timestamptz not null
);
create unique index person_name_unique on person (lower(name));

-- Tokens are random; only their SHA-256 is kept.
create table session (
    token_hash bytea primary key,
    person_id  bigint not null references person on delete cascade,
    created_at timestamptz not null,
    seen_at    timestamptz not null,
    expires_at timestamptz not null
);
create index session_of_person on session (person_id);

create table sign_in_link (
    token_hash bytea primary key,
    person_id  bigint not null references person on delete cascade,
    expires_at timestamptz not null,
    used_at    timestamptz
);
create index sign_in_link_of_person on sign_in_link (person_id);

-- A key of a control script. telescope is a code, not a reference: the key
-- outlives a change of the live campaign.
create table api_key (
    id           bigint generated always as identity primary key,
    name         text not null constraint api_key_name_filled check (name <> ''),
    token_hash   bytea not null unique,
    telescope    text not null,
    created_at   timestamptz not null,
    created_by   text not null,
    last_used_at timestamptz,
    revoked_at   timestamptz
);
create unique index api_key_name_unique on api_key (lower(name)) where revoked_at is null;

-- Failed attempts to sign in, to slow down guessing; subject is a name or an
-- address.
create table sign_in_failure (
    id      bigint generated always as identity primary key,
    subject text not null,
    at      timestamptz not null
);
create index sign_in_failure_of on sign_in_failure (subject, at);

-- Every change: who, when, what, before and after; written in the transaction
-- of the change. What concerns people and keys belongs to no campaign.
create table journal (
    id          bigint generated always as identity primary key,
    campaign_id bigint references campaign,
    at          timestamptz not null,
    actor       text not null,
    action      text not null,
    subject     text not null,
    before      jsonb,
    after       jsonb
);
create index journal_of_campaign on journal (campaign_id, id desc);

-- The answer to a request that carried an Idempotency-Key, kept for some days so
-- that the same request again gets the same answer. request_hash tells another
-- request under the same key.
create table idempotency (
    actor        text not null,
    key          text not null,
    request_hash bytea not null,
    answer       jsonb not null,
    at           timestamptz not null,
    primary key (actor, key)
);
create index idempotency_by_time on idempotency (at);

-- A planning job as people see it, with its progress and the best score and
-- bound so far; the queue's own rows are in schema river. A horizon has at most
-- one job under way.
create table plan_job (
    id          bigint generated always as identity primary key,
    campaign_id bigint not null references campaign,
    horizon     tstzrange not null constraint plan_job_horizon check (not isempty(horizon)),
    state       text not null constraint plan_job_state check (state in ('queued', 'running', 'done', 'failed', 'cancelled')),
    effort      bigint not null default 0,
    effort_of   bigint not null default 0,
    score       finite not null default 0,
    bound       finite,
    seed        bigint not null,
    plan_id     bigint references plan on delete set null,
    problem     text not null default '',
    stop_wanted boolean not null default false,
    asked_by    text not null,
    asked_at    timestamptz not null,
    changed_at  timestamptz not null
);
create unique index plan_job_one_active on plan_job (campaign_id, horizon) where state in ('queued', 'running');
create index plan_job_by_horizon on plan_job (campaign_id, horizon, id desc);
