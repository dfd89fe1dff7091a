/** Local spaces of a site (spin, boson up to a cut-off, spinless fermion), the operators on them, and products as users write them. */
import { refusal } from '../refusal.js';

/** One element of a local operator: the value it leads to and ⟨to|O|from⟩. */
interface Step {
  readonly to: number;
  readonly re: number;
  readonly im: number;
}

export interface LocalOperator {
  /** value → what the operator makes of it */
  readonly steps: readonly (readonly Step[])[];
  /** True where it changes the number of fermions by one, and so has a sign with those on earlier sites. */
  readonly odd: boolean;
}

export interface LocalSpace {
  readonly levels: number;
  /** one character a value; null where there are more than ten */
  readonly symbols: string | null;
  readonly operators: ReadonlyMap<string, LocalOperator>;
}

/** One operator of a product and the place in its list of sites, from 0, it acts on. */
export interface Factor {
  readonly name: string;
  readonly operator: LocalOperator;
  readonly place: number;
}

/** Factors of one product. */
const MOST_FACTORS = 12;

const DIGITS = '0123456789';

function operator(levels: number, odd: boolean, steps: (value: number) => readonly (readonly [number, number, number?])[]): LocalOperator {
  const inside = (value: number): Step[] =>
    steps(value)
      .map(([to, re, im = 0]) => ({ to, re, im }))
      .filter(({ to, re, im }) => to >= 0 && to < levels && (re !== 0 || im !== 0));
  return { odd, steps: Array.from({ length: levels }, (_, value) => inside(value)) };
}

/** Spin s with S = σ/2 for s = 1/2; value v is m = v − s. */
export function spinSpace(s: number): LocalSpace {
  const levels = 2 * s + 1;
  const up = (v: number): number => Math.sqrt((v + 1) * (2 * s - v));
  const down = (v: number): number => (v === 0 ? 0 : up(v - 1));
  const make = (steps: Parameters<typeof operator>[2]): LocalOperator => operator(levels, false, steps);
  const spins: [string, LocalOperator][] = [
    ['Sz', make((v) => [[v, v - s]])],
    ['S+', make((v) => [[v + 1, up(v)]])],
    ['S-', make((v) => [[v - 1, down(v)]])],
    [
      'Sx',
      make((v) => [
        [v + 1, up(v) / 2],
        [v - 1, down(v) / 2],
      ]),
    ],
    [
      'Sy',
      make((v) => [
        [v + 1, 0, -up(v) / 2],
        [v - 1, 0, down(v) / 2],
      ]),
    ],
  ];
  const paulis: [string, LocalOperator][] = [
    ['X', make((v) => [[1 - v, 1]])],
    ['Y', make((v) => [[1 - v, 0, v === 0 ? -1 : 1]])],
    ['Z', make((v) => [[v, 2 * v - 1]])],
  ];
  const symbols = levels === 2 ? 'du' : levels === 3 ? '-0+' : levels <= 10 ? DIGITS.slice(0, levels) : null;
  return { levels, symbols, operators: new Map(levels === 2 ? [...spins, ...paulis] : spins) };
}

/** Bosons, at most `most` a site: bdag leads from the fullest state nowhere. */
export function bosonSpace(most: number): LocalSpace {
  const levels = most + 1;
  return {
    levels,
    symbols: levels <= 10 ? DIGITS.slice(0, levels) : null,
    operators: new Map([
      ['b', operator(levels, false, (v) => [[v - 1, Math.sqrt(v)]])],
      ['bdag', operator(levels, false, (v) => [[v + 1, Math.sqrt(v + 1)]])],
      ['n', operator(levels, false, (v) => [[v, v]])],
    ]),
  };
}

/** Spinless fermions; the signs between sites follow their order, see `term-matrix.ts`. */
export const fermionSpace: LocalSpace = {
  levels: 2,
  symbols: '01',
  operators: new Map([
    ['c', operator(2, true, (v) => [[v - 1, 1]])],
    ['cdag', operator(2, true, (v) => [[v + 1, 1]])],
    ['n', operator(2, false, (v) => [[v, v]])],
  ]),
};

/**
 * The factors of a product such as 'S+ S-' (the first on the first site of each list, the second on the second) or 'n@1 n@1 bdag@2',
 * with the places written out. The rightmost factor acts first. On lists of one site all factors act there.
 * @param width sites of a list
 * @throws WindrowError model.parameter
 */
export function readProduct(space: LocalSpace, text: string, width: number, where: string): readonly Factor[] {
  const refuse = (message: string, found: unknown, allowed: string): Error => refusal('model.parameter', message, where, found, allowed);
  const words = text.split(/\s+/).filter((word) => word !== '');
  if (words.length === 0 || words.length > MOST_FACTORS)
    throw refuse(`a product has ${words.length} operators`, text, `1 to ${MOST_FACTORS} operators, separated by spaces`);
  const placed = words.filter((word) => word.includes('@')).length;
  if (placed !== 0 && placed !== words.length)
    throw refuse('some operators of a product have a place and some have none', text, 'a place for all of them, or for none');
  if (placed === 0 && width !== 1 && words.length !== width)
    throw refuse(`a product has ${words.length} operators for ${width} sites`, text, `${width} operators, or places: OPERATOR@PLACE`);
  const factors = words.map((word, index): Factor => {
    const [name = '', place] = word.split(/@(.*)/s);
    const found = space.operators.get(name);
    if (found === undefined) throw refuse(`there is no operator "${name}" on these sites`, text, [...space.operators.keys()].join(', '));
    if (place === undefined) return { name, operator: found, place: width === 1 ? 0 : index };
    if (!/^[1-9]\d{0,3}$/.test(place) || Number(place) > width)
      throw refuse('an operator acts on a place that its list of sites does not have', word, `1 to ${width}`);
    return { name, operator: found, place: Number(place) - 1 };
  });
  if (factors.filter((factor) => factor.operator.odd).length % 2 === 1)
    throw refuse('a product with an odd number of c and cdag', text, 'an even number: fermions are not created one by one');
  return factors;
}
