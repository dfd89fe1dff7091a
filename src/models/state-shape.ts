/** The forms a state may be written in, told apart. Whether the parts fit a system is not looked at here. */
import { refusal } from './refusal.js';

/** Another Hamiltonian of the same family whose ground state is meant; what is left out is as in the system itself. */
export interface QuenchForm {
  readonly coupling?: unknown;
  /** scale of the coupling */
  readonly as?: unknown;
  readonly parameters?: unknown;
  /** the state whose sector is searched */
  readonly within?: unknown;
}

export type Shape =
  | { readonly kind: 'name'; readonly name: string }
  | { readonly kind: 'occupation'; readonly values: readonly unknown[] }
  | { readonly kind: 'product'; readonly symbols: string }
  | { readonly kind: 'site'; readonly site: unknown }
  | { readonly kind: 'random'; readonly seed: number; readonly like: unknown }
  | { readonly kind: 'uniform'; readonly like: unknown }
  | { readonly kind: 'ground-state'; readonly quench: QuenchForm }
  | { readonly kind: 'superposition'; readonly terms: readonly (readonly [unknown, unknown])[] };

const FORMS =
  'a state name, { occupation: […] }, { product: "…" }, { site: n }, { random: { seed, like } }, { uniform: { like } }, ' +
  '{ ground-state: { coupling, as, parameters, within } } or { superposition: [[amplitude, state], …] }';

const isMapping = (value: unknown): value is Record<string, unknown> =>
  typeof value === 'object' && value !== null && !Array.isArray(value);

function mapping(value: unknown, keys: readonly string[], form: string, where: string): Record<string, unknown> {
  const path = `${where}.${form}`;
  if (!isMapping(value)) throw refusal('state.invalid', `${form} is not a mapping`, path, value, keys.join(', '));
  const stray = Object.keys(value).find((key) => !keys.includes(key));
  if (stray !== undefined) throw refusal('state.invalid', `${form} has no such key`, `${path}.${stray}`, stray, keys.join(', '));
  return value;
}

type Reader = (value: unknown, where: string) => Shape;

const READERS: Readonly<Record<string, Reader>> = {
  site: (site) => ({ kind: 'site', site }),
  occupation(values, where) {
    if (!Array.isArray(values))
      throw refusal('state.invalid', 'an occupation is not a list', `${where}.occupation`, values, 'a list of whole numbers');
    return { kind: 'occupation', values };
  },
  product(symbols, where) {
    if (typeof symbols !== 'string')
      throw refusal('state.invalid', 'a product state is not a text', `${where}.product`, symbols, 'a quoted text, one character a site');
    return { kind: 'product', symbols };
  },
  random(value, where) {
    const { seed, like } = mapping(value, ['seed', 'like'], 'random', where);
    if (!Number.isSafeInteger(seed))
      throw refusal('state.invalid', 'a random state needs a seed', `${where}.random.seed`, seed, 'a whole number');
    return { kind: 'random', seed: seed as number, like };
  },
  uniform(value, where) {
    const { like } = mapping(value, ['like'], 'uniform', where);
    if (like === undefined) throw refusal('state.invalid', 'a state is missing', `${where}.uniform.like`, like, 'a state');
    return { kind: 'uniform', like };
  },
  'ground-state': (value, where) => ({
    kind: 'ground-state',
    quench: mapping(value, ['coupling', 'as', 'parameters', 'within'], 'ground-state', where),
  }),
  superposition(terms, where) {
    if (!Array.isArray(terms) || terms.length === 0 || !terms.every((term) => Array.isArray(term) && term.length === 2))
      throw refusal(
        'state.invalid',
        'a superposition is not a list of terms',
        `${where}.superposition`,
        terms,
        '[[amplitude, state], …] with at least one term',
      );
    return { kind: 'superposition', terms: terms as [unknown, unknown][] };
  },
};

/** @throws WindrowError state.invalid */
export function shapeOf(spec: unknown, where: string): Shape {
  if (typeof spec === 'string') return { kind: 'name', name: spec };
  if (isMapping(spec)) {
    const [entry, ...others] = Object.entries(spec);
    if (entry !== undefined && others.length === 0 && Object.hasOwn(READERS, entry[0])) return READERS[entry[0]](entry[1], where);
  }
  throw refusal('state.invalid', 'a state is written in a form that is not known', where, spec, FORMS);
}
