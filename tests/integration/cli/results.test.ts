/** Commands that compute and read results: the built command line on an embedded store, data on stdout, everything else on stderr. */
import { existsSync, readFileSync } from 'node:fs';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { recurrentWeight } from '../../support/two-level-rows.js';
import { JUNCTION_SWEEP, makeWorkplace, type Run, runCli, TWO_LEVEL_SWEEP, type Workplace } from './small-store.js';

type Record_ = Record<string, unknown>;

let place: Workplace;
let first: Run;

function jsonLines(text: string): Record_[] {
  return text
    .trimEnd()
    .split('\n')
    .map((line) => JSON.parse(line) as Record_);
}

beforeAll(async () => {
  place = makeWorkplace();
  const file = place.write('line.yaml', TWO_LEVEL_SWEEP);
  first = await place.run('sweep', file);
  const junction = await place.run('sweep', place.write('junction.yaml', JUNCTION_SWEEP), '--report', join(place.folder, 'out'));
  if (junction.status !== 0) throw new Error(junction.err);
  place.write('junction.out', junction.out);
});
afterAll(() => place.remove());

describe('sweep', () => {
  it('ends with status 0 and its summary on stdout; progress is on stderr', () => {
    expect(first).toMatchObject({ status: 0 });
    expect(first.out).toContain('Sweep two-level-line is finished.');
    expect(first.out).toMatch(/points +15\n/);
    expect(first.out).toMatch(/cells +30\n/);
    expect(first.out).toMatch(/computed +30\n/);
    expect(first.out).not.toContain('windrow:');
  });

  it('run again reuses every cell and says so', async () => {
    const again = await place.run('sweep', place.write('line.yaml', TWO_LEVEL_SWEEP), '--format', 'json');
    expect(again.status).toBe(0);
    expect(JSON.parse(again.out)).toMatchObject({ computed: 0, reused: 30, failed: 0, outcome: 'done' });
    const said = await place.run('resume', 'two-level-line');
    expect(said.out).toContain('every cell was in the store already');
  });

  it('with --report shows phase diagram and boundary and writes figures', () => {
    const out = readFileSync(join(place.folder, 'files', 'junction.out'), 'utf8');
    expect(out).toContain('winding number · exponential, mean 0.5');
    expect(out).toMatch(/^ *6 \|[0-9~|]/m);
    expect(out).toContain('Boundary along coupling: Λ = U N/(2J)');
    for (const name of ['map-winding-number', 'map-capped-mean'])
      for (const kind of ['svg', 'png']) {
        const path = join(place.folder, 'out', `${name}.${kind}`);
        expect(out).toContain(path);
        expect(existsSync(path)).toBe(true);
      }
  });

  it('--estimate prints the grid and touches no store', async () => {
    const empty = makeWorkplace();
    const { status, out } = await empty.run('sweep', empty.write('j.yaml', JUNCTION_SWEEP), '--estimate', '--format', 'json');
    expect(status).toBe(0);
    expect(JSON.parse(out)).toMatchObject({ points: 24, questions: 1, cells: 24, largest_dimension: 7 });
    expect(existsSync(empty.store)).toBe(false);
    empty.remove();
  });
});

