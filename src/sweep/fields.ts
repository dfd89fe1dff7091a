/**
 * The field table: every number windrow stores or exports, declared once. SQL columns, CSV headers, JSON keys, help and docs come
 * from it; a test holds it against the types and the schema.
 */
import type { PointFields } from '../spectral/types.js';
import type { CellFields } from '../statistics/types.js';

export interface FieldDeclaration<Name extends string = string> {
  readonly name: Name;
  readonly type: 'float' | 'integer' | 'text' | 'list';
  /** '1' dimensionless, 'energy', 'time', 'measurement', … */
  readonly unit: string;
  readonly nullable: boolean;
  readonly meaning: string;
}

const field = <Name extends string>(
  name: Name,
  type: FieldDeclaration['type'],
  unit: string,
  meaning: string,
  nullable = false,
): FieldDeclaration<Name> => ({ name, type, unit, nullable, meaning });

export const POINT_FIELDS = [
  field('hilbert_dimension', 'float', '1', 'dimension of the full space at that size, conserved numbers fixed'),
  field('sector_dimension', 'float', '1', "size of the connected component of H's graph that holds the detected state"),
  field('accessible_dimension', 'integer', '1', 'dimension of the Krylov space of the detected state'),
  field('accessible_by', 'text', '', 'how it was counted: weights, structure or modular'),
  field('bright_levels', 'integer', '1', 'levels kept in double precision'),
  field('effective_dimension', 'float', '1', '1/Σ v²'),
  field('mean_energy', 'float', 'energy', 'Σ v E'),
  field('energy_variance', 'float', 'energy²', 'Σ v (E − mean)²'),
  field('smallest_gap', 'float', 'energy', 'least distance of neighbouring bright levels', true),
  field('gap_ratio', 'float', '1', 'mean ratio of neighbouring bright spacings', true),
  field('measure_residual', 'float', '1', 'largest relative error of the first three moments of the measure'),
  field('method', 'text', '', 'how the measure was computed'),
] as const satisfies readonly FieldDeclaration<Exclude<keyof PointFields, 'flags' | 'flag_reasons'>>[];

export const CELL_FIELDS = [
  field('recurrent_weight', 'float', '1', 'Σ |q|², levels merged at the resolution'),
  field('decaying_weight', 'float', '1', '|<φ|ψ>|² − recurrent_weight'),
  field('decay_rate', 'float', '1/measurement', 'rate of the slowest decaying pair', true),
  field(
    'settling_measurements',
    'integer',
    'measurement',
    'least k from which the averaged transition probability stays within 0.01',
    true,
  ),
  field('winding_number', 'integer', '1', 'distinct phases (fixed) or energies (random) at the resolution'),
  field('winding_low', 'integer', '1', 'the same at twice the resolution'),
  field('winding_high', 'integer', '1', 'the same at half the resolution'),
  field('resolution_energy', 'float', 'energy', 'window width that was used'),
  field('resolution_weight', 'float', '1', 'window weight that was used'),
  field('detection_probability', 'float', '1', 'total detection probability'),
  field('mean_measurements', 'float', 'measurement', 'mean of n given detection, exact', true),
  field('variance_measurements', 'float', 'measurement²', 'variance of n given detection, exact', true),
  field('mean_time', 'float', 'time', 'mean elapsed time at detection', true),
  field('capped_mean', 'float', 'measurement', 'E[min(n, K)]'),
  field('detected_in_budget', 'float', '1', 'Σ F_n for n ≤ K'),
  field('median_measurements', 'integer', 'measurement', 'least n that holds half of the detections', true),
  field('p90_measurements', 'integer', 'measurement', 'least n that holds nine tenths of the detections', true),
  field('sampled_winding', 'float', '1', 'mean winding number of drawn schedules', true),
  field('sampled_winding_error', 'float', '1', 'its standard error', true),
  field('sampled_draws', 'integer', '1', 'number of drawn schedules', true),
  field('sampled_seed', 'integer', '', 'their seed', true),
] as const satisfies readonly FieldDeclaration<Exclude<keyof CellFields, 'flags' | 'flag_reasons'>>[];

/** Both records also carry these two. */
export const FLAG_FIELDS = [
  field('flags', 'list', '', 'doubtful, underresolved, resolution-sensitive, uncertified'),
  field('flag_reasons', 'list', '', 'one sentence a flag'),
] as const;
