/**
 * Rows a second of the store's writer against COPY of the very same rows into the same tables, so keys, references and indexes are there
 * for both. The writer encodes, sorts, skips what is stored and commits every job; COPY has its text ready and commits once.
 */
import { Readable } from 'node:stream';
import { pipeline } from 'node:stream/promises';
import pg from 'pg';
import { from as copyFrom, to as copyTo } from 'pg-copy-streams';
import { afterAll, beforeAll, expect, it } from 'vitest';
import { JOB_POINTS } from '../../../src/coordinator/bundler.js';
import { openSweep } from '../../../src/coordinator/run-sweep.js';
import type { SaveBatch } from '../../../src/store/types.js';
import { evaluatePoint } from '../../../src/sweep/evaluate.js';
import { sweepOf } from '../../support/sweeps.js';
import { cheapSweep } from './measured-sweeps.js';
import { median, openMeasure, type Measure } from './measured-run.js';

const ROUNDS = Number(process.env.ROUNDS ?? 3);
const CELLS = 40_000;
const TABLES = ['windrow.point', 'windrow.measure', 'windrow.cell'];

let measure: Measure;
beforeAll(async () => {
  measure = await openMeasure();
});
afterAll(() => measure.close());

async function seconds(work: () => Promise<unknown>): Promise<number> {
  const begun = performance.now();
  await work();
  return (performance.now() - begun) / 1000;
}

/** What workers would hand to the store, a batch a job. */
function batchesOf(sweep: ReturnType<typeof sweepOf>): SaveBatch[] {
  const questions = sweep.grid.questions;
  const outcomes = [...sweep.grid.iterate()].map(({ id, spec }) =>
    evaluatePoint({ id, spec, stored: null, questions }, { memory: 2 ** 20 }),
  );
  return Array.from({ length: Math.ceil(outcomes.length / JOB_POINTS) }, (_, job) => {
    const part = outcomes.slice(job * JOB_POINTS, (job + 1) * JOB_POINTS);
    return { points: part.flatMap(({ point }) => point ?? []), cells: part.flatMap(({ cells }) => cells), failures: [] };
  });
}

async function copyOut(client: pg.Client, table: string): Promise<Buffer> {
  const pieces: Buffer[] = [];
  for await (const piece of client.query(copyTo(`copy ${table} to stdout`))) pieces.push(piece as Buffer);
  return Buffer.concat(pieces);
}

async function copyIn(client: pg.Client, texts: ReadonlyMap<string, Buffer>): Promise<void> {
  await client.query('begin');
  for (const [table, text] of texts) await pipeline(Readable.from([text]), client.query(copyFrom(`copy ${table} from stdin`)));
  await client.query('commit');
}

it('the writer against COPY', async () => {
  const sweep = sweepOf(cheapSweep(CELLS));
  const batches = batchesOf(sweep);
  const own = await measure.database();
  const store = await own.open();
  const client = new pg.Client({ connectionString: own.url });
  await client.connect();
  try {
    await openSweep({ ...sweep, store });
    const empty = (): Promise<unknown> => client.query(`truncate ${TABLES.join(', ')} cascade`);
    const rows = batches.reduce((sum, { points, cells }) => sum + 2 * points.length + cells.length, 0);
    const save = async (): Promise<void> => {
      for (const batch of batches) await store.save(batch);
    };
    await save();
    const texts = new Map<string, Buffer>();
    for (const table of TABLES) texts.set(table, await copyOut(client, table));
    const written: number[] = [];
    const copied: number[] = [];
    for (let round = 0; round < ROUNDS; round++) {
      await empty();
      await client.query('checkpoint');
      copied.push(await seconds(() => copyIn(client, texts)));
      await empty();
      await client.query('checkpoint');
      written.push(await seconds(save));
      const stored = await client.query<{ cells: string }>('select count(*) as cells from windrow.cell');
      expect(Number(stored.rows[0].cells)).toBe(CELLS);
    }
    const rate = (times: readonly number[]): string => (rows / median(times)).toFixed(0);
    const ratios = copied.map((time, round) => time / written[round]);
    console.log(`${rows} rows: writer ${rate(written)} rows/s, COPY ${rate(copied)} rows/s`);
    console.log(`WRITER against COPY: ${median(ratios).toFixed(2)} (aim 0.4 or more; ${ratios.map((r) => r.toFixed(2)).join(', ')})`);
  } finally {
    await client.end();
    await store.close();
  }
});
