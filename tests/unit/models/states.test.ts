import { describe, expect, it } from 'vitest';
import { WindrowError } from '../../../src/core/errors.js';
import { findModel } from '../../../src/models/registry.js';
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

const dimer = (prepared: unknown, detected: unknown = 'same', size = 4) => systemOf('bose-hubbard-dimer', { size, prepared, detected });

describe('states that are allowed', () => {
  it('names, occupations and sites mean the same vector', () => {
    expect(dimer('all-left').detected.re).toEqual(Float64Array.of(1, 0, 0, 0, 0));
    expect(dimer({ occupation: [4, 0] }).detected.re).toEqual(Float64Array.of(1, 0, 0, 0, 0));
    expect(dimer('balanced').detected.re).toEqual(Float64Array.of(0, 0, 1, 0, 0));
    expect(dimer({ site: 2 }, 'same', 1).detected.re).toEqual(Float64Array.of(0, 1));
    expect(systemOf('tight-binding', { size: 5, prepared: 'center' }).detected.re).toEqual(Float64Array.of(0, 0, 1, 0, 0));
    expect(systemOf('tight-binding', { size: 5, prepared: { occupation: [0, 0, 0, 0, 1] } }).detected.re).toEqual(
      systemOf('tight-binding', { size: 5, prepared: 'last' }).detected.re,
    );
  });

  it('normalises superpositions, with complex amplitudes in a second plane', () => {
    const real = dimer({
      superposition: [
        [3, 'all-left'],
        [-4, 'all-right'],
      ],
    }).detected;
    expect(real.re[0]).toBeCloseTo(0.6, 15);
    expect(real.re[4]).toBeCloseTo(-0.8, 15);
    expect(real.im).toBeNull();
    const complex = dimer({
      superposition: [
        [1, 'all-left'],
        [[0, 1], { occupation: [2, 2] }],
      ],
    }).detected;
    expect(complex.re[0]).toBeCloseTo(Math.SQRT1_2, 15);
    expect(complex.im?.[2]).toBeCloseTo(Math.SQRT1_2, 15);
  });

  it('normalises inner superpositions first and sums equal labels', () => {
    const inner = {
      superposition: [
        [5, 'all-left'],
        [5, 'all-right'],
      ],
    };
    const { re } = dimer({
      superposition: [
        [Math.SQRT2, inner],
        [-1, 'all-right'],
        [[0, 0], 'balanced'],
      ],
    }).detected;
    expect([...re]).toEqual([1, 0, 0, 0, 0]);
  });

  it('scales amplitudes of any size', () => {
    const { re } = dimer({
      superposition: [
        [3e300, 'all-left'],
        [4e300, 'all-right'],
      ],
    }).detected;
    expect(re[0]).toBeCloseTo(0.6, 15);
    const tiny = dimer({
      superposition: [
        [3e-300, 'all-left'],
        [4e-300, 'all-right'],
      ],
    }).detected;
    expect(tiny.re[0]).toBeCloseTo(0.6, 15);
  });

  it("detect: same is the prepared object; a prepared part outside φ's sector is dropped", () => {
    const same = dimer('all-left');
    expect(same.prepared).toBe(same.detected);
    const { prepared, matrix } = systemOf('bose-hubbard-dimer', {
      size: 2,
      parameters: { J: 0 },
      prepared: {
        superposition: [
          [0.6, 'all-left'],
          [0.8, 'balanced'],
        ],
      },
      detected: 'all-left',
    });
    expect(matrix.dimension).toBe(1);
    expect([...prepared.re]).toEqual([0.6000000000000001].map((x) => expect.closeTo(x, 14) as number));
  });

  it('a superposition across uncoupled sectors keeps each of them', () => {
    const { matrix, sectorDimension } = systemOf('bose-hubbard-dimer', {
      size: 3,
      parameters: { J: 0 },
      prepared: {
        superposition: [
          [1, 'all-left'],
          [1, 'all-right'],
        ],
      },
    });
    expect(sectorDimension).toBe(2);
    expect(matrix).toMatchObject({ diagonal: Float64Array.of(3, 3), offDiagonal: Float64Array.of(0) });
  });

  it('a line cut by a missing hop keeps the sites of φ only', () => {
    expect(
      systemOf('tight-binding', { size: 6, coupling: 0, parameters: { geometry: 'line' }, prepared: { site: 3 } }).sectorDimension,
    ).toBe(1);
    expect(systemOf('tight-binding', { size: 6, coupling: 0, prepared: 'uniform' }).sectorDimension).toBe(6);
  });

  it('names of the chain', () => {
    const wave = systemOf('bose-hubbard-chain', { size: 4, parameters: { particles: 2 }, prepared: 'density-wave' });
    const list = systemOf('bose-hubbard-chain', { size: 4, parameters: { particles: 2 }, prepared: { occupation: [1, 0, 1, 0] } });
    expect(wave.detected).toEqual(list.detected);
    const unit = systemOf('bose-hubbard-chain', { size: 4, prepared: 'unit-filling' });
    expect(unit.detected).toEqual(systemOf('bose-hubbard-chain', { size: 4, prepared: { occupation: [1, 1, 1, 1] } }).detected);
    const wall = systemOf('bose-hubbard-chain', { size: 4, prepared: 'domain-wall' });
    const pairs = systemOf('bose-hubbard-chain', { size: 4, prepared: { occupation: [2, 2, 0, 0] } });
    expect(wall.detected).toEqual(pairs.detected);
  });
});

