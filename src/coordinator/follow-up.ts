/**
 * Follow-up: new questions put to a sweep's stored measures. Nothing is diagonalised.
 *
 * Guarantees: a cell that is stored is left alone, so asking again computes nothing; what was computed is stored bundle by bundle, so an
 * interrupted follow-up goes on where it ended; the sweep itself, its progress and its failures stay as they are. Points without a
 * measure are counted, not computed: that is for a resumed sweep.
 *
 * At most two bundles a thread are held in memory, whatever the size of the sweep; of the other points only the ids.
 *
 * @throws sweep.differs for a sweep of another method version; errors of the store and the pool
 */
import { WindrowError } from '../core/errors.js';
import { withRetry } from '../core/retry.js';
import type { ComputePool } from '../queue/types.js';
import type { CellRow, ResultStore } from '../store/types.js';
import { METHOD_VERSION } from '../sweep/identity.js';
import type { PointFailure, PointSpec, PointTask, QuestionRecord } from '../sweep/types.js';
import { JOB_OPERATIONS, JOB_POINTS } from './bundler.js';
import { pointCost } from './point-cost.js';

export interface FollowUp {
  readonly sweep: string;
  /** What is asked; enrolled where the sweep does not have it yet. */
  readonly questions: readonly Omit<QuestionRecord, 'ordinal'>[];
  readonly store: ResultStore;
  readonly pool: ComputePool;
  /** bytes one evaluation may use */
  readonly memory: number;
  /** Restricts the follow-up to some places of the grid: which, and how many they are. */
  readonly places?: { readonly wanted: (row: CellRow) => boolean; readonly count: number };
  readonly signal?: AbortSignal;
  readonly onProgress?: (progress: FollowUpProgress) => void;
}

export interface FollowUpProgress {
  /** cells asked for so far, of which `stored` were found and `computed` made */
  readonly cells: number;
  readonly stored: number;
  readonly computed: number;
  /** all cells that will be asked for */
  readonly total: number;
}

export interface FollowUpSummary {
  /** numbers of the questions in the sweep */
  readonly questions: readonly QuestionRecord[];
  readonly cells: number;
  /** answered before */
  readonly stored: number;
  readonly computed: number;
  /** stored measures that new cells were computed from */
  readonly measures: number;
  /** cells of points that have no measure: not computed yet, or failed */
  readonly unmeasured: number;
  /** measures that could not answer, by reason; they are not stored as failures of the sweep */
  readonly failures: readonly { readonly code: string; readonly message: string; readonly count: number }[];
  readonly outcome: 'done' | 'interrupted';
}

type Open = { readonly id: string; readonly spec: PointSpec; readonly questions: readonly QuestionRecord[] };

export async function followUp({
  sweep,
  questions: asked,
  store,
  pool,
  memory,
  places,
  signal,
  onProgress,
}: FollowUp): Promise<FollowUpSummary> {
  const record = await withRetry(() => store.findSweep(sweep));
  if (record !== null && record.methodVersion !== METHOD_VERSION) {
    throw new WindrowError(
      'sweep.differs',
      'the measures of this sweep were made by another version of the methods; sweep it again under another name',
      {
        where: `sweep ${sweep}`,
        found: `method version ${record.methodVersion}`,
        allowed: `method version ${METHOD_VERSION}`,
      },
    );
  }
  const questions = await withRetry(() => store.followUp(sweep, asked));
  const byOrdinal = new Map(questions.map((question) => [question.ordinal, question]));
  const ordinals = [...byOrdinal.keys()];
  const total = (places?.count ?? record?.points ?? 0) * ordinals.length;
  const counts = { cells: 0, stored: 0, computed: 0, measures: 0, unmeasured: 0 };
  const failures = new Map<string, { code: string; message: string; count: number }>();
  const seen = new Set<string>();
  const running = new Set<Promise<void>>();

  const compute = async (bundle: readonly Open[]): Promise<void> => {
    const measures = await withRetry(() => store.measures(bundle.map(({ id }) => id)), { signal });
    const tasks: PointTask[] = bundle.flatMap((open) => {
      const stored = measures.get(open.id);
      return stored === undefined ? [] : [{ ...open, stored }];
    });
    const outcomes = await pool.run(tasks, { memory });
    const cells = outcomes.flatMap((outcome) => outcome.cells);
    await withRetry(() => store.save({ points: [], cells, failures: [] }), { signal });
    counts.computed += cells.length;
    counts.measures += outcomes.filter((outcome) => outcome.cells.length > 0).length;
    for (const { failure } of outcomes) if (failure !== null) note(failures, failure);
    // Refined points come on top of the grid's.
    onProgress?.({ ...counts, total: Math.max(total, counts.cells) });
  };

  const bundles = bundler(async (bundle) => {
    // A bundle that fails stays among the running ones and ends the walk here or after it.
    while (running.size >= 2 * pool.threads) await Promise.race(running);
    const run = compute(bundle);
    running.add(run);
    void run.then(
      () => running.delete(run),
      () => undefined,
    );
  });
  try {
    for await (const rows of pointsOf(store.cells({ sweep, questions: ordinals }), places?.wanted)) {
      if (signal?.aborted === true) break;
      const [{ pointId: id, spec, point }] = rows;
      counts.cells += rows.length;
      const open = rows.filter(({ fields }) => fields === null).map(({ questionOrdinal }) => byOrdinal.get(questionOrdinal)!);
      counts.stored += rows.length - open.length;
      if (point === null) counts.unmeasured += open.length;
      // A second place of the grid with the same content needs no second answer.
      else if (open.length > 0 && !seen.has(id)) {
        seen.add(id);
        await bundles.push({ id, spec, questions: open });
      }
    }
    if (signal?.aborted !== true) await bundles.flush();
  } finally {
    await Promise.allSettled(running);
  }
  await Promise.all(running);
  return {
    questions,
    ...counts,
    failures: [...failures.values()].sort((a, b) => b.count - a.count),
    outcome: signal?.aborted === true ? 'interrupted' : 'done',
  };
}

function note(failures: Map<string, { code: string; message: string; count: number }>, { code, message }: PointFailure): void {
  const key = `${code} ${message}`;
  const known = failures.get(key);
  if (known) known.count++;
  else failures.set(key, { code, message, count: 1 });
}

/** Consecutive rows of one place of the grid. */
async function* pointsOf(
  rows: AsyncIterable<CellRow>,
  wanted: (row: CellRow) => boolean = () => true,
): AsyncGenerator<readonly [CellRow, ...CellRow[]]> {
  let group: [CellRow, ...CellRow[]] | null = null;
  for await (const row of rows) {
    if (group !== null && group[0].ordinal === row.ordinal) {
      group.push(row);
      continue;
    }
    if (group !== null) yield group;
    group = wanted(row) ? [row] : null;
  }
  if (group !== null) yield group;
}

/** Bundles of about equal cost, so that a bundle is worth its round trip and progress is smooth. */
function bundler(hand: (bundle: readonly Open[]) => Promise<void>): { push(open: Open): Promise<void>; flush(): Promise<void> } {
  let bundle: Open[] = [];
  let cost = 0;
  const flush = async (): Promise<void> => {
    if (bundle.length === 0) return;
    const ready = bundle;
    bundle = [];
    cost = 0;
    await hand(ready);
  };
  return {
    async push(open) {
      bundle.push(open);
      cost += pointCost(open.spec, true, open.questions).operations;
      if (cost >= JOB_OPERATIONS || bundle.length >= JOB_POINTS) await flush();
    },
    flush,
  };
}
