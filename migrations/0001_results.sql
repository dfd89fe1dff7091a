-- The result tables. Everything lives in the schema "windrow", so that a database can be shared with other programs.
--
-- Ids are SHA-256 digests of content (32 bytes). Result columns carry the names of the field table; all numbers among them are
-- double precision, which holds every number the program can produce (NaN, infinities, counts beyond 2^63) and returns it unchanged.

-- One Hamiltonian with its two states.
create table windrow.point (
  id bytea primary key check (octet_length(id) = 32),
  spec jsonb not null,
  method_version text not null,
  created timestamptz not null default now()
);

-- The spectral measure of a point: energies E_j ascending, weights v_j and overlaps q_j of the bright levels.
-- overlap_re is null where the overlaps are the weights (the return problem), overlap_im where they are real.
create table windrow.measure (
  point_id bytea primary key references windrow.point,
  energies double precision[] not null,
  weights double precision[] not null,
  overlap_re double precision[],
  overlap_im double precision[],
  -- <detected|prepared>
  state_overlap_re double precision not null,
  state_overlap_im double precision not null,
  hilbert_dimension double precision not null,
  sector_dimension double precision not null,
  accessible_dimension double precision not null,
  accessible_by text not null,
  bright_levels double precision not null,
  effective_dimension double precision not null,
  mean_energy double precision not null,
  energy_variance double precision not null,
  smallest_gap double precision,
  gap_ratio double precision,
  measure_residual double precision not null,
  method text not null,
  flags text[] not null,
  flag_reasons text[] not null,
  created timestamptz not null default now()
);

-- What is asked of a measure: schedule, resolution, budget, detector, sampling.
create table windrow.question (
  id bytea primary key check (octet_length(id) = 32),
  question jsonb not null
);

-- A point's answer to a question. The id is a function of the pair, so the pair is the key and the id needs no index of its own.
create table windrow.cell (
  point_id bytea not null references windrow.point,
  question_id bytea not null references windrow.question,
  id bytea not null check (octet_length(id) = 32),
  recurrent_weight double precision not null,
  decaying_weight double precision not null,
  decay_rate double precision,
  settling_measurements double precision,
  winding_number double precision not null,
  winding_low double precision not null,
  winding_high double precision not null,
  resolution_energy double precision not null,
  resolution_weight double precision not null,
  detection_probability double precision not null,
  mean_measurements double precision,
  variance_measurements double precision,
  mean_time double precision,
  capped_mean double precision not null,
  detected_in_budget double precision not null,
  median_measurements double precision,
  p90_measurements double precision,
  sampled_winding double precision,
  sampled_winding_error double precision,
  sampled_draws double precision,
  sampled_seed double precision,
  flags text[] not null,
  flag_reasons text[] not null,
  created timestamptz not null default now(),
  primary key (point_id, question_id)
);

-- A point that could not be computed, with the reason.
create table windrow.failure (
  point_id bytea primary key references windrow.point,
  code text not null,
  message text not null,
  created timestamptz not null default now()
);

create table windrow.sweep (
  name text primary key,
  digest bytea not null check (octet_length(digest) = 32),
  document jsonb not null,
  method_version text not null,
  points bigint not null,
  state text not null default 'open' check (state in ('open', 'stopping', 'done')),
  created timestamptz not null default now(),
  updated timestamptz not null default now()
);

create table windrow.sweep_question (
  sweep text not null references windrow.sweep,
  ordinal integer not null,
  question_id bytea not null references windrow.question,
  primary key (sweep, ordinal)
);

-- A grid point of a sweep: its place in the grid's order and its values on the sweep's axes.
create table windrow.sweep_point (
  sweep text not null references windrow.sweep,
  ordinal bigint not null,
  point_id bytea not null references windrow.point,
  coordinates jsonb not null,
  primary key (sweep, ordinal)
);
