/** `sweep FILE --refine boundary:WIDTH`: brackets halved by new points until they are narrow, and what that took. */
import { boundaryOf } from '../analysis/boundary.js';
import { curvesOf } from '../analysis/curves.js';
import { nextPoint } from '../analysis/refine.js';
import { WindrowError } from '../core/errors.js';
import { formatCount, formatNumber } from '../report/format.js';
import type { ResultStore } from '../store/types.js';
import type { RefinedPlace } from '../sweep/refined-grid.js';
import type { BoundaryChoice } from './boundary-options.js';
import { parseNumber } from './options.js';
import { readSamples, readStoredSweep, REFINED_AXIS } from './stored-sweep.js';

/** @returns the width of 'boundary:WIDTH', in units of the coupling @throws WindrowError `cli.usage` */
export function refinementWidth(text: string): number {
  const allowed = 'boundary:WIDTH with a width above 0, such as boundary:0.01';
  const [what, width, ...more] = text.split(':');
  if (what !== 'boundary' || width === undefined || more.length > 0)
    throw new WindrowError('cli.usage', 'an option that cannot be understood', { where: '--refine', found: text, allowed });
  return parseNumber('--refine', width, allowed, (value) => value > 0 && Number.isFinite(value));
}

async function curvesAlongCoupling(store: ResultStore, name: string, choice: BoundaryChoice) {
  const sweep = await readStoredSweep(store, name);
  const questions = sweep.record.questions.map(({ ordinal }) => ordinal);
  const samples = await readSamples(store, sweep, choice.quantity, { questions, refined: true });
  return { sweep, curves: curvesOf(samples, REFINED_AXIS) };
}

/** The points that halve the brackets of every question and place which are wider than asked, each once. */
export async function wantedPlaces(store: ResultStore, name: string, choice: BoundaryChoice, width: number): Promise<RefinedPlace[]> {
  const { curves } = await curvesAlongCoupling(store, name, choice);
  const places = curves.flatMap((curve) => {
    const coupling = nextPoint(curve, choice.rule, width);
    return coupling === null ? [] : [{ coupling, at: curve.at }];
  });
  return [...new Map(places.map((place) => [JSON.stringify([place.coupling, place.at]), place])).values()];
}

export interface Refinement {
  readonly width: number;
  readonly grid_points: number;
  readonly refined_points: number;
  /** of a grid over the same couplings whose neighbours are as close as the brackets are wide */
  readonly dense_points: number;
  /** (grid + refined) / dense */
  readonly share: number;
  readonly brackets: number;
  /** wider than asked all the same: what lies inside can't be used */
  readonly wide_brackets: number;
}

export async function refinementOf(store: ResultStore, name: string, choice: BoundaryChoice, width: number): Promise<Refinement> {
  const { sweep, curves } = await curvesAlongCoupling(store, name, choice);
  const { grid } = sweep;
  const couplings = (grid.axes.find((axis) => axis.name === REFINED_AXIS)?.values ?? []) as readonly number[];
  const span =
    couplings.reduce((most, value) => Math.max(most, value), -Infinity) -
    couplings.reduce((least, value) => Math.min(least, value), Infinity);
  const dense = (grid.points / couplings.length) * (Math.ceil(span / width - 1e-9) + 1);
  const refined = (await store.refinements(name)).length;
  const brackets = curves.flatMap((curve) => boundaryOf(curve, choice.rule).bracket ?? []);
  return {
    width,
    grid_points: grid.points,
    refined_points: refined,
    dense_points: dense,
    share: (grid.points + refined) / dense,
    brackets: brackets.length,
    wide_brackets: brackets.filter(({ low, high }) => high - low > width * (1 + 1e-6)).length,
  };
}

export function refinementText(found: Refinement, { words }: BoundaryChoice): string {
  const { width, grid_points, refined_points, dense_points, share, brackets, wide_brackets } = found;
  const wide =
    wide_brackets === 0
      ? `all ${formatCount(brackets)} brackets are at most ${formatNumber(width)} wide`
      : `${formatCount(wide_brackets)} of ${formatCount(brackets)} brackets stay wider than ${formatNumber(width)}: the points in them can't be used`;
  return (
    `Refined boundary (${words}): ${wide}.\n` +
    `${formatCount(grid_points)} points of the grid and ${formatCount(refined_points)} between them, ` +
    `${formatNumber(100 * share, 3)} % of the ${formatCount(dense_points)} of a grid as dense everywhere.`
  );
}
