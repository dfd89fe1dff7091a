/** Grids: order, addressing, identities and what a document keeps. */
import { describe, expect, it } from 'vitest';
import type { Json } from '../../../src/core/json.js';
import { expandGrid } from '../../../src/sweep/grid.js';
import { cellId, pointId, questionId } from '../../../src/sweep/identity.js';
import { documentFromJson, readSweep } from '../../../src/sweep/read.js';
import { smallSweep, type Mapping } from '../../support/small-sweep.js';

const gridOf = (changes: Mapping = {}): ReturnType<typeof expandGrid> => expandGrid(documentFromJson(smallSweep(changes)));
const ids = (grid: ReturnType<typeof expandGrid>): string[] => [...grid.iterate()].map((point) => point.id);

describe('grid', () => {
  it('counts points, questions and cells', () => {
    const grid = gridOf();
    expect([grid.points, grid.questions.length, grid.cells]).toEqual([3 * 4, 3 * 2, 72]);
    expect(grid.axes.map(({ name, values }) => [name, values])).toEqual([
      ['size', [2, 4, 6]],
      ['coupling', [0.5, 1, 1.5, 2]],
    ]);
  });

  it('varies the last axis fastest', () => {
    const places = [...gridOf({ parameters: { tilt: [0, 1] } }).iterate()].map(({ coordinates }) => Object.values(coordinates));
    expect(places.slice(0, 4)).toEqual([
      [2, 0.5, 0],
      [2, 0.5, 1],
      [2, 1, 0],
      [2, 1, 1],
    ]);
    expect(places.at(-1)).toEqual([6, 2, 1]);
  });

  it('orders questions by schedule, its parameters, then the budget', () => {
    const asked = gridOf().questions.map(({ ordinal, question }) => [
      ordinal,
      question.schedule.family,
      question.schedule['mean'],
      question.budget,
    ]);
    expect(asked).toEqual([
      [0, 'exponential', 0.25, 10],
      [1, 'exponential', 0.25, 100],
      [2, 'exponential', 0.5, 10],
      [3, 'exponential', 0.5, 100],
      [4, 'fixed', undefined, 10],
      [5, 'fixed', undefined, 100],
    ]);
  });

  it('turns a scaled coupling into the own one and keeps it as a coordinate', () => {
    // Λ = U N/(2J): at N = 4, J = 2 and Λ = 1.5, U = 2·2·1.5/4 = 1.5; at J = 1, 0.75 (convention of the model, closed form).
    const grid = gridOf({ size: 4, parameters: { J: [1, 2] } });
    const couplings = [...grid.iterate()].filter(({ coordinates }) => coordinates['coupling'] === 1.5).map(({ spec }) => spec.coupling);
    expect(couplings).toEqual([0.75, 1.5]);
    expect([...gridOf({ size: 4, coupling: [1.5] }).iterate()].map(({ spec }) => spec.coupling)).toEqual([1.5]);
  });

  it('addresses 10^8 points without making them', () => {
    const line = { from: 1, to: 10_000, count: 10_000 };
    const grid = gridOf({ size: 2, coupling: line, parameters: { tilt: line }, budget: 10 });
    expect(grid.points).toBe(1e8);
    expect(grid.pointAt(99_999_999).coordinates).toEqual({ size: 2, coupling: 10_000, tilt: 10_000 });
    expect(grid.pointAt(12_345_678).coordinates).toEqual({ size: 2, coupling: 1235, tilt: 5679 });
    expect(grid.iterate(99_999_998).next().value).toEqual(grid.pointAt(99_999_998));
    expect(() => grid.pointAt(1e8)).toThrow(/outside the grid/);
  });

  it('gives states that mean the same the same id', () => {
    const named = ids(gridOf({ size: 4, detect: 'same' }));
    expect(ids(gridOf({ size: 4, prepare: { occupation: [4, 0] } }))).toEqual(named);
    expect(ids(gridOf({ size: 4, detect: 'all-left' }))).toEqual(named);
    expect(ids(gridOf({ size: 4, detect: 'all-right' }))).not.toEqual(named);
  });

  it('makes axes of states and names them', () => {
    const grid = gridOf({ size: 4, coupling: 1, prepare: ['all-left', { occupation: [3, 1] }] });
    expect([...grid.iterate()].map(({ coordinates }) => coordinates['prepare'])).toEqual(['all-left', '{"occupation":[3,1]}']);
  });

  it('computes a clean system once for all realisations', () => {
    const sweep = {
      model: 'tight-binding',
      size: 4,
      coupling: 1,
      prepare: { site: 1 },
      disorder: { strength: [0, 1], realisations: 3, seed: 5 },
    };
    const grid = gridOf(sweep);
    const points = [...grid.iterate()];
    expect(points.map(({ spec }) => spec.disorder)).toEqual([
      null,
      null,
      null,
      ...[0, 1, 2].map((realisation) => ({ strength: 1, seed: 5, realisation })),
    ]);
    expect(new Set(points.map(({ id }) => id)).size).toBe(4);
    expect(points[4]?.coordinates).toEqual({ size: 4, coupling: 1, disorder: 1, realisation: 1 });
  });

  it('tells a list that is a value from a list that is an axis', () => {
    const chain = { model: 'tight-binding', size: 3, coupling: 1, prepare: { site: 1 } };
    const value = gridOf({ ...chain, parameters: { onsite: [0, 0.5, 0] } });
    expect(value.points).toBe(1);
    expect(value.pointAt(0).spec.parameters['onsite']).toEqual([0, 0.5, 0]);
    const axis = gridOf({ ...chain, parameters: { onsite: { values: [0, [0, 0.5, 0]] } } });
    expect([...axis.iterate()].map(({ coordinates }) => coordinates['onsite'])).toEqual([0, '[0,0.5,0]']);
  });

  it('fills parameters that follow the size', () => {
    const chain = { model: 'bose-hubbard-chain', size: [2, 3], coupling: 1, prepare: 'unit-filling' };
    expect([...gridOf(chain).iterate()].map(({ spec }) => spec.parameters['particles'])).toEqual([2, 3]);
    expect(ids(gridOf({ ...chain, size: 3 }))).toEqual(ids(gridOf({ ...chain, size: 3, parameters: { particles: 3 } })));
  });
});

