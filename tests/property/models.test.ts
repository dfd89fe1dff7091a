/** Identities of Hamiltonians that hold for any parameters. */
import fc from 'fast-check';
import { Matrix } from 'ml-matrix';
import { describe, expect, it } from 'vitest';
import { WindrowError } from '../../src/core/errors.js';
import { canonicalJson } from '../../src/core/json.js';
import type { Json } from '../../src/core/json.js';
import { modelFamilies } from '../../src/models/registry.js';
import type { StateVector } from '../../src/linalg/matrix.js';
import { describeParameters } from '../../src/models/parameters.js';
import { checkRequest } from '../../src/models/request.js';
import type { RawRequest } from '../../src/models/request.js';
import type { ModelFamily } from '../../src/models/types.js';
import { densePlanes, levelsOf, referenceMeasure } from '../support/exact-spectrum.js';
import { systemOf } from '../support/model-requests.js';
import { hermitianTermRequests } from '../support/term-lists.js';

const energy = fc.double({ min: -3, max: 3, noNaN: true });
const geometry = fc.constantFrom('ring', 'line');
const disorder = fc.option(
  fc.record({ strength: fc.double({ min: 0, max: 5, noNaN: true }), seed: fc.nat(), realisation: fc.nat({ max: 99 }) }),
);
const amplitude = fc.tuple(energy, energy).filter(([re, im]) => Math.hypot(re, im) > 0.01);

/** Random requests of each registered family, small enough to look at every element. */
const requests: Record<string, fc.Arbitrary<RawRequest>> = {
  'two-level': fc.record({
    size: fc.constant(2),
    coupling: energy,
    parameters: fc.record({ bias: energy }),
    prepared: fc.constantFrom('up', 'down', 'plus', 'minus'),
  }),
  'tight-binding': fc.integer({ min: 1, max: 9 }).chain((size) =>
    fc.record({
      size: fc.constant(size),
      coupling: energy,
      parameters: fc.record({
        geometry,
        phase: fc.oneof(fc.constant(0), energy),
        onsite: fc.oneof(energy, fc.array(energy, { minLength: size, maxLength: size })),
      }),
      disorder,
      prepared: fc.oneof(
        fc.constantFrom('first', 'last', 'center', 'uniform'),
        fc.record({ site: fc.integer({ min: 1, max: size }) }),
        amplitude.map((a) => ({
          superposition: [
            [1, 'first'],
            [a, 'center'],
          ],
        })),
      ),
      detected: fc.constantFrom('same', 'last', 'uniform'),
    }),
  ),
  'bose-hubbard-dimer': fc.integer({ min: 1, max: 12 }).chain((size) =>
    fc.record({
      size: fc.constant(size),
      coupling: energy,
      parameters: fc.record({ J: energy, tilt: energy }),
      prepared: fc.oneof(
        fc.constantFrom('all-left', 'all-right'),
        fc.integer({ min: 0, max: size }).map((left) => ({ occupation: [left, size - left] })),
      ),
      detected: fc.constantFrom('same', 'all-left'),
    }),
  ),
  'bose-hubbard-chain': fc.tuple(fc.integer({ min: 1, max: 4 }), fc.integer({ min: 1, max: 4 })).chain(([size, particles]) =>
    fc.record({
      size: fc.constant(size),
      coupling: energy,
      parameters: fc.record({ J: energy, tilt: energy, geometry, onsite: energy, particles: fc.constant(particles) }),
      disorder,
      prepared: fc.constantFrom('all-left', 'all-right'),
      detected: fc.constantFrom('same', 'all-right'),
    }),
  ),
  terms: hermitianTermRequests,
};

const normOf = ({ re, im }: StateVector): number => Math.sqrt([...re, ...(im ?? [])].reduce((sum, x) => sum + x * x, 0));

/** Any values of the parameters a family declares; those that are neither numbers nor words keep their default. */
function anyParameters(family: ModelFamily): fc.Arbitrary<Record<string, unknown>> {
  const values: Record<string, fc.Arbitrary<unknown>> = {};
  for (const { name, allowed } of describeParameters(family)) {
    if (/^a finite number(, or|$)/.test(allowed)) values[name] = energy;
    else if (/^[a-z-]+( \| [a-z-]+)+$/.test(allowed)) values[name] = fc.constantFrom(...allowed.split(' | '));
  }
  return fc.record(values);
}

/** For families without their own requests: any parameters, small sizes, the named states that fit and drawn ones. */
function anyRequests(family: ModelFamily): fc.Arbitrary<RawRequest> {
  const { minimum, maximum } = family.size;
  const states = fc.oneof(
    fc.constantFrom<unknown>(...family.states.map(({ name }) => name)),
    fc.nat().map((seed) => (family.productSpace === undefined ? family.states[0]?.name : { random: { seed } })),
  );
  const request = fc.record({
    size: fc.integer({ min: minimum, max: Math.min(minimum + 2, maximum) }),
    coupling: fc.oneof(fc.constant(0), energy),
    parameters: anyParameters(family),
    disorder: family.disordered ? disorder : fc.constant(null),
    prepared: states,
    detected: fc.oneof(fc.constant('same'), states),
  });
  return request.filter((raw) => {
    try {
      checkRequest(family, raw);
      return true;
    } catch (error) {
      if (error instanceof WindrowError && error.code === 'state.invalid') return false;
      throw error;
    }
  });
}

