create table windrow.cell (
  point_id bytea not null,
  question_id bytea not null,
  id bytea not null,
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
  created timestamp with time zone not null default now(),
  constraint cell_id_check CHECK ((octet_length(id) = 32)),
  constraint cell_pkey PRIMARY KEY (point_id, question_id),
  constraint cell_point_id_fkey FOREIGN KEY (point_id) REFERENCES point(id),
  constraint cell_question_id_fkey FOREIGN KEY (question_id) REFERENCES question(id)
);

create table windrow.failure (
  point_id bytea not null,
  code text not null,
  message text not null,
  created timestamp with time zone not null default now(),
  constraint failure_pkey PRIMARY KEY (point_id),
  constraint failure_point_id_fkey FOREIGN KEY (point_id) REFERENCES point(id)
);

create table windrow.follow_up (
  sweep text not null,
  ordinal integer not null,
  question_id bytea not null,
  constraint follow_up_pkey PRIMARY KEY (sweep, ordinal),
  constraint follow_up_question_id_fkey FOREIGN KEY (question_id) REFERENCES question(id),
  constraint follow_up_sweep_fkey FOREIGN KEY (sweep) REFERENCES sweep(name),
  constraint follow_up_sweep_question_id_key UNIQUE (sweep, question_id)
);

create table windrow.measure (
  point_id bytea not null,
  energies double precision[] not null,
  weights double precision[] not null,
  overlap_re double precision[],
  overlap_im double precision[],
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
  created timestamp with time zone not null default now(),
  constraint measure_pkey PRIMARY KEY (point_id),
  constraint measure_point_id_fkey FOREIGN KEY (point_id) REFERENCES point(id)
);

create table windrow.migration (
  id integer not null default nextval('migration_id_seq'::regclass),
  name character varying(255) not null,
  run_on timestamp without time zone not null,
  constraint migration_pkey PRIMARY KEY (id)
);

create table windrow.point (
  id bytea not null,
  spec jsonb not null,
  method_version text not null,
  created timestamp with time zone not null default now(),
  constraint point_id_check CHECK ((octet_length(id) = 32)),
  constraint point_pkey PRIMARY KEY (id)
);

create table windrow.question (
  id bytea not null,
  question jsonb not null,
  constraint question_id_check CHECK ((octet_length(id) = 32)),
  constraint question_pkey PRIMARY KEY (id)
);

create table windrow.sweep (
  name text not null,
  digest bytea not null,
  document jsonb not null,
  method_version text not null,
  points bigint not null,
  state text not null default 'open'::text,
  created timestamp with time zone not null default now(),
  updated timestamp with time zone not null default now(),
  constraint sweep_digest_check CHECK ((octet_length(digest) = 32)),
  constraint sweep_pkey PRIMARY KEY (name),
  constraint sweep_state_check CHECK ((state = ANY (ARRAY['open'::text, 'stopping'::text, 'done'::text])))
);

create table windrow.sweep_point (
  sweep text not null,
  ordinal bigint not null,
  point_id bytea not null,
  coordinates jsonb not null,
  constraint sweep_point_pkey PRIMARY KEY (sweep, ordinal),
  constraint sweep_point_point_id_fkey FOREIGN KEY (point_id) REFERENCES point(id),
  constraint sweep_point_sweep_fkey FOREIGN KEY (sweep) REFERENCES sweep(name)
);

create table windrow.sweep_question (
  sweep text not null,
  ordinal integer not null,
  question_id bytea not null,
  constraint sweep_question_pkey PRIMARY KEY (sweep, ordinal),
  constraint sweep_question_question_id_fkey FOREIGN KEY (question_id) REFERENCES question(id),
  constraint sweep_question_sweep_fkey FOREIGN KEY (sweep) REFERENCES sweep(name)
);

view windrow.boundary_input (
  sweep text,
  ordinal bigint,
  question integer,
  size integer,
  coupling double precision,
  place jsonb,
  state text,
  sensitive boolean,
  winding_fraction double precision,
  capped_fraction double precision,
  recurrent_weight double precision,
  sector_fraction double precision
);

view windrow.phase_cell (
  sweep text,
  ordinal bigint,
  question integer,
  model text,
  size integer,
  coupling double precision,
  parameters jsonb,
  disorder jsonb,
  prepared jsonb,
  detected jsonb,
  coordinates jsonb,
  schedule jsonb,
  resolution jsonb,
  budget double precision,
  efficiency double precision,
  sampling jsonb,
  hilbert_dimension double precision,
  sector_dimension double precision,
  accessible_dimension double precision,
  accessible_by text,
  bright_levels double precision,
  effective_dimension double precision,
  mean_energy double precision,
  energy_variance double precision,
  smallest_gap double precision,
  gap_ratio double precision,
  measure_residual double precision,
  method text,
  recurrent_weight double precision,
  decaying_weight double precision,
  decay_rate double precision,
  settling_measurements double precision,
  winding_number double precision,
  winding_low double precision,
  winding_high double precision,
  resolution_energy double precision,
  resolution_weight double precision,
  detection_probability double precision,
  mean_measurements double precision,
  variance_measurements double precision,
  mean_time double precision,
  capped_mean double precision,
  detected_in_budget double precision,
  median_measurements double precision,
  p90_measurements double precision,
  sampled_winding double precision,
  sampled_winding_error double precision,
  sampled_draws double precision,
  sampled_seed double precision,
  flags text[],
  flag_reasons text[],
  status text,
  failure_code text,
  failure_message text,
  point_id text,
  cell_id text
);
