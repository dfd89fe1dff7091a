-- Views for people and other programs: a stable, read-only interface. The tables may change with any migration; a view keeps its columns
-- and their meaning, new columns are added at its end, and anything else comes under a new name. DEVELOPERS.md describes the columns.

-- One row a cell: the columns of `windrow export`, under the same names and in the same order.
create view windrow.phase_cell as
select
  sp.sweep,
  sp.ordinal,
  asked.ordinal as question,
  p.spec ->> 'model' as model,
  (p.spec ->> 'size')::integer as size,
  (p.spec ->> 'coupling')::double precision as coupling,
  p.spec -> 'parameters' as parameters,
  nullif(p.spec -> 'disorder', 'null') as disorder,
  p.spec -> 'prepared' as prepared,
  p.spec -> 'detected' as detected,
  sp.coordinates,
  q.question -> 'schedule' as schedule,
  q.question -> 'resolution' as resolution,
  (q.question ->> 'budget')::double precision as budget,
  (q.question -> 'detector' ->> 'efficiency')::double precision as efficiency,
  nullif(q.question -> 'sampling', 'null') as sampling,
  m.hilbert_dimension,
  m.sector_dimension,
  m.accessible_dimension,
  m.accessible_by,
  m.bright_levels,
  m.effective_dimension,
  m.mean_energy,
  m.energy_variance,
  m.smallest_gap,
  m.gap_ratio,
  m.measure_residual,
  m.method,
  c.recurrent_weight,
  c.decaying_weight,
  c.decay_rate,
  c.settling_measurements,
  c.winding_number,
  c.winding_low,
  c.winding_high,
  c.resolution_energy,
  c.resolution_weight,
  c.detection_probability,
  c.mean_measurements,
  c.variance_measurements,
  c.mean_time,
  c.capped_mean,
  c.detected_in_budget,
  c.median_measurements,
  c.p90_measurements,
  c.sampled_winding,
  c.sampled_winding_error,
  c.sampled_draws,
  c.sampled_seed,
  -- Those of the measure, then those that only the cell has.
  coalesce(m.flags, '{}') || array(
    select flag from unnest(c.flags) with ordinality f (flag, place) where flag <> all (coalesce(m.flags, '{}')) order by place
  ) as flags,
  coalesce(m.flag_reasons, '{}') || array(
    select reason from unnest(c.flag_reasons) with ordinality f (reason, place)
    where reason <> all (coalesce(m.flag_reasons, '{}')) order by place
  ) as flag_reasons,
  case when c.id is not null then 'computed' when f.point_id is not null then 'failed' else 'missing' end as status,
  f.code as failure_code,
  f.message as failure_message,
  encode(sp.point_id, 'hex') as point_id,
  encode(c.id, 'hex') as cell_id
from windrow.sweep_point sp
join (
  select sweep, ordinal, question_id from windrow.sweep_question
  union all
  select sweep, ordinal, question_id from windrow.follow_up
) asked on asked.sweep = sp.sweep
join windrow.point p on p.id = sp.point_id
join windrow.question q on q.id = asked.question_id
left join windrow.measure m on m.point_id = sp.point_id
left join windrow.cell c on c.point_id = sp.point_id and c.question_id = asked.question_id
left join windrow.failure f on f.point_id = sp.point_id;

-- One row a cell: what a boundary is made of. An order parameter is null where it has no value.
create view windrow.boundary_input as
select
  cell.sweep,
  cell.ordinal,
  cell.question,
  cell.size,
  coalesce((cell.coordinates ->> 'coupling')::double precision, cell.coupling) as coupling,
  cell.coordinates - 'size' - 'coupling' as place,
  case
    when cell.status <> 'computed' then cell.status
    when 'doubtful' = any (cell.flags) then 'doubtful'
    else 'value'
  end as state,
  'resolution-sensitive' = any (cell.flags) as sensitive,
  known.winding_number / nullif(known.accessible_dimension, 0) as winding_fraction,
  -- Over what the budget can show: a return needs accessible_dimension measurements on average.
  case
    when cell.detected <> '"same"' then known.capped_mean / cell.budget
    when known.accessible_dimension is not null then known.capped_mean / nullif(least(cell.budget, known.accessible_dimension), 0)
  end as capped_fraction,
  known.recurrent_weight,
  known.sector_dimension / nullif(known.hilbert_dimension, 0) as sector_fraction
from windrow.phase_cell cell
cross join lateral (
  -- Numbers that are not finite count as absent.
  select
    case when cell.winding_number < 'Infinity' then cell.winding_number end as winding_number,
    case when cell.accessible_dimension < 'Infinity' then cell.accessible_dimension end as accessible_dimension,
    case when cell.capped_mean < 'Infinity' then cell.capped_mean end as capped_mean,
    case when cell.recurrent_weight < 'Infinity' then cell.recurrent_weight end as recurrent_weight,
    case when cell.sector_dimension < 'Infinity' then cell.sector_dimension end as sector_dimension,
    case when cell.hilbert_dimension < 'Infinity' then cell.hilbert_dimension end as hilbert_dimension
) known;