describe('states that are refused', () => {
  it.each<[string, string, unknown, string, RegExp, RegExp]>([
    ['unknown name', 'bose-hubbard-dimer', 'all-up', 'prepare', /all-up/, /all-left, all-right, balanced/],
    ['same as prepared state', 'bose-hubbard-dimer', 'same', 'prepare', /same/, /all-left/],
    ['wrong particle number', 'bose-hubbard-dimer', { occupation: [3, 0] }, 'prepare.occupation', /\[3,0\]/, /sum to 4/],
    ['wrong length', 'bose-hubbard-dimer', { occupation: [4] }, 'prepare.occupation', /\[4\]/, /^2 whole numbers/],
    ['negative occupation', 'bose-hubbard-dimer', { occupation: [5, -1] }, 'prepare.occupation', /-1/, /from 0/],
    ['fractional occupation', 'bose-hubbard-dimer', { occupation: [2.5, 1.5] }, 'prepare.occupation', /2\.5/, /whole/],
    ['NaN', 'bose-hubbard-dimer', { occupation: [Number.NaN, 4] }, 'prepare.occupation', /null/, /whole/],
    ['text in a list', 'bose-hubbard-dimer', { occupation: ['4', 0] }, 'prepare.occupation', /"4"/, /whole/],
    ['occupation not a list', 'bose-hubbard-dimer', { occupation: 4 }, 'prepare.occupation', /^4$/, /list/],
    ['site of many bosons', 'bose-hubbard-dimer', { site: 1 }, 'prepare.site', /^1$/, /4 bosons/],
    ['no such site', 'tight-binding', { site: 5 }, 'prepare.site', /^5$/, /from 1 to 4/],
    ['site counted from 0', 'tight-binding', { site: 0 }, 'prepare.site', /^0$/, /from 1 to 4/],
    ['two particles', 'tight-binding', { occupation: [1, 1, 0, 0] }, 'prepare.occupation', /1,1/, /single 1/],
    ['two on one site', 'tight-binding', { occupation: [2, 0, 0, 0] }, 'prepare.occupation', /2,0/, /single 1/],
    ['unknown form', 'tight-binding', { place: 1 }, 'prepare', /place/, /superposition/],
    ['two forms', 'tight-binding', { site: 1, occupation: [1, 0, 0, 0] }, 'prepare', /site/, /site: n/],
    ['null', 'tight-binding', null, 'prepare', /null/, /state name/],
    ['a number', 'tight-binding', 7, 'prepare', /7/, /state name/],
    ['empty superposition', 'tight-binding', { superposition: [] }, 'prepare.superposition', /\[\]/, /at least one/],
    ['term without state', 'tight-binding', { superposition: [[1]] }, 'prepare.superposition', /\[1\]/, /amplitude, state/],
    [
      'zero vector',
      'tight-binding',
      {
        superposition: [
          [1, 'first'],
          [-1, 'first'],
        ],
      },
      'prepare',
      /-1/,
      /cancel/,
    ],
    [
      'zero up to rounding',
      'tight-binding',
      {
        superposition: [
          [0.1, 'first'],
          [0.2, 'first'],
          [-0.3, { site: 1 }],
        ],
      },
      'prepare',
      /0\.3/,
      /cancel/,
    ],
    ['zero amplitude', 'tight-binding', { superposition: [[0, 'first']] }, 'prepare', /0/, /cancel/],
    ['infinite amplitude', 'tight-binding', { superposition: [[Infinity, 'first']] }, 'prepare.superposition.0.0', /Infinity/, /finite/],
    ['amplitude of three', 'tight-binding', { superposition: [[[1, 2, 3], 'first']] }, 'prepare.superposition.0.0', /1,2,3/, /imaginary/],
    [
      'inner name',
      'tight-binding',
      {
        superposition: [
          [1, 'first'],
          [1, 'middle'],
        ],
      },
      'prepare.superposition.1.1',
      /middle/,
      /center/,
    ],
    ['inner site', 'tight-binding', { superposition: [[1, { site: 9 }]] }, 'prepare.superposition.0.1.site', /9/, /1 to 4/],
  ])('%s', (_what, model, prepared, where, found, allowed) => {
    const error = caught(() => requestOf(model, { size: 4, prepared }));
    expect(error.code).toBe(typeof prepared === 'string' || where === 'prepare.superposition.1.1' ? 'state.unknown' : 'state.invalid');
    expect(error.exit).toBe(2);
    expect(error.details.where).toBe(where);
    expect(error.details.found).toMatch(found);
    expect(error.details.allowed).toMatch(allowed);
  });

  it('names that do not fit the system', () => {
    const odd = caught(() => dimer('balanced', 'same', 3));
    expect([odd.code, odd.details.allowed]).toEqual(['state.invalid', 'an even number of bosons']);
    const chain = (prepared: string, size: number, particles: number) =>
      caught(() => requestOf('bose-hubbard-chain', { size, parameters: { particles }, prepared })).details.allowed;
    expect(chain('unit-filling', 4, 3)).toBe('as many bosons as sites');
    expect(chain('domain-wall', 3, 3)).toMatch(/even number of sites/);
    expect(chain('density-wave', 4, 3)).toMatch(/every other site/);
  });

  it('nesting without end, and the detected state by its own key', () => {
    let nested: unknown = 'first';
    for (let depth = 0; depth < 40; depth += 1) nested = { superposition: [[1, nested]] };
    expect(caught(() => requestOf('tight-binding', { size: 4, prepared: nested })).code).toBe('state.invalid');
    const error = caught(() => requestOf('tight-binding', { size: 4, prepared: 'first', detected: { site: 8 } }));
    expect(error.details.where).toBe('detect.site');
  });
});

