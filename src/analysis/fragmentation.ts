/**
 * Strong or weak fragmentation: how the largest sector's share of its space falls with size.
 *
 * A space is strongly fragmented where the share goes to zero exponentially, weakly where it goes to one (Ergodicity breaking arising from
 * Hilbert space fragmentation in dipole-conserving Hamiltonians, Phys. Rev. X 10, 011047 (2020), 10.1103/PhysRevX.10.011047). The share is
 * fitted by ln f = a − κ L + γ ln L, with a second a for odd sizes where there are enough of both: counts of paths bring powers of L and an
 * alternation that a bare exponential would take for a change of κ. Least squares; errors are standard errors from the scatter about the
 * fit, no more.
 */
import { inverse, Matrix, QrDecomposition } from 'ml-matrix';

export interface SizeShare {
  readonly size: number;
  /** largest sector over dimension, 0 < share ≤ 1 */
  readonly share: number;
}

export interface FragmentationFit {
  /** κ in ln f = a − κ L + …, for each unit of size */
  readonly exponent: number;
  readonly exponent_error: number;
  /** γ, null where too few sizes tell it from κ */
  readonly power: number | null;
  readonly power_error: number | null;
  /** a and its change for odd sizes, 0 where none is fitted */
  readonly intercept: number;
  readonly alternation: number;
}

export type Fragmentation = 'strong' | 'weak' | 'none' | 'undecided';

export interface FragmentationVerdict {
  readonly fragmentation: Fragmentation;
  /** One sentence. */
  readonly reason: string;
  /** null below four sizes, and where every share is 1 */
  readonly fit: FragmentationFit | null;
}

/** An exponent counts as different from zero beyond this many standard errors. */
const SIGNIFICANT = 3;
/** A fit without scatter has no error; below this its exponent is rounding. */
const LEAST = 1e-9;
/** Shares that stay above this, without an exponential fall, are on their way to one. */
const NEARLY_ALL = 0.9;
const FEWEST = 4;
const FEWEST_FOR_POWER = 6;
const FEWEST_FOR_ALTERNATION = 9;

const odd = (size: number): number => size % 2;

/** Columns of the design matrix: 1, −L, then ln L and the parity where sizes suffice. */
function columnsOf(sizes: readonly number[]): readonly ('intercept' | 'exponent' | 'power' | 'alternation')[] {
  const odds = sizes.filter((size) => odd(size) === 1).length;
  const both = Math.min(odds, sizes.length - odds) >= 3;
  return [
    'intercept',
    'exponent',
    ...(sizes.length >= FEWEST_FOR_POWER ? (['power'] as const) : []),
    ...(sizes.length >= FEWEST_FOR_ALTERNATION && both ? (['alternation'] as const) : []),
  ];
}

const VALUE = { intercept: () => 1, exponent: (size: number) => -size, power: Math.log, alternation: odd } as const;

function leastSquares(points: readonly SizeShare[]): FragmentationFit {
  const columns = columnsOf(points.map(({ size }) => size));
  const design = new Matrix(points.map(({ size }) => columns.map((column) => VALUE[column](size))));
  const target = Matrix.columnVector(points.map(({ share }) => Math.log(share)));
  const solution = new QrDecomposition(design).solve(target);
  const residual = Matrix.sub(target, design.mmul(solution));
  const variance = residual.dot(residual) / (points.length - columns.length);
  const covariance = inverse(design.transpose().mmul(design)).mul(variance);
  const valueOf = (column: (typeof columns)[number]): readonly [number, number] | null => {
    const k = columns.indexOf(column);
    return k < 0 ? null : [solution.get(k, 0), Math.sqrt(covariance.get(k, k))];
  };
  const [exponent, error] = valueOf('exponent')!;
  const power = valueOf('power');
  return {
    exponent,
    exponent_error: error,
    power: power?.[0] ?? null,
    power_error: power?.[1] ?? null,
    intercept: valueOf('intercept')![0],
    alternation: valueOf('alternation')?.[0] ?? 0,
  };
}

/** Share that a fit gives at a size. */
export function fittedShare({ intercept, exponent, power, alternation }: FragmentationFit, size: number): number {
  return Math.exp(intercept - exponent * size + (power ?? 0) * Math.log(size) + alternation * odd(size));
}

const number = (value: number): string => String(Number(value.toPrecision(3)));

/** @param points distinct sizes in any order */
export function fragmentationOf(points: readonly SizeShare[]): FragmentationVerdict {
  const sorted = [...points].sort((a, b) => a.size - b.size);
  const last = sorted.at(-1)?.share ?? 0;
  if (sorted.length > 0 && sorted.every(({ share }) => share === 1))
    return { fragmentation: 'none', reason: 'every size is a single sector', fit: null };
  if (sorted.length < FEWEST)
    return {
      fragmentation: 'undecided',
      reason: `too few sizes: ${sorted.length}, and a fit with an error takes ${FEWEST}, one with a power of L ${FEWEST_FOR_POWER}`,
      fit: null,
    };
  const fit = leastSquares(sorted);
  const { exponent, exponent_error: error } = fit;
  const fitted = `exponent ${number(exponent)} ± ${number(error)} a site over ${sorted.length} sizes`;
  if (exponent > Math.max(SIGNIFICANT * error, LEAST) && last < NEARLY_ALL) {
    const plain = fit.power === null ? '; too few sizes to tell an exponential from a power of L' : '';
    return fit.power === null
      ? { fragmentation: 'undecided', reason: `the share of the largest sector falls, ${fitted}${plain}`, fit }
      : { fragmentation: 'strong', reason: `the share of the largest sector falls exponentially, ${fitted}`, fit };
  }
  const upper = sorted.slice(Math.floor(sorted.length / 2));
  if (upper.every(({ share }) => share >= NEARLY_ALL))
    return {
      fragmentation: 'weak',
      reason: `the largest sector keeps nearly all of its space, ${number(last)} at the largest size; ${fitted}`,
      fit,
    };
  return {
    fragmentation: 'undecided',
    reason: `the share of the largest sector, ${number(last)} at the largest size, falls no faster than a power of the size; ${fitted}`,
    fit,
  };
}
