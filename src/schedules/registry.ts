/**
 * The schedule families by name, and the way from a schedule as written to a distribution. Adding a family: its file and one line here.
 *
 * Every family also takes `dead-time`, a time ≥ 0 added to each interval. Errors: schedule.unknown, schedule.parameter; `where` is the
 * parameter's key as in a sweep file.
 */
import { WindrowError } from '../core/errors.js';
import { nonNegativeTime } from './complement.js';
import { delayed } from './delayed.js';
import { empirical } from './empirical.js';
import { exponential } from './exponential.js';
import { fixed } from './fixed.js';
import { gamma } from './gamma.js';
import { inverseGaussian } from './inverse-gaussian.js';
import { truncatedNormal } from './truncated-normal.js';
import { twoPoint } from './two-point.js';
import type { IntervalDistribution, ScheduleFamily, ScheduleSpec } from './types.js';
import { uniform } from './uniform.js';

/** A family among others: whoever builds from it hands over parameters its own schema has passed. */
const anyFamily = <P>(family: ScheduleFamily<P>): ScheduleFamily => family;

const FAMILIES: readonly ScheduleFamily[] = [
  anyFamily(fixed),
  anyFamily(exponential),
  anyFamily(gamma),
  anyFamily(uniform),
  anyFamily(twoPoint),
  anyFamily(truncatedNormal),
  anyFamily(inverseGaussian),
  anyFamily(empirical),
];

export const scheduleFamilies: ReadonlyMap<string, ScheduleFamily> = new Map(FAMILIES.map((family) => [family.name, family]));

/** The schema of `dead-time`, which every family takes besides its own parameters. */
export const deadTimeParameter = nonNegativeTime('dead time added to every interval, ≥ 0').default(0);

const shown = (value: unknown): string => {
  const text = typeof value === 'number' || value === undefined ? String(value) : (JSON.stringify(value) ?? typeof value);
  return text.length > 80 ? `${text.slice(0, 79)}…` : text;
};

const isMapping = (raw: unknown): raw is Record<string, unknown> => typeof raw === 'object' && raw !== null && !Array.isArray(raw);

const valueAt = (raw: unknown, path: readonly PropertyKey[]): unknown =>
  path.reduce<unknown>((value, key) => (value as Record<PropertyKey, unknown> | undefined)?.[key], raw);

interface Parsed {
  readonly family: ScheduleFamily;
  readonly parameters: Record<string, number | readonly number[]>;
  readonly deadTime: number;
}

function parse(raw: unknown): Parsed {
  if (!isMapping(raw)) {
    throw new WindrowError('schedule.parameter', 'a schedule is not a mapping', {
      where: 'schedule',
      found: shown(raw),
      allowed: 'family: a name, and its parameters',
    });
  }
  const { family: name, 'dead-time': deadTime, ...own } = raw;
  const family = typeof name === 'string' ? scheduleFamilies.get(name) : undefined;
  if (family === undefined) {
    throw new WindrowError('schedule.unknown', `there is no schedule family ${shown(name)}`, {
      where: 'family',
      found: shown(name),
      allowed: [...scheduleFamilies.keys()].join(', '),
    });
  }
  const parameters = family.parameters.safeParse(own);
  const delay = deadTimeParameter.safeParse(deadTime);
  const problem = parameters.success ? delay.error?.issues[0] : parameters.error.issues[0];
  if (problem !== undefined) {
    const where = parameters.success
      ? 'dead-time'
      : problem.code === 'unrecognized_keys'
        ? problem.keys[0]
        : problem.path.map(String).join('.');
    const found = parameters.success ? deadTime : problem.code === 'unrecognized_keys' ? problem.keys[0] : valueAt(own, problem.path);
    throw new WindrowError('schedule.parameter', `${family.name} schedule: ${where} is not allowed`, {
      where,
      found: shown(found),
      allowed: problem.code === 'unrecognized_keys' ? parameterNames(family).join(', ') : allowedBy(problem.message),
    });
  }
  return { family, parameters: parameters.data as Parsed['parameters'], deadTime: delay.data as number };
}

/** zod's 'Too small: expected number to be >0' says more than is needed after 'allowed'. */
const allowedBy = (message: string): string => message.replace(/^(Too small|Too big|Invalid input): expected /, '');

/** Keys a family takes, `dead-time` last. */
export function parameterNames(family: ScheduleFamily): readonly string[] {
  const shape = (family.parameters as unknown as { readonly shape: Record<string, unknown> }).shape;
  return [...Object.keys(shape), 'dead-time'];
}

/**
 * A schedule as it enters an identity: checked, defaults filled in.
 * @throws WindrowError schedule.unknown, schedule.parameter
 */
export function canonicalSchedule(raw: unknown): ScheduleSpec {
  const { family, parameters, deadTime } = parse(raw);
  return { family: family.name, ...parameters, 'dead-time': deadTime };
}

/**
 * The distribution of a schedule.
 * @throws WindrowError schedule.unknown, schedule.parameter
 */
export function buildSchedule(spec: ScheduleSpec): IntervalDistribution {
  const { family, parameters, deadTime } = parse(spec);
  return delayed(family.build(parameters), deadTime);
}
