import { describe, expect, it } from 'vitest';
import { WindrowError } from '../../../src/core/errors.js';
import { canonicalParameters, describeParameters } from '../../../src/models/parameters.js';
import { findModel, modelFamilies } from '../../../src/models/registry.js';
import { checkRequest } from '../../../src/models/request.js';
import type { System } from '../../../src/models/types.js';
import { requestOf, systemOf } from '../../support/model-requests.js';

const caught = (action: () => unknown): WindrowError => {
  try {
    action();
  } catch (error) {
    if (error instanceof WindrowError) return error;
    throw error;
  }
  throw new Error('nothing was thrown');
};

describe('registry', () => {
  it('finds the families of the first issue by name', () => {
    for (const name of ['two-level', 'tight-binding', 'bose-hubbard-dimer', 'bose-hubbard-chain']) expect(findModel(name).name).toBe(name);
  });

  it('refuses an unknown family and lists the known', () => {
    const error = caught(() => findModel('bose-hubard-dimer'));
    expect(error.code).toBe('model.unknown');
    expect(error.details.found).toBe('"bose-hubard-dimer"');
    expect(error.details.allowed).toContain('bose-hubbard-dimer');
  });

  it.each([...modelFamilies.values()].map((family) => [family.name, family] as const))('%s is described for its users', (name, family) => {
    expect(name).toMatch(/^[a-z0-9]+(-[a-z0-9]+)*$/);
    expect(family.summary).toMatch(/H = .*\.$/);
    expect(family.source).toMatch(/DOI 10\.\d+\/|common practice/);
    expect(family.size.minimum).toBeLessThanOrEqual(family.size.maximum);
    expect(family.scales[0].toCoupling(1.25, family.size.minimum, {})).toBe(1.25);
    for (const state of family.states) expect(state.meaning.length).toBeGreaterThan(5);
    expect(new Set(family.states.map((state) => state.name)).size).toBe(family.states.length);
    const defaults = family.parameters.parse({}) as Record<string, unknown>;
    for (const parameter of describeParameters(family)) {
      expect(parameter.meaning.length).toBeGreaterThan(10);
      expect(parameter.allowed).not.toBe('any value');
      expect(defaults[parameter.name]).toEqual(parameter.default);
    }
    expect(Object.keys(defaults)).toEqual(describeParameters(family).map((parameter) => parameter.name));
    expect(family.parameters.safeParse({ 'no-such-parameter': 1 }).success).toBe(false);
  });
});

describe('parameters', () => {
  it('says what is allowed, and which take lists', () => {
    expect(describeParameters(findModel('tight-binding')).map(({ name, allowed, list }) => [name, allowed, list])).toEqual([
      ['geometry', 'ring | line', false],
      ['phase', 'a finite number', false],
      ['onsite', 'a finite number, or a list, each a finite number', true],
    ]);
    expect(describeParameters(findModel('bose-hubbard-chain')).find(({ name }) => name === 'particles')?.allowed).toBe(
      '"size", or a whole number ≥ 1 and ≤ 65535',
    );
  });

  it('are completed, so that the same physics is written the same', () => {
    expect(canonicalParameters(findModel('bose-hubbard-dimer'), undefined)).toEqual({ J: 1, tilt: 0 });
    const chain = findModel('bose-hubbard-chain');
    expect(canonicalParameters(chain, {})).toMatchObject({ particles: 'size' });
    expect(canonicalParameters(chain, {}, 6)).toEqual(canonicalParameters(chain, { particles: 6, geometry: 'ring', J: 1 }, 6));
  });

  it.each<[string, string, unknown, string, string, RegExp]>([
    ['misspelled', 'bose-hubbard-dimer', { tlit: 1 }, 'parameters.tlit', '"tlit"', /^J, tilt$/],
    ['text', 'bose-hubbard-dimer', { J: 'one' }, 'parameters.J', '"one"', /finite number/],
    ['NaN', 'bose-hubbard-dimer', { J: Number.NaN }, 'parameters.J', 'NaN', /finite number/],
    ['infinite', 'two-level', { bias: Infinity }, 'parameters.bias', 'Infinity', /finite number/],
    ['geometry', 'tight-binding', { geometry: 'torus' }, 'parameters.geometry', '"torus"', /ring \| line/],
    ['list element', 'tight-binding', { onsite: [1, 'x', 2, 3] }, 'parameters.onsite', '[1,"x",2,3]', /list, each a finite number/],
    ['list length', 'tight-binding', { onsite: [1, 2] }, 'parameters.onsite', '[1,2]', /list of 4 numbers/],
    ['chain list length', 'bose-hubbard-chain', { onsite: [1, 2] }, 'parameters.onsite', '[1,2]', /list of 4 numbers/],
    ['no particles', 'bose-hubbard-chain', { particles: 0 }, 'parameters.particles', '0', /≥ 1/],
    ['half a particle', 'bose-hubbard-chain', { particles: 1.5 }, 'parameters.particles', '1.5', /whole number/],
    ['not a mapping', 'two-level', 3, 'parameters', '3', /mapping/],
  ])('refuses: %s', (_what, model, parameters, where, found, allowed) => {
    const prepared = model === 'bose-hubbard-chain' || model === 'bose-hubbard-dimer' ? 'all-left' : { site: 1 };
    const error = caught(() => requestOf(model, { size: model === 'two-level' ? 2 : 4, parameters, prepared }));
    expect(error.code).toBe('model.parameter');
    expect(error.details).toMatchObject({ where, found });
    expect(error.details.allowed).toMatch(allowed);
  });
});

