/**
 * States: from what a user writes to normalised amplitudes on product-basis labels.
 *
 * A label is a list of small integers that the family understands: an occupation list, or the position of one particle. Nothing here
 * knows the dimension of the space, so a state costs its number of terms. Guarantees: terms are distinct, nonzero and of norm 1;
 * every WindrowError (`state.unknown`, `state.invalid`) carries the key path, what was found and what is allowed.
 */
import type { StateSpec } from './types.js';
import type { Json } from '../core/json.js';
import { randomStream } from '../core/random.js';
import { refusal } from './refusal.js';
import { shapeOf } from './state-shape.js';
import type { QuenchForm, Shape } from './state-shape.js';

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
  /** What stands for the values 0, 1, … of a site in a product state; digits unless given. */
  readonly symbols?: string;
}

/** Labels that can be drawn and listed. */
export interface LabelSpace {
  readonly dimension: number;
  draw(uniform: () => number): Label;
  list(): readonly Label[];
}

/** The states of one system: its labels, its named states, and what is built from them. */
export interface StateSpace extends LabelReader {
  /** Names that may mean a single basis state, in the order they are preferred. */
  readonly basisNames: readonly string[];
  /** Terms of a named state, in any normalisation. @throws WindrowError state.unknown, state.invalid */
  named(name: string, where: string): readonly Term[];
  /** The labels that share the conserved numbers of those given; all labels for null. @throws WindrowError state.invalid */
  labels(like: readonly Label[] | null, where: string): LabelSpace;
  /** The ground state of another Hamiltonian of the family. @throws WindrowError state.invalid, and what its parameters are refused with */
  groundState(quench: Quench, within: readonly Label[], where: string): readonly Term[];
  /** A quench in the family's own coupling, its parameters checked. */
  readQuench(form: QuenchForm, where: string): Quench;
  /** The state whose sector a ground state is looked for in unless it says so. */
  readonly fallback: string;
}

/** Another Hamiltonian of the same family. */
export interface Quench {
  readonly coupling: number;
  /** The parameters that differ from the system's. */
  readonly parameters: Readonly<Record<string, Json>>;
}

/** The basis state of a label. */
export const basisState = (label: Label): readonly Term[] => [{ label, re: 1, im: 0 }];

/** A deeper nesting than any state needs; stops runaway input. */
const DEEPEST = 16;

/** Cancelled sums leave rounding noise of this many ulp of their summands; it must not become a state. */
const NOISE = 8 * Number.EPSILON;

const keyOf = (label: Label): string => label.join(',');

