/** Sweeps: identities that hold for any input. */
import { stringify } from 'yaml';
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import type { Json } from '../../src/core/json.js';
import { WindrowError } from '../../src/core/errors.js';
import { expandAxis } from '../../src/sweep/axis.js';
import { expandGrid } from '../../src/sweep/grid.js';
import { documentFromJson, readSweep } from '../../src/sweep/read.js';
import type { Grid } from '../../src/sweep/types.js';
import { smallSweep, type Mapping } from '../support/small-sweep.js';

const decimal = fc
  .tuple(fc.integer({ min: -9999, max: 9999 }), fc.integer({ min: 0, max: 4 }))
  .map(([whole, places]) => Number(`${whole}e-${places}`));

describe('axis expansion', () => {
  it('holds count values, ascending, from the first to the last', () => {
    fc.assert(
      fc.property(decimal, fc.double({ min: 1e-3, max: 1e3, noNaN: true }), fc.integer({ min: 2, max: 200 }), (from, width, count) => {
        const to = from + width;
        const values = expandAxis<number>({ from, to, count }, [], false);
        expect(values.length).toBe(count);
        expect([values[0], values.at(-1)]).toEqual([from, to]);
        for (let i = 1; i < count; i++) expect(values[i]).toBeGreaterThan(values[i - 1]);
      }),
    );
  });

  it('is the same by step and by count, and as a list of decimals', () => {
    fc.assert(
      fc.property(
        fc.integer({ min: -500, max: 500 }),
        fc.integer({ min: 1, max: 50 }),
        fc.integer({ min: 1, max: 60 }),
        fc.integer({ min: 0, max: 4 }),
        (from, step, intervals, places) => {
          const text = (value: number): number => Number(`${value}e-${places}`);
          const ends = { from: text(from), to: text(from + step * intervals) };
          // The literal of every value, as a user would write it: the reference is the language's own reading of decimals.
          const listed = Array.from({ length: intervals + 1 }, (_, i) => text(from + step * i));
          expect(expandAxis({ ...ends, step: text(step) }, [], false)).toEqual(listed);
          expect(expandAxis({ ...ends, count: intervals + 1 }, [], false)).toEqual(listed);
        },
      ),
    );
  });
});

const sweeps = fc
  .record({
    sizes: fc.uniqueArray(fc.integer({ min: 1, max: 9 }), { minLength: 1, maxLength: 3 }),
    couplings: fc.uniqueArray(
      decimal.map((value) => value + 0),
      { minLength: 1, maxLength: 4 },
    ),
    tilts: fc.uniqueArray(
      decimal.map((value) => value + 0),
      { minLength: 1, maxLength: 3 },
    ),
    means: fc.uniqueArray(fc.integer({ min: 1, max: 99 }), { minLength: 1, maxLength: 3 }),
    scaled: fc.boolean(),
  })
  .map(({ sizes, couplings, tilts, means, scaled }) =>
    smallSweep({
      size: sizes,
      coupling: scaled ? { values: couplings, as: 'interaction-ratio' } : couplings,
      parameters: { tilt: tilts },
      schedules: [{ family: 'exponential', mean: means }],
    }),
  );

const idsOf = (grid: Grid): string[] => [...[...grid.iterate()].map(({ id }) => id), ...grid.questions.map(({ id }) => id)];

const shuffledKeys = (value: Json, random: () => number): Json => {
  if (Array.isArray(value)) return (value as readonly Json[]).map((inner) => shuffledKeys(inner, random));
  if (typeof value !== 'object' || value === null) return value;
  const entries = Object.entries(value as Mapping).map(([key, inner]) => ({ key, inner, rank: random() }));
  entries.sort((a, b) => a.rank - b.rank);
  return Object.fromEntries(entries.map(({ key, inner }) => [key, shuffledKeys(inner, random)]));
};

describe('grids', () => {
  it('are addressed as they are walked', () => {
    fc.assert(
      fc.property(sweeps, fc.nat(), (sweep, start) => {
        const grid = expandGrid(documentFromJson(sweep));
        const walked = [...grid.iterate()];
        expect(walked.length).toBe(grid.points);
        for (const point of walked) expect(grid.pointAt(point.ordinal)).toEqual(point);
        const from = start % (grid.points + 1);
        expect([...grid.iterate(from)]).toEqual(walked.slice(from));
      }),
      { numRuns: 30 },
    );
  });

  it('have distinct places, one id a distinct point', () => {
    fc.assert(
      fc.property(sweeps, (sweep) => {
        const walked = [...expandGrid(documentFromJson(sweep)).iterate()];
        expect(new Set(walked.map(({ coordinates }) => JSON.stringify(coordinates))).size).toBe(walked.length);
        const specs = new Map(walked.map(({ id, spec }) => [id, JSON.stringify(spec)]));
        for (const { id, spec } of walked) expect(specs.get(id)).toBe(JSON.stringify(spec));
        expect(new Set(specs.values()).size).toBe(specs.size);
      }),
      { numRuns: 30 },
    );
  });

  it('have ids that no key order, format or layout changes', () => {
    fc.assert(
      fc.property(
        sweeps,
        fc.infiniteStream(fc.double({ min: 0, max: 1, noNaN: true })),
        fc.integer({ min: 20, max: 120 }),
        (sweep, stream, lineWidth) => {
          const random = (): number => stream.next().value as number;
          const expected = idsOf(expandGrid(documentFromJson(sweep)));
          const shuffled = shuffledKeys(sweep, random);
          const texts = [
            JSON.stringify(shuffled),
            JSON.stringify(shuffled, null, '\t'),
            stringify(shuffled, { lineWidth }),
            stringify(shuffled, { collectionStyle: 'flow', lineWidth }),
            `# comment\r\n${stringify(shuffled).replaceAll('\n', '\r\n')}`,
          ];
          for (const text of texts) expect(idsOf(expandGrid(readSweep(text)))).toEqual(expected);
        },
      ),
      { numRuns: 30 },
    );
  });

  it('survive being stored', () => {
    fc.assert(
      fc.property(sweeps, (sweep) => {
        const document = documentFromJson(sweep);
        const back = documentFromJson(JSON.parse(JSON.stringify(document)) as Json);
        expect(back).toEqual(document);
        expect(idsOf(expandGrid(back))).toEqual(idsOf(expandGrid(document)));
      }),
      { numRuns: 30 },
    );
  });
});

describe('reading', () => {
  it('gives a document or one error, whatever the text', () => {
    fc.assert(
      fc.property(fc.oneof(fc.string({ unit: 'binary' }), fc.json(), fc.uint8Array({ maxLength: 200 }), corrupted()), (source) => {
        try {
          readSweep(source, { file: 'any' });
        } catch (error) {
          expect(error).toBeInstanceOf(WindrowError);
          expect((error as WindrowError).exit).toBe(2);
          expect((error as WindrowError).details.where).toBe('any');
        }
      }),
      { numRuns: 300 },
    );
  });
});

/** A right file with a piece replaced by something random. */
function corrupted(): fc.Arbitrary<string> {
  const text = stringify(smallSweep());
  return fc
    .tuple(
      fc.nat({ max: text.length }),
      fc.nat({ max: 20 }),
      fc.oneof(fc.string(), fc.constantFrom('[', '{', ':', '- ', '*a', '&a', '!', '\t', '.nan', '1e999', 'null', '""')),
    )
    .map(([at, length, piece]) => text.slice(0, at) + piece + text.slice(at + length));
}
