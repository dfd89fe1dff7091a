/** What the options of a follow-up ask of a sweep, and what they refuse. Expectations follow the rules of sweep files; no outside numbers. */
import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { describe, expect, it } from 'vitest';
import { askedQuestions, asksFollowUp, type FollowUpOptions } from '../../../src/cli/follow-up-options.js';
import type { Json } from '../../../src/core/json.js';
import { normalise } from '../../../src/sweep/document.js';
import { expandQuestions } from '../../../src/sweep/questions.js';
import { smallSweep } from '../../support/small-sweep.js';

const file = { ...smallSweep(), detector: { efficiency: [0.5, 1] }, sampling: { draws: 4, seed: 3 } };
const document = normalise(file);
const asked = (options: FollowUpOptions) => askedQuestions(document as unknown as Json, options);

describe('follow-up questions', () => {
  it('are the sweep with some keys replaced: the same ids as in a file that says so', () => {
    const cases: [FollowUpOptions, object][] = [
      [{ budget: '77' }, { budget: 77 }],
      [{ budget: '77, 99' }, { budget: [77, 99] }],
      [{ budget: '{ from: 10, to: 30, step: 10 }' }, { budget: [10, 20, 30] }],
      [{ efficiency: '0.25' }, { detector: { efficiency: 0.25 } }],
      [{ energyResolution: '0.5,auto' }, { resolution: { energy: [0.5, 'auto'] } }],
      [{ weightResolution: '1e-3' }, { resolution: { weight: 1e-3 } }],
      [{ schedule: ['{ family: exponential, mean: [0.1, 0.2] }'] }, { schedules: [{ family: 'exponential', mean: [0.1, 0.2] }] }],
      [
        { schedule: ['{ family: fixed, interval: 1 }', '{ family: uniform, low: 0, high: 1, dead-time: 0.5 }'], budget: '5' },
        {
          schedules: [
            { family: 'fixed', interval: 1 },
            { family: 'uniform', low: 0, high: 1, 'dead-time': 0.5 },
          ],
          budget: 5,
        },
      ],
      [{}, {}],
    ];
    for (const [options, changes] of cases) expect(asked(options)).toEqual(expandQuestions(normalise({ ...file, ...changes })));
  });

  it('take measured intervals from a file', () => {
    const folder = mkdtempSync(join(tmpdir(), 'windrow-intervals-'));
    const path = join(folder, 'intervals.txt');
    writeFileSync(path, '0.25\n0.5\n');
    const questions = asked({ schedule: [`{ family: empirical, file: ${path} }`] });
    expect(questions[0].question.schedule).toMatchObject({ family: 'empirical', intervals: [0.25, 0.5] });
    rmSync(folder, { recursive: true });
  });

  it.each<[FollowUpOptions, RegExp]>([
    [{ schedule: ['{ family: exponential, mean: -1 }'] }, /schedules\[0\]/],
    [{ schedule: ['{ family: poisson, mean: 1 }'] }, /schedules\[0\]/],
    [{ schedule: ['uniform'] }, /schedules\[0\]/],
    [{ schedule: ['{ family: ['] }, /--schedule/],
    [{ schedule: ['12'] }, /schedules\[0\]/],
    [{ schedule: ['{ family: empirical, file: /nowhere/at/all }'] }, /nowhere/],
    [{ budget: 'many' }, /budget/],
    [{ budget: '0' }, /budget/],
    [{ efficiency: '1.5' }, /efficiency/],
    [{ weightResolution: '1' }, /weight/],
  ])('refuse %j', (options, where) => {
    let thrown: unknown;
    try {
      asked(options);
    } catch (error) {
      thrown = error;
    }
    expect(thrown).toMatchObject({ name: 'WindrowError', exit: 2 });
    expect(JSON.stringify({ ...(thrown as object), message: (thrown as Error).message })).toMatch(where);
  });

  it('are asked for by any of the options but the numbers of stored ones', () => {
    expect(asksFollowUp({ question: '1' })).toBe(false);
    for (const option of ['budget', 'energyResolution', 'weightResolution', 'efficiency'])
      expect(asksFollowUp({ [option]: '1' })).toBe(true);
    expect(asksFollowUp({ schedule: [] })).toBe(true);
  });
});