describe('canonical states', () => {
  const canonical = (model: string, asked: object) => {
    const { prepared, detected } = findModel(model).canonical(requestOf(model, { size: 4, prepared: 'first', ...asked }));
    return [prepared, detected];
  };

  it('names a basis state by the first name that means it, else as the family writes it', () => {
    expect(canonical('bose-hubbard-dimer', { prepared: { occupation: [4, 0] } })).toEqual(['all-left', 'same']);
    expect(canonical('bose-hubbard-dimer', { prepared: { occupation: [3, 1] } })).toEqual([{ occupation: [3, 1] }, 'same']);
    expect(canonical('tight-binding', { prepared: { occupation: [0, 0, 1, 0] } })).toEqual([{ site: 3 }, 'same']);
    expect(canonical('tight-binding', { prepared: 'uniform', detected: 'uniform' })).toEqual(['uniform', 'same']);
  });

  it("writes the return problem as 'same' however its two states are spelled", () => {
    expect(canonical('bose-hubbard-dimer', { prepared: 'all-right', detected: { occupation: [0, 4] } })).toEqual(['all-right', 'same']);
    const first = {
      superposition: [
        [[1, 0], { site: 1 }],
        [[0, 1], 'last'],
      ],
    };
    const second = {
      superposition: [
        [1, 'first'],
        [[0, 1], { site: 4 }],
      ],
    };
    expect(canonical('tight-binding', { prepared: first, detected: second })).toEqual([
      {
        superposition: [
          [1, 'first'],
          [[0, 1], 'last'],
        ],
      },
      'same',
    ]);
  });
});
