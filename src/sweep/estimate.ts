/**
 * What a sweep will cost, before it starts: counts exactly, work and memory from the cost models of the kernel and the statistics.
 *
 * A large grid is sampled: its ends along every axis, for the largest point, and a low-discrepancy sequence of ordinals, for the mean.
 * Costs are upper estimates: levels are taken to be as many as the matrix dimension.
 */
import { findModel } from '../models/registry.js';
import { measureCost } from '../spectral/cost.js';
import { answerCost } from '../statistics/cost.js';
import { requestOf } from './evaluate.js';
import type { Grid } from './types.js';

export interface EstimateOptions {
  /** floating-point operations a second of one thread; default 2e9, what the TypeScript kernels reached on a core of 2024 */
  readonly rate?: number;
  /** default 1 */
  readonly threads?: number;
}

export interface SweepEstimate {
  readonly points: number;
  readonly questions: number;
  readonly cells: number;
  /** largest matrix dimension of the points looked at */
  readonly largestDimension: number;
  /** bytes the costliest point needs in one worker */
  readonly memory: number;
  /** floating-point operations of the whole sweep: spectral measures, statistics, both */
  readonly flops: { readonly kernel: number; readonly statistics: number; readonly total: number };
  /**
   * At the given rate and number of threads, nothing being stored yet. At most: symmetries of the states leave fewer bright levels than
   * the dimension, and a run that is detected early stops early.
   */
  readonly seconds: number;
  /** points looked at; as many as `points` where the estimate is of every point */
  readonly sampled: number;
}

/** Points that are looked at one by one. */
const SAMPLE = 2_000;
/** Points times questions that are looked at one by one. */
const ANSWERS = 2_000_000;

/** Of the sequence i·φ mod 1: neighbours never share a period with the strides of a grid. */
const GOLDEN = (Math.sqrt(5) - 1) / 2;

export function estimateSweep(grid: Grid, options: EstimateOptions = {}): SweepEstimate {
  const { rate = 2e9, threads = 1 } = options;
  const questions = grid.questions.map((record) => record.question);
  let largestDimension = 0;
  let memory = 0;
  const look = (ordinal: number): { readonly kernel: number; readonly statistics: number } => {
    const { spec } = grid.pointAt(ordinal);
    const extent = findModel(spec.model).extent(requestOf(spec));
    const cost = measureCost(extent);
    let statistics = 0;
    let bytes = cost.bytes;
    for (const question of questions) {
      const answered = answerCost(extent.dimension, question);
      statistics += answered.flops;
      bytes = Math.max(bytes, answered.bytes);
    }
    largestDimension = Math.max(largestDimension, extent.dimension);
    memory = Math.max(memory, bytes);
    return { kernel: cost.flops, statistics };
  };
  const budget = Math.max(100, Math.min(SAMPLE, Math.floor(ANSWERS / questions.length)));
  const whole = grid.points <= budget;
  const sampled = whole ? grid.points : budget;
  let kernel = 0;
  let statistics = 0;
  for (let i = 0; i < sampled; i++) {
    const cost = look(whole ? i : Math.floor((((i + 0.5) * GOLDEN) % 1) * grid.points));
    kernel += cost.kernel;
    statistics += cost.statistics;
  }
  if (!whole) for (const ordinal of ends(grid)) look(ordinal);
  const share = grid.points / sampled;
  const flops = { kernel: kernel * share, statistics: statistics * share, total: (kernel + statistics) * share };
  return {
    points: grid.points,
    questions: questions.length,
    cells: grid.cells,
    largestDimension,
    memory,
    flops,
    seconds: flops.total / (rate * threads),
    sampled,
  };
}

/** Ordinals with every axis at its first or last value; along axes beyond the sixteenth only the first. */
function ends(grid: Grid): readonly number[] {
  let ordinals = [0];
  let stride = grid.points;
  for (const axis of grid.axes.slice(0, 16)) {
    stride /= axis.values.length;
    if (axis.values.length === 1) continue;
    const last = (axis.values.length - 1) * stride;
    if (ordinals.length < SAMPLE) ordinals = ordinals.flatMap((ordinal) => [ordinal, ordinal + last]);
  }
  return ordinals;
}
