/**
 * Whether a sum of groups is Hermitian, decided for the operator itself and not for some configurations of it.
 *
 * A group that is Hermitian on its own needs no more. What is left of the others is written in a basis of operators in which every sum is
 * unique: a site carries the identity, or |b⟩⟨a| other than |0⟩⟨0|, as |0⟩⟨0| = 1 − Σ_{v>0} |v⟩⟨v|.
 */
import { digit } from './term-matrix.js';
import type { Element, Group } from './term-matrix.js';

/** Sums of a few products of square roots cancel up to some units of rounding of what was added. */
export const ROUNDING = 32 * Number.EPSILON;

const negligible = ({ re, im, size }: Pick<Element, 're' | 'im' | 'size'>): boolean => Math.abs(re) + Math.abs(im) <= ROUNDING * size;

type Mirrored = Pick<Element, 're' | 'im' | 'size'>;

const mirror = (group: Group, { from, to }: Element): Mirrored => group.elements.get(to * group.codes + from) ?? { re: 0, im: 0, size: 0 };

/** The first term whose part of H − H† does not vanish; null for a Hermitian sum. */
export function nonHermitianTerm(groups: readonly Group[], levels: number): number | null {
  const rest = new Map<string, Mirrored & { term: number }>();
  const collect = (group: Group, from: number, to: number, term: number, { re, im, size }: Mirrored): void => {
    for (const [key, sign] of expansion(group, from, to, levels)) {
      const held = rest.get(key) ?? { re: 0, im: 0, size: 0, term };
      rest.set(key, { re: held.re + sign * re, im: held.im + sign * im, size: held.size + size, term: Math.min(held.term, term) });
    }
  };
  for (const group of groups) {
    for (const element of group.elements.values()) {
      const { from, to, term } = element;
      const other = mirror(group, element);
      const difference = { re: element.re - other.re, im: element.im + other.im, size: element.size + other.size };
      if (negligible(difference)) continue;
      collect(group, from, to, term, difference);
      // Its mirror image is not met by itself where no term has that element.
      if (other.size === 0) collect(group, to, from, term, { ...difference, re: -difference.re });
    }
  }
  let first: number | null = null;
  for (const sum of rest.values()) if (!negligible(sum) && (first === null || sum.term < first)) first = sum.term;
  return first;
}

/** The basis operators of |to⟩⟨from|, as keys, with their signs. */
function* expansion(group: Group, from: number, to: number, levels: number, slot = 0): IterableIterator<readonly [string, number]> {
  if (slot === group.sites.length) {
    yield [group.strings.length === 0 ? '' : `sign ${group.strings.join()}`, 1];
    return;
  }
  const [a, b] = [digit(from, slot, levels), digit(to, slot, levels)];
  const at = (before: number, after: number): string => `${group.sites[slot]}:${before}>${after} `;
  for (const [key, sign] of expansion(group, from, to, levels, slot + 1)) {
    if (a !== 0 || b !== 0) yield [at(a, b) + key, sign];
    else {
      yield [key, sign];
      for (let v = 1; v < levels; v += 1) yield [at(v, v) + key, -sign];
    }
  }
}

/** (H + H†)/2 of a group, equal to its mirror image to the last bit, without the elements that cancelled. */
export function symmetrised(group: Group): readonly Element[] {
  const kept: Element[] = [];
  const done = new Set<number>();
  for (const element of group.elements.values()) {
    const { from, to } = element;
    if (done.has(from * group.codes + to)) continue;
    const other = mirror(group, element);
    const half = { re: (element.re + other.re) / 2, im: (element.im - other.im) / 2, size: (element.size + other.size) / 2 };
    done.add(from * group.codes + to).add(to * group.codes + from);
    if (negligible(half)) continue;
    kept.push({ ...element, ...half, im: from === to ? 0 : half.im });
    if (from !== to) kept.push({ ...element, ...half, from: to, to: from, im: -half.im });
  }
  return kept;
}
