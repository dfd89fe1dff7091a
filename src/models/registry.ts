/** The registry of model families: one line a family. */
import { WindrowError } from '../core/errors.js';
import { boseHubbardChain } from './bose-hubbard-chain.js';
import { boseHubbardDimer } from './bose-hubbard-dimer.js';
import { tightBinding } from './tight-binding.js';
import { twoLevel } from './two-level.js';
import type { ModelFamily } from './types.js';
import { showValue } from './refusal.js';

const families: readonly ModelFamily[] = [twoLevel, tightBinding, boseHubbardDimer, boseHubbardChain];

export const modelFamilies: ReadonlyMap<string, ModelFamily> = new Map(families.map((family) => [family.name, family]));

/** @throws WindrowError model.unknown */
export function findModel(name: string): ModelFamily {
  const family = modelFamilies.get(name);
  if (family === undefined)
    throw new WindrowError('model.unknown', `there is no model family ${showValue(name)}`, {
      where: 'model',
      found: showValue(name),
      allowed: [...modelFamilies.keys()].join(', '),
    });
  return family;
}
