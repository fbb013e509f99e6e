-- +goose Up

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

-- +goose Down
drop table history, outcome, scan, plan;
