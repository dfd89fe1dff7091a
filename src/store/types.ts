/**
 * The result store: one interface, one adapter folder per engine.
 *
 * Guarantees every adapter gives (tests/conformance holds them to it):
 * - `save` is one transaction and idempotent: a row whose id is stored is left as it is. When it resolves, the rows survive a crash.
 * - Readers see only whole transactions. `cells` streams from one snapshot.
 * - Any number of processes may use one store at once.
 * Errors: store.unreachable (retryable), store.full, store.schema-newer, store.schema-older, store.data.
 */
import type { Json } from '../core/json.js';
import type { MeasuredPoint, PointFields } from '../spectral/types.js';
import type { CellFields, Question } from '../statistics/types.js';
import type { CellResult, GridPoint, PointFailure, PointResult, PointSpec, QuestionRecord } from '../sweep/types.js';

export interface SweepRecord {
  readonly name: string;
  /** SHA-256 of the canonical sweep document */
  readonly digest: string;
  /** the sweep file, normalised; enough to expand the grid again */
  readonly document: Json;
  readonly methodVersion: string;
  /** of the document's grid, without refined points */
  readonly points: number;
  /** what the sweep is made of: every point of it answers them */
  readonly questions: readonly QuestionRecord[];
  /** asked later, of stored measures; their ordinals go on where those of `questions` end */
  readonly followUps: readonly QuestionRecord[];
  /** 'stopping' asks feeders to hand out no new jobs */
  readonly state: 'open' | 'stopping' | 'done';
  /** ISO 8601, by the store's clock */
  readonly created: string;
  readonly updated: string;
}

/** A sweep as it is registered; the rest is the store's to say. */
export type NewSweep = Omit<SweepRecord, 'state' | 'created' | 'updated' | 'followUps'>;

export interface SweepProgress {
  readonly points: number;
  readonly cells: number;
  readonly storedPoints: number;
  readonly storedCells: number;
  readonly failedPoints: number;
  readonly failures: readonly { readonly code: string; readonly message: string; readonly count: number }[];
}

/** What is still missing of a chunk of grid points, in the chunk's order; complete points are left out. */
export interface MissingPoint {
  readonly id: string;
  /** the measure is stored */
  readonly measured: boolean;
  /** ids of questions not yet answered */
  readonly questionIds: readonly string[];
  /** stored as failed; null where it is not */
  readonly failure: { readonly code: string; readonly message: string } | null;
}

/** One row of a result table: a cell with its point, or a failed point with `fields` null. */
export interface CellRow {
  readonly ordinal: number;
  readonly coordinates: { readonly [axis: string]: number | string };
  readonly pointId: string;
  readonly cellId: string | null;
  readonly spec: PointSpec;
  readonly question: Question;
  readonly questionOrdinal: number;
  /** null where the point is not (yet) computed */
  readonly point: PointFields | null;
  readonly fields: CellFields | null;
  readonly failure: { readonly code: string; readonly message: string } | null;
}

export interface CellQuery {
  readonly sweep: string;
  /** ordinals of the sweep's questions and follow-ups; all when absent */
  readonly questions?: readonly number[];
  /** places of the grid; all when absent */
  readonly ordinals?: readonly number[];
}

/** Names of roles that cannot log in themselves; logins are put into them. */
export interface StoreRoles {
  /** computes: may add results, set the state of sweeps and clear failures */
  readonly writer: string;
  /** only reads */
  readonly reader: string;
}

export interface ResultStore {
  /** Brings the schema up to date; safe to call from many processes at once. */
  migrate(): Promise<void>;
  /** Makes the roles of the store where they are missing and gives them their rights; the schema must be up to date. */
  grant(): Promise<StoreRoles>;
  /** @throws sweep.differs when the name is taken by another document */
  registerSweep(sweep: NewSweep): Promise<SweepRecord>;
  findSweep(name: string): Promise<SweepRecord | null>;
  listSweeps(): Promise<readonly SweepRecord[]>;
  setSweepState(name: string, state: SweepRecord['state']): Promise<void>;
  /**
   * Enrols questions that a sweep was not made of (idempotent); those it has already keep their ordinal. Enrolment, progress and with them
   * resuming see only what was swept; `cells` shows both. Returned in the order given. @throws sweep.unknown
   */
  followUp(sweep: string, questions: readonly Omit<QuestionRecord, 'ordinal'>[]): Promise<readonly QuestionRecord[]>;
  /** Enrols grid points in a sweep (idempotent) and tells what of them is missing. */
  enrol(sweep: string, points: readonly GridPoint[]): Promise<readonly MissingPoint[]>;
  /**
   * Points enrolled beyond the grid of the sweep's document: those with an ordinal of at least its `points`, by ordinal. Progress counts
   * them. @throws sweep.unknown
   */
  refinements(sweep: string): Promise<readonly GridPoint[]>;
  /** Stored measures by point id; ids that are not stored are absent. */
  measures(ids: readonly string[]): Promise<ReadonlyMap<string, MeasuredPoint>>;
  /** One transaction; see the guarantees above. A saved point clears its failure. */
  save(batch: SaveBatch): Promise<void>;
  /** Forgets the failures of a sweep's points, so that they are computed again; returns how many. */
  clearFailures(sweep: string): Promise<number>;
  progress(sweep: string): Promise<SweepProgress>;
  /** Rows in the grid's order (ordinal, then question ordinal), one for every enrolled point × question. */
  cells(query: CellQuery): AsyncIterable<CellRow>;
  /** Runs `work` while holding a store-wide named lock, or returns null at once where another process holds it. */
  withLock<T>(name: string, work: () => Promise<T>): Promise<T | null>;
  close(): Promise<void>;
}

export interface SaveBatch {
  readonly points: readonly PointResult[];
  readonly cells: readonly CellResult[];
  readonly failures: readonly PointFailure[];
}