describe('size, coupling and disorder', () => {
  const ask = (model: string, change: object) =>
    caught(() => checkRequest(findModel(model), { size: 2, coupling: 1, prepared: { site: 1 }, ...change }));

  it.each([
    ['two-level', 3, '2'],
    ['tight-binding', 0, 'a whole number from 1 to 65536'],
    ['tight-binding', 2.5, 'a whole number from 1 to 65536'],
    ['bose-hubbard-chain', 257, 'a whole number from 1 to 256'],
    ['bose-hubbard-dimer', -1, 'a whole number from 1 to 1000000'],
    ['bose-hubbard-dimer', '4', 'a whole number from 1 to 1000000'],
    ['bose-hubbard-dimer', Number.NaN, 'a whole number from 1 to 1000000'],
  ])('%s has no size %s', (model, size, allowed) => {
    expect(ask(model, { size })).toMatchObject({ code: 'model.size', details: { where: 'size', allowed } });
  });

  it.each([Number.NaN, Infinity, '1', undefined])('refuses the coupling %s', (coupling) => {
    expect(ask('tight-binding', { coupling })).toMatchObject({ code: 'model.coupling', details: { where: 'coupling' } });
  });

  it.each([
    ['bose-hubbard-dimer', { strength: 1, seed: 1, realisation: 0 }, 'disorder'],
    ['tight-binding', 5, 'disorder'],
    ['tight-binding', { strength: -1, seed: 1, realisation: 0 }, 'disorder.strength'],
    ['tight-binding', { strength: Infinity, seed: 1, realisation: 0 }, 'disorder.strength'],
    ['tight-binding', { strength: 1, seed: 0.5, realisation: 0 }, 'disorder.seed'],
    ['tight-binding', { strength: 1, seed: 1, realisation: -1 }, 'disorder.realisation'],
  ])('%s refuses disorder %j', (model, disorder, where) => {
    expect(ask(model, { disorder })).toMatchObject({ code: 'model.parameter', details: { where } });
  });

  it('refuses energies beyond double precision instead of computing with infinities', () => {
    const huge = () => systemOf('bose-hubbard-chain', { size: 3, coupling: 1e308, prepared: { occupation: [3, 0, 0] } });
    expect(caught(huge).code).toBe('matrix.not-finite');
    const dimer = () => systemOf('bose-hubbard-dimer', { size: 10, coupling: 1e308, prepared: 'all-left' });
    expect(caught(dimer).code).toBe('matrix.not-finite');
  });

  it('says a huge chain is huge without building it', () => {
    const chain = findModel('bose-hubbard-chain');
    const extent = chain.extent(requestOf('bose-hubbard-chain', { size: 40, prepared: 'unit-filling' }));
    // C(79, 40) = 53753604366668088230810 > 2^53, rounded correctly
    expect(extent).toMatchObject({ hilbertDimension: 5.375360436666809e22, dimension: 5.375360436666809e22, storage: 'sparse' });
    // C(56, 28), the last central binomial below 2^53, exact
    const exact = chain.extent(requestOf('bose-hubbard-chain', { size: 29, parameters: { particles: 28 }, prepared: 'all-left' }));
    expect(exact.hilbertDimension).toBe(7_648_690_600_760_440);
  });
});

