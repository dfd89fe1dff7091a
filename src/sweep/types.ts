/**
 * Points, cells and results: the records that travel from sweep file to store.
 *
 * A point is one Hamiltonian with its two states; a cell is a point under one question (schedule, resolution, budget, detector,
 * sampling). Both are identified by the SHA-256 of their canonical JSON with the method version; see identity.ts.
 */
import type { MeasuredPoint, PointFields, SpectralMeasure } from '../spectral/types.js';
import type { CellFields, Question } from '../statistics/types.js';
import type { Disorder, StateSpec } from '../models/types.js';
import type { ErrorCode } from '../core/errors.js';
import type { Json } from '../core/json.js';

export interface PointSpec {
  readonly model: string;
  readonly size: number;
  /** the family's own coupling */
  readonly coupling: number;
  /** complete, defaults filled in */
  readonly parameters: { readonly [name: string]: Json };
  readonly disorder: Disorder | null;
  readonly prepared: StateSpec;
  /** canonical: 'same' only for the return problem */
  readonly detected: StateSpec;
  /** set where accessible_dimension is to be counted exactly: another way of computing, so another point */
  readonly certify?: true;
}

/** A point of a grid: its identity and where it lies on the sweep's axes. */
export interface GridPoint {
  readonly id: string;
  /** position in the grid's order, from 0 */
  readonly ordinal: number;
  readonly spec: PointSpec;
  /** axis name → value as the sweep file gives it (a scaled coupling stays scaled) */
  readonly coordinates: { readonly [axis: string]: number | string };
}

export interface QuestionRecord {
  readonly id: string;
  readonly ordinal: number;
  readonly question: Question;
}

/** A point's stored truth. */
export interface PointResult {
  readonly id: string;
  readonly spec: PointSpec;
  readonly measured: MeasuredPoint;
}

export interface CellResult {
  readonly id: string;
  readonly pointId: string;
  readonly questionId: string;
  readonly fields: CellFields;
}

/** A point that could not be computed: a mathematical or resource limit, stored with its reason and not retried by itself. */
export interface PointFailure {
  readonly id: string;
  readonly spec: PointSpec;
  readonly code: ErrorCode;
  readonly message: string;
}

/** What one point of a job needs: its measure when the store already has it, and the questions still open. */
export interface PointTask {
  readonly id: string;
  readonly spec: PointSpec;
  readonly stored: MeasuredPoint | null;
  readonly questions: readonly QuestionRecord[];
}

export interface EvaluateOptions {
  /** bytes one evaluation may use */
  readonly memory: number;
}

export interface PointOutcome {
  /** set where the measure was computed here (not where it came from the store) */
  readonly point: PointResult | null;
  readonly cells: readonly CellResult[];
  readonly failure: PointFailure | null;
  /** seconds of CPU, for the benchmarks and the estimate: spectral measure, statistics */
  readonly seconds: { readonly kernel: number; readonly statistics: number };
}

export type { CellFields, PointFields, Question, SpectralMeasure };

export interface GridAxis {
  readonly name: string;
  readonly values: readonly (number | string)[];
  /** unit or meaning for axis titles, e.g. 'bosons' or 'U N/(2J)' */
  readonly unit: string;
}

/** A sweep's grid, addressed by ordinal; nothing of it is kept in memory but the axes. */
export interface Grid {
  readonly name: string;
  readonly model: string;
  /** varying fastest last: ordinal = mixed-radix index over these */
  readonly axes: readonly GridAxis[];
  readonly points: number;
  readonly questions: readonly QuestionRecord[];
  readonly cells: number;
  pointAt(ordinal: number): GridPoint;
  iterate(from?: number): IterableIterator<GridPoint>;
}
