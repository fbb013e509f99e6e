-- The whole schema as it stands after every migration, for reading. The program
-- runs the numbered files; a test checks that this file makes the same database.

create extension if not exists btree_gist;
create schema if not exists river;

-- What a campaign has and wants. Several may be stored; one is live: pages and
-- control scripts serve that one. revision counts every change to anything of
-- the campaign, so that a plan knows what it was made from.
create table campaign (
    id         bigint generated always as identity primary key,
    name       text not null constraint campaign_name_filled check (name <> ''),
    starts_at  timestamptz not null,
    ends_at    timestamptz not null,
    grid_min   smallint not null constraint campaign_grid check (grid_min in (1, 2, 5, 10)),
    dut1_s     double precision not null constraint campaign_dut1 check (dut1_s between -1 and 1),
    live       boolean not null default false,
    revision   bigint not null default 1,
    created_at timestamptz not null,
    constraint campaign_name_unique unique (name),
    constraint campaign_span check (starts_at < ends_at)
);
create unique index campaign_one_live on campaign (live) where live;

create table telescope (
    id                bigint generated always as identity primary key,
    campaign_id       bigint not null references campaign on delete cascade,
    code              text not null constraint telescope_code_filled check (code <> ''),
    name              text not null,
    position          integer not null,
    longitude_deg     double precision not null constraint telescope_longitude check (longitude_deg between -180 and 360),
    latitude_deg      double precision not null constraint telescope_latitude check (latitude_deg between -90 and 90),
    height_m          double precision not null,
    timezone          text not null,
    mount             text not null constraint telescope_mount check (mount in ('altaz', 'equatorial', 'transit')),
    elevation_min_deg double precision not null,
    elevation_max_deg double precision not null,
    horizon           jsonb not null default '[]',
    sun_min_deg       double precision not null,
    setup_s           double precision not null constraint telescope_setup check (setup_s >= 0),
    cal_s             double precision not null constraint telescope_cal check (cal_s >= 0),
    switch_s          double precision not null constraint telescope_switch check (switch_s >= 0),
    settle_s          double precision not null constraint telescope_settle check (settle_s >= 0),
    drives            jsonb not null,
    version           bigint not null default 1,
    constraint telescope_code_unique unique (campaign_id, code),
    constraint telescope_elevation check (elevation_min_deg >= 0 and elevation_min_deg < elevation_max_deg and elevation_max_deg <= 90)
);

create table receiver (
    id            bigint generated always as identity primary key,
    telescope_id  bigint not null references telescope on delete cascade,
    code          text not null constraint receiver_code_filled check (code <> ''),
    position      integer not null,
    bands         text[] not null constraint receiver_bands check (cardinality(bands) > 0),
    freq_mhz      double precision not null constraint receiver_freq check (freq_mhz > 0),
    bandwidth_mhz double precision not null constraint receiver_bandwidth check (bandwidth_mhz > 0),
    npol          smallint not null constraint receiver_npol check (npol in (1, 2)),
    trec_k        double precision not null constraint receiver_trec check (trec_k > 0),
    tatm_k        double precision not null,
    gain_k_per_jy double precision not null constraint receiver_gain check (gain_k_per_jy > 0),
    digitisation  double precision not null constraint receiver_digitisation check (digitisation >= 1),
    rfi_loss      double precision[] not null default '{}'
        constraint receiver_rfi check (cardinality(rfi_loss) in (0, 24)),
    constraint receiver_code_unique unique (telescope_id, code)
);

create table source (
    id            bigint generated always as identity primary key,
    campaign_id   bigint not null references campaign on delete cascade,
    name          text not null constraint source_name_filled check (name <> ''),
    position      integer not null,
    period_s      double precision not null constraint source_period check (period_s > 0),
    dm_pc_cm3     double precision not null constraint source_dm check (dm_pc_cm3 >= 0),
    flux_mjy      double precision not null constraint source_flux check (flux_mjy > 0),
    flux_freq_mhz double precision not null constraint source_flux_freq check (flux_freq_mhz > 0),
    spectral_idx  double precision not null,
    width_s       double precision not null constraint source_width check (width_s > 0),
    scatter_1ghz_s double precision not null,
    jitter_us_1h  double precision not null,
    sun_min_deg   double precision not null,
    scan_minutes  integer[] not null constraint source_scan_minutes check (cardinality(scan_minutes) > 0),
    version       bigint not null default 1,
    constraint source_name_unique unique (campaign_id, name)
);

