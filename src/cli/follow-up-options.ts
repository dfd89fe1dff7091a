/**
 * Follow-up questions on the command line: `map NAME --schedule …` asks a stored sweep what it was not swept for.
 *
 * The question is the sweep's own with some parts replaced, so `--budget 5000` alone keeps schedules, resolution and efficiency. What is
 * new is computed from the stored measures, stored, and found again the next time.
 */
import type { Command } from 'commander';
import { parse as parseYaml } from 'yaml';
import { samePlace } from '../analysis/cut.js';
import { WindrowError } from '../core/errors.js';
import type { Json } from '../core/json.js';
import { followUp, type FollowUpSummary } from '../coordinator/follow-up.js';
import { formatCount } from '../report/format.js';
import type { ResultStore } from '../store/types.js';
import { expandQuestions } from '../sweep/questions.js';
import { readIntervalsFile } from '../sweep/read-file.js';
import { documentFromJson } from '../sweep/read.js';
import type { QuestionRecord } from '../sweep/types.js';
import { memoryLimit, openPool } from './compose.js';
import { type Context, EXIT, type ExitStatus, say } from './context.js';
import { collect, computeOptions, parseQuestions } from './options.js';
import { progressView } from './progress.js';
import { requireQuestions, type Selection, type StoredSweep } from './stored-sweep.js';

export interface FollowUpOptions {
  readonly question?: string;
  readonly schedule?: string[];
  readonly budget?: string;
  readonly energyResolution?: string;
  readonly weightResolution?: string;
  readonly efficiency?: string;
}

export function followUpOptions(command: Command): Command {
  return computeOptions(
    command
      .option('--schedule <yaml>', "ask for this schedule, such as '{ family: exponential, mean: [0.1, 0.2] }'; may be repeated", collect)
      .option('--budget <numbers>', 'ask for these numbers of measurements, such as 100,1000')
      .option('--energy-resolution <numbers>', 'ask for this energy resolution, or auto')
      .option('--weight-resolution <numbers>', 'ask for this weight resolution, or auto')
      .option('--efficiency <numbers>', 'ask for this efficiency of the detector'),
  );
}

function yaml(option: string, text: string): unknown {
  try {
    return parseYaml(text) as unknown;
  } catch (cause) {
    throw new WindrowError('cli.usage', 'an option that cannot be understood', { where: option, found: text, allowed: 'YAML', cause });
  }
}