function readAmplitude(value: unknown, where: string): readonly [number, number] {
  if (typeof value === 'number' && Number.isFinite(value)) return [value, 0];
  if (Array.isArray(value) && value.length === 2 && value.every((part) => typeof part === 'number' && Number.isFinite(part)))
    return [value[0] as number, value[1] as number];
  throw refusal('state.invalid', 'an amplitude is not a number', where, value, 'a finite number or [real, imaginary]');
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

/** Basis states of a superposition that is written by listing them; 2^20 of them take about 200 MB. */
export const MOST_TERMS = 2 ** 20;

function readProduct(space: StateSpace, text: string, where: string): Label {
  const symbols = space.symbols ?? '0123456789';
  const values = Array.from(text, (symbol) => {
    const value = symbols.indexOf(symbol);
    if (value < 0)
      throw refusal('state.invalid', `a site of a product state cannot be "${symbol}"`, where, text, Array.from(symbols).join(', '));
    return value;
  });
  return space.occupation(values, where);
}

/** The basis state a shape stands for; null for shapes that are not of one basis state by themselves. */
function labelOf(space: StateSpace, shape: Shape, where: string, depth: number): Label | null {
  if (shape.kind === 'occupation') return space.occupation(shape.values, `${where}.occupation`);
  if (shape.kind === 'product') return readProduct(space, shape.symbols, `${where}.product`);
  if (shape.kind === 'site') return space.site(shape.site, `${where}.site`);
  if (shape.kind !== 'random') return null;
  const like = shape.like === undefined ? null : labelsOf(space, shape.like, `${where}.random.like`, depth + 1);
  const stream = randomStream(shape.seed, 'random product state');
  return space.labels(like, `${where}.random`).draw(() => stream.uniform());
}

const labelsOf = (space: StateSpace, spec: unknown, where: string, depth: number): readonly Label[] =>
  resolveState(space, spec, where, depth).map((term) => term.label);

function equalSuperposition(labels: LabelSpace, where: string): readonly Term[] {
  if (labels.dimension > MOST_TERMS)
    throw refusal('state.invalid', 'a uniform state has too many terms', where, labels.dimension, `at most ${MOST_TERMS} basis states`);
  return labels.list().map((label) => ({ label, re: 1, im: 0 }));
}

/**
 * The normalised terms of a state. Inner superpositions are normalised before they are added; equal labels are summed.
 * @param where key path of the state, 'prepare' or 'detect'
 * @throws WindrowError state.unknown, state.invalid
 */
export function resolveState(space: StateSpace, spec: unknown, where: string, depth = 0): readonly Term[] {
  if (depth > DEEPEST) throw refusal('state.invalid', 'states are nested too deeply', where, spec, `at most ${DEEPEST} levels`);
  const shape = shapeOf(spec, where);
  const label = labelOf(space, shape, where, depth);
  if (label !== null) return basisState(label);
  if (shape.kind === 'name') return normalised(space.named(shape.name, where), spec, where);
  if (shape.kind === 'uniform') {
    const path = `${where}.uniform`;
    const like = labelsOf(space, shape.like, `${path}.like`, depth + 1);
    return normalised(equalSuperposition(space.labels(like, path), path), spec, where);
  }
  if (shape.kind === 'ground-state') {
    const path = `${where}.ground-state`;
    const within = labelsOf(space, shape.quench.within ?? space.fallback, `${path}.within`, depth + 1);
    return space.groundState(space.readQuench(shape.quench, path), within, path);
  }
  if (shape.kind !== 'superposition') return [];
  const terms: Term[] = [];
  shape.terms.forEach(([amplitude, inner], position) => {
    const [re, im] = readAmplitude(amplitude, `${where}.superposition.${position}.0`);
    for (const term of resolveState(space, inner, `${where}.superposition.${position}.1`, depth + 1))
      terms.push({ label: term.label, re: re * term.re - im * term.im, im: re * term.im + im * term.re });
  });
  return normalised(terms, spec, where);
}

/** The first name that means this basis state. */
function nameOf(space: StateSpace, label: Label, where: string): string | null {
  const key = keyOf(label);
  for (const name of space.basisNames) {
    let candidate: readonly Term[];
    try {
      candidate = space.named(name, where);
    } catch {
      continue; // a name without meaning at this size
    }
    if (candidate.length === 1 && candidate[0] !== undefined && keyOf(candidate[0].label) === key) return name;
  }
  return null;
}

/**
 * A state in the form that identifies it: basis states by the first name that means them, otherwise as the family writes the label;
 * amplitudes as numbers where they are real; quenches in the family's own coupling. Superpositions keep their terms and order.
 */
export function canonicalState(space: StateSpace, spec: unknown, where: string, depth = 0): StateSpec {
  if (depth > DEEPEST) throw refusal('state.invalid', 'states are nested too deeply', where, spec, `at most ${DEEPEST} levels`);
  const shape = shapeOf(spec, where);
  const inner = (state: unknown, path: string): StateSpec => canonicalState(space, state, `${where}.${path}`, depth + 1);
  if (shape.kind === 'superposition') {
    return {
      superposition: shape.terms.map(([amplitude, state], position) => {
        const [re, im] = readAmplitude(amplitude, `${where}.superposition.${position}.0`);
        return [im === 0 ? re : [re, im], inner(state, `superposition.${position}.1`)] as const;
      }),
    };
  }
  if (shape.kind === 'uniform') return { uniform: { like: inner(shape.like, 'uniform.like') } };
  if (shape.kind === 'ground-state') {
    const { coupling, parameters } = space.readQuench(shape.quench, `${where}.ground-state`);
    const within = inner(shape.quench.within ?? space.fallback, 'ground-state.within');
    const given = Object.keys(parameters).length === 0 ? {} : { parameters };
    return { 'ground-state': { coupling, ...given, within } };
  }
  const terms = resolveState(space, spec, where, depth);
  const label = terms[0]?.label;
  if (terms.length !== 1 || label === undefined) return spec as StateSpec;
  return nameOf(space, label, where) ?? space.write(label);
}
