/**
 * kill -9 of the sweeping process, at twenty random moments: each sweep is resumed to rows identical to those of a run that nothing
 * disturbed. The processes are the built command line on the embedded store; the undisturbed run is made by this process, in another store.
 */
import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { randomStream } from '../../src/core/random.js';
import { runSweep } from '../../src/coordinator/run-sweep.js';
import { openInProcessQueue } from '../../src/queue/in-process/in-process-queue.js';
import { openEmbeddedStore } from '../../src/store/embedded/embedded-store.js';
import type { ResultStore } from '../../src/store/types.js';
import { createDatabase, type TestDatabase } from '../support/database.js';
import { inlinePool } from '../support/inline-pool.js';
import { startCli } from '../support/cli.js';
import { rowsOf, sweepOf } from '../support/sweeps.js';
import { waitFor } from '../support/wait-for.js';

const KILLS = 20;

/** 36 points of some ten milliseconds each, in a dozen jobs; every kill has points of its own, told apart by the tilt. */
const fileOf = (kill: number) => ({
  name: `killed-${kill}`,
  model: 'bose-hubbard-dimer',
  size: [40, 48, 56],
  coupling: { from: 0.5, to: 5, count: 12, as: 'interaction-ratio' },
  parameters: { tilt: kill / 100 },
  prepare: 'all-left',
  schedules: [{ family: 'exponential', mean: 0.25 }],
  budget: 2000,
});

describe('kill -9 in mid-sweep', () => {
  const folder = mkdtempSync(join(tmpdir(), 'windrow-kill-'));
  const draw = randomStream(Number(process.env['TEST_SEED'] ?? 1), 'kills');
  const midSweep: boolean[] = [];
  let store: ResultStore;
  let undisturbed: ResultStore;
  let database: TestDatabase;

  beforeAll(async () => {
    store = await openEmbeddedStore({ folder: join(folder, 'store') });
    await store.migrate();
    database = await createDatabase();
    undisturbed = await database.open();
  });
  afterAll(async () => {
    await store.close();
    await database.drop();
    rmSync(folder, { recursive: true, force: true });
  });

  const storedCells = async (name: string): Promise<number> =>
    (await store.findSweep(name)) === null ? 0 : (await store.progress(name)).storedCells;

  it.each(Array.from({ length: KILLS }, (_, kill) => kill))(
    'kill %i',
    async (kill) => {
      const file = fileOf(kill);
      const sweep = sweepOf(file);
      const path = join(folder, `${file.name}.json`);
      writeFileSync(path, JSON.stringify(file));

      const victim = startCli(['sweep', path, '--store', join(folder, 'store'), '--threads', '2']);
      // A quarter of the kills falls anywhere from the start of the process on, the others after the first rows.
      if (kill % 4 !== 0) await waitFor(async () => victim.ended() || (await storedCells(file.name)) > 0, 'the first rows');
      await new Promise((resolve) => setTimeout(resolve, draw.uniform() * (kill % 4 === 0 ? 1500 : 400)));
      victim.kill('SIGKILL');
      await victim.end;
      const left = await storedCells(file.name);
      midSweep.push(left > 0 && left < sweep.grid.cells);

      // Killed before it was registered, a sweep has no name yet: then the file is run again.
      const known = (await store.findSweep(file.name)) !== null;
      const resumed = startCli([...(known ? ['resume', file.name] : ['sweep', path]), '--store', join(folder, 'store'), '--threads', '2']);
      expect(await resumed.end, resumed.stderr()).toBe(0);

      await runSweep({ ...sweep, store: undisturbed, queue: openInProcessQueue(), pool: inlinePool(), memory: 2 ** 30 });
      expect(await rowsOf(store, file.name)).toEqual(await rowsOf(undisturbed, file.name));
    },
    300_000,
  );

  it('met sweeps that were half done', () => {
    expect(midSweep.filter(Boolean).length).toBeGreaterThanOrEqual(5);
  });
});
