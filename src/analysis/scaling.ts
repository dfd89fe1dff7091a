/**
 * Scaling: the boundary b of growing sizes N drawn out to its limit, b(N) = b∞ + a N^(−ω), with a leading correction whose exponent ω is
 * fitted too.
 *
 * The law is linear in b∞ and a, so a fit is the least of Σ residual² over the one variable ω, each value with the straight line of
 * least squares that belongs to it (The differentiation of pseudo-inverses and nonlinear least squares problems whose variables separate,
 * SIAM J. Numer. Anal. 10, 413 (1973), DOI 10.1137/0710036, from memory). That least is searched over the whole range of ω: there is no
 * starting value to choose, none that a resampled fit could fail from, and the strong correlation of a with ω does no harm. These are the
 * reasons why no general non-linear fitter is used.
 *
 * No fit comes without its residuals. Two errors are told apart, both standard deviations over resampled fits: `error` from the scatter
 * around the law (residuals drawn with replacement), `bracket_error` from boundaries that may lie anywhere in their brackets. 'Too few
 * sizes', 'no trend' and 'unsettled' are answers, with words. Units: those of the boundary for limits, residuals and their errors.
 */
import { Matrix, QrDecomposition } from 'ml-matrix';
import { type RandomStream, randomStream } from '../core/random.js';
import type { Question } from '../statistics/types.js';
import type { Boundary } from './boundary.js';
import { groupBy, otherAxes } from './curves.js';
import type { Coordinates } from './samples.js';

/** Three parameters and one residual that is free. */
export const LEAST_SIZES = 4;
/** Exponents that are searched; at either end sizes of a computer say nothing of a limit. */
export const EXPONENTS = { least: 0.05, greatest: 8 } as const;
const DRAWS = 300;
/** Precision of the exponent in a resampled fit: far below the 4 % that 300 draws leave a standard deviation uncertain by. */
const DRAWN = 1e-5;

export interface SizedBoundary {
  readonly size: number;
  readonly estimate: number;
  readonly low: number;
  readonly high: number;
}

export interface Estimated {
  readonly value: number;
  /** From the scatter of the boundaries around the law. */
  readonly error: number;
  /** From the width of the brackets. */
  readonly bracket_error: number;
}

export interface ScalingFit {
  /** b∞ */
  readonly limit: Estimated;
  /** ω */
  readonly exponent: Estimated;
  /** a, in units of the boundary times N^ω */
  readonly amplitude: number;
  /** In the order of the sizes: boundary − law. */
  readonly residuals: readonly number[];
  /** √(Σ residual² / (sizes − 3)) */
  readonly scatter: number;
  /** b∞ without the smallest size; null where that leaves too few sizes or no fit. A shift beyond the error speaks of further corrections. */
  readonly limit_without_smallest: number | null;
}

export type ScalingOutcome = 'fit' | 'too few sizes' | 'no trend' | 'unsettled';

export interface Scaling {
  readonly outcome: ScalingOutcome;
  /** One sentence. */
  readonly words: string;
  /** Sizes ascending. */
  readonly sizes: readonly SizedBoundary[];
  /** Set for outcome `fit`. */
  readonly fit: ScalingFit | null;
}

export interface PlacedScaling extends Scaling {
  readonly questionOrdinal: number;
  readonly question: Question;
  /** The axes besides the size and the one the boundary was searched along. */
  readonly at: Coordinates;
  /** Sizes that have no bracket. */
  readonly left_out: number;
}

interface Law {
  readonly exponent: number;
  readonly limit: number;
  /** With sizes in units of the greatest. */
  readonly amplitude: number;
  readonly residuals: readonly number[];
  readonly squares: number;
}

function lawAt(exponent: number, sizes: readonly number[], values: readonly number[]): Law {
  const powers = sizes.map((size) => size ** -exponent);
  const middle = powers.reduce((sum, power) => sum + power, 0) / powers.length;
  // Centred columns: the constant does not drown the small differences of weak powers.
  const line = new QrDecomposition(new Matrix(powers.map((power) => [1, power - middle])));
  const solution = line.solve(Matrix.columnVector([...values]));
  const [offset, amplitude] = [solution.get(0, 0), solution.get(1, 0)];
  const residuals = values.map((value, index) => value - offset - amplitude * (powers[index] - middle));
  const squares = residuals.reduce((sum, residual) => sum + residual * residual, 0);
  return { exponent, limit: offset - amplitude * middle, amplitude, residuals, squares };
}

const STEPS = 24;
const GOLDEN = (Math.sqrt(5) - 1) / 2;
const SCAN = Array.from({ length: STEPS + 1 }, (_, step) => EXPONENTS.least * (EXPONENTS.greatest / EXPONENTS.least) ** (step / STEPS));

/**
 * @param precision relative, of the exponent
 * @returns the law of least squares; null where the least lies at an end of the range of exponents
 */
