/** From a list of terms to H on the product basis: coefficients, lists of sites, one matrix a set of sites, the Hermiticity of the whole. */
import { WindrowError } from '../../core/errors.js';
import { bonds, nextNeighbours, siteEnergies, termAmplitudes, windows } from '../lattice.js';
import { refusal } from '../refusal.js';
import type { Configuration, ProductBasis, SystemRequest } from '../types.js';
import { nonHermitianTerm, ROUNDING, symmetrised } from './hermiticity.js';
import { bosonSpace, fermionSpace, readProduct, spinSpace } from './local-operators.js';
import type { Factor, LocalSpace } from './local-operators.js';
import { addTo, digit, productMatrix, stringsOf } from './term-matrix.js';
import type { Group, MatrixElement } from './term-matrix.js';
import { COEFFICIENTS } from './term-schema.js';
import type { TermForm, TermParameters } from './term-schema.js';

export type TermRequest = SystemRequest<TermParameters>;

/** Local states of the sites one product acts on, and elements of all groups together: some tens of MB. */
const MOST_CODES = 1024;
const MOST_ELEMENTS = 2 ** 18;

export function localSpace({ local, spin, most }: TermParameters): LocalSpace {
  if (local !== 'spin' && spin !== null)
    throw refusal('model.parameter', 'spin is given for sites that hold none', 'parameters.spin', spin, 'null');
  if (local !== 'boson' && most !== null)
    throw refusal('model.parameter', 'most is given for sites that hold no bosons', 'parameters.most', most, 'null');
  if (local === 'fermion') return fermionSpace;
  if (local === 'spin') return spinSpace(spin ?? 0.5);
  if (most === null) throw refusal('model.parameter', 'bosons need a cut-off', 'parameters.most', most, 'a whole number ≥ 1 and ≤ 31');
  return bosonSpace(most);
}

/** Lists of sites from 0. @throws WindrowError model.parameter */
export function siteLists(
  over: TermForm['over'],
  size: number,
  geometry: TermParameters['geometry'],
  where: string,
): readonly (readonly number[])[] {
  if (over === 'sites') return windows(size, 1, geometry);
  if (over === 'bonds') return bonds(size, geometry);
  if (over === 'next-bonds') return nextNeighbours(size, geometry);
  if ('stretch' in over) return windows(size, over.stretch, geometry);
  over.forEach((list, index) => {
    if (list.length !== over[0].length)
      throw refusal('model.parameter', 'lists of sites of different lengths', `${where}.${index}`, list, `${over[0].length} sites in each`);
    if (new Set(list).size !== list.length || list.some((site) => site > size))
      throw refusal(
        'model.parameter',
        'a list of sites does not fit the system',
        `${where}.${index}`,
        list,
        `different sites from 1 to ${size}`,
      );
  });
  return over.map((list) => list.map((site) => site - 1));
}

const widthOf = (over: TermForm['over']): number => {
  if (over === 'sites') return 1;
  if (over === 'bonds' || over === 'next-bonds') return 2;
  return 'stretch' in over ? over.stretch : over[0].length;
};

/** The values of a coefficient, one for each list of sites, and whether they are imaginary. */
function coefficients(request: TermRequest, index: number, count: number): { readonly values: Float64Array; readonly imaginary: boolean } {
  const { coupling, parameters, disorder, size } = request;
  const { coefficient, over } = parameters.terms[index];
  const values = new Float64Array(count).fill(1);
  let turns = 0;
  for (const part of Array.isArray(coefficient) ? coefficient : [coefficient]) {
    if (part === 'i') turns += 1;
    else if (part === 'random') {
      const drawn = over === 'sites' ? siteEnergies(0, disorder, size) : termAmplitudes(0, disorder, 'hops', count, index);
      for (let k = 0; k < count; k += 1) values[k] *= drawn[k];
    } else {
      const factor = typeof part === 'number' ? part : part === 'coupling' ? coupling : (parameters[part] ?? 0);
      for (let k = 0; k < count; k += 1) values[k] *= factor;
    }
  }
  if (turns % 4 >= 2) for (let k = 0; k < count; k += 1) values[k] = -values[k];
  return { values, imaginary: turns % 2 === 1 };
}

