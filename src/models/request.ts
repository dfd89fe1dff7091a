/** Checks of a request that do not depend on the family: size, coupling, disorder; and the way from untyped input to a request. */
import { refusal } from './refusal.js';
import { parseParameters } from './parameters.js';
import type { ModelFamily, StateSpec, SystemRequest } from './types.js';

/** What `checkRequest` reads: a request as it comes from a file or a message, nothing trusted. */
export interface RawRequest {
  readonly size: unknown;
  readonly coupling: unknown;
  readonly parameters?: unknown;
  readonly disorder?: unknown;
  readonly prepared: unknown;
  /** default 'same' */
  readonly detected?: unknown;
}

type Limits = Pick<ModelFamily, 'name' | 'size' | 'coupling' | 'disordered'>;

function checkDisorder(family: Limits, disorder: unknown): void {
  if (disorder === null) return;
  if (!family.disordered) throw refusal('model.parameter', `${family.name} has no disorder`, 'disorder', disorder, 'no disorder');
  if (typeof disorder !== 'object')
    throw refusal('model.parameter', 'disorder is not a mapping', 'disorder', disorder, 'strength, seed, realisation');
  const { strength, seed, realisation } = disorder as Record<string, unknown>;
  if (typeof strength !== 'number' || !Number.isFinite(strength) || strength < 0)
    throw refusal('model.parameter', 'the disorder strength is not allowed', 'disorder.strength', strength, 'a finite number ≥ 0');
  if (!Number.isSafeInteger(seed))
    throw refusal('model.parameter', 'the disorder seed is not allowed', 'disorder.seed', seed, 'a whole number');
  if (!Number.isSafeInteger(realisation) || (realisation as number) < 0)
    throw refusal('model.parameter', 'the disorder realisation is not allowed', 'disorder.realisation', realisation, 'a whole number ≥ 0');
}

/**
 * Size, coupling and disorder of a request.
 * @throws WindrowError model.size, model.coupling, model.parameter (disorder)
 */
export function checkCommon(
  family: Limits,
  request: { readonly size: unknown; readonly coupling: unknown; readonly disorder: unknown },
): void {
  const { size, coupling, disorder } = request;
  const { minimum, maximum, symbol, meaning } = family.size;
  if (!Number.isSafeInteger(size) || (size as number) < minimum || (size as number) > maximum) {
    const allowed = minimum === maximum ? String(minimum) : `a whole number from ${minimum} to ${maximum}`;
    throw refusal('model.size', `${family.name} has no such size ${symbol} (${meaning})`, 'size', size, allowed);
  }
  if (typeof coupling !== 'number' || !Number.isFinite(coupling))
    throw refusal(
      'model.coupling',
      `the coupling ${family.coupling.symbol} is not a finite number`,
      'coupling',
      coupling,
      'a finite number',
    );
  checkDisorder(family, disorder);
}

/**
 * Turns untyped input into a checked request: parameters by the family's schema, then the family's own check.
 * @throws WindrowError model.size, model.coupling, model.parameter, state.unknown, state.invalid
 */
export function checkRequest<P>(family: ModelFamily<P>, raw: RawRequest): SystemRequest<P> {
  const disorder = raw.disorder ?? null;
  checkCommon(family, { size: raw.size, coupling: raw.coupling, disorder });
  const request = {
    size: raw.size as number,
    coupling: raw.coupling as number,
    parameters: parseParameters(family, raw.parameters),
    disorder: disorder as SystemRequest['disorder'],
    prepared: raw.prepared as StateSpec,
    detected: (raw.detected ?? 'same') as StateSpec,
  };
  family.check(request);
  return request;
}