describe('scales of the coupling', () => {
  it('interaction-ratio is U N/(2J)', () => {
    const scale = findModel('bose-hubbard-dimer').scales.find(({ name }) => name === 'interaction-ratio');
    expect(scale?.toCoupling(2, 20, { J: 0.5 })).toBeCloseTo(0.1, 15);
    expect(caught(() => scale?.toCoupling(2, 20, { J: 0 })).code).toBe('model.coupling');
  });

  it('U/J is in units of the hopping', () => {
    const scale = findModel('bose-hubbard-chain').scales.find(({ name }) => name === 'U/J');
    expect(scale?.toCoupling(3.4, 8, { J: 2 })).toBe(6.8);
    expect(caught(() => scale?.toCoupling(3.4, 8, { J: 0 })).code).toBe('model.coupling');
  });
});

describe('disorder', () => {
  const SITES = 100;
  const energies = (strength: number, seed: number, realisation: number): Float64Array => {
    const { matrix } = systemOf('tight-binding', {
      size: SITES,
      parameters: { geometry: 'line' },
      disorder: { strength, seed, realisation },
    });
    return (matrix as Extract<System['matrix'], { kind: 'tridiagonal' }>).diagonal;
  };

  it('is fixed by seed and realisation, and stretches with its strength', () => {
    expect(energies(2, 7, 3)).toEqual(energies(2, 7, 3));
    expect(energies(2, 7, 4)).not.toEqual(energies(2, 7, 3));
    expect(energies(2, 8, 3)).not.toEqual(energies(2, 7, 3));
    energies(4, 7, 3).forEach((energy, x) => expect(energy).toBe(2 * energies(2, 7, 3)[x]));
  });

  it('adds to the given on-site energies; zero strength is no disorder', () => {
    const asked = { size: 3, parameters: { onsite: [1, 2, 3], geometry: 'line' } };
    expect(systemOf('tight-binding', { ...asked, disorder: { strength: 0, seed: 1, realisation: 0 } }).matrix).toMatchObject({
      diagonal: Float64Array.of(1, 2, 3),
    });
    const request = requestOf('tight-binding', { ...asked, disorder: { strength: 0, seed: 1, realisation: 0 } });
    expect(findModel('tight-binding').canonical(request).disorder).toBeNull();
  });

  it('is uniform on [−W/2, W/2]', () => {
    const W = 3;
    const drawn = Array.from({ length: 100 }, (_, realisation) => [...energies(W, 42, realisation)])
      .flat()
      .sort((a, b) => a - b);
    const n = drawn.length;
    const mean = drawn.reduce((a, b) => a + b, 0) / n;
    const variance = drawn.reduce((a, b) => a + (b - mean) ** 2, 0) / n;
    expect(drawn[0]).toBeGreaterThanOrEqual(-W / 2);
    expect(drawn[n - 1]).toBeLessThan(W / 2);
    // Four standard errors: of the mean W/√(12n); of the variance W²/√(180 n).
    expect(Math.abs(mean)).toBeLessThan((4 * W) / Math.sqrt(12 * n));
    expect(Math.abs(variance - (W * W) / 12)).toBeLessThan((4 * W * W) / Math.sqrt(180 * n));
    // Kolmogorov–Smirnov distance; 1.95/√n is passed by 99.9 % of true samples (common practice).
    const distance = Math.max(...drawn.map((x, i) => Math.abs((i + 0.5) / n - (x / W + 0.5))));
    expect(distance).toBeLessThan(1.95 / Math.sqrt(n));
  });
});