describe('export', () => {
  it('prints one flat object a cell, whose numbers are the closed forms of the two-level system', async () => {
    const { status, out, err } = await place.run('export', 'two-level-line', '--format', 'json');
    expect({ status, err }).toEqual({ status: 0, err: '' });
    const cells = jsonLines(out);
    expect(cells).toHaveLength(30);
    for (const cell of cells) {
      // Two levels from one rotation each: a few ulp.
      expect(cell['recurrent_weight']).toBeCloseTo(recurrentWeight(cell['coupling'] as number, 1), 13);
      // The fainter level, of weight (1 − (b/2)/Ω)/2, is seen where it reaches the resolution 1/K.
      const faint = (1 - 0.5 / Math.hypot(cell['coupling'] as number, 0.5)) / 2;
      expect(cell['winding_number']).toBe(faint < 1 / 20 ? 1 : 2);
      expect(cell).toMatchObject({ sweep: 'two-level-line', model: 'two-level', status: 'computed', budget: 20 });
    }
  });

  it('is the same in CSV, number for number', async () => {
    const cells = jsonLines((await place.run('export', 'junction', '--format', 'json')).out);
    const path = join(place.folder, 'junction.csv');
    const { status, out, err } = await place.run('export', 'junction', '--output', path);
    expect({ status, out }).toEqual({ status: 0, out: '' });
    expect(err).toContain(path);
    const [header, ...lines] = readFileSync(path, 'utf8').trimEnd().split('\n');
    const columns = header.split(',');
    expect(columns).toEqual(Object.keys(cells[0]));
    expect(lines).toHaveLength(cells.length);
    // Fields before the first quoted one can be split at commas.
    lines.forEach((line, index) => {
      const fields = line.split(',');
      for (const name of ['ordinal', 'size', 'coupling']) expect(Number(fields[columns.indexOf(name)])).toBe(cells[index]?.[name]);
    });
  });
});

describe('point', () => {
  it('computes without a store what a sweep stores: the same ids, the same numbers', async () => {
    const stored = jsonLines((await place.run('export', 'junction', '--format', 'json')).out).find(
      ({ size, coordinates }) => size === 6 && (coordinates as Record_)['coupling'] === 2,
    ) as Record_;
    const file = place.write('junction.yaml', JUNCTION_SWEEP);
    const { status, out } = await runCli(['point', file, '--set', 'size=6', '--set', 'coupling=2', '--format', 'json'], {
      WINDROW_STORE: '/nonexistent',
    });
    expect(status).toBe(0);
    const [point] = jsonLines(out) as [Record_];
    for (const [key, value] of Object.entries(point))
      if (!['sweep', 'ordinal'].includes(key)) expect([key, stored[key]]).toEqual([key, value]);
  });

  it('gives the published variance of the return to a two-level state, 2 cot²(gτ)', async () => {
    // Large fluctuations of the first detected quantum return time, Phys. Rev. Research 1, 033086 (2019),
    // DOI 10.1103/PhysRevResearch.1.033086; the formula for two levels from memory.
    const args = ['point', '--model', 'two-level', '--set', 'coupling=1', '--set', 'schedule={family: fixed, interval: 0.3}'];
    const { out } = await runCli([...args, '--format', 'json']);
    const [point] = jsonLines(out) as [Record_];
    expect(point['variance_measurements']).toBeCloseTo(2 / Math.tan(0.3) ** 2, 9);
    expect(point['mean_measurements']).toBeCloseTo(2, 12);
    const text = (await runCli(args)).out;
    expect(text).toContain('variance_measurements');
    expect(text).toContain('20.901062503');
  });
});

