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

/** The same for spins. */
export const fieldParameter = z
  .union([z.number(), z.array(z.number()).min(1)])
  .default(0)
  .describe('longitudinal field h: one number for all sites, or a list with one number a site');

/** What the disorder of a family with moves of its own makes random. */
export type Randomness = 'onsite' | 'hops' | 'both';

export const randomParameter = z
  .enum(['onsite', 'hops', 'both'])
  .default('onsite')
  .describe('what disorder of width W makes random: onsite energies (fields); hops, the amplitude of each off-diagonal term; or both');

/**
 * Stretches of `width` neighbouring sites, as lists of sites. On a ring each site begins one, provided it holds as many sites and no two
 * stretches are the same pair.
 */
export function windows(sites: number, width: number, geometry: Geometry): readonly (readonly number[])[] {
  const closed = geometry === 'ring' && sites >= Math.max(width, 3);
  const count = closed ? sites : Math.max(0, sites - width + 1);
  return Array.from({ length: count }, (_, x) => Array.from({ length: width }, (__, k) => (x + k) % sites));
}

/** Pairs of sites two apart, each once. */
export function nextNeighbours(sites: number, geometry: Geometry): readonly (readonly [number, number])[] {
  const list: [number, number][] = [];
  for (let x = 0; x + 2 < sites; x += 1) list.push([x, x + 2]);
  // On a ring of four the two pairs are met from both ends.
  if (geometry === 'ring' && sites > 2 && sites !== 4) list.push([sites - 2, 0], [sites - 1, 1]);
  return list;
}

/** Nearest-neighbour bonds [x, y] of sites 0 … sites − 1, y = x + 1 or, on a ring of more than two sites, the closing bond [sites − 1, 0]. */
export function bonds(sites: number, geometry: Geometry): readonly (readonly [number, number])[] {
  const list: [number, number][] = [];
  for (let x = 0; x + 1 < sites; x += 1) list.push([x, x + 1]);
  if (geometry === 'ring' && sites > 2) list.push([sites - 1, 0]);
  return list;
}

/**
 * @param name of the parameter
 * @throws WindrowError model.parameter where a list of on-site energies has not one number a site
 */
export function checkOnsite(onsite: number | readonly number[], sites: number, name = 'onsite'): void {
  if (typeof onsite !== 'number' && onsite.length !== sites)
    throw refusal(
      'model.parameter',
      `${name} has ${onsite.length} energies, the system ${sites} sites`,
      `parameters.${name}`,
      onsite,
      `one number, or a list of ${sites} numbers`,
    );
}

/**
 * Amplitudes of the terms of one kind: `amplitude`, plus W(r_x − 1/2) where disorder makes them random. The r_x depend on (seed,
 * realisation, kind) only.
 * @param kind tells terms of several kinds apart
 */
export function termAmplitudes(
  amplitude: number,
  disorder: Disorder | null,
  random: Randomness,
  count: number,
  kind: string | number = '',
): Float64Array {
  const amplitudes = new Float64Array(count).fill(amplitude);
  if (disorder === null || disorder.strength === 0 || random === 'onsite') return amplitudes;
  const stream = randomStream(disorder.seed, 'hops', disorder.realisation, kind);
  return amplitudes.map((value) => value + disorder.strength * (stream.uniform() - 0.5));
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