describe.each([...modelFamilies.values()].map((family) => [family.name, family] as const))('%s', (name, family) => {
  const random = requests[name] ?? anyRequests(family);

  it('builds a Hermitian matrix in the promised form, within the promised extent, with a normalised φ', () => {
    fc.assert(
      fc.property(random, (raw) => {
        const request = { ...raw, disorder: raw.disorder ?? null, detected: raw.detected ?? 'same' };
        const system = systemOf(name, request);
        const { matrix, detected, prepared, sectorDimension, hilbertDimension } = system;
        const { re, im } = densePlanes(matrix);
        // Both triangles come from the same products, so they agree to the last bit.
        expect(
          Matrix.sub(re, re.transpose())
            .to1DArray()
            .every((x) => x === 0),
        ).toBe(true);
        expect(
          Matrix.add(im, im.transpose())
            .to1DArray()
            .every((x) => x === 0),
        ).toBe(true);
        const extent = family.extent({ ...request, parameters: family.parameters.parse(raw.parameters ?? {}) } as never);
        expect(sectorDimension).toBe(matrix.dimension);
        expect(sectorDimension).toBeLessThanOrEqual(extent.dimension);
        expect(extent.dimension).toBeLessThanOrEqual(hilbertDimension);
        expect(extent.hilbertDimension).toBe(hilbertDimension);
        expect(extent.storage).toBe(matrix.kind);
        if (matrix.kind === 'sparse') {
          expect(matrix.column.length).toBeLessThanOrEqual(extent.nonzeros);
          if (!extent.complex) expect(matrix.im).toBeNull();
          for (let row = 0; row < matrix.dimension; row += 1) {
            const columns = [...matrix.column.subarray(matrix.rowStart[row], matrix.rowStart[row + 1])];
            expect(columns).toEqual([...new Set(columns)].sort((a, b) => a - b));
            expect(columns).toContain(row);
          }
        }
        // The test's own sum over up to 3^5 squares rounds at 1e-14.
        expect(normOf(detected)).toBeCloseTo(1, 13);
        expect(normOf(prepared)).toBeLessThanOrEqual(1 + 1e-14);
        if (request.detected === 'same') expect(prepared).toBe(detected);
      }),
      { numRuns: 30 },
    );
  });

  it('is deterministic, and its canonical request is a fixed point that builds the same system', () => {
    fc.assert(
      fc.property(random, (raw) => {
        const request = { ...raw, disorder: raw.disorder ?? null, detected: raw.detected ?? 'same' };
        const typed = { ...request, parameters: family.parameters.parse(raw.parameters ?? {}) } as never;
        const canonical = family.canonical(typed);
        expect(family.canonical(canonical)).toEqual(canonical);
        expect(JSON.parse(canonicalJson(canonical as unknown as Json))).toEqual(JSON.parse(JSON.stringify(canonical)));
        const [a, b] = [family.build(typed), family.build(canonical)];
        expect(b.matrix).toEqual(a.matrix);
        expect(b.detected).toEqual(a.detected);
        expect(b.prepared).toEqual(a.prepared);
      }),
      { numRuns: 20 },
    );
  });

  const productSpace = family.productSpace?.bind(family);
  if (productSpace === undefined) return;

  it('numbers its configurations, and H leaves none of the conserved numbers of φ', () => {
    fc.assert(
      fc.property(random, (raw) => {
        const request = checkRequest(family, raw);
        const { basis, space } = productSpace(request, 'conserved');
        expect(space.dimension).toBe(family.extent(request).hilbertDimension);
        const configuration = new Uint16Array(space.sites);
        const whole = productSpace(request, 'whole').space;
        let last = -1;
        for (let rank = 0; rank < Math.min(space.dimension, 300); rank += 1) {
          space.read(rank, configuration);
          expect(space.rank(configuration)).toBe(rank);
          const before = configuration.slice();
          expect(whole.rank(configuration)).toBeGreaterThan(last);
          last = whole.rank(configuration);
          basis.connect(configuration, () => expect(space.rank(configuration)).toBeGreaterThanOrEqual(0));
          expect(configuration).toEqual(before);
        }
      }),
      { numRuns: 15 },
    );
  });
});

describe('conserved particle number', () => {
  it('a uniform on-site energy ε shifts every level of N bosons by exactly N ε', () => {
    fc.assert(
      fc.property(fc.integer({ min: 1, max: 4 }), fc.integer({ min: 1, max: 4 }), geometry, energy, (size, particles, shape, onsite) => {
        const build = (shift: number) =>
          densePlanes(
            systemOf('bose-hubbard-chain', {
              size,
              coupling: 0.7,
              parameters: { particles, geometry: shape, onsite: shift },
              prepared: 'all-left',
            }).matrix,
          ).re;
        const difference = Matrix.sub(build(onsite), build(0));
        const expected = Matrix.eye(difference.rows, difference.rows, particles * onsite);
        expect(Matrix.sub(difference, expected).norm()).toBeLessThan(1e-13 * (1 + difference.rows));
      }),
      { numRuns: 40 },
    );
  });
});

