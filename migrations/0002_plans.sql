-- +goose Up

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

-- +goose Down
drop table history, outcome, scan, plan;
