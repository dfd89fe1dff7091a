/**
 * Hamiltonians that are sums of local moves: on some sites one pattern of local values is replaced by another, with an amplitude. Every
 * move stands for itself and its conjugate, so the matrix is symmetric by construction.
 */
import { basisState } from './states.js';
import type { Term } from './states.js';
import type { Configuration, Emit } from './types.js';

export interface LocalTerm {
  /** The lists of sites the moves act on, all of one length. */
  readonly windows: readonly (readonly number[])[];
  /** One amplitude a window. */
  readonly amplitudes: ArrayLike<number>;
  /** Patterns that are exchanged, one character a site, with the factor of the amplitude (default 1). Each pair once. */
  readonly moves: readonly (readonly [string, string, number?])[];
}

interface Table {
  readonly term: LocalTerm;
  /** pattern, as a number in base `levels` → what it turns into */
  readonly targets: readonly (readonly { readonly values: readonly number[]; readonly factor: number }[])[];
}

function tabulate(term: LocalTerm, symbols: string): Table {
  const read = (pattern: string): number[] => Array.from(pattern, (symbol) => symbols.indexOf(symbol));
  const code = (values: readonly number[]): number => values.reduce((sum, value) => sum * symbols.length + value, 0);
  const targets: { values: number[]; factor: number }[][] = [];
  for (const [one, other, factor = 1] of term.moves) {
    const [from, to] = [read(one), read(other)];
    (targets[code(from)] ??= []).push({ values: to, factor });
    (targets[code(to)] ??= []).push({ values: from, factor });
  }
  return { term, targets };
}

/**
 * `connect` of a sum of terms.
 * @param symbols the local states in the order of their values, as the patterns write them
 */
export function localMoves(symbols: string, terms: readonly LocalTerm[]): (c: Configuration, emit: Emit) => void {
  const tables = terms.map((term) => tabulate(term, symbols));
  const levels = symbols.length;
  return (c, emit) => {
    for (const { term, targets } of tables) {
      for (let w = 0; w < term.windows.length; w += 1) {
        const sites = term.windows[w];
        let code = 0;
        for (let k = 0; k < sites.length; k += 1) code = code * levels + c[sites[k]];
        const found = targets[code];
        if (found === undefined) continue;
        const held = sites.map((x) => c[x]);
        for (const { values, factor } of found) {
          for (let k = 0; k < sites.length; k += 1) c[sites[k]] = values[k];
          emit(factor * term.amplitudes[w]);
        }
        for (let k = 0; k < sites.length; k += 1) c[sites[k]] = held[k];
      }
    }
  };
}

/** The basis state that repeats a pattern along the chain: 'ud' is up on sites 1, 3, 5, …. */
export function repeated(symbols: string, sites: number, pattern: string): readonly Term[] {
  return basisState(Array.from({ length: sites }, (_, x) => symbols.indexOf(pattern[x % pattern.length])));
}

/** The basis state with one symbol on the left half of the chain (the larger half of an odd one) and another on the right. */
export function halves(symbols: string, sites: number, left: string, right: string): readonly Term[] {
  return basisState(Array.from({ length: sites }, (_, x) => symbols.indexOf(2 * x < sites ? left : right)));
}
