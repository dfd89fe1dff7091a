/**
 * Recheck: points of a sweep drawn at random, computed anew and held against what is stored, bit by bit.
 *
 * What is computed comes from the sweep's document alone, so a row that was changed is found whatever was changed in it: the point it
 * claims to be, its measure, its fields, or a cell. Nothing is written.
 *
 * @throws sweep.unknown; errors of the store and the pool
 */
import {
  comparisonLedger,
  type Comparison,
  compareCellFields,
  comparePointFields,
  type ComparedPlace,
  type Ledger,
} from '../sweep/ledger.js';
import { digest } from '../core/json.js';
import { randomStream } from '../core/random.js';
import { withRetry } from '../core/retry.js';
import type { ComputePool } from '../queue/types.js';
import type { MeasuredPoint } from '../spectral/types.js';
import type { CellRow, ResultStore, SweepRecord } from '../store/types.js';
import { cellId, METHOD_VERSION, pointId, questionId } from '../sweep/identity.js';
import type { Grid, PointOutcome, PointTask } from '../sweep/types.js';

export interface Recheck {
  readonly record: SweepRecord;
  readonly grid: Grid;
  readonly store: ResultStore;
  readonly pool: ComputePool;
  /** bytes one evaluation may use */
  readonly memory: number;
  /** points to draw; all where the grid has no more */
  readonly sample: number;
  readonly seed: number;
  /** relative difference that still counts as agreement */
  readonly tolerance: number;
  readonly signal?: AbortSignal;
  readonly onProgress?: (done: number, total: number) => void;
}

export interface RecheckSummary {
  /** places drawn */
  readonly drawn: number;
  /** of them: computed and compared, without a stored measure, and measured but not computable here */
  readonly checked: number;
  readonly unmeasured: number;
  readonly uncomputable: readonly { readonly code: string; readonly message: string; readonly count: number }[];
  readonly cells: number;
  readonly values: Comparison;
  /** the sweep was made by this version of the methods, so that ids can be compared, too */
  readonly sameMethod: boolean;
}

/** Points computed before the next ones are read. */
const CHUNK = 64;

/** Different ordinals below `points`, ascending. The same seed draws the same ones. */
export function drawOrdinals(points: number, sample: number, seed: number): number[] {
  if (sample >= points) return Array.from({ length: points }, (_, ordinal) => ordinal);
  const stream = randomStream(seed, 'recheck');
  const drawn = new Set<number>();
  // Drawn from the smaller half, so that few draws are wasted.
  const wanted = Math.min(sample, points - sample);
  while (drawn.size < wanted) drawn.add(Math.floor(stream.uniform() * points));
  if (wanted === sample) return [...drawn].sort((a, b) => a - b);
  return Array.from({ length: points }, (_, ordinal) => ordinal).filter((ordinal) => !drawn.has(ordinal));
}

export async function recheck(run: Recheck): Promise<RecheckSummary> {
  const { record, grid, store, pool, memory, sample, seed, tolerance, signal, onProgress } = run;
  const ledger = comparisonLedger(tolerance);
  const sameMethod = record.methodVersion === METHOD_VERSION;
  const ordinals = drawOrdinals(grid.points, sample, seed);
  const counts = { drawn: 0, checked: 0, unmeasured: 0, cells: 0 };
  const uncomputable = new Map<string, { code: string; message: string; count: number }>();
  ledger.add({ coordinates: {}, question: null }, 'document_digest', record.digest, digest(record.document));

  for (let from = 0; from < ordinals.length && signal?.aborted !== true; from += CHUNK) {
    const chunk = ordinals.slice(from, from + CHUNK);
    const places = await withRetry(() => readPlaces(store, grid.name, chunk), { signal });
    counts.drawn += chunk.length;
    counts.unmeasured += chunk.length - places.length;
    const stored = await withRetry(() => store.measures(places.map(([{ pointId: id }]) => id)), { signal });
    await Promise.all(
      places.map(async (rows) => {
        const task = taskOf(rows, grid, sameMethod);
        const [outcome] = await pool.run([task], { memory });
        if (outcome.point === null) {
          const { code, message } = outcome.failure ?? { code: 'internal.invariant', message: 'a point without a measure' };
          const known = uncomputable.get(message) ?? { code, message, count: 0 };
          uncomputable.set(message, { ...known, count: known.count + 1 });
          return;
        }
        counts.checked++;
        counts.cells += compareOutcome(ledger, rows, task, outcome, stored.get(rows[0].pointId) ?? null, sameMethod);
      }),
    );
    onProgress?.(counts.drawn, ordinals.length);
  }
  return { ...counts, uncomputable: [...uncomputable.values()], values: ledger.result(), sameMethod };
}