describe('document', () => {
  it('is a sweep file itself, and the same one', () => {
    const document = documentFromJson(smallSweep({ sampling: { draws: 3 }, detector: { efficiency: [0.5, 1] } }));
    expect(documentFromJson(JSON.parse(JSON.stringify(document)) as Json)).toEqual(document);
    expect(readSweep(JSON.stringify(document, null, 2), { file: 'a.json' })).toEqual(document);
  });

  it('keeps ordinals when a store returns its keys in another order', () => {
    const document = documentFromJson(smallSweep({ parameters: { J: [1, 2], tilt: [0, 1] } }));
    const shuffled = reversedKeys(document as unknown as Json) as unknown as typeof document;
    expect(ids(expandGrid(shuffled))).toEqual(ids(expandGrid(document)));
    expect(expandGrid(shuffled).questions).toEqual(expandGrid(document).questions);
  });

  it('resolves measured intervals from a file', () => {
    const text = JSON.stringify(smallSweep({ schedules: [{ family: 'empirical', file: ['a', 'b'] }] }));
    const document = readSweep(text, { loadIntervals: (name) => (name === 'a' ? [1, 2] : [3]) });
    expect(expandGrid(document).questions.map(({ question }) => question.schedule['intervals'])).toEqual([[1, 2], [1, 2], [3], [3]]);
  });
});

describe('identities', () => {
  const point = gridOf().pointAt(0);

  it('are SHA-256 digests that tell kinds apart', () => {
    const question = gridOf().questions[0];
    const all = [point.id, question.id, cellId(point.id, question.id), cellId(question.id, point.id)];
    expect(new Set(all).size).toBe(4);
    for (const id of all) expect(id).toMatch(/^[0-9a-f]{64}$/);
  });

  it('change with every part of the question', () => {
    const { question } = gridOf().questions[0];
    const changed = [
      { ...question, budget: 11 },
      { ...question, resolution: { energy: 0.1, weight: 'auto' as const } },
      { ...question, resolution: { energy: 'auto' as const, weight: 0.1 } },
      { ...question, detector: { efficiency: 0.5 } },
      { ...question, sampling: { draws: 2, seed: 0 } },
      { ...question, schedule: { ...question.schedule, 'dead-time': 0.1 } },
    ];
    expect(new Set([question, ...changed].map(questionId)).size).toBe(1 + changed.length);
    expect(pointId({ ...point.spec, coupling: point.spec.coupling + 2 ** -52 })).not.toBe(point.id);
  });
});

function reversedKeys(value: Json): Json {
  if (Array.isArray(value)) return (value as readonly Json[]).map(reversedKeys);
  if (typeof value !== 'object' || value === null) return value;
  return Object.fromEntries(
    Object.entries(value)
      .reverse()
      .map(([key, inner]) => [key, reversedKeys(inner)]),
  );
}
