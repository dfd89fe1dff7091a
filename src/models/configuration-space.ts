/**
 * Sets of configurations told by a rule that reads them site by site, and their numbering.
 *
 * A rule is a finite automaton: its state, a short list of integers, carries the partial conserved numbers and what a constraint has to
 * remember. Counting the ways to go on from every state gives the dimension, and each configuration's number in lexicographic order,
 * without listing any. Counts are doubles: exact up to 2^53.
 */
import { WindrowError } from '../core/errors.js';
import type { Configuration, ConfigurationSpace } from './types.js';

type Tuple = readonly number[];

export interface ConfigurationRule {
  readonly sites: number;
  /** Values a site takes: 0 … levels − 1. */
  readonly levels: number;
  readonly start: Tuple;
  /** The state after one more site has been read; null where nothing allowed begins like this. */
  step(state: Tuple, value: number, site: number): Tuple | null;
  /** The conserved numbers of a whole configuration; null where it is not allowed. */
  finish(state: Tuple): Tuple | null;
}

/** All configurations, nothing conserved. */
export function freeRule(sites: number, levels: number): ConfigurationRule {
  return { sites, levels, start: [], step: (state) => state, finish: (state) => state };
}

/** All configurations; each site adds to conserved numbers, `charges(value, site)` one entry a number. */
export function chargeRule(sites: number, levels: number, charges: (value: number, site: number) => Tuple): ConfigurationRule {
  return {
    sites,
    levels,
    start: charges(0, 0).map(() => 0),
    step(state, value, site) {
      const added = charges(value, site);
      return state.map((sum, i) => sum + added[i]);
    },
    finish: (state) => state,
  };
}

/** Configurations whose values sum to `total`. */
export function totalRule(sites: number, levels: number, total: number): ConfigurationRule {
  return {
    sites,
    levels,
    start: [0],
    step: ([sum], value, site) => {
      const now = sum + value;
      return now <= total && now + (sites - 1 - site) * (levels - 1) >= total ? [now] : null;
    },
    finish: (state) => state,
  };
}

/**
 * Conserves the sum Q of the charges and the dipole moment P = Σ x q_x, on a ring of L sites P modulo L.
 * @param charge q of a value
 */
export function dipoleRule(sites: number, levels: number, ring: boolean, charge: (value: number) => number): ConfigurationRule {
  return {
    sites,
    levels,
    start: [0, 0],
    step([total, moment], value, site) {
      const next = moment + site * charge(value);
      return [total + charge(value), ring ? ((next % sites) + sites) % sites : next];
    },
    finish: (state) => state,
  };
}

/** The conserved numbers of a configuration, null where the rule refuses it. */
export function chargesOf(rule: ConfigurationRule, configuration: ArrayLike<number>): Tuple | null {
  let state: Tuple | null = rule.start;
  for (let site = 0; site < rule.sites && state !== null; site += 1) state = rule.step(state, configuration[site], site);
  return state === null ? null : rule.finish(state);
}

export const chargeKey = (charges: Tuple): string => charges.join(',');

/** Transitions that are kept; 12 bytes each. */
const MOST_TRANSITIONS = 2 ** 24;

interface Layer {
  /** state × levels + value → number of the next state, −1 where there is none */
  readonly next: Int32Array;
  /** state × levels + value → configurations that go on with a smaller value */
  readonly before: Float64Array;
}

/**
 * The configurations a rule allows, or those of given conserved numbers.
 * @param charges keys (`chargeKey`) of the conserved numbers that are kept; null keeps all
 * @throws WindrowError point.too-large where the rule has too many states to be tabulated
 */
