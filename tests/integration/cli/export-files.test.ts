/** `export --as`: files of the built command line, compared value by value with what `export --format json` prints. */
import { createHash } from 'node:crypto';
import { existsSync, readFileSync } from 'node:fs';
import { join } from 'node:path';
import { parquetMetadata, parquetReadObjects } from 'hyparquet';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { readNpz } from '../../support/read-npz.js';
import { makeWorkplace, TWO_LEVEL_SWEEP, type Workplace } from './small-store.js';

type Row = Record<string, unknown>;

let place: Workplace;
let printed: Row[];

const rowsOf = (text: string): Row[] =>
  text
    .trimEnd()
    .split('\n')
    .map((line) => JSON.parse(line) as Row);

const plain = (row: Row): Row =>
  Object.fromEntries(Object.entries(row).map(([key, value]) => [key, typeof value === 'bigint' ? Number(value) : value]));

async function exported(name: string, ...args: string[]): Promise<string> {
  const path = join(place.folder, name);
  const { status, out, err } = await place.run('export', 'two-level-line', ...args, '--output', path);
  expect({ status, out }).toEqual({ status: 0, out: '' });
  expect(err).toContain(`wrote ${path}\n`);
  return path;
}

beforeAll(async () => {
  place = makeWorkplace();
  const { status, err } = await place.run('sweep', place.write('line.yaml', TWO_LEVEL_SWEEP));
  if (status !== 0) throw new Error(err);
  printed = rowsOf((await place.run('export', 'two-level-line', '--format', 'json')).out);
});
afterAll(() => place.remove());

describe('export --as', () => {
  it('parquet holds the printed rows and what the sweep says about them', async () => {
    const { buffer: file } = Uint8Array.from(readFileSync(await exported('line.parquet', '--as', 'parquet')));
    expect((await parquetReadObjects({ file })).map(plain)).toEqual(printed);
    const [{ key, value }] = parquetMetadata(file).key_value_metadata ?? [];
    expect(key).toBe('windrow');
    const stored = JSON.parse((await place.run('status', 'two-level-line', '--format', 'json')).out) as Row;
    expect(JSON.parse(value ?? '')).toMatchObject({
      sweep: { name: 'two-level-line', document: { model: 'two-level' }, points: 15, state: stored['state'] },
      rows: { rows: 30, computed: 30, failed: 0, missing: 0 },
      questions: [{ ordinal: 0 }, { ordinal: 1 }],
    });
  });

  it('npz holds the numbers and the measures they come from', async () => {
    const arrays = readNpz(readFileSync(await exported('line.npz', '--as', 'npz')));
    const values = (name: string) => arrays.get(name)?.values as number[];
    for (const name of ['winding_number', 'capped_mean', 'mean_time', 'recurrent_weight'])
      expect(values(`cells/${name}`)).toEqual(printed.map((row) => row[name]));
    // H = −g σx + (b/2) σz has the levels ±√(g² + b²/4); elementary. Two levels from one rotation: a few ulp.
    const first = values('points/first_level');
    expect(first).toEqual(Array.from({ length: 16 }, (_, point) => 2 * point));
    values('points/coupling').forEach((coupling, point) => {
      const omega = Math.hypot(coupling, 0.5);
      const [low, high] = values('levels/energies').slice(first[point], first[point + 1]);
      expect(low).toBeCloseTo(-omega, 13);
      expect(high).toBeCloseTo(omega, 13);
      const weights = values('levels/weights').slice(first[point], first[point + 1]);
      expect(weights[1]).toBeCloseTo((1 + 0.5 / omega) / 2, 13);
    });
  });

  it('csv and jsonl say it in a file beside, with the digest of the data', async () => {
    for (const kind of ['csv', 'jsonl']) {
      const path = await exported(`line.${kind}`, '--as', kind, '--question', '1');
      const text = readFileSync(path, 'utf8');
      const metadata = JSON.parse(readFileSync(`${path}.metadata.json`, 'utf8')) as Row;
      expect(metadata).toMatchObject({
        sweep: { name: 'two-level-line' },
        questions: [{ ordinal: 1 }],
        rows: { rows: 15 },
        file_sha256: createHash('sha256').update(text).digest('hex'),
      });
      if (kind === 'jsonl') expect(rowsOf(text)).toEqual(printed.filter((row) => row['question'] === 1));
      else expect(text.trimEnd().split('\n')).toHaveLength(16);
    }
  });

  it('knows the questions that were asked with it', async () => {
    const { buffer: file } = Uint8Array.from(readFileSync(await exported('more.parquet', '--as', 'parquet', '--budget', '30')));
    const read = await parquetReadObjects({ file, columns: ['budget', 'question'] });
    expect(new Set(read.map((row) => row['budget']))).toEqual(new Set([30n]));
    const metadata = JSON.parse(parquetMetadata(file).key_value_metadata?.[0]?.value ?? '') as { questions: Row[] };
    expect(metadata.questions.map(({ ordinal, follow_up, budget }) => ({ ordinal, follow_up, budget }))).toEqual(
      [2, 3].map((ordinal) => ({ ordinal, follow_up: true, budget: 30 })),
    );
  });

  it('is refused in words without a place, with a format of its own, and where nothing can be written', async () => {
    expect(await place.run('export', 'two-level-line', '--as', 'npz')).toMatchObject({
      status: 2,
      err: expect.stringContaining('--output'),
    });
    const twice = await place.run('export', 'two-level-line', '--as', 'csv', '--format', 'json', '--output', join(place.folder, 'x'));
    expect(twice).toMatchObject({ status: 2, err: expect.stringContaining('--format') });
    for (const kind of ['parquet', 'npz']) {
      const path = join(place.folder, 'no-such-folder', `x.${kind}`);
      const refused = await place.run('export', 'two-level-line', '--as', kind, '--output', path);
      expect(refused).toMatchObject({ status: 1, err: expect.stringContaining('report.unwritable') });
      expect(refused.err).toContain(path);
    }
  });

  it.runIf(existsSync('/dev/full'))('fails in words on a full disk', async () => {
    const full = await place.run('export', 'two-level-line', '--as', 'parquet', '--output', '/dev/full');
    expect(full).toMatchObject({ status: 1, err: expect.stringContaining('ENOSPC') });
  });
});
