/** Term lists against the families that are built in, element by element and as measures; and against Kronecker products. */
import { Matrix } from 'ml-matrix';
import { describe, expect, it } from 'vitest';
import { spectralMeasure } from '../../src/spectral/measure.js';
import { densePlanes } from '../support/exact-spectrum.js';
import { systemOf } from '../support/model-requests.js';
import type { Asked } from '../support/model-requests.js';
import { fermions, onSite, plusTranspose, product, spin, sum, times } from '../support/operators.js';

const FIELD = [0.3, -0.7, 1.1, 0.2, -0.45, 0.9];

/** h_x on site x, written as one term a site. */
const onEachSite = (operator: string, values: readonly number[]): object[] =>
  values.map((value, x) => ({ coefficient: value, product: operator, over: [[x + 1]] }));

interface Pair {
  readonly name: string;
  readonly family: string;
  readonly built: Record<string, unknown>;
  readonly terms: Record<string, unknown>;
  readonly states: readonly (readonly [prepared: unknown, detected: unknown])[];
  readonly shared?: Partial<Asked>;
}

const product6 = (text: string, other: string): readonly (readonly [unknown, unknown])[] => [
  [{ product: text }, 'same'],
  [{ product: text }, { product: other }],
];

const PAIRS: readonly Pair[] = [
  {
    name: 'XXZ by ladder operators, with next neighbours and fields',
    family: 'xxz-chain',
    built: { J: 1.3, 'next-J': -0.4, field: FIELD },
    terms: {
      J: 1.3,
      K: -0.4,
      terms: [
        { coefficient: [0.5, 'J'], product: 'S+ S-', over: 'bonds', hc: true },
        { coefficient: ['J', 'coupling'], product: 'Sz Sz', over: 'bonds' },
        { coefficient: [0.5, 'K'], product: 'S+ S-', over: 'next-bonds', hc: true },
        { coefficient: ['K', 'coupling'], product: 'Sz Sz', over: 'next-bonds' },
        ...onEachSite('Sz', FIELD),
      ],
    },
    states: product6('uuddud', 'ududud'),
  },
  {
    name: 'XXZ by Sx and Sy, whose parts that change the magnetisation cancel',
    family: 'xxz-chain',
    built: { J: 1.3 },
    terms: {
      J: 1.3,
      terms: ['Sx Sx', 'Sy Sy']
        .map((text) => ({ coefficient: 'J', product: text, over: 'bonds' }))
        .concat([{ coefficient: ['J', 'coupling'] as never, product: 'Sz Sz', over: 'bonds' }]),
    },
    states: product6('uuddud', 'ududud'),
  },
  {
    name: 'XXZ in random fields',
    family: 'xxz-chain',
    built: {},
    terms: {
      terms: [
        { coefficient: 0.5, product: 'S+ S-', over: 'bonds', hc: true },
        { coefficient: 'coupling', product: 'Sz Sz', over: 'bonds' },
        { coefficient: 'random', product: 'Sz', over: 'sites' },
      ],
    },
    states: product6('uuddud', 'ududud'),
    shared: { disorder: { strength: 1.7, seed: 5, realisation: 2 } },
  },
  {
    name: 'mixed-field Ising',
    family: 'ising-chain',
    built: { J: 0.8, field: FIELD },
    terms: {
      J: 0.8,
      terms: [
        { coefficient: [-1, 'J'], product: 'Z Z', over: { stretch: 2 } },
        { coefficient: [-1, 'coupling'], product: 'X', over: 'sites' },
        ...onEachSite(
          'Z',
          FIELD.map((h) => -h),
        ),
      ],
    },
    states: product6('uuddud', 'dddddd'),
  },
  {
    name: 'fermions with next neighbours, around the ring',
    family: 'fermion-chain',
    built: { J: 1.3, 'next-J': 0.6, 'next-V': -0.8, onsite: FIELD },
    terms: {
      local: 'fermion',
      t: 1.3,
      terms: [
        { coefficient: [-1, 't'], product: 'cdag c', over: 'bonds', hc: true },
        { coefficient: -0.6, product: 'cdag c', over: 'next-bonds', hc: true },
        { coefficient: 'coupling', product: 'n n', over: 'bonds' },
        { coefficient: -0.8, product: 'cdag@1 c@1 cdag@2 c@2', over: 'next-bonds' },
        ...onEachSite('n', FIELD),
      ],
    },
    states: [
      [{ occupation: [1, 1, 0, 0, 1, 0] }, 'same'],
      [{ occupation: [1, 1, 0, 0, 1, 0] }, { occupation: [0, 1, 1, 0, 0, 1] }],
    ],
  },
  {
    name: 'pair hopping of hard-core bosons',
    family: 'pair-hopping-chain',
    built: { V: 0.7 },
    terms: {
      local: 'boson',
      most: 1,
      V: 0.7,
      terms: [
        { coefficient: 'coupling', product: 'bdag b b bdag', over: { stretch: 4 }, hc: true },
        { coefficient: 'V', product: 'n n', over: 'bonds' },
      ],
    },
    states: product6('011011', '100111'),
  },
];

