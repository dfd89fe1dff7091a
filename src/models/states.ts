/**
 * States: from what a user writes to normalised amplitudes on product-basis labels.
 *
 * A label is a list of small integers that the family understands: an occupation list, or the position of one particle. Nothing here
 * knows the dimension of the space, so a state costs its number of terms. Guarantees: terms are distinct, nonzero and of norm 1;
 * every WindrowError (`state.unknown`, `state.invalid`) carries the key path, what was found and what is allowed.
 */
import type { StateSpec } from './types.js';
import { refusal } from './refusal.js';

export type Label = readonly number[];

export interface Term {
  readonly label: Label;
  readonly re: number;
  readonly im: number;
}

/** How a system reads and writes its basis labels. `where` is the key path for errors. */
export interface LabelReader {
  /** @throws WindrowError state.invalid */
  occupation(values: readonly unknown[], where: string): Label;
  /** @param site counted from 1. @throws WindrowError state.invalid */
  site(site: unknown, where: string): Label;
  /** The canonical way to write a label that has no name. */
  write(label: Label): StateSpec;
}

/** The states of one system: its labels and its named states. */
export interface StateSpace extends LabelReader {
  readonly names: readonly string[];
  /** Terms of a named state, in any normalisation. @throws WindrowError state.unknown, state.invalid */
  named(name: string, where: string): readonly Term[];
}

/** The basis state of a label. */
export const basisState = (label: Label): readonly Term[] => [{ label, re: 1, im: 0 }];

/** A deeper nesting than any state needs; stops runaway input. */
const DEEPEST = 16;
const FORMS = 'a state name, { occupation: […] }, { site: n } or { superposition: [[amplitude, state], …] }';

/** Cancelled sums leave rounding noise of this many ulp of their summands; it must not become a state. */
const NOISE = 8 * Number.EPSILON;

const keyOf = (label: Label): string => label.join(',');

function readAmplitude(value: unknown, where: string): readonly [number, number] {
  if (typeof value === 'number' && Number.isFinite(value)) return [value, 0];
  if (Array.isArray(value) && value.length === 2 && value.every((part) => typeof part === 'number' && Number.isFinite(part)))
    return [value[0] as number, value[1] as number];
  throw refusal('state.invalid', 'an amplitude is not a number', where, value, 'a finite number or [real, imaginary]');
}

type Shape =
  | { readonly kind: 'name'; readonly name: string }
  | { readonly kind: 'occupation'; readonly values: readonly unknown[] }
  | { readonly kind: 'site'; readonly site: unknown }
  | { readonly kind: 'superposition'; readonly terms: readonly (readonly [unknown, unknown])[] };

function shapeOf(spec: unknown, where: string): Shape {
  if (typeof spec === 'string') return { kind: 'name', name: spec };
  if (typeof spec === 'object' && spec !== null && !Array.isArray(spec)) {
    const entries = Object.entries(spec as Record<string, unknown>);
    const [key, value] = entries[0] ?? [];
    if (entries.length === 1 && key === 'site') return { kind: 'site', site: value };
    if (entries.length === 1 && key === 'occupation') {
      if (!Array.isArray(value))
        throw refusal('state.invalid', 'an occupation is not a list', `${where}.occupation`, value, 'a list of whole numbers');
      return { kind: 'occupation', values: value };
    }
    if (entries.length === 1 && key === 'superposition') {
      const terms: unknown = value;
      if (!Array.isArray(terms) || terms.length === 0 || !terms.every((term) => Array.isArray(term) && term.length === 2))
        throw refusal(
          'state.invalid',
          'a superposition is not a list of terms',
          `${where}.superposition`,
          value,
          '[[amplitude, state], …] with at least one term',
        );
      return { kind: 'superposition', terms: terms as [unknown, unknown][] };
    }
  }
  throw refusal('state.invalid', 'a state is written in a form that is not known', where, spec, FORMS);
}

function normalised(terms: readonly Term[], spec: unknown, where: string): readonly Term[] {
  const sums = new Map<string, { label: Label; re: number; im: number; size: number }>();
  const largest = terms.reduce((most, term) => Math.max(most, Math.abs(term.re), Math.abs(term.im)), 0);
  for (const { label, re, im } of terms) {
    if (re === 0 && im === 0) continue;
    const key = keyOf(label);
    let sum = sums.get(key);
    if (sum === undefined) sums.set(key, (sum = { label, re: 0, im: 0, size: 0 }));
    sum.re += re / largest;
    sum.im += im / largest;
    sum.size += (Math.abs(re) + Math.abs(im)) / largest;
  }
  const kept = [...sums.values()].filter((sum) => Math.hypot(sum.re, sum.im) > NOISE * sum.size);
  const norm = Math.sqrt(kept.reduce((square, term) => square + term.re * term.re + term.im * term.im, 0));
  if (!(norm > 0)) throw refusal('state.invalid', 'a superposition is the zero vector', where, spec, 'amplitudes that do not cancel');
  return kept.map(({ label, re, im }) => ({ label, re: re / norm, im: im / norm }));
}

/**
 * The normalised terms of a state. Inner superpositions are normalised before they are added; equal labels are summed.
 * @param where key path of the state, 'prepare' or 'detect'
 * @throws WindrowError state.unknown, state.invalid
 */
export function resolveState(space: StateSpace, spec: unknown, where: string, depth = 0): readonly Term[] {
  const shape = shapeOf(spec, where);
  if (shape.kind === 'name') return normalised(space.named(shape.name, where), spec, where);
  if (shape.kind === 'occupation') return basisState(space.occupation(shape.values, `${where}.occupation`));
  if (shape.kind === 'site') return basisState(space.site(shape.site, `${where}.site`));
  if (depth >= DEEPEST)
    throw refusal('state.invalid', 'superpositions are nested too deeply', where, spec, `at most ${DEEPEST} levels of superposition`);
  const terms: Term[] = [];
  shape.terms.forEach(([amplitude, inner], position) => {
    const [re, im] = readAmplitude(amplitude, `${where}.superposition.${position}.0`);
    for (const term of resolveState(space, inner, `${where}.superposition.${position}.1`, depth + 1))
      terms.push({ label: term.label, re: re * term.re - im * term.im, im: re * term.im + im * term.re });
  });
  return normalised(terms, spec, where);
}

/**
 * A state in the form that identifies it: basis states by the first name that means them, otherwise as the family writes the label;
 * amplitudes as numbers where they are real. Superpositions keep their terms and order.
 */
export function canonicalState(space: StateSpace, spec: unknown, where: string): StateSpec {
  const shape = shapeOf(spec, where);
  if (shape.kind === 'superposition') {
    return {
      superposition: shape.terms.map(([amplitude, inner], position) => {
        const [re, im] = readAmplitude(amplitude, `${where}.superposition.${position}.0`);
        return [im === 0 ? re : [re, im], canonicalState(space, inner, `${where}.superposition.${position}.1`)] as const;
      }),
    };
  }
  const terms = resolveState(space, spec, where);
  const label = terms[0]?.label;
  if (terms.length !== 1 || label === undefined) return spec as StateSpec;
  const key = keyOf(label);
  for (const name of space.names) {
    let candidate: readonly Term[];
    try {
      candidate = space.named(name, where);
    } catch {
      continue; // a name without meaning at this size
    }
    if (candidate.length === 1 && candidate[0] !== undefined && keyOf(candidate[0].label) === key) return name;
  }
  return space.write(label);
}