/** @throws WindrowError model.parameter where a name is used and has no value, or has one and is not used */
function checkNames(parameters: TermParameters): void {
  const used = new Set(parameters.terms.flatMap(({ coefficient }) => coefficient));
  for (const name of COEFFICIENTS) {
    if (used.has(name) && parameters[name] === null)
      throw refusal('model.parameter', `a term uses ${name}, which has no value`, `parameters.${name}`, null, 'a finite number');
    if (!used.has(name) && parameters[name] !== null)
      throw refusal(
        'model.parameter',
        `no term uses ${name}`,
        `parameters.${name}`,
        parameters[name],
        'null, or a term with that coefficient',
      );
  }
}

/** H as the sum of its groups, checked. @throws WindrowError model.parameter, matrix.not-hermitian, matrix.not-finite */
export function collectGroups(request: TermRequest): readonly Group[] {
  const { size, parameters } = request;
  if (parameters.terms.length === 0)
    throw refusal(
      'model.parameter',
      'there are no terms',
      'parameters.terms',
      parameters.terms,
      'a list of { coefficient, product, over, hc }',
    );
  checkNames(parameters);
  const space = localSpace(parameters);
  const groups = new Map<string, Group>();
  let elements = 0;
  parameters.terms.forEach(({ product, over, hc }, index) => {
    const where = `parameters.terms.${index}`;
    const factors = readProduct(space, product, widthOf(over), `${where}.product`);
    const places = [...new Set(factors.map((factor) => factor.place))];
    if (space.levels ** places.length > MOST_CODES)
      throw refusal(
        'model.parameter',
        'a product acts on too many states',
        `${where}.product`,
        product,
        `at most ${MOST_CODES} states of its sites`,
      );
    const lists = siteLists(over, size, parameters.geometry, `${where}.over`);
    const { values, imaginary } = coefficients(request, index, lists.length);
    const matrices = new Map<string, readonly MatrixElement[]>();
    lists.forEach((list, k) => {
      if (!Number.isFinite(values[k]))
        throw new WindrowError('matrix.not-finite', 'a coefficient is beyond double precision', {
          where: `${where}.coefficient`,
          allowed: 'energies below 1e308',
        });
      const sites = places.map((place) => list[place]).sort((a, b) => a - b);
      const matrix = matrixOf(matrices, factors, places, list, sites, space.levels);
      elements += matrix.length;
      if (elements > MOST_ELEMENTS)
        throw refusal(
          'model.parameter',
          'the terms have too many local matrix elements',
          where,
          `more than ${MOST_ELEMENTS}`,
          `at most ${MOST_ELEMENTS}`,
        );
      const factor = imaginary ? { re: 0, im: values[k] } : { re: values[k], im: 0 };
      addTo(groupAt(groups, sites, stringsOf(factors, list, sites), space.levels), matrix, factor, hc, index);
    });
  });
  const all = [...groups.values()];
  const wrong = nonHermitianTerm(all, space.levels);
  if (wrong === null) return all;
  throw new WindrowError('matrix.not-hermitian', 'the sum of the terms is not Hermitian', {
    where: `parameters.terms.${wrong}`,
    found: parameters.terms[wrong].product,
    allowed: 'a sum that is its own conjugate: hc: true, or the conjugate as another term',
  });
}

/** The matrix depends on the order of the sites alone, so that a term has one or, across the end of a ring, a few. */
function matrixOf(
  known: Map<string, readonly MatrixElement[]>,
  factors: readonly Factor[],
  places: readonly number[],
  list: readonly number[],
  sites: readonly number[],
  levels: number,
): readonly MatrixElement[] {
  const slots: number[] = [];
  for (const place of places) slots[place] = sites.indexOf(list[place]);
  const key = slots.join();
  const matrix = known.get(key) ?? productMatrix(factors, slots, sites.length, levels);
  known.set(key, matrix);
  return matrix;
}

function groupAt(groups: Map<string, Group>, sites: readonly number[], strings: readonly number[], levels: number): Group {
  const key = `${sites.join()}|${strings.join()}`;
  let group = groups.get(key);
  if (group === undefined) groups.set(key, (group = { sites, strings, codes: levels ** sites.length, elements: new Map() }));
  return group;
}