-- Where a source stands and how it orbits, by version: a new ephemeris is a new
-- row with the instant from which it holds, and old plans keep theirs.
create table ephemeris (
    id            bigint generated always as identity primary key,
    source_id     bigint not null references source on delete cascade,
    number        integer not null,
    valid_from    timestamptz not null,
    ra_deg        double precision not null constraint ephemeris_ra check (ra_deg between 0 and 360),
    dec_deg       double precision not null constraint ephemeris_dec check (dec_deg between -90 and 90),
    pos_epoch_mjd double precision not null,
    pm_ra_mas_yr  double precision not null,
    pm_dec_mas_yr double precision not null,
    binary_model  text constraint ephemeris_model check (binary_model in ('kepler', 'ell1')),
    orbit         jsonb,
    created_at    timestamptz not null,
    constraint ephemeris_number_unique unique (source_id, number),
    constraint ephemeris_orbit check ((binary_model is null) = (orbit is null))
);

create table goal (
    id          bigint generated always as identity primary key,
    campaign_id bigint not null references campaign on delete cascade,
    code        text not null constraint goal_code check (code <> '' and code !~ '[#@]'),
    kind        text not null constraint goal_kind check (kind in ('cadence', 'phase', 'overlap', 'pair')),
    position    integer not null,
    source_id   bigint not null references source on delete cascade,
    bands       text[] not null constraint goal_bands check (cardinality(bands) > 0),
    telescopes  text[] not null default '{}',
    priority    double precision not null constraint goal_priority check (priority > 0),
    every_d     double precision constraint goal_every check (every_d > 0),
    early_d     double precision,
    toa_us      double precision,
    reference   text constraint goal_reference check (reference in ('periastron', 'node', 'conjunction')),
    dwell_min   double precision,
    per_horizon integer,
    windows     jsonb,
    count       integer,
    overlap_min double precision,
    within_h    double precision,
    version     bigint not null default 1,
    constraint goal_code_unique unique (campaign_id, code),
    constraint goal_fields check (
        case kind
            when 'cadence' then every_d is not null and early_d is not null
            when 'phase' then reference is not null and dwell_min is not null and per_horizon is not null and windows is not null
            when 'overlap' then every_d is not null and count is not null and overlap_min is not null
            when 'pair' then every_d is not null and within_h is not null and cardinality(bands) = 2
        end)
);

create table block (
    id           bigint generated always as identity primary key,
    campaign_id  bigint not null references campaign on delete cascade,
    telescope_id bigint not null references telescope on delete cascade,
    code         text not null constraint block_code_filled check (code <> ''),
    position     integer not null,
    span         tstzrange not null constraint block_span check (not isempty(span) and lower_inc(span) and not upper_inc(span)),
    receivers    text[] not null constraint block_receivers check (cardinality(receivers) > 0),
    label        text not null default '',
    version      bigint not null default 1,
    constraint block_code_unique unique (campaign_id, code),
    constraint block_no_overlap exclude using gist (telescope_id with =, span with &&)
);
create index block_by_time on block (campaign_id, lower(span));

create table block_lost (
    id       bigint generated always as identity primary key,
    block_id bigint not null references block on delete cascade,
    span     tstzrange not null constraint block_lost_span check (not isempty(span)),
    cause    text not null default ''
);
create index block_lost_of on block_lost (block_id);

create table pin (
    id          bigint generated always as identity primary key,
    campaign_id bigint not null references campaign on delete cascade,
    block_id    bigint not null references block on delete cascade,
    source_id   bigint not null references source on delete cascade,
    receiver_id bigint not null references receiver on delete cascade,
    starts_at   timestamptz not null,
    minutes     integer not null constraint pin_minutes check (minutes > 0),
    constraint pin_unique unique (block_id, starts_at)
);

-- A plan is a draft until it is issued, and never changes after that; a later
-- one supersedes it from an instant on. version counts the edits of a draft.
create table plan (
    id                bigint generated always as identity primary key,
    campaign_id       bigint not null references campaign on delete cascade,
    horizon           tstzrange not null constraint plan_horizon check (not isempty(horizon)),
    state             text not null constraint plan_state check (state in ('draft', 'issued', 'superseded')),
    revision          integer,
    version           bigint not null default 1,
    campaign_revision bigint not null,
    score             double precision not null,
    possible          double precision not null,
    bound             double precision not null,
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
    constraint plan_revision_unique unique (campaign_id, horizon, revision),
    constraint plan_issue check ((state = 'draft') = (issued_at is null) and (issued_at is null) = (revision is null)),
    constraint plan_superseded check ((state = 'superseded') = (superseded_at is not null)),
    constraint plan_one_issued exclude using gist (campaign_id with =, horizon with &&) where (state = 'issued')
);
create index plan_by_horizon on plan (campaign_id, lower(horizon), id desc);