type Place = readonly [CellRow, ...CellRow[]];

/** The rows of each place that has a measure. */
async function readPlaces(store: ResultStore, sweep: string, ordinals: readonly number[]): Promise<Place[]> {
  const places = new Map<number, [CellRow, ...CellRow[]]>();
  for await (const row of store.cells({ sweep, ordinals })) {
    if (row.point === null) continue;
    const place = places.get(row.ordinal);
    if (place) place.push(row);
    else places.set(row.ordinal, [row]);
  }
  return [...places.values()];
}

/** What the document says stands there, with the questions that were answered. */
function taskOf(rows: Place, grid: Grid, sameMethod: boolean): PointTask {
  const { id, spec } = grid.pointAt(rows[0].ordinal);
  const known = new Map(grid.questions.map(({ ordinal, question }) => [ordinal, question]));
  const questions = rows
    .filter(({ fields }) => fields !== null)
    // Follow-ups are not in the document; their cell ids tell whether their questions are what was asked.
    .map(({ question, questionOrdinal: ordinal }) => ({ id: String(ordinal), ordinal, question: known.get(ordinal) ?? question }));
  return { id: sameMethod ? id : rows[0].pointId, spec, stored: null, questions };
}

/** @returns number of cells compared */
function compareOutcome(
  ledger: Ledger,
  rows: Place,
  task: PointTask,
  { point, cells }: PointOutcome,
  stored: MeasuredPoint | null,
  sameMethod: boolean,
): number {
  const [first] = rows;
  const place: ComparedPlace = { coordinates: first.coordinates, question: null };
  if (sameMethod) {
    ledger.add(place, 'point_id', first.pointId, task.id);
    ledger.add(place, 'point_content', pointId(first.spec), task.id);
  }
  const computed = point!.measured;
  if (stored === null) ledger.add(place, 'measure', 'missing', 'computed');
  else {
    const { energies } = computed.measure;
    const scale = energies.reduce((largest, energy) => Math.max(largest, Math.abs(energy)), 0);
    ledger.addArray(place, 'energies', stored.measure.energies, energies, scale);
    for (const name of ['weights', 'overlapRe', 'overlapIm'] as const) {
      ledger.addArray(place, name, stored.measure[name], computed.measure[name]);
    }
    ledger.addArray(place, 'state_overlap', Float64Array.from(stored.overlap), Float64Array.from(computed.overlap));
    comparePointFields(ledger, place, stored.fields, computed.fields);
  }
  let compared = 0;
  for (const { questionOrdinal, question, fields, cellId: id } of rows) {
    if (fields === null) continue;
    const at = { coordinates: first.coordinates, question: questionOrdinal };
    const cell = cells.find((candidate) => candidate.questionId === String(questionOrdinal));
    if (cell === undefined) ledger.add(at, 'cell', 'stored', 'not computed');
    else compareCellFields(ledger, at, fields, cell.fields);
    if (sameMethod) ledger.add(at, 'cell_id', id, cellId(task.id, questionId(question)));
    compared++;
  }
  return compared;
}