function leastSquares(sizes: readonly number[], values: readonly number[], precision = 1e-10): Law | null {
  const squares = SCAN.map((exponent) => lawAt(exponent, sizes, values).squares);
  const best = squares.indexOf(Math.min(...squares));
  if (best === 0 || best === STEPS) return null;
  let [low, high] = [SCAN[best - 1], SCAN[best + 1]];
  let left = lawAt(high - GOLDEN * (high - low), sizes, values);
  let right = lawAt(low + GOLDEN * (high - low), sizes, values);
  while (high - low > precision * high) {
    if (left.squares <= right.squares) {
      high = right.exponent;
      right = left;
      left = lawAt(high - GOLDEN * (high - low), sizes, values);
    } else {
      low = left.exponent;
      left = right;
      right = lawAt(low + GOLDEN * (high - low), sizes, values);
    }
  }
  return left.squares <= right.squares ? left : right;
}

/** Fits of resampled boundaries; those without an exponent inside the range are counted by their absence. */
function resampled(sizes: readonly number[], draw: () => readonly number[]): Law[] {
  return Array.from({ length: DRAWS }, () => leastSquares(sizes, draw(), DRAWN)).filter((law) => law !== null);
}

function deviation(values: readonly number[]): number {
  const mean = values.reduce((sum, value) => sum + value, 0) / values.length;
  return Math.sqrt(values.reduce((sum, value) => sum + (value - mean) ** 2, 0) / (values.length - 1));
}

function nothing(outcome: ScalingOutcome, sizes: readonly SizedBoundary[], words: string): Scaling {
  return { outcome, sizes, words, fit: null };
}

/** A change of this size, relative to the largest boundary, is rounding. */
const FLAT = 1e-12;
/** Of the resampled fits, those that must have an exponent for a fit to be reported. */
const SETTLED = 0.9;

/**
 * @param boundaries one a size, sizes positive and distinct, in any order
 * @param random stream of the resampling; the same one by default, so that an answer can be had again
 */
export function scalingOf(boundaries: readonly SizedBoundary[], random: RandomStream = randomStream(0, 'scaling')): Scaling {
  const sized = [...boundaries].sort((a, b) => a.size - b.size);
  const greatest = sized.at(-1)?.size ?? 1;
  if (sized.length < LEAST_SIZES)
    return nothing('too few sizes', sized, `${sized.length} size(s) with a boundary; a fit needs ${LEAST_SIZES}`);
  const estimates = sized.map(({ estimate }) => estimate);
  const change = Math.max(...estimates) - Math.min(...estimates);
  if (change <= FLAT * Math.max(...estimates.map(Math.abs)))
    return nothing('no trend', sized, `the same at every size: ${Number(estimates[0].toPrecision(6))}`);

  const sizes = sized.map(({ size }) => size / greatest);
  const law = leastSquares(sizes, estimates);
  const range = `from ${EXPONENTS.least} to ${EXPONENTS.greatest}`;
  if (!law) return nothing('unsettled', sized, `no exponent ${range} fits best: these sizes do not show a limit`);

  const freedom = sized.length - 3;
  // Residuals of a fit are smaller than the scatter they come from by this factor.
  const widened = Math.sqrt(sized.length / freedom);
  const fitted = estimates.map((estimate, index) => estimate - law.residuals[index]);
  const pick = (): number => widened * law.residuals[Math.floor(random.uniform() * sized.length)];
  const scattered = resampled(sizes, () => fitted.map((value) => value + pick()));
  const shifted = resampled(sizes, () => sized.map(({ low, high }) => low + random.uniform() * (high - low)));
  const settled = Math.min(scattered.length, shifted.length);
  if (settled < SETTLED * DRAWS)
    return nothing(
      'unsettled',
      sized,
      `${DRAWS - settled} of ${DRAWS} resampled fits have no exponent ${range}: narrower brackets or more sizes`,
    );

  const estimated = (value: (law: Law) => number): Estimated => ({
    value: value(law),
    error: deviation(scattered.map(value)),
    bracket_error: deviation(shifted.map(value)),
  });
  const fewer = sized.length > LEAST_SIZES ? leastSquares(sizes.slice(1), estimates.slice(1)) : null;
  const fit: ScalingFit = {
    limit: estimated(({ limit }) => limit),
    exponent: estimated(({ exponent }) => exponent),
    amplitude: law.amplitude * greatest ** law.exponent,
    residuals: law.residuals,
    scatter: Math.sqrt(law.squares / freedom),
    limit_without_smallest: fewer?.limit ?? null,
  };
  const lost = DRAWS - settled;
  const words = `${sized.length} sizes, ${law.amplitude < 0 ? 'rising' : 'falling'} to the limit`;
  return { outcome: 'fit', sizes: sized, fit, words: lost === 0 ? words : `${words}; ${lost} of ${DRAWS} resampled fits had no exponent` };
}

/** One scaling for each question and each setting of the axes besides the size. Boundaries without a bracket are left out and counted. */
export function scalingsOf(boundaries: readonly Boundary[]): PlacedScaling[] {
  const places = groupBy(boundaries, ({ questionOrdinal, at }) => JSON.stringify([questionOrdinal, otherAxes(at, ['size'])]));
  return [...places.values()].map((place) => {
    const [{ questionOrdinal, question, at }] = place as [Boundary, ...Boundary[]];
    const sized = place.flatMap(({ bracket, at: { size } }) => (bracket && typeof size === 'number' ? [{ ...bracket, size }] : []));
    return { questionOrdinal, question, at: otherAxes(at, ['size']), left_out: place.length - sized.length, ...scalingOf(sized) };
  });
}
