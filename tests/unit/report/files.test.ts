/** Parquet and .npz, read back value by value: Parquet by hyparquet, .npz by a decoder of the test's own and, where it is, by NumPy. */
import { spawnSync } from 'node:child_process';
import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { PassThrough } from 'node:stream';
import { parquetMetadata, parquetReadObjects } from 'hyparquet';
import { afterAll, describe, expect, it } from 'vitest';
import type { Json } from '../../../src/core/json.js';
import type { MeasuredPoint } from '../../../src/spectral/types.js';
import type { CellRow } from '../../../src/store/types.js';
import { emptyTally, exportMetadata, tallied } from '../../../src/report/files/export-metadata.js';
import { writeNpz } from '../../../src/report/files/npz-file.js';
import { writeParquet } from '../../../src/report/files/parquet-file.js';
import { flatRecord, RECORD_KEYS } from '../../../src/report/flat-record.js';
import { CELL_FIELDS, POINT_FIELDS } from '../../../src/sweep/fields.js';
import { readNpz, type ReadArray } from '../../support/read-npz.js';
import { measured, questionRecord, returnMeasure, sweepOf } from '../../support/results.js';
import { cellRow, PLAIN_POINT } from '../../support/two-level-rows.js';

/** Doubles that a careless path would change. */
const AWKWARD = { decay_rate: -0, mean_time: 1 / 3, variance_measurements: 5e-324, capped_mean: 1.7976931348623157e308 };

const rows: readonly CellRow[] = [
  cellRow({ coupling: 0.1 + 0.2, cell: AWKWARD, flags: ['doubtful', 'resolution-sensitive'], coordinates: { prepare: 'Ψ₁ 𝜓' } }),
  cellRow({ coupling: 0.1 + 0.2, questionOrdinal: 1, cell: { decay_rate: Infinity }, coordinates: { prepare: 'Ψ₁ 𝜓' } }),
  cellRow({ coupling: 1, ordinal: 1, coordinates: { prepare: 'up' }, state: 'failed' }),
  cellRow({ coupling: 1, ordinal: 1, questionOrdinal: 1, coordinates: { prepare: 'up' }, state: 'failed' }),
  // Measured, and not asked the second question yet.
  cellRow({ coupling: -2, ordinal: 2, coordinates: { prepare: 'up' } }),
  { ...cellRow({ coupling: -2, ordinal: 2, questionOrdinal: 1, coordinates: { prepare: 'up' }, state: 'missing' }), point: PLAIN_POINT },
];

const MEASURES: ReadonlyMap<string, MeasuredPoint> = new Map([
  [rows[0].pointId, measured(returnMeasure([-1, 1 / 3, 2], [0.25, 0.5, 0.25]))],
  [
    rows[4].pointId,
    {
      ...measured({
        energies: Float64Array.of(-0, 1e-300),
        weights: Float64Array.of(0.5, 0.5),
        overlapRe: Float64Array.of(0.1, -0.1),
        overlapIm: Float64Array.of(0.2, -0.3),
      }),
      overlap: [0, -0.1],
    },
  ],
]);

const record = {
  ...sweepOf('lines', 3, [questionRecord(0), questionRecord(1)]),
  followUps: [],
  state: 'done' as const,
  created: '2024-01-01T00:00:00.000Z',
  updated: '2024-01-01T00:00:00.000Z',
};
const grid = { axes: [{ name: 'coupling', values: [0.1 + 0.2, 1, -2], unit: 'energy' }] };

async function* stream<T>(items: Iterable<T>): AsyncIterable<T> {
  yield* items;
}

async function written(work: (out: PassThrough) => Promise<void>): Promise<Buffer> {
  const out = new PassThrough();
  const chunks: Buffer[] = [];
  out.on('data', (chunk: Buffer) => chunks.push(chunk));
  await work(out);
  return Buffer.concat(chunks);
}

const arrayBuffer = (bytes: Buffer): ArrayBuffer => Uint8Array.from(bytes).buffer;