describe('second quantisation by Kronecker products', () => {
  /** b truncated at `most` bosons, on site x of `sites`. */
  const annihilator = (x: number, sites: number, most: number): Matrix => {
    const b = Matrix.zeros(most + 1, most + 1);
    for (let n = 1; n <= most; n += 1) b.set(n - 1, n, Math.sqrt(n));
    let whole = Matrix.eye(1);
    for (let y = 0; y < sites; y += 1) whole = whole.kroneckerProduct(y === x ? b : Matrix.eye(most + 1));
    return whole;
  };

  it('the chain is the sum of its operators restricted to N bosons, element by element', () => {
    const [sites, particles] = [3, 3];
    const b = [0, 1, 2].map((x) => annihilator(x, sites, particles));
    const number = b.map((operator) => operator.transpose().mmul(operator));
    const digits = (index: number): number[] => [Math.floor(index / 16), Math.floor(index / 4) % 4, index % 4];
    // Lexicographic ascending order is the order of the Kronecker index.
    const held = Array.from({ length: 64 }, (_, i) => i).filter((i) => digits(i).reduce((x, y) => x + y, 0) === particles);
    fc.assert(
      fc.property(
        energy.filter((J) => J !== 0),
        energy,
        energy,
        fc.array(energy, { minLength: 3, maxLength: 3 }),
        geometry,
        (J, U, tilt, onsite, shape) => {
          const H = Matrix.zeros(64, 64);
          const pairs =
            shape === 'ring'
              ? [
                  [0, 1],
                  [1, 2],
                  [2, 0],
                ]
              : [
                  [0, 1],
                  [1, 2],
                ];
          for (const [x, y] of pairs) {
            const hop = b[x].transpose().mmul(b[y]);
            H.sub(Matrix.mul(Matrix.add(hop, hop.transpose()), J));
          }
          number.forEach((n, x) => {
            H.add(Matrix.mul(Matrix.sub(n.mmul(n), n), U / 2));
            H.add(Matrix.mul(n, onsite[x] + tilt * (1 - x)));
          });
          const { matrix } = systemOf('bose-hubbard-chain', {
            size: sites,
            coupling: U,
            parameters: { J, tilt, onsite, geometry: shape, particles },
            prepared: { occupation: [1, 1, 1] },
          });
          expect(matrix.dimension).toBe(held.length);
          expect(Matrix.sub(H.selection(held, held), densePlanes(matrix).re).max()).toBeLessThan(1e-12);
          expect(Matrix.sub(H.selection(held, held), densePlanes(matrix).re).min()).toBeGreaterThan(-1e-12);
        },
      ),
      { numRuns: 25 },
    );
  });
});

const coarse = (value: number): number => Math.round(value * 2 ** 20) / 2 ** 20;

describe('translation invariance of rings', () => {
  it('turning the on-site energies around the ring leaves the levels', () => {
    fc.assert(
      // On a grid of 2^-20: the reference decomposition loses digits beside subnormal numbers.
      fc.property(fc.array(energy.map(coarse), { minLength: 3, maxLength: 8 }), fc.nat(), energy.map(coarse), (onsite, turn, phase) => {
        const by = turn % onsite.length;
        const turned = [...onsite.slice(by), ...onsite.slice(0, by)];
        const levels = (list: number[]) =>
          levelsOf(systemOf('tight-binding', { size: onsite.length, parameters: { onsite: list, phase } }).matrix);
        const [a, b] = [levels(onsite), levels(turned)];
        a.forEach((level, i) => expect(level).toBeCloseTo(b[i], 10));
      }),
      { numRuns: 30 },
    );
  });

  it('every site of a uniform ring, and every rotation of an occupation, has the same spectral measure', () => {
    const measureAt = (site: number) => {
      const { matrix, detected } = systemOf('tight-binding', { size: 7, prepared: { site } });
      return referenceMeasure(matrix, detected, detected);
    };
    const rotated = (turn: number) => {
      const list = [2, 0, 1, 0];
      const { matrix, detected } = systemOf('bose-hubbard-chain', {
        size: 4,
        coupling: 0.8,
        parameters: { particles: 3 },
        prepared: { occupation: [...list.slice(turn), ...list.slice(0, turn)] },
      });
      return referenceMeasure(matrix, detected, detected);
    };
    for (const [first, other] of [
      [measureAt(1), measureAt(5)],
      [rotated(0), rotated(3)],
    ]) {
      expect(other).toHaveLength(first.length);
      first.forEach((level, j) => {
        expect(other[j].energy).toBeCloseTo(level.energy, 11);
        expect(other[j].weight).toBeCloseTo(level.weight, 11);
      });
    }
  });
});
