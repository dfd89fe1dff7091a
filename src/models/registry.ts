/** The registry of model families: one line a family. */
import { WindrowError } from '../core/errors.js';
import { boseHubbardChain } from './bose-hubbard-chain.js';
import { boseHubbardDimer } from './bose-hubbard-dimer.js';
import { collectiveSpin } from './collective-spin.js';
import { completeGraph } from './complete-graph.js';
import { termList } from './custom/terms.js';
import { dipoleSpinOneChain } from './dipole-spin-one-chain.js';
import { eastHoppingChain } from './east-hopping-chain.js';
import { extendedBoseHubbardChain } from './extended-bose-hubbard-chain.js';
import { fermionChain } from './fermion-chain.js';
import { foldedXxzChain } from './folded-xxz-chain.js';
import { hypercube } from './hypercube.js';
import { isingChain } from './ising-chain.js';
import { pairFlipChain } from './pair-flip-chain.js';
import { pairHoppingChain } from './pair-hopping-chain.js';
import { pxpChain } from './pxp-chain.js';
import { quantumEastChain } from './quantum-east-chain.js';
import { randomMatrix } from './random-matrix.js';
import { spinOneChain } from './spin-one-chain.js';
import { tJzChain } from './t-jz-chain.js';
import { tightBinding } from './tight-binding.js';
import { twoLevel } from './two-level.js';
import { xxzChain } from './xxz-chain.js';
import type { ModelFamily } from './types.js';
import { showValue } from './refusal.js';

const families: readonly ModelFamily[] = [
  twoLevel,
  tightBinding,
  completeGraph,
  hypercube,
  boseHubbardDimer,
  boseHubbardChain,
  extendedBoseHubbardChain,
  fermionChain,
  xxzChain,
  isingChain,
  spinOneChain,
  collectiveSpin,
  pxpChain,
  quantumEastChain,
  eastHoppingChain,
  tJzChain,
  dipoleSpinOneChain,
  pairHoppingChain,
  pairFlipChain,
  foldedXxzChain,
  randomMatrix,
  termList,
];

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