-- A scan of a plan. live: it belongs to the issued plan, so it is what the
-- telescope does; two of those cannot overlap. Codes and names are kept beside
-- the references so that an old plan reads as it was issued.
create table scan (
    id           bigint generated always as identity primary key,
    plan_id      bigint not null references plan on delete cascade,
    telescope_id bigint not null references telescope,
    block_code   text not null,
    source_name  text not null,
    receiver     text not null,
    span         tstzrange not null constraint scan_span check (not isempty(span) and lower_inc(span) and not upper_inc(span)),
    minutes      integer not null constraint scan_minutes check (minutes > 0),
    motor_az_deg double precision,
    pinned       boolean not null,
    toa_us       double precision not null,
    earns        jsonb not null default '[]',
    live         boolean not null default false,
    state        text not null default 'planned'
        constraint scan_state check (state in ('planned', 'observing', 'done', 'partial', 'lost', 'dropped')),
    version      bigint not null default 1,
    constraint scan_no_overlap exclude using gist (telescope_id with =, span with &&) where (live and state <> 'dropped')
);
create index scan_of_plan on scan (plan_id);
create index scan_live_by_time on scan (telescope_id, lower(span)) where live;

-- What was reported of a scan, every report an event; the last one counts.
create table outcome (
    id          bigint generated always as identity primary key,
    scan_id     bigint not null references scan on delete cascade,
    state       text not null constraint outcome_state check (state in ('observing', 'done', 'partial', 'lost')),
    cause       text not null default '',
    started_at  timestamptz,
    ended_at    timestamptz,
    snr         double precision constraint outcome_snr check (snr > 0),
    toa_us      double precision constraint outcome_toa check (toa_us > 0),
    note        text not null default '',
    reported_by text not null,
    reported_at timestamptz not null,
    constraint outcome_span check (started_at is null or ended_at is null or started_at < ended_at),
    constraint outcome_cause check (state <> 'lost' or cause <> '')
);
create index outcome_of_scan on outcome (scan_id, id desc);

-- Scans that were made: brought in from a file, or from a reported outcome.
create table history (
    id           bigint generated always as identity primary key,
    campaign_id  bigint not null references campaign on delete cascade,
    source_id    bigint not null references source on delete cascade,
    telescope_id bigint not null references telescope on delete cascade,
    receiver_id  bigint not null references receiver on delete cascade,
    starts_at    timestamptz not null,
    minutes      double precision not null constraint history_minutes check (minutes > 0),
    counted      boolean not null,
    scan_id      bigint references scan on delete set null,
    constraint history_scan_unique unique (scan_id)
);
create index history_by_time on history (campaign_id, starts_at);
create index history_of_source on history (source_id, starts_at);

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

-- Failed attempts to sign in, to slow down guessing.
create table sign_in_failure (
    id      bigint generated always as identity primary key,
    subject text not null,
    at      timestamptz not null
);
create index sign_in_failure_of on sign_in_failure (subject, at);

-- Every change: who, when, what, before and after.
create table journal (
    id          bigint generated always as identity primary key,
    campaign_id bigint references campaign on delete set null,
    at          timestamptz not null,
    actor       text not null,
    action      text not null,
    subject     text not null,
    before      jsonb,
    after       jsonb
);
create index journal_of_campaign on journal (campaign_id, id desc);

-- The answer to a request that carried an Idempotency-Key, kept so that the
-- same request again gets the same answer.
create table idempotency (
    actor        text not null,
    key          text not null,
    request_hash bytea not null,
    status       integer not null,
    answer       jsonb not null,
    at           timestamptz not null,
    primary key (actor, key)
);

-- A planning job as people see it; the queue's own rows are in schema river.
create table plan_job (
    id          bigint generated always as identity primary key,
    campaign_id bigint not null references campaign on delete cascade,
    horizon     tstzrange not null,
    state       text not null constraint plan_job_state check (state in ('queued', 'running', 'done', 'failed', 'cancelled')),
    effort      bigint not null default 0,
    effort_of   bigint not null default 0,
    score       double precision not null default 0,
    bound       double precision,
    seed        bigint not null,
    plan_id     bigint references plan on delete set null,
    problem     text not null default '',
    stop_wanted boolean not null default false,
    asked_by    text not null,
    asked_at    timestamptz not null,
    changed_at  timestamptz not null
);
create unique index plan_job_one_active on plan_job (campaign_id, horizon) where state in ('queued', 'running');
