/** `map`, `cut`, `boundary` and `export` with questions that were never swept, on an embedded store. */
import { existsSync } from 'node:fs';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { makeWorkplace, TWO_LEVEL_SWEEP, type Workplace } from './small-store.js';

type Row = { readonly [key: string]: number & string };

let place: Workplace;
beforeAll(async () => {
  place = makeWorkplace();
  const { status, err } = await place.run('sweep', place.write('line.yaml', TWO_LEVEL_SWEEP));
  if (status !== 0) throw new Error(err);
});
afterAll(() => place.remove());

describe('a question that was not swept', () => {
  it('is answered from stored measures, by the closed form; stored; and reused', async () => {
    // Two levels ±Ω with weights w, 1 − w under a fixed interval: the return needs <n> = 2 measurements on average, whatever τ
    // (Recurrence for discrete time unitary evolutions, Commun. Math. Phys. 320, 543 (2013), DOI 10.1007/s00220-012-1645-2).
    const args = ['cut', 'two-level-line', '--field', 'mean_measurements', '--schedule', '{ family: fixed, interval: 0.41 }'];
    const first = await place.run(...args, '--format', 'json');
    expect(first.status).toBe(0);
    expect(first.err).toContain('question 2 of two-level-line: 15 cells computed from 15 stored measures, nothing diagonalised');
    const rows = JSON.parse(first.out) as Row[];
    expect(rows).toHaveLength(15);
    for (const row of rows) {
      expect(row['question']).toBe(2);
      expect(row['mean_measurements']).toBeCloseTo(2, 10);
    }
    const again = await place.run(...args, '--format', 'json');
    expect(again.err).toContain('every cell was in the store already');
    expect(again.out).toBe(first.out);
  });

  it('keeps of the sweep what the options leave open', async () => {
    const { out, err } = await place.run('map', 'two-level-line', '--budget', '30,40', '--efficiency', '0.5', '--format', 'json');
    expect(err).toContain('60 cells computed from 15 stored measures');
    const { maps } = JSON.parse(out) as { maps: { budget: number; schedule: { family: string } }[] };
    expect(maps.map(({ budget, schedule }) => [schedule.family, budget])).toEqual([
      ['fixed', 30],
      ['fixed', 40],
      ['exponential', 30],
      ['exponential', 40],
    ]);
  });

  it('draws figures and brackets with them', async () => {
    const figures = join(place.folder, 'figures');
    const drawn = await place.run('cut', 'two-level-line', '--schedule', 'uniform', '--figures', figures);
    expect(drawn.status).toBe(2);
    const schedule = '{ family: uniform, low: 0.2, high: 0.6 }';
    expect((await place.run('cut', 'two-level-line', '--schedule', schedule, '--figures', figures)).status).toBe(0);
    expect(existsSync(join(figures, 'cut-winding-number.svg'))).toBe(true);
    const { out, err } = await place.run(
      'boundary',
      'two-level-line',
      '--schedule',
      schedule,
      '--weight-resolution',
      '0.2',
      '--steepest',
      '--format',
      'json',
    );
    expect(err).toContain('15 cells computed from 15 stored measures');
    // The fainter level, of weight (1 − (b/2)/Ω)/2, reaches 0.2 at g = (b/2) √(1/0.36 − 1) = 2/3.
    const [found] = JSON.parse(out) as { low: number; high: number }[];
    expect(found.low).toBeLessThanOrEqual(2 / 3);
    expect(found.high).toBeGreaterThanOrEqual(2 / 3);
  });

  it('is listed by status and exported with the others; progress and resuming are those of the sweep', async () => {
    const status = JSON.parse((await place.run('status', 'two-level-line', '--format', 'json')).out) as {
      cells: number;
      stored_cells: number;
      questions: unknown[];
      follow_ups: { ordinal: number }[];
    };
    expect(status).toMatchObject({ cells: 30, stored_cells: 30 });
    expect(status.questions).toHaveLength(2);
    expect(status.follow_ups.map(({ ordinal }) => ordinal)).toEqual(status.follow_ups.map((_, index) => index + 2));
    expect((await place.run('status', 'two-level-line')).out).toContain('followed up');
    const exported = await place.run('export', 'two-level-line', '--question', '2', '--format', 'json');
    expect(exported.out.trimEnd().split('\n')).toHaveLength(15);
    expect((await place.run('resume', 'two-level-line')).out).toContain('every cell was in the store already');
  });

  it('is refused in one clear sentence where it makes no sense', async () => {
    const wrong: [string[], RegExp][] = [
      [['--schedule', '{ family: exponential, mean: -1 }'], /schedules\[0\]/],
      [['--budget', '30', '--question', '0'], /chosen twice/],
      [['--question', '99'], /no such question/],
    ];
    for (const [options, words] of wrong) {
      const { status, out, err } = await place.run('map', 'two-level-line', ...options);
      expect({ options, status, out }).toEqual({ options, status: 2, out: '' });
      expect(err).toMatch(words);
    }
  });
});
