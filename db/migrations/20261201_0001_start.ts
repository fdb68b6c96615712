import { type Kysely, sql } from 'kysely'

/** `any`: a migration must not depend on the table types of a later day. The first tables: people, instruments, readings, orders. */
export async function up(db: Kysely<any>): Promise<void> {
  await sql`create extension if not exists pg_trgm`.execute(db)
  await sql`
    create table users (
      id uuid primary key default gen_random_uuid(),
      email text not null unique check (email = lower(email)),
      name text not null,
      role text not null check (role in ('owner', 'maker', 'staff', 'customer')),
      password_hash text,
      email_confirmed_at timestamptz,
      deactivated_at timestamptz,
      created_at timestamptz not null default now()
    );
    create table sessions (
      id uuid primary key default gen_random_uuid(),
      user_id uuid not null references users on delete cascade,
      user_agent text,
      created_at timestamptz not null default now(),
      last_seen_at timestamptz not null default now(),
      revoked_at timestamptz
    );
    create index sessions_live on sessions (user_id) where revoked_at is null;
    create table user_tokens (
      id uuid primary key default gen_random_uuid(),
      user_id uuid not null references users on delete cascade,
      kind text not null check (kind in ('confirm-email', 'reset-password', 'invitation')),
      token_hash text not null unique,
      expires_at timestamptz not null,
      used_at timestamptz,
      created_at timestamptz not null default now()
    );
    create table audit_events (
      id bigint generated always as identity primary key,
      at timestamptz not null default now(),
      actor_id uuid references users,
      action text not null,
      subject_type text not null,
      subject_id text,
      detail jsonb not null default '{}'
    );
    create table settings (key text primary key, value jsonb not null);

    create table films (
      id text primary key,
      name text not null,
      material text not null check (material in ('pet', 'skin', 'woven', 'other')),
      plies int not null check (plies between 1 and 4),
      thickness_um double precision not null check (thickness_um > 0),
      density_kg_m3 double precision not null check (density_kg_m3 > 0),
      modulus_gpa double precision not null check (modulus_gpa > 0),
      poisson double precision not null check (poisson >= 0 and poisson < 0.5),
      yield_mpa double precision not null check (yield_mpa > 0),
      areal_density_kg_m2 double precision not null check (areal_density_kg_m2 > 0),
      coating text,
      position int not null default 0,
      active boolean not null default true
    );

    create sequence instrument_number start 101;
    create table instruments (
      id uuid primary key default gen_random_uuid(),
      code text not null unique default 'TA-' || lpad(nextval('instrument_number')::text, 4, '0'),
      name text not null,
      construction text not null check (construction in ('open', 'frame', 'double-headed', 'kettle', 'fixture')),
      diameter_mm double precision not null check (diameter_mm > 0),
      depth_mm double precision not null check (depth_mm >= 0),
      bowl_volume_l double precision check (bowl_volume_l > 0),
      rod_count int not null check (rod_count between 1 and 24),
      thread_pitch_mm double precision not null check (thread_pitch_mm > 0),
      hoop text,
      note text,
      customer_id uuid references users,
      -- The customer's name, kept by the triggers below: sorting and searching a million readings by owner must not join for it.
      owner_name text not null default '',
      created_by uuid references users,
      created_at timestamptz not null default now(),
      updated_at timestamptz not null default now()
    );
    create index instruments_customer on instruments (customer_id);
    create index instruments_owner on instruments (owner_name, code);
    create index instruments_search on instruments using gin ((code || ' ' || name) gin_trgm_ops);
    create index instruments_search_with_owner on instruments using gin ((code || ' ' || name || ' ' || owner_name) gin_trgm_ops);
    create function set_owner_name() returns trigger language plpgsql as $$
    begin
      new.owner_name := coalesce((select name from users where id = new.customer_id), '');
      return new;
    end $$;
    create trigger instruments_owner_name before insert or update of customer_id, owner_name on instruments
      for each row execute function set_owner_name();
    create function pass_on_owner_name() returns trigger language plpgsql as $$
    begin
      update instruments set owner_name = new.name where customer_id = new.id;
      return null;
    end $$;
    create trigger users_owner_name after update of name on users
      for each row when (old.name is distinct from new.name) execute function pass_on_owner_name();
    create table heads (
      id uuid primary key default gen_random_uuid(),
      instrument_id uuid not null references instruments on delete cascade,
      side text not null check (side in ('batter', 'resonant')),
      film_id text references films,
      material text not null check (material in ('pet', 'skin', 'woven', 'other')),
      plies int not null check (plies between 1 and 4),
      thickness_um double precision not null check (thickness_um > 0),
      density_kg_m3 double precision not null check (density_kg_m3 > 0),
      modulus_gpa double precision not null check (modulus_gpa > 0),
      poisson double precision not null check (poisson >= 0 and poisson < 0.5),
      yield_mpa double precision not null check (yield_mpa > 0),
      areal_density_kg_m2 double precision not null check (areal_density_kg_m2 > 0),
      coating text,
      kappa double precision,
      kappa_variance double precision,
      kappa_passes int not null default 0,
      film_since timestamptz not null default now(),
      created_at timestamptz not null default now(),
      unique (instrument_id, side)
    );

    create table recordings (
      id uuid primary key default gen_random_uuid(),
      head_id uuid not null references heads on delete cascade,
      instrument_id uuid not null references instruments on delete cascade,
      uploaded_by uuid references users,
      strike text not null check (strike in ('centre', 'edge', 'round')),
      rod int,
      first_rod int not null default 1,
      centre_damped boolean not null default false,
      temperature_c double precision not null,
      note text,
      file_path text not null,
      byte_count bigint not null,
      sha256 text not null,
      duration_s double precision not null,
      sample_rate_hz int not null,
      channels int not null,
      private_to_maker boolean not null default false,
      refusal_code text,
      refusal_message text,
      sound jsonb not null,
      recorded_at timestamptz not null default now(),
      created_at timestamptz not null default now()
    );
    create index recordings_head on recordings (head_id, recorded_at desc);
    create table readings (
      id uuid primary key default gen_random_uuid(),
      recording_id uuid not null references recordings on delete cascade,
      head_id uuid not null references heads on delete cascade,
      instrument_id uuid not null references instruments on delete cascade,
      taken_at timestamptz not null default now(),
      taken_by uuid references users,
      strike text not null,
      temperature_c double precision not null,
      tension_n_per_m double precision not null check (tension_n_per_m > 0),
      u95_n_per_m double precision not null,
      repeatability_u95_n_per_m double precision not null,
      fundamental_hz double precision not null check (fundamental_hz > 0),
      evenness_percent double precision,
      confidence double precision not null,
      doubtful boolean not null,
      detail jsonb not null,
      analysis_version text not null,
      created_at timestamptz not null default now()
    );
    -- The history table walks these: a sort column and the id, forwards or backwards. A reading without evenness sorts last both ways.
    alter table readings set (toast_tuple_target = 128);
    create index readings_taken on readings (taken_at, id);
    create index readings_instrument on readings (instrument_id, taken_at, id) include (tension_n_per_m, fundamental_hz);
    create index readings_head on readings (head_id, taken_at);
    create index readings_tension on readings (tension_n_per_m, id);
    create index readings_fundamental on readings (fundamental_hz, id);
    create index readings_evenness_up on readings ((coalesce(evenness_percent, 'infinity')), id);
    create index readings_evenness_down on readings ((coalesce(evenness_percent, '-infinity')), id);
    create index readings_taken_by on readings (taken_by, taken_at, id);
    create index readings_doubtful on readings (taken_at, id) where doubtful;
    create table turn_sheets (
      id uuid primary key default gen_random_uuid(),
      head_id uuid not null references heads on delete cascade,
      instrument_id uuid not null references instruments on delete cascade,
      reading_id uuid not null references readings on delete cascade,
      target jsonb not null,
      sheet jsonb not null,
      applied jsonb,
      applied_at timestamptz,
      applied_by uuid references users,
      next_reading_id uuid references readings on delete set null,
      created_by uuid references users,
      created_at timestamptz not null default now()
    );
    create index turn_sheets_head on turn_sheets (head_id, created_at desc);
    create index turn_sheets_open on turn_sheets (head_id) where applied_at is not null and next_reading_id is null;

    create table price_lists (
      id uuid primary key default gen_random_uuid(),
      valid_from timestamptz not null,
      currency text not null check (currency ~ '^[a-z]{3}$'),
      prices jsonb not null,
      created_by uuid references users,
      created_at timestamptz not null default now()
    );
    create table head_specs (
      id uuid primary key default gen_random_uuid(),
      customer_id uuid not null references users,
      instrument_id uuid references instruments on delete set null,
      diameter_mm double precision not null check (diameter_mm > 0),
      film_id text not null references films,
      drum jsonb,
      film jsonb,
      target jsonb not null,
      note text,
      reachable boolean not null,
      message text not null,
      predicted jsonb not null,
      price jsonb,
      price_list_id uuid not null references price_lists,
      created_at timestamptz not null default now(),
      check (reachable = (price is not null))
    );
    create index head_specs_customer on head_specs (customer_id, created_at desc);
    create sequence order_number start 1001;
    create table orders (
      id uuid primary key default gen_random_uuid(),
      number text not null unique default 'RW-' || nextval('order_number')::text,
      customer_id uuid not null references users,
      status text not null default 'awaiting-payment'
        check (status in ('awaiting-payment', 'paid', 'in-making', 'tuned', 'shipped', 'delivered', 'cancelled', 'refunded')),
      currency text not null,
      total_minor int not null check (total_minor > 0),
      shipping_address jsonb not null,
      lines jsonb not null,
      checkout_session_id text unique,
      checkout_url text,
      due_on date,
      attention text,
      disputed_at timestamptz,
      created_at timestamptz not null default now(),
      updated_at timestamptz not null default now()
    );
    create index orders_newest on orders (created_at desc, id desc);
    create index orders_customer on orders (customer_id, created_at desc, id desc);
    create index orders_status on orders (status, created_at desc, id desc);
    create table order_heads (
      order_id uuid not null references orders on delete cascade,
      head_spec_id uuid not null references head_specs,
      position int not null,
      primary key (order_id, position)
    );
    create index order_heads_spec on order_heads (head_spec_id);
    create table order_history (
      id bigint generated always as identity primary key,
      order_id uuid not null references orders on delete cascade,
      at timestamptz not null default now(),
      from_status text,
      to_status text not null,
      by_user uuid references users,
      by_label text not null,
      note text
    );
    create index order_history_order on order_history (order_id, id);
    create table payments (
      id uuid primary key default gen_random_uuid(),
      order_id uuid not null references orders,
      provider_ref text not null unique,
      amount_minor int not null check (amount_minor > 0),
      currency text not null,
      status text not null check (status in ('succeeded', 'failed', 'pending')),
      created_at timestamptz not null default now()
    );
    create index payments_order on payments (order_id);
    create table refunds (
      id uuid primary key default gen_random_uuid(),
      order_id uuid not null references orders,
      payment_id uuid not null references payments,
      provider_ref text unique,
      amount_minor int not null check (amount_minor > 0),
      currency text not null,
      reason text not null,
      status text not null check (status in ('pending', 'succeeded', 'failed')),
      by_user uuid references users,
      created_at timestamptz not null default now()
    );
    create index refunds_order on refunds (order_id);
    create table webhook_events (
      id text primary key,
      type text not null,
      received_at timestamptz not null default now()
    );
  `.execute(db)
}
