/**
 * The form of a job as it travels: what arrives from a queue is untrusted until it has passed here.
 *
 * `parseJob` checks the form, `verifyJob` that the ids are those of the content: a payload that names a point by another point's id
 * would store a result under the wrong name.
 */
import { z } from 'zod';
import { WindrowError } from '../core/errors.js';
import { pointId, questionId } from '../sweep/identity.js';
import type { Job } from './types.js';

/** Far above what a feeder makes; keeps a forged payload from tying up a worker. */
const MOST_POINTS = 10_000;
const MOST_QUESTIONS = 10_000;

const id = z.string().regex(/^[0-9a-f]{64}$/);
const count = z.int().nonnegative();
const name = z.string().min(1).max(1000);

const amplitude = z.union([z.number(), z.tuple([z.number(), z.number()])]);
const state: z.ZodType = z.lazy(() =>
  z.union([
    name,
    z.strictObject({ occupation: z.array(z.number()) }),
    z.strictObject({ product: name }),
    z.strictObject({ site: z.int() }),
    z.strictObject({ random: z.strictObject({ seed: z.int(), like: state.optional() }) }),
    z.strictObject({ uniform: z.strictObject({ like: state }) }),
    z.strictObject({
      'ground-state': z.strictObject({
        coupling: z.number().optional(),
        as: name.optional(),
        parameters: z.record(z.string(), z.json()).optional(),
        within: state.optional(),
      }),
    }),
    z.strictObject({ superposition: z.array(z.tuple([amplitude, state])) }),
  ]),
);

const pointSpec = z.strictObject({
  model: name,
  size: z.number(),
  coupling: z.number(),
  parameters: z.record(z.string(), z.json()),
  disorder: z.strictObject({ strength: z.number(), seed: z.int(), realisation: count }).nullable(),
  prepared: state,
  detected: state,
  certify: z.literal(true).optional(),
});

const resolution = z.union([z.literal('auto'), z.number()]);

const question = z.strictObject({
  schedule: z.looseObject({ family: name }),
  resolution: z.strictObject({ energy: resolution, weight: resolution }),
  budget: count,
  detector: z.strictObject({ efficiency: z.number() }),
  sampling: z.strictObject({ draws: count, seed: z.int() }).nullable(),
});

const job = z
  .strictObject({
    id,
    sweep: name,
    methodVersion: name,
    questions: z.array(z.strictObject({ id, ordinal: count, question })).max(MOST_QUESTIONS),
    points: z
      .array(z.strictObject({ id, spec: pointSpec, measured: z.boolean(), open: z.array(count) }))
      .min(1)
      .max(MOST_POINTS),
    memory: z.number().nonnegative(),
    cost: z.number().nonnegative(),
  })
  .refine(({ points, questions }) => points.every(({ open }) => open.every((index) => index < questions.length)), {
    error: 'an open question that the job does not have',
    path: ['points'],
  });

/** @throws queue.payload naming the first place that is not of the agreed form */
export function parseJob(payload: unknown): Job {
  let parsed;
  try {
    parsed = job.safeParse(payload);
  } catch (cause) {
    // Nesting deep enough to exhaust the stack.
    throw new WindrowError('queue.payload', 'a job that cannot be read', { cause });
  }
  if (parsed.success) return parsed.data as Job;
  const issue = parsed.error.issues[0];
  throw new WindrowError('queue.payload', `a job that is not of the agreed form: ${issue.message}`, { where: issue.path.join('.') });
}

/** @throws queue.payload where an id is not the digest of what it names */
export function verifyJob({ points, questions }: Job): void {
  const wrong =
    points.find((point) => pointId(point.spec) !== point.id)?.id ??
    questions.find((record) => questionId(record.question) !== record.id)?.id;
  if (wrong === undefined) return;
  throw new WindrowError('queue.payload', 'a job whose ids are not those of its content', { where: wrong });
}

/** @throws queue.version for a job of another method version than `allowed` */
export function checkVersion(job: Job, allowed: string): void {
  if (job.methodVersion === allowed) return;
  throw new WindrowError('queue.version', `a job of sweep '${job.sweep}' was made by another version of windrow: update the older one`, {
    where: `job ${job.id}`,
    found: job.methodVersion,
    allowed,
  });
}
