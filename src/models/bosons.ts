/** What the families of bosons on a chain share: their number, hops between sites, named states. */
import { z } from 'zod';
import { basisState } from './states.js';
import type { NamedState } from './family-definition.js';
import type { Term } from './states.js';
import type { Configuration, Emit, SystemRequest } from './types.js';

/** The most a configuration entry holds. */
const MOST_PARTICLES = 65_535;

/** The parameter `particles`. */
export const bosonNumber = z
  .union([z.literal('size'), z.int().min(1).max(MOST_PARTICLES)])
  .default('size')
  .describe('number of bosons; size: one boson a site on average');

export interface BosonParameters {
  readonly particles: 'size' | number;
  /** Bosons a site holds; without it as many as there are. */
  readonly most?: number | 'particles';
}

type Request = SystemRequest<BosonParameters>;

export const particlesOf = ({ size, parameters: { particles } }: Request): number => (particles === 'size' ? size : particles);

/** Bosons a site holds. */
export function mostOf(request: Request): number {
  const { most } = request.parameters;
  return most === undefined || most === 'particles' ? particlesOf(request) : Math.min(most, particlesOf(request));
}

/**
 * `connect` of Σ_b t_b (b†_x b_y + h.c.) over bonds b = [x, y].
 * @param amplitudes t, one a bond
 * @param most bosons a site holds
 */
export function bosonHops(
  bonds: readonly (readonly [number, number])[],
  amplitudes: Float64Array,
  most: number,
): (n: Configuration, emit: Emit) => void {
  return (n, emit) => {
    const hop = (from: number, to: number, t: number): void => {
      if (n[from] === 0 || n[to] === most) return;
      const amplitude = t * Math.sqrt(n[from] * (n[to] + 1));
      n[from] -= 1;
      n[to] += 1;
      emit(amplitude);
      n[from] += 1;
      n[to] -= 1;
    };
    for (let b = 0; b < bonds.length; b += 1) {
      const [x, y] = bonds[b];
      hop(x, y, amplitudes[b]);
      hop(y, x, amplitudes[b]);
    }
  };
}

/** The bosons shared equally among the chosen sites; null where they cannot be. */
function shared(request: Request, chosen: (site: number) => boolean): readonly Term[] | null {
  const sites = Array.from({ length: request.size }, (_, site) => chosen(site));
  const each = particlesOf(request) / sites.filter(Boolean).length;
  return Number.isInteger(each) && each <= mostOf(request) ? basisState(sites.map((filled) => (filled ? each : 0))) : null;
}

export const bosonStates: readonly NamedState<BosonParameters>[] = [
  {
    name: 'unit-filling',
    meaning: 'one boson on every site',
    needs: 'as many bosons as sites',
    terms: (request) => (particlesOf(request) === request.size ? shared(request, () => true) : null),
  },
  {
    name: 'all-left',
    meaning: 'all bosons on the first site',
    needs: 'sites that hold all bosons',
    terms: (request) => shared(request, (site) => site === 0),
  },
  {
    name: 'all-right',
    meaning: 'all bosons on the last site',
    needs: 'sites that hold all bosons',
    terms: (request) => shared(request, (site) => site === request.size - 1),
  },
  {
    name: 'domain-wall',
    meaning: 'the left half of the sites filled evenly, the right half empty',
    needs: 'an even number of sites, and bosons that fill half of them evenly',
    terms: (request) => (request.size % 2 === 0 ? shared(request, (site) => site < request.size / 2) : null),
  },
  {
    name: 'density-wave',
    meaning: 'sites 1, 3, 5, … filled evenly, the others empty',
    needs: 'bosons that fill every other site evenly',
    terms: (request) => shared(request, (site) => site % 2 === 0),
  },
];