describe('metadata', () => {
  it('names sweep, method, digests, units, resolution, and what became of the rows', async () => {
    const tally = emptyTally();
    for await (const _ of tallied(stream(rows), tally));
    const metadata = exportMetadata({ record, grid, questions: [1] }, tally);
    expect(metadata).toMatchObject({
      sweep: { name: 'lines', digest: record.digest, method_version: 'test', document: record.document },
      axes: [{ name: 'coupling', unit: 'energy' }],
      questions: [{ ordinal: 1, id: record.questions[1].id, resolution: { energy: 'auto', weight: 1e-3 }, follow_up: false }],
      rows: { rows: 6, computed: 3, failed: 2, missing: 1 },
    });
    const units = Object.fromEntries((metadata['cell_fields'] as { name: string; unit: string }[]).map(({ name, unit }) => [name, unit]));
    expect(units).toEqual(Object.fromEntries(CELL_FIELDS.map(({ name, unit }) => [name, unit])));
    expect(metadata['questions']).toHaveLength(1);
  });
});

describe('Parquet', () => {
  it('reads back to the records: every double, text, structure and gap', async () => {
    const records = rows.map((row) => flatRecord(row, 'lines'));
    const file = arrayBuffer(await written((out) => writeParquet(stream(records), () => ({ unit: 'energy²' }), out)));
    const footer = parquetMetadata(file);
    expect(footer.key_value_metadata).toEqual([{ key: 'windrow', value: '{"unit":"energy²"}' }]);
    expect(footer.schema.slice(1).map(({ name }) => name)).toEqual(RECORD_KEYS);
    const read = await parquetReadObjects({ file });
    expect(read).toHaveLength(records.length);
    read.forEach((found, index) => {
      for (const key of RECORD_KEYS) {
        const value: unknown = found[key];
        expect([key, typeof value === 'bigint' ? Number(value) : value]).toEqual([key, records[index][key] ?? null]);
      }
    });
    expect(Object.is(read[0]['decay_rate'], -0)).toBe(true);
    expect(read[0]['variance_measurements']).toBe(5e-324);
    expect(read[1]['decay_rate']).toBe(Infinity);
    expect(read[0]['ordinal']).toBe(0n);
    expect(footer.schema.find(({ name }) => name === 'winding_number')?.type).toBe('DOUBLE');
  });

  it('is written in groups, and an empty one is a file all the same', async () => {
    const one = flatRecord(rows[0], 'lines');
    function* many() {
      for (let ordinal = 0; ordinal < 20_003; ordinal++) yield { ...one, ordinal };
    }
    const file = arrayBuffer(await written((out) => writeParquet(stream(many()), () => ({}), out)));
    const footer = parquetMetadata(file);
    expect(footer.row_groups.map(({ num_rows }) => num_rows)).toEqual([20_000n, 3n]);
    const tail = await parquetReadObjects({ file, columns: ['ordinal', 'mean_time'], rowStart: 19_999 });
    expect(tail).toEqual([19_999n, 20_000n, 20_001n, 20_002n].map((ordinal) => ({ ordinal, mean_time: 1 / 3 })));
    const empty = arrayBuffer(await written((out) => writeParquet(stream([]), () => ({}), out)));
    expect(parquetMetadata(empty).num_rows).toBe(0n);
  });
});

const npz = (source: readonly CellRow[], metadata: () => Json = () => ({ unit: 'energy²' })) =>
  written((out) =>
    writeNpz(
      {
        rows: stream(source),
        axes: ['coupling', 'prepare'],
        measures: async (ids) => new Map([...MEASURES].filter(([id]) => ids.includes(id))),
        metadata,
      },
      out,
    ),
  );

