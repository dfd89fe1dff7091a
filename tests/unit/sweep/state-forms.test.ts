/** Every way to write a state goes from a sweep file through a job to a result. */
import { describe, expect, it } from 'vitest';
import { WindrowError } from '../../../src/core/errors.js';
import { parseJob } from '../../../src/queue/job-form.js';
import { stateText } from '../../../src/report/format.js';
import { evaluatePoint } from '../../../src/sweep/evaluate.js';
import { expandGrid } from '../../../src/sweep/grid.js';
import { readSweep } from '../../../src/sweep/read.js';
import { sampleJob } from '../../support/jobs.js';

const file = (prepare: string): string => `
name: states
model: xxz-chain
size: 6
coupling: [0.5, 1]
parameters: { geometry: line }
prepare: ${prepare}
schedules: [{ family: exponential, mean: 0.5 }]
budget: 100
`;

describe('states in a sweep file', () => {
  it.each([
    ['neel', 'neel'],
    ['{ product: "uddudd" }', 'occupation [1, 0, 0, 1, 0, 0]'],
    ['{ occupation: [1, 1, 0, 0, 0, 1] }', 'occupation [1, 1, 0, 0, 0, 1]'],
    ['{ uniform: { like: neel } }', 'uniform like neel'],
    ['{ ground-state: { coupling: 2, as: Δ, within: domain-wall } }', 'ground-state (coupling 2, within domain-wall)'],
    ['{ ground-state: { coupling: 0.5, parameters: { field: 0.25 } } }', 'ground-state (coupling 0.5, field 0.25, within neel)'],
    [
      '{ superposition: [[1, { ground-state: { coupling: 2 } }], [[0, 1], neel]] }',
      '1 ground-state (coupling 2, within neel) + (0, 1i) neel',
    ],
  ])('%s', (prepare, text) => {
    const grid = expandGrid(readSweep(file(prepare)));
    for (let ordinal = 0; ordinal < grid.points; ordinal += 1) {
      const { id, spec } = grid.pointAt(ordinal);
      expect(stateText(spec.prepared)).toBe(text);
      const job = { ...sampleJob(1), points: [{ id, spec, measured: false, open: [0] }] };
      expect(parseJob(JSON.parse(JSON.stringify(job))).points[0]?.spec).toEqual(spec);
      const outcome = evaluatePoint({ id, spec, stored: null, questions: grid.questions }, { memory: 1e9 });
      expect(outcome.failure).toBeNull();
    }
  });

  it('random states of one sector become basis states', () => {
    const { spec } = expandGrid(readSweep(file('{ random: { seed: 5, like: neel } }'))).pointAt(0);
    const prepared = spec.prepared as { occupation: number[] };
    expect(prepared.occupation.reduce((a, b) => a + b, 0)).toBe(3);
  });

  it('an axis of quenches is an axis of states', () => {
    const grid = expandGrid(readSweep(file('[{ ground-state: { coupling: 0.5 } }, { ground-state: { coupling: 2 } }]')));
    expect(grid.points).toBe(4);
    expect(new Set([0, 1, 2, 3].map((ordinal) => grid.pointAt(ordinal).id)).size).toBe(4);
  });

  it('a ground state that is degenerate fails its point, with the reason', () => {
    const grid = expandGrid(
      readSweep(file('{ ground-state: { coupling: 1, parameters: { J: 0 }, within: { uniform: { like: neel } } } }')),
    );
    const { id, spec } = grid.pointAt(0);
    const { failure } = evaluatePoint({ id, spec, stored: null, questions: grid.questions }, { memory: 1e9 });
    expect(failure).toMatchObject({ code: 'state.invalid' });
    expect(failure?.message).toMatch(/degenerate/);
  });

  it.each([
    ['{ random: { like: neel } }', /seed/],
    ['{ ground-state: { couplng: 1 } }', /couplng/],
    ['{ uniform: {} }', /like/],
    ['{ product: 101010 }', /product/],
    ['{ ground-state: { coupling: 1, as: U } }', /scale/],
  ])('refuses %s with its line', (prepare, named) => {
    let error: unknown;
    try {
      readSweep(file(prepare));
    } catch (thrown) {
      error = thrown;
    }
    expect(error).toBeInstanceOf(WindrowError);
    const { message, details } = error as WindrowError;
    expect(details.line).toBe(7);
    expect(`${message} ${JSON.stringify(details)}`).toMatch(named);
  });
});
