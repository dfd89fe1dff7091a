/**
 * Bundles missing points into jobs of about equal cost, so that a job is worth its round trip, progress is smooth and a drain is short:
 * many cheap points, or one costly one. Points keep their order.
 */
import { digest } from '../core/json.js';
import type { Job } from '../queue/types.js';
import type { MissingPoint } from '../store/types.js';
import type { PointSpec, QuestionRecord } from '../sweep/types.js';

/** Floating-point operations of a job: about half a second of one core at the 1 GFlop/s that the plain kernels reach. */
export const JOB_OPERATIONS = 5e8;
/** Bounds the payload of a job and the rows of its transaction where points cost next to nothing. */
export const JOB_POINTS = 250;

export interface PointCost {
  /** bytes */
  readonly memory: number;
  /** floating-point operations */
  readonly operations: number;
}

export interface BundlerOptions {
  readonly sweep: string;
  readonly methodVersion: string;
  readonly questions: readonly QuestionRecord[];
  /** default JOB_POINTS */
  readonly jobPoints?: number | undefined;
}

export interface Bundler {
  /** Takes a point; returns the jobs that are complete with it (none, one, or two). */
  push(point: MissingPoint, spec: PointSpec, cost: PointCost): readonly Job[];
  /** What is left, as a last job. */
  flush(): readonly Job[];
}

export function createBundler({ sweep, methodVersion, questions, jobPoints = JOB_POINTS }: BundlerOptions): Bundler {
  const indexOf = new Map(questions.map(({ id }, index) => [id, index]));
  let points: Job['points'][number][] = [];
  let memory = 0;
  let cost = 0;

  const flush = (): readonly Job[] => {
    if (points.length === 0) return [];
    const job = makeJob({ sweep, methodVersion, questions, points, memory, cost });
    points = [];
    memory = 0;
    cost = 0;
    return [job];
  };

  return {
    push(point, spec, estimate) {
      // A costly point does not take cheap ones with it: they would wait for it.
      const complete = cost + estimate.operations > JOB_OPERATIONS ? flush() : [];
      const open = point.questionIds.flatMap((id) => indexOf.get(id) ?? []);
      points.push({ id: point.id, spec, measured: point.measured, open });
      memory = Math.max(memory, estimate.memory);
      cost += estimate.operations;
      return cost >= JOB_OPERATIONS || points.length >= jobPoints ? [...complete, ...flush()] : complete;
    },
    flush,
  };
}

/** A job with its id, the digest of what is to be computed. */
function makeJob(content: Omit<Job, 'id'>): Job {
  const { sweep, methodVersion, questions, points } = content;
  return { id: digest([sweep, methodVersion, points.map(({ id, open }) => [id, open.map((index) => questions[index].id)])]), ...content };
}

/** The points of a job as jobs of their own. */
export function splitJob(job: Job): readonly Job[] {
  const { sweep, methodVersion, questions, points, memory } = job;
  return points.map((point) => makeJob({ sweep, methodVersion, questions, points: [point], memory, cost: job.cost / points.length }));
}