interface Move {
  readonly values: readonly number[];
  /** what the number of the configuration, read with weights levels^site, changes by */
  readonly shift: number;
  readonly re: number;
  readonly im: number;
}

interface Table {
  readonly sites: readonly number[];
  readonly strings: readonly number[];
  readonly diagonal: Float64Array;
  readonly moves: readonly (readonly Move[] | undefined)[];
}

export interface TermHamiltonian extends ProductBasis {
  readonly complex: boolean;
  /** Most elements that `connect` reports. */
  readonly most: number;
  /** True where every move keeps the sum of the values of all sites. */
  readonly conserves: boolean;
}

/** H on the product basis. @throws WindrowError as collectGroups */
export function termHamiltonian(request: TermRequest): TermHamiltonian {
  const { size, parameters } = request;
  const { levels } = localSpace(parameters);
  const groups = collectGroups(request);
  const kept = groups.map(symmetrised);
  const tables = groups.map((group, g): Table => {
    const diagonal = new Float64Array(group.codes);
    const moves: Move[][] = [];
    for (const { from, to, re, im } of kept[g]) {
      if (from === to) {
        diagonal[from] = re;
        continue;
      }
      const values = group.sites.map((_, slot) => digit(to, slot, levels));
      const shift = group.sites.reduce((sum, site, slot) => sum + (values[slot] - digit(from, slot, levels)) * levels ** site, 0);
      (moves[from] ??= []).push({ values, shift, re, im });
    }
    return { sites: group.sites, strings: group.strings, diagonal, moves };
  });
  const sumOf = (code: number, width: number): number =>
    Array.from({ length: width }, (_, slot) => digit(code, slot, levels)).reduce((a, b) => a + b, 0);
  return {
    sites: size,
    levels,
    complex: kept.flat().some((element) => element.im !== 0),
    most: tables.reduce((sum, { moves }) => sum + moves.reduce((most, list) => Math.max(most, list?.length ?? 0), 0), 0),
    conserves: groups.every(({ sites }, g) => kept[g].every(({ from, to }) => sumOf(from, sites.length) === sumOf(to, sites.length))),
    diagonal(c) {
      let energy = 0;
      for (const table of tables) energy += signOf(table, c) * table.diagonal[codeOf(table, c, levels)];
      return energy;
    },
    connect(c, emit) {
      for (const { re, im, table, move } of summed(tables, c, levels)) {
        const held = table.sites.map((x) => c[x]);
        table.sites.forEach((x, slot) => (c[x] = move.values[slot]));
        emit(re, im);
        table.sites.forEach((x, slot) => (c[x] = held[slot]));
      }
    },
  };
}

function codeOf({ sites }: Table, c: Configuration, levels: number): number {
  let code = 0;
  for (let slot = sites.length - 1; slot >= 0; slot -= 1) code = code * levels + c[sites[slot]];
  return code;
}

function signOf({ strings }: Table, c: Configuration): number {
  let sign = 1;
  for (const x of strings) if (c[x] === 1) sign = -sign;
  return sign;
}

/** The elements that lead from c, one for each target: those that cancel between groups would join sectors that H does not join. */
function* summed(
  tables: readonly Table[],
  c: Configuration,
  levels: number,
): IterableIterator<{ readonly table: Table; readonly move: Move; readonly re: number; readonly im: number }> {
  const targets = new Map<number, { table: Table; move: Move; re: number; im: number; size: number }>();
  for (const table of tables) {
    const moves = table.moves[codeOf(table, c, levels)];
    if (moves === undefined) continue;
    const sign = signOf(table, c);
    for (const move of moves) {
      let target = targets.get(move.shift);
      if (target === undefined) targets.set(move.shift, (target = { table, move, re: 0, im: 0, size: 0 }));
      target.re += sign * move.re;
      target.im += sign * move.im;
      target.size += Math.abs(move.re) + Math.abs(move.im);
    }
  }
  for (const target of targets.values()) if (Math.abs(target.re) + Math.abs(target.im) > ROUNDING * target.size) yield target;
}
