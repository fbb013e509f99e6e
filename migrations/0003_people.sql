-- +goose Up

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

-- +goose Down
drop table plan_job, idempotency, journal, sign_in_failure, api_key, sign_in_link, session, person;