describe('.npz', () => {
  it('reads back to the cells, points and measures', async () => {
    const arrays = readNpz(await npz(rows));
    const values = (name: string): ReadArray['values'] => (arrays.get(name) as ReadArray).values;
    expect(arrays.get('windrow')).toMatchObject({ shape: [], values: ['{"unit":"energy²"}'] });
    expect(values('cells/point')).toEqual([0, 0, 1, 1, 2, 2]);
    expect(values('cells/question')).toEqual([0, 1, 0, 1, 0, 1]);
    expect(values('cells/status')).toEqual(['computed', 'computed', 'failed', 'failed', 'computed', 'missing']);
    expect(values('cells/flags')).toEqual(['doubtful resolution-sensitive', '', '', '', '', '']);
    expect(values('cells/id')).toEqual(rows.map(({ cellId }) => cellId ?? ''));
    for (const { name } of CELL_FIELDS)
      expect([name, values(`cells/${name}`)]).toEqual([name, rows.map(({ fields }) => fields?.[name] ?? NaN)]);
    expect(Object.is(values('cells/decay_rate')[0], -0)).toBe(true);
    const points = [rows[0], rows[2], rows[4]];
    expect(values('points/id')).toEqual(points.map(({ pointId }) => pointId));
    expect(values('points/coupling')).toEqual([0.1 + 0.2, 1, -2]);
    expect(values('points/coordinates/coupling')).toEqual([0.1 + 0.2, 1, -2]);
    expect(values('points/coordinates/prepare')).toEqual(['Ψ₁ 𝜓', 'up', 'up']);
    for (const { name, type } of POINT_FIELDS)
      expect([name, values(`points/${name}`)]).toEqual([name, points.map(({ point }) => point?.[name] ?? (type === 'text' ? '' : NaN))]);
    expect(values('points/first_level')).toEqual([0, 3, 3, 5]);
    expect(values('points/state_overlap_im')).toEqual([0, NaN, -0.1]);
    expect(values('levels/energies')).toEqual([-1, 1 / 3, 2, -0, 1e-300]);
    expect(values('levels/weights')).toEqual([0.25, 0.5, 0.25, 0.5, 0.5]);
    expect(values('levels/overlap_re')).toEqual([0.25, 0.5, 0.25, 0.1, -0.1]);
    expect(values('levels/overlap_im')).toEqual([0, 0, 0, 0.2, -0.3]);
  });

  it('is the same file for the same content, and holds nothing where there is nothing', async () => {
    expect((await npz(rows)).equals(await npz(rows))).toBe(true);
    const arrays = readNpz(await npz([]));
    expect(arrays.get('levels/energies')).toMatchObject({ shape: [0] });
    expect(arrays.get('points/first_level')).toMatchObject({ values: [0] });
    expect(arrays.get('cells/status')).toMatchObject({ shape: [0] });
  });

  const folder = mkdtempSync(join(tmpdir(), 'windrow-npz-'));
  afterAll(() => rmSync(folder, { recursive: true, force: true }));
  const numpy = spawnSync('python3', ['-c', 'import numpy'], { stdio: 'ignore' }).status === 0;
  if (!numpy) process.stderr.write('python3 with numpy is not on this machine: .npz is read back by the decoder of the test only\n');

  it.skipIf(!numpy)('is read by NumPy, bit for bit', async () => {
    const path = join(folder, 'lines.npz');
    const bytes = await npz(rows);
    writeFileSync(path, bytes);
    const script = `
import json, sys, numpy
z = numpy.load(sys.argv[1])
show = lambda a: [v.hex() for v in a.tolist()] if a.dtype.kind == 'f' else [v.decode() for v in a.tolist()] if a.dtype.kind == 'S' else a.tolist()
print(json.dumps({name: show(z[name]) if z[name].shape else str(z[name]) for name in z.files}))`;
    const { stdout, stderr } = spawnSync('python3', ['-c', script, path], { encoding: 'utf8' });
    expect(stderr).toBe('');
    const seen = JSON.parse(stdout) as Record<string, string | (string | number)[]>;
    const arrays = readNpz(bytes);
    expect(Object.keys(seen)).toEqual([...arrays.keys()]);
    for (const [name, { descr, shape, values }] of arrays) {
      if (shape.length === 0) expect(seen[name]).toBe(values[0]);
      else if (descr !== '<f8') expect(seen[name]).toEqual(values);
      else expect((seen[name] as string[]).map(fromHex)).toEqual(values);
    }
  });
});

/** Python's float.hex(), exact: 0x1.8p+1, -0x0.0p+0, inf, nan. */
function fromHex(text: string): number {
  if (text === 'nan') return NaN;
  const match = /^(-?)(?:inf|0x([01])\.([0-9a-f]+)p([+-]\d+))$/.exec(text);
  if (!match) throw new Error(`no hexadecimal double: ${text}`);
  const [, sign, whole, fraction, power] = match;
  if (whole === undefined) return sign ? -Infinity : Infinity;
  const mantissa = Number(whole) + Number(`0x${fraction}`) / 16 ** fraction.length;
  // In two steps, as 2^-1074 alone and 2^1024 are outside the range of the factor.
  const exponent = Number(power);
  const half = Math.trunc(exponent / 2);
  return (sign ? -1 : 1) * mantissa * 2 ** half * 2 ** (exponent - half);
}
