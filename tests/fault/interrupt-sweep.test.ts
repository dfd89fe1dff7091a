/** Signals to the built command line in mid-sweep, and two of them at work at once. */
import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, afterEach, beforeEach, describe, expect, it } from 'vitest';
import { runSweep } from '../../src/coordinator/run-sweep.js';
import { openInProcessQueue } from '../../src/queue/in-process/in-process-queue.js';
import type { ResultStore } from '../../src/store/types.js';
import { startCli, type CliProcess } from '../support/cli.js';
import { createDatabase, type TestDatabase } from '../support/database.js';
import { inlinePool } from '../support/inline-pool.js';
import { rowsOf, sweepOf } from '../support/sweeps.js';
import { waitFor } from '../support/wait-for.js';

/** 240 points of some ten milliseconds each, two questions. */
const fileOf = (name: string, from = 0.5) => ({
  name,
  model: 'bose-hubbard-dimer',
  size: [40, 48, 56],
  coupling: { from, step: 0.0625, to: from + 79 * 0.0625, as: 'interaction-ratio' },
  prepare: 'all-left',
  schedules: [
    { family: 'exponential', mean: 0.25 },
    { family: 'fixed', interval: 0.25 },
  ],
  budget: 500,
});
const POINTS = 240;
const CELLS = 480;
const TIMEOUT = 300_000;

describe('the command line in mid-sweep', () => {
  const folder = mkdtempSync(join(tmpdir(), 'windrow-interrupt-'));
  let database: TestDatabase;
  let store: ResultStore;

  beforeEach(async () => {
    database = await createDatabase();
    store = await database.open();
  });
  afterEach(() => database.drop());
  afterAll(() => rmSync(folder, { recursive: true, force: true }));

  const cli = (...args: string[]): CliProcess => startCli(args, { DATABASE_URL: database.url });
  const write = (name: string, from?: number): string => {
    const path = join(folder, `${name}.json`);
    writeFileSync(path, JSON.stringify(fileOf(name, from)));
    return path;
  };
  const stored = async (name: string): Promise<number> =>
    (await store.findSweep(name)) === null ? 0 : (await store.progress(name)).storedCells;
  const firstRows = (name: string, process: CliProcess): Promise<void> =>
    waitFor(async () => process.ended() || (await stored(name)) > 0, 'the first rows', TIMEOUT);

  it.each(['SIGINT', 'SIGTERM'] as const)(
    '%s drains: what runs is finished and stored, the exit status is 130, and resuming ends it',
    async (signal) => {
      const sweeping = cli('sweep', write('drained'), '--threads', '2');
      await firstRows('drained', sweeping);
      sweeping.kill(signal);
      expect(await sweeping.end, sweeping.stderr()).toBe(130);
      const left = await store.progress('drained');
      expect(left.storedCells).toBeGreaterThan(0);
      expect(left.storedCells).toBeLessThan(CELLS);
      // Whole points only: a job is stored in one transaction.
      expect(left.storedCells).toBe(2 * left.storedPoints);
      const resumed = cli('resume', 'drained', '--format', 'json');
      expect(await resumed.end, resumed.stderr()).toBe(0);
      expect(JSON.parse(resumed.stdout())).toMatchObject({ computed: CELLS - left.storedCells, reused: left.storedCells });
    },
    TIMEOUT,
  );

  it(
    'lets two processes sweep at once, sharing points, to the rows of undisturbed runs',
    async () => {
      const names = ['left', 'right'];
      // 40 of the 80 couplings are common to both.
      const both = names.map((name, index) => cli('sweep', write(name, 0.5 + 2.5 * index), '--threads', '1'));
      for (const process of both) expect(await process.end, process.stderr()).toBe(0);
      const rows = await database.query<{ points: number }>('select count(*)::int as points from windrow.measure');
      expect(rows).toEqual([{ points: POINTS * 1.5 }]);
      const other = await createDatabase();
      try {
        const undisturbed = await other.open();
        for (const [index, name] of names.entries()) {
          const sweep = sweepOf(fileOf(name, 0.5 + 2.5 * index));
          await runSweep({ ...sweep, store: undisturbed, queue: openInProcessQueue(), pool: inlinePool(), memory: 2 ** 30 });
          expect(await rowsOf(store, name)).toEqual(await rowsOf(undisturbed, name));
        }
      } finally {
        await other.drop();
      }
    },
    TIMEOUT,
  );

  it(
    'the state that `windrow stop` sets drains a sweep of any other process',
    async () => {
      const sweeping = cli('sweep', write('halted'), '--threads', '2');
      await firstRows('halted', sweeping);
      await store.setSweepState('halted', 'stopping');
      await sweeping.end;
      const left = await stored('halted');
      expect(left).toBeGreaterThan(0);
      expect(left).toBeLessThan(CELLS);
      expect((await store.findSweep('halted'))?.state).toBe('stopping');
      const resumed = cli('resume', 'halted');
      expect(await resumed.end, resumed.stderr()).toBe(0);
      expect(await stored('halted')).toBe(CELLS);
    },
    TIMEOUT,
  );
});