const BOSONS: Pair = {
  name: 'Bose-Hubbard, the cut-off at the number of bosons',
  family: 'bose-hubbard-chain',
  built: { J: 0.9, particles: 4, onsite: [0.3, -0.7, 1.1, 0.2] },
  terms: {
    local: 'boson',
    most: 4,
    J: 0.9,
    terms: [
      { coefficient: [-1, 'J'], product: 'bdag b', over: 'bonds', hc: true },
      { coefficient: [0.5, 'coupling'], product: 'bdag bdag b b', over: 'sites' },
      ...onEachSite('n', [0.3, -0.7, 1.1, 0.2]),
    ],
  },
  states: [
    [{ occupation: [2, 0, 1, 1] }, 'same'],
    [{ occupation: [2, 0, 1, 1] }, { occupation: [0, 4, 0, 0] }],
  ],
};

describe.each(['ring', 'line'])('on a %s', (geometry) => {
  it.each([...PAIRS.map((pair) => ({ ...pair, size: 6 })), { ...BOSONS, size: 4 }])(
    '$name',
    ({ family, built, terms, states, shared, size }) => {
      for (const [prepared, detected] of states) {
        const asked = { size, coupling: 0.6, ...shared, prepared, detected };
        const one = systemOf(family, { ...asked, parameters: { ...built, geometry } });
        const other = systemOf('terms', { ...asked, parameters: { ...terms, geometry } });
        expect(other.sectorDimension).toBe(one.sectorDimension);
        // The same few products in another order.
        const [a, b] = [densePlanes(one.matrix), densePlanes(other.matrix)];
        expect(Matrix.sub(a.re, b.re).abs().max()).toBeLessThan(1e-14 * size);
        expect(Matrix.add(a.im, b.im).abs().max()).toBe(0);
        expect(other.detected).toEqual(one.detected);
        const [measure, same] = [spectralMeasure(one), spectralMeasure(other)];
        expect(same.fields.accessible_dimension).toBe(measure.fields.accessible_dimension);
        measure.measure.energies.forEach((energy, j) => expect(same.measure.energies[j]).toBeCloseTo(energy, 11));
        measure.measure.weights.forEach((weight, j) => expect(same.measure.weights[j]).toBeCloseTo(weight, 11));
        measure.measure.overlapRe.forEach((overlap, j) => expect(same.measure.overlapRe[j]).toBeCloseTo(overlap, 11));
      }
    },
  );
});

