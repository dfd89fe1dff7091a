/** One-dimensional lattices: their bonds, and on-site energies with or without disorder. */
import { z } from 'zod';
import { randomStream } from '../core/random.js';
import { refusal } from './refusal.js';
import type { Disorder } from './types.js';

export type Geometry = 'ring' | 'line';

/** The parameter of that name, the same words in every family. */
export const geometryParameter = z
  .enum(['ring', 'line'])
  .default('ring')
  .describe('ring: the last site is joined to the first (each bond counts once, so two sites share one bond); line: open ends');

/** Energies given by hand; see `siteEnergies`. */
export const onsiteParameter = z
  .union([z.number(), z.array(z.number()).min(1)])
  .default(0)
  .describe('on-site energy: one number for all sites, or a list with one number a site');

/** Nearest-neighbour bonds [x, y] of sites 0 … sites − 1, y = x + 1 or, on a ring of more than two sites, the closing bond [sites − 1, 0]. */
export function bonds(sites: number, geometry: Geometry): readonly (readonly [number, number])[] {
  const list: [number, number][] = [];
  for (let x = 0; x + 1 < sites; x += 1) list.push([x, x + 1]);
  if (geometry === 'ring' && sites > 2) list.push([sites - 1, 0]);
  return list;
}

/** @throws WindrowError model.parameter where a list of on-site energies has not one number a site */
export function checkOnsite(onsite: number | readonly number[], sites: number): void {
  if (typeof onsite !== 'number' && onsite.length !== sites)
    throw refusal(
      'model.parameter',
      `onsite has ${onsite.length} energies, the system ${sites} sites`,
      'parameters.onsite',
      onsite,
      `one number, or a list of ${sites} numbers`,
    );
}

/**
 * Energies ε_x of sites x = 1 … sites: `onsite` plus, with disorder, W(r_x − 1/2) with r_x uniform in [0, 1) drawn in the order of
 * the sites. The r_x depend on (seed, realisation) only, so a scan of W stretches one landscape.
 */
export function siteEnergies(onsite: number | readonly number[], disorder: Disorder | null, sites: number): Float64Array {
  const energies = typeof onsite === 'number' ? new Float64Array(sites).fill(onsite) : Float64Array.from(onsite);
  if (disorder !== null && disorder.strength !== 0) {
    const stream = randomStream(disorder.seed, 'disorder', disorder.realisation);
    for (let x = 0; x < sites; x += 1) energies[x] += disorder.strength * (stream.uniform() - 0.5);
  }
  return energies;
}