describe('reading commands', () => {
  it('status lists sweeps, and one in full', async () => {
    const list = JSON.parse((await place.run('status', '--format', 'json')).out) as Record_[];
    expect(list.map(({ sweep }) => sweep).sort()).toEqual(['junction', 'two-level-line']);
    expect(list[0]).toMatchObject({ state: 'done', failed_points: 0 });
    const { out } = await place.run('status', 'two-level-line');
    expect(out).toContain('30 of 30 stored');
    expect(out).toContain('fixed, interval 0.3');
  });

  it('map gives the same cells as text, document and rows', async () => {
    const document = JSON.parse((await place.run('map', 'junction', '--field', 'accessible_dimension', '--format', 'json')).out) as {
      maps: { x: { values: number[] }; y: { values: number[] }; values: number[][] }[];
    };
    const [map] = document.maps as [(typeof document.maps)[number]];
    expect(map.y.values).toEqual([2, 4, 6]);
    expect(map.x.values).toHaveLength(8);
    // From all-left without tilt every level of N bosons is bright: N + 1.
    expect(map.values).toEqual([2, 4, 6].map((size) => Array<number>(8).fill(size + 1)));
    const csv = (await place.run('map', 'junction', '--field', 'accessible_dimension', '--format', 'csv')).out.trimEnd().split('\n');
    expect(csv).toHaveLength(25);
    expect(csv[0]).toBe(
      'question,schedule,budget,efficiency,resolution_energy,resolution_weight,size,coupling,accessible_dimension,error,count,state',
    );
    const figures = join(place.folder, 'more');
    const { err } = await place.run('map', 'junction', '--figures', figures, '--at', 'size=4', '--y', 'size');
    expect(err).toContain(join(figures, 'map-winding-number.png'));
  });

  it('boundary brackets the closed-form crossing Σw² = 3/4 at g = b/2', async () => {
    const { out } = await place.run('boundary', 'two-level-line', '--boundary', 'recurrent_weight', '--level', '0.75', '--format', 'json');
    const found = JSON.parse(out) as { low: number; high: number; estimate: number; outcome: string }[];
    expect(found).toHaveLength(2);
    for (const { low, high, estimate, outcome } of found) {
      expect(outcome).toBe('bracket');
      expect(low).toBeLessThanOrEqual(0.5);
      expect(high).toBeGreaterThanOrEqual(0.5);
      expect(Math.abs(estimate - 0.5)).toBeLessThan(0.01);
    }
    // The fainter level appears where (1 − (b/2)/Ω)/2 = 1/K, at g = √(1/0.81 − 1)/2 = 0.2422.
    const steepest = await place.run('boundary', 'two-level-line', '--steepest', '--format', 'csv');
    for (const line of steepest.out.trimEnd().split('\n').slice(1)) expect(line).toContain(',bracket,0.2,0.25,0.3,0.5,1,');
  });

  it('scaling of three sizes is too few, in every format, and that is no failure', async () => {
    const args = ['scaling', 'junction', '--boundary', 'effective_dimension', '--level', '60%'];
    const { status, out } = await place.run(...args, '--format', 'json');
    expect(status).toBe(0);
    expect(JSON.parse(out)).toMatchObject([{ outcome: 'too few sizes', limit: null, exponent: null }]);
    expect((await place.run(...args)).out).toContain('too few sizes');
    expect((await place.run(...args, '--format', 'csv')).out).toContain(',too few sizes,');
    expect(await place.run('scaling', 'junction', '--along', 'size')).toMatchObject({ status: 2, out: '' });
  });

  it('cut runs along the coupling at one size, and along the size at one coupling', async () => {
    const along = JSON.parse((await place.run('cut', 'junction', '--at', 'size=4', '--format', 'json')).out) as Record_[];
    expect(along.map(({ coupling }) => coupling)).toEqual([0.5, 1, 1.5, 2, 2.5, 3, 3.5, 4]);
    const across = JSON.parse((await place.run('cut', 'junction', '--at', 'coupling=2', '--format', 'json')).out) as Record_[];
    expect(across.map(({ size }) => size)).toEqual([2, 4, 6]);
    expect((await place.run('cut', 'junction', '--at', 'size=4')).out).toContain(
      'winding number · exponential, mean 0.5; K = 50, δ = 0.04, ε = 0.02 · size 4',
    );
  });

  it('models, schedules and schema need no store', async () => {
    for (const args of [['models'], ['models', 'bose-hubbard-dimer'], ['schedules'], ['schedules', 'gamma']]) {
      const { status, out } = await runCli([...args, '--format', 'json'], { WINDROW_STORE: '/nonexistent' });
      expect(status).toBe(0);
      expect(() => JSON.parse(out) as unknown).not.toThrow();
    }
    const schema = JSON.parse((await runCli(['schema'])).out) as Record_;
    expect(schema['$schema']).toContain('json-schema.org');
  });

  it('migrate can be run at any time, and stop says when nothing runs', async () => {
    expect((await place.run('migrate')).out).toContain('up to date');
    const { status, out } = await place.run('stop', 'junction');
    expect({ status, out }).toEqual({ status: 0, out: 'Sweep junction is not running.\n' });
    expect(JSON.parse((await place.run('status', 'junction', '--format', 'json')).out)).toMatchObject({ state: 'done' });
  });
});
