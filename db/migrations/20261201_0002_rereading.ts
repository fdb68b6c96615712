import { type Kysely, sql } from 'kysely'

/**
 * Recordings may be read again: the earlier reading stays beside the new one. Figures that the maker measured better,
 * calibrations, and both heads read together. `any`: a migration must not depend on the table types of a later day.
 */
export async function up(db: Kysely<any>): Promise<void> {
  await sql`
    alter table instruments add column diameter_u95_mm double precision check (diameter_u95_mm > 0);
    alter table heads
      add column areal_density_u95_kg_m2 double precision check (areal_density_u95_kg_m2 > 0),
      add column weighing jsonb,
      -- When a figure that readings rest on was last changed; film_since is when this film was mounted.
      add column figures_since timestamptz not null default now();
    update heads set figures_since = film_since;

    -- The figures of films that were on a head before, so that their recordings can be read again with them.
    create table earlier_films (
      id uuid primary key default gen_random_uuid(),
      head_id uuid not null references heads on delete cascade,
      mounted_at timestamptz not null,
      removed_at timestamptz not null,
      figures jsonb not null
    );
    create index earlier_films_head on earlier_films (head_id, mounted_at);

    create table calibrations (
      id uuid primary key default gen_random_uuid(),
      head_id uuid not null references heads on delete cascade,
      kind text not null check (kind in ('known', 'reading')),
      known_n_per_m double precision not null check (known_n_per_m > 0),
      known_u95_n_per_m double precision not null check (known_u95_n_per_m > 0),
      source_reading_id uuid not null references readings on delete cascade,
      reference_reading_id uuid references readings on delete set null,
      found jsonb not null,
      note text,
      created_by uuid references users,
      created_at timestamptz not null default now(),
      removed_by uuid references users,
      removed_at timestamptz,
      removed_because text
    );
    create unique index calibrations_one on calibrations (head_id) where removed_at is null;
    create index calibrations_source on calibrations (source_reading_id);
    create index calibrations_reference on calibrations (reference_reading_id);

    alter table recordings
      -- Version of the last analysis and when its figures were taken; null: from before versions were kept.
      add column analysis_version text,
      add column analysed_at timestamptz not null default now(),
      -- { version, code, message } where a later version could not read what an earlier one had read.
      add column reread_refusal jsonb;
    alter table readings
      -- Null for the newest reading of a recording; the others stay as they were.
      add column superseded_at timestamptz,
      add column calibration_id uuid references calibrations on delete set null;
    create index readings_recording on readings (recording_id, created_at);
    create index readings_calibration on readings (calibration_id) where calibration_id is not null;
    create index recordings_by_time on recordings (recorded_at, id);

    update recordings set analysis_version = r.analysis_version, analysed_at = r.created_at
      from (select distinct on (recording_id) recording_id, analysis_version, created_at from readings order by recording_id, created_at desc) r
      where r.recording_id = recordings.id;
    update recordings set analysed_at = created_at where analysis_version is null;

    -- The history table shows newest readings only, so it walks indexes of those only.
    drop index readings_taken, readings_instrument, readings_tension, readings_fundamental, readings_evenness_up, readings_evenness_down, readings_taken_by, readings_doubtful;
    create index readings_taken on readings (taken_at, id) where superseded_at is null;
    create index readings_instrument on readings (instrument_id, taken_at, id) include (tension_n_per_m, fundamental_hz) where superseded_at is null;
    create index readings_tension on readings (tension_n_per_m, id) where superseded_at is null;
    create index readings_fundamental on readings (fundamental_hz, id) where superseded_at is null;
    create index readings_evenness_up on readings ((coalesce(evenness_percent, 'infinity')), id) where superseded_at is null;
    create index readings_evenness_down on readings ((coalesce(evenness_percent, '-infinity')), id) where superseded_at is null;
    create index readings_taken_by on readings (taken_by, taken_at, id) where superseded_at is null;
    create index readings_doubtful on readings (taken_at, id) where doubtful and superseded_at is null;

    create table rereading_runs (
      id uuid primary key default gen_random_uuid(),
      version text not null,
      total int not null,
      read int not null default 0,
      refused int not null default 0,
      failed int not null default 0,
      -- Where the walk, newest recordings first, has come to.
      at_recorded timestamptz,
      at_id uuid,
      started_by uuid references users,
      started_at timestamptz not null default now(),
      cancelled_by uuid references users,
      cancelled_at timestamptz,
      finished_at timestamptz
    );
    create unique index rereading_runs_one on rereading_runs ((true)) where finished_at is null and cancelled_at is null;

    create table joint_readings (
      id uuid primary key default gen_random_uuid(),
      instrument_id uuid not null references instruments on delete cascade,
      batter_recording_id uuid not null references recordings on delete cascade,
      resonant_recording_id uuid not null references recordings on delete cascade,
      detail jsonb not null,
      analysis_version text not null,
      created_by uuid references users,
      created_at timestamptz not null default now()
    );
    create index joint_readings_instrument on joint_readings (instrument_id, created_at desc);
    create index joint_readings_batter on joint_readings (batter_recording_id);
    create index joint_readings_resonant on joint_readings (resonant_recording_id);
  `.execute(db)
}