/** '0.5', '[0.5, 1]', '0.5,1' or '{ from: 0.5, to: 1, count: 6 }', as an axis of a sweep file. */
function axis(option: string, text: string): unknown {
  return yaml(option, /^[^[{]*,/.test(text) ? `[${text}]` : text);
}

/** An empirical schedule may name a file of intervals, as in a sweep file. */
function scheduleEntry(text: string): unknown {
  const entry = yaml('--schedule', text);
  if (typeof entry === 'string') return { family: entry };
  const { file, ...others } = (entry ?? {}) as { file?: unknown; family?: unknown };
  if (others.family !== 'empirical' || typeof file !== 'string') return entry;
  return { ...others, intervals: { values: [readIntervalsFile(file)] } };
}

export function asksFollowUp({ schedule, budget, energyResolution, weightResolution, efficiency }: FollowUpOptions): boolean {
  return [schedule, budget, energyResolution, weightResolution, efficiency].some((option) => option !== undefined);
}

/**
 * The questions that the options stand for, with the sweep's own answer to whatever they leave open.
 * @throws WindrowError cli.usage, and whatever a sweep file with such values is refused with
 */
export function askedQuestions(document: Json, options: FollowUpOptions): readonly Omit<QuestionRecord, 'ordinal'>[] {
  const own = document as { readonly [key: string]: Json } & { readonly resolution?: object };
  const { schedule, budget, energyResolution, weightResolution, efficiency } = options;
  const asked = {
    ...own,
    ...(schedule === undefined ? {} : { schedules: schedule.map(scheduleEntry) }),
    ...(budget === undefined ? {} : { budget: axis('--budget', budget) }),
    resolution: {
      ...own.resolution,
      ...(energyResolution === undefined ? {} : { energy: axis('--energy-resolution', energyResolution) }),
      ...(weightResolution === undefined ? {} : { weight: axis('--weight-resolution', weightResolution) }),
    },
    ...(efficiency === undefined ? {} : { detector: { efficiency: axis('--efficiency', efficiency) } }),
  };
  return expandQuestions(documentFromJson(asked as unknown as Json));
}

function words({ questions, computed, stored, measures, unmeasured }: FollowUpSummary, sweep: string): string {
  const numbers = questions.map(({ ordinal }) => ordinal).join(', ');
  const what = questions.length === 1 ? `question ${numbers} of ${sweep}` : `questions ${numbers} of ${sweep}`;
  const answer =
    computed === 0
      ? stored === 0
        ? 'no measure to answer from'
        : 'every cell was in the store already'
      : `${formatCount(computed)} cells computed from ${formatCount(measures)} stored measures, nothing diagonalised` +
        (stored === 0 ? '' : `; ${formatCount(stored)} were in the store already`);
  const gap =
    unmeasured === 0 ? '' : `; ${formatCount(unmeasured)} cells have no measure, \`windrow resume ${sweep}\` computes what can be`;
  return `windrow: ${what}: ${answer}${gap}`;
}

export interface Followed {
  /** numbers of the questions to show; undefined for all */
  readonly questions: readonly number[] | undefined;
  readonly status: ExitStatus;
}

/**
 * What the options select: stored questions by number, or follow-up questions, which are answered first.
 * @param at restricts what is computed to the places that will be shown
 * @throws WindrowError `cli.usage`, and whatever a sweep file with such values is refused with
 */
export async function followedQuestions(
  context: Context,
  store: ResultStore,
  sweep: StoredSweep,
  options: FollowUpOptions,
  at: Selection['at'] = {},
): Promise<Followed> {
  if (!asksFollowUp(options)) {
    const stored = parseQuestions(options.question);
    requireQuestions(sweep, stored ?? []);
    return { questions: stored, status: EXIT.done };
  }
  if (options.question !== undefined) {
    throw new WindrowError('cli.usage', 'questions are chosen twice', {
      where: '--question',
      found: 'with a schedule, budget, resolution or efficiency to ask for',
      allowed: 'either stored questions by their numbers, or new ones',
    });
  }
  const { name, axes, points } = sweep.grid;
  const questions = askedQuestions(sweep.record.document, options);
  const fixed = axes.filter((axis) => axis.name in at);
  const view = progressView(context);
  const begun = performance.now();
  let summary: FollowUpSummary;
  try {
    summary = await followUp({
      sweep: name,
      questions,
      store,
      pool: openPool(context),
      memory: memoryLimit(context.settings),
      places: {
        wanted: ({ spec, coordinates }) => samePlace({ size: spec.size, coupling: spec.coupling, ...coordinates }, at),
        count: fixed.reduce((count, { values }) => count / values.length, points),
      },
      signal: context.signal,
      onProgress: ({ total, stored, computed }) =>
        view.show({
          sweep: name,
          phase: 'feeding',
          points,
          cells: total,
          storedPoints: points,
          storedCells: stored + computed,
          failedPoints: 0,
          reusedCells: stored,
          seconds: (performance.now() - begun) / 1000,
        }),
    });
  } finally {
    view.close();
  }
  say(context, words(summary, name));
  for (const { count, code, message } of summary.failures)
    say(context, `windrow: ${formatCount(count)} measures gave no answer: ${message} (${code})`);
  return {
    questions: [...new Set(summary.questions.map(({ ordinal }) => ordinal))],
    status: summary.failures.length > 0 ? EXIT.failedPoints : EXIT.done,
  };
}