it('counts the dimension at the conserved number, as the families do', () => {
  const states = { size: 6, prepared: { product: 'uuddud' } };
  const terms = (text: string) => ({ parameters: { terms: [{ product: text, over: 'bonds', hc: true }] } });
  expect(systemOf('terms', { ...states, ...terms('S+ S-') }).hilbertDimension).toBe(20);
  expect(systemOf('terms', { ...states, ...terms('S+ S+') }).hilbertDimension).toBe(64);
});

describe('operators of larger spins, products on given sites and imaginary coefficients', () => {
  it('spin one: the square of a bond, and a field along y', () => {
    const { z, plus } = spin(1);
    const sites = 3;
    const bond = (x: number, y: number): Matrix => {
      const hop = times(0.5, plusTranspose(product(onSite(plus, x, sites), onSite(plus, y, sites).transpose())));
      return Matrix.add(hop, product(onSite(z, x, sites), onSite(z, y, sites)));
    };
    const square = sum([product(bond(0, 2), bond(0, 2))]);
    const pairs = ['x', 'y', 'z'].flatMap((a) => ['x', 'y', 'z'].map((b) => `S${a}@1 S${a}@2 S${b}@1 S${b}@2`));
    const parameters = { spin: 1, terms: pairs.map((text) => ({ product: text, over: [[3, 1]] })) };
    const { matrix } = systemOf('terms', { size: sites, parameters, prepared: 'uniform' });
    expect(matrix.dimension).toBe(27);
    expect(Matrix.sub(densePlanes(matrix).re, square).abs().max()).toBeLessThan(1e-14);
    expect(densePlanes(matrix).im.abs().max()).toBe(0);
    const field = systemOf('terms', { size: 1, parameters: { spin: 1, terms: [{ product: 'Sy', over: 'sites' }] }, prepared: 'uniform' });
    // S^y = (S⁺ − S⁻)/2i
    expect(
      Matrix.sub(densePlanes(field.matrix).im, times(-0.5, Matrix.sub(plus, plus.transpose())))
        .abs()
        .max(),
    ).toBe(0);
  });

  it('fermions: a pair created across the sites in between, with the signs of their order', () => {
    const sites = 4;
    const c = fermions(sites);
    const pair = product(c[3].transpose(), c[0].transpose());
    const hop = product(c[2].transpose(), c[0]);
    const whole = sum([times(0.7, plusTranspose(pair)), times(-1.2, plusTranspose(hop))]);
    const terms = [
      { coefficient: 0.7, product: 'cdag cdag', over: [[4, 1]], hc: true },
      { coefficient: -1.2, product: 'cdag@2 c@1', over: [[1, 3]], hc: true },
    ];
    const { matrix } = systemOf('terms', { size: sites, parameters: { local: 'fermion', terms }, prepared: 'uniform' });
    expect(Matrix.sub(densePlanes(matrix).re, whole).abs().max()).toBe(0);
  });

  it('a hop with a phase: i J (S⁺S⁻ − S⁻S⁺) from both ways of writing it', () => {
    const build = (terms: object[]) => systemOf('terms', { size: 4, coupling: 0.8, parameters: { terms }, prepared: 'neel' });
    const one = build([{ coefficient: ['i', 'coupling'], product: 'S+ S-', over: 'bonds', hc: true }]);
    const other = build([
      { coefficient: ['i', 'coupling'], product: 'S+ S-', over: 'bonds' },
      { coefficient: ['i', 'i', 'i', 'coupling'], product: 'S- S+', over: 'bonds' },
    ]);
    const crossed = build([
      { coefficient: [2, 'coupling'], product: 'Sx Sy', over: 'bonds' },
      { coefficient: [-2, 'coupling'], product: 'Sy Sx', over: 'bonds' },
    ]);
    expect(other.matrix).toEqual(one.matrix);
    // S^xS^y − S^yS^x = i(S⁺S⁻ − S⁻S⁺)/2
    expect(Matrix.sub(densePlanes(crossed.matrix).im, densePlanes(one.matrix).im).abs().max()).toBeLessThan(1e-15);
  });
});
