/**
 * Sums of products of local operators as one sparse matrix for every set of sites they act on.
 *
 * Fermions are ordered by site: c_x carries a sign for every fermion on a site before x. The part of that sign which is due to sites the
 * product does not act on is kept as a list of such sites, the rest is in the matrix.
 */
import type { Factor } from './local-operators.js';

/** ⟨to|O|from⟩ of one set of sites; `size` is the sum of the magnitudes that were added, the scale of its rounding. */
export interface Element {
  readonly from: number;
  readonly to: number;
  re: number;
  im: number;
  size: number;
  /** position of the first term that contributes */
  readonly term: number;
}

export interface Group {
  /** ascending; the first is the lowest digit of a code */
  readonly sites: readonly number[];
  /** sites in between whose fermions change the sign */
  readonly strings: readonly number[];
  /** number of codes: levels^(number of sites) */
  readonly codes: number;
  /** key from · codes + to */
  readonly elements: Map<number, Element>;
}

export const digit = (code: number, slot: number, levels: number): number => Math.floor(code / levels ** slot) % levels;

interface Amplitude {
  readonly re: number;
  readonly im: number;
}

export interface MatrixElement extends Amplitude {
  readonly from: number;
  readonly to: number;
}

/**
 * The elements of a product on its own sites.
 * @param slots place of a factor → position of its site among the ascending sites
 */
export function productMatrix(
  factors: readonly Factor[],
  slots: readonly number[],
  width: number,
  levels: number,
): readonly MatrixElement[] {
  const all: MatrixElement[] = [];
  for (let from = 0; from < levels ** width; from += 1) {
    let states = new Map<number, Amplitude>([[from, { re: 1, im: 0 }]]);
    for (let f = factors.length - 1; f >= 0 && states.size > 0; f -= 1) states = apply(factors[f], slots[factors[f].place], states, levels);
    for (const [to, { re, im }] of states) if (re !== 0 || im !== 0) all.push({ from, to, re, im });
  }
  return all;
}

function apply({ operator }: Factor, slot: number, states: ReadonlyMap<number, Amplitude>, levels: number): Map<number, Amplitude> {
  const next = new Map<number, Amplitude>();
  for (const [code, amplitude] of states) {
    const value = digit(code, slot, levels);
    let sign = 1;
    if (operator.odd) for (let before = 0; before < slot; before += 1) if (digit(code, before, levels) === 1) sign = -sign;
    for (const step of operator.steps[value]) {
      const to = code + (step.to - value) * levels ** slot;
      const held = next.get(to) ?? { re: 0, im: 0 };
      next.set(to, {
        re: held.re + sign * (amplitude.re * step.re - amplitude.im * step.im),
        im: held.im + sign * (amplitude.re * step.im + amplitude.im * step.re),
      });
    }
  }
  return next;
}

/** Sites the product does not act on with an odd number of its c and cdag behind them. */
export function stringsOf(factors: readonly Factor[], list: readonly number[], sites: readonly number[]): number[] {
  const odd = factors.filter((factor) => factor.operator.odd).map((factor) => list[factor.place]);
  const strings: number[] = [];
  for (let x = 0; x < Math.max(-1, ...odd); x += 1) if (!sites.includes(x) && odd.filter((y) => y > x).length % 2 === 1) strings.push(x);
  return strings;
}

/** Adds factor × matrix to a group, and its Hermitian conjugate where asked. */
export function addTo(group: Group, matrix: readonly MatrixElement[], factor: Amplitude, hc: boolean, term: number): void {
  const add = (from: number, to: number, re: number, im: number): void => {
    const key = from * group.codes + to;
    let element = group.elements.get(key);
    if (element === undefined) group.elements.set(key, (element = { from, to, re: 0, im: 0, size: 0, term }));
    element.re += re;
    element.im += im;
    element.size += Math.abs(re) + Math.abs(im);
  };
  for (const { from, to, re, im } of matrix) {
    const [x, y] = [factor.re * re - factor.im * im, factor.re * im + factor.im * re];
    add(from, to, x, y);
    if (hc) add(to, from, x, -y);
  }
}