export function configurationSpace(rule: ConfigurationRule, charges: ReadonlySet<string> | null = null): NumberedSpace {
  const { sites, levels } = rule;
  const steps: Int32Array[] = [];
  let states: readonly Tuple[] = [rule.start];
  let transitions = 0;
  for (let site = 0; site < sites; site += 1) {
    transitions += states.length * levels;
    if (transitions > MOST_TRANSITIONS)
      throw new WindrowError('point.too-large', 'the conserved numbers of this space take too many values to be counted', {
        found: `more than ${MOST_TRANSITIONS} transitions`,
        allowed: 'fewer sites or particles',
      });
    const numbers = new Map<string, number>();
    const following: Tuple[] = [];
    const next = new Int32Array(states.length * levels).fill(-1);
    states.forEach((state, from) => {
      for (let value = 0; value < levels; value += 1) {
        const to = rule.step(state, value, site);
        if (to === null) continue;
        const key = chargeKey(to);
        let number = numbers.get(key);
        if (number === undefined) {
          numbers.set(key, (number = following.length));
          following.push(to);
        }
        next[from * levels + value] = number;
      }
    });
    steps.push(next);
    states = following;
  }
  let counts = Float64Array.from(states, (state) => {
    const found = rule.finish(state);
    return found !== null && (charges === null || charges.has(chargeKey(found))) ? 1 : 0;
  });
  const layers = new Array<Layer>(sites);
  for (let site = sites - 1; site >= 0; site -= 1) {
    const next = steps[site];
    const before = new Float64Array(next.length);
    const sums = new Float64Array(next.length / levels);
    for (let from = 0; from < sums.length; from += 1) {
      for (let at = from * levels; at < (from + 1) * levels; at += 1) {
        before[at] = sums[from];
        if (next[at] < 0) continue;
        if (counts[next[at]] === 0) next[at] = -1;
        else sums[from] += counts[next[at]];
      }
    }
    layers[site] = { next, before };
    counts = sums;
  }
  return new NumberedSpace(sites, levels, counts[0], layers);
}

export class NumberedSpace implements ConfigurationSpace {
  readonly sites: number;
  readonly levels: number;
  readonly dimension: number;
  private readonly layers: readonly Layer[];

  constructor(sites: number, levels: number, dimension: number, layers: readonly Layer[]) {
    this.sites = sites;
    this.levels = levels;
    this.dimension = dimension;
    this.layers = layers;
  }

  rank(configuration: ArrayLike<number>): number {
    let rank = 0;
    let state = 0;
    for (let site = 0; site < this.sites; site += 1) {
      const value = configuration[site];
      if (value >= this.levels) return -1;
      const { next, before } = this.layers[site];
      const at = state * this.levels + value;
      state = next[at];
      if (state < 0) return -1;
      rank += before[at];
    }
    return rank;
  }

  read(rank: number, out: Configuration): void {
    let rest = rank;
    let state = 0;
    for (let site = 0; site < this.sites; site += 1) {
      const { next, before } = this.layers[site];
      const first = state * this.levels;
      let at = first + this.levels - 1;
      while (next[at] < 0 || before[at] > rest) at -= 1;
      rest -= before[at];
      out[site] = at - first;
      state = next[at];
    }
  }

  /** All configurations in order; for small spaces. */
  list(): number[][] {
    const configuration = new Uint16Array(this.sites);
    return Array.from({ length: this.dimension }, (_, rank) => {
      this.read(rank, configuration);
      return [...configuration];
    });
  }

  /**
   * A configuration drawn evenly from the space.
   * @param uniform numbers in [0, 1), one is taken a site
   */
  draw(uniform: () => number): number[] {
    let size = this.dimension;
    let state = 0;
    return this.layers.map(({ next, before }, site) => {
      const first = state * this.levels;
      const point = uniform() * size;
      let at = first + this.levels - 1;
      while (at > first && (next[at] < 0 || before[at] > point)) at -= 1;
      while (next[at] < 0) at += 1;
      // The configurations that begin like this: up to the next value that goes on, or to the end.
      size = this.countAfter(site, at, first + this.levels, size);
      state = next[at];
      return at - first;
    });
  }

  private countAfter(site: number, at: number, end: number, size: number): number {
    const { next, before } = this.layers[site];
    for (let later = at + 1; later < end; later += 1) if (next[later] >= 0) return before[later] - before[at];
    return size - before[at];
  }
}
