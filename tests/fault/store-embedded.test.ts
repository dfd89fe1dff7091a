/** The embedded store when things die or fill up. */
import { spawnSync } from 'node:child_process';
import { chmodSync, mkdirSync, readFileSync, rmSync, utimesSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { setTimeout as sleep } from 'node:timers/promises';
import { afterEach, describe, expect, it } from 'vitest';
import { WindrowError } from '../../src/core/errors.js';
import { withRetry } from '../../src/core/retry.js';
import { openEmbeddedStore } from '../../src/store/embedded/embedded-store.js';
import { isServing, readPostmaster } from '../../src/store/embedded/postmaster.js';
import { gridPoint, measured, pointResult, returnMeasure, sweepOf } from '../support/results.js';
import { makeStoreFolder } from '../support/store-folder.js';
import { storeFolders } from '../support/store-folders.js';
import { startStoreProcess } from '../support/store-process.js';

const { storeFolder, emptyFolder } = storeFolders();

const server = async (folder: string) => {
  const data = join(folder, 'data');
  const postmaster = await readPostmaster(data);
  return postmaster !== null && (await isServing(postmaster, data)) ? postmaster : null;
};

describe('kill -9', () => {
  it('of the server loses no saved row, and the open store goes on', async () => {
    const folder = storeFolder();
    const store = await openEmbeddedStore({ folder });
    const acknowledged: string[] = [];
    let ended = false;
    const writing = (async () => {
      for (let i = 0; !ended; i++) {
        const grid = gridPoint(i, `kill ${i}`);
        await withRetry(() => store.save({ points: [pointResult(grid)], cells: [], failures: [] }));
        acknowledged.push(grid.id);
      }
    })();
    for (let kill = 0; kill < 3; kill++) {
      const before = acknowledged.length;
      while (acknowledged.length < before + 20) await sleep(5);
      const running = await server(folder);
      process.kill(running!.pid, 'SIGKILL');
    }
    const before = acknowledged.length;
    while (acknowledged.length < before + 20) await sleep(5);
    ended = true;
    await writing;
    expect((await store.measures(acknowledged)).size).toBe(acknowledged.length);
    await store.close();
    expect(await server(folder)).toBeNull();
  });

  it('of the server with every process of it: the next start recovers', async () => {
    const folder = storeFolder();
    const victim = startStoreProcess();
    await victim.call('open', { folder });
    await victim.call('register', sweepOf('kept', 1, []));
    const { pid } = (await server(folder))!;
    // The server leads its own session.
    const { stdout } = spawnSync('ps', ['-o', 'pid=', '-s', String(pid)], { encoding: 'utf8' });
    const processes = ((stdout as string | null) ?? '').split('\n').map(Number).filter(Boolean);
    for (const process_ of new Set([pid, ...processes])) tryKill(process_);
    await victim.kill();
    const store = await openEmbeddedStore({ folder });
    expect(await store.findSweep('kept')).not.toBeNull();
    await store.close();
  });

  it('of the only client leaves a server that the next one takes over and stops', async () => {
    const folder = storeFolder();
    const victim = startStoreProcess();
    await victim.call('open', { folder });
    const orphan = await server(folder);
    await victim.kill();
    const store = await openEmbeddedStore({ folder });
    expect((await server(folder))?.pid).toBe(orphan!.pid);
    await store.close();
    expect(await server(folder)).toBeNull();
  });

  it('of one of two clients does not keep the server alive after the other', async () => {
    const folder = storeFolder();
    const victim = startStoreProcess();
    await victim.call('open', { folder });
    const store = await openEmbeddedStore({ folder });
    await victim.kill();
    await store.close();
    expect(await server(folder)).toBeNull();
  });
});

describe('postmaster.pid', () => {
  it.each([
    ['a dead process', () => spawnSync('true').pid],
    ['a living process that is no server', () => process.ppid],
  ])('that names %s is no obstacle', async (_, pid) => {
    const folder = storeFolder();
    const data = join(folder, 'data');
    writeFileSync(join(data, 'postmaster.pid'), `${pid()}\n${data}\n1700000000\n5432\n/tmp/windrow-gone00\n\n  1 1\nready   \n`);
    const store = await openEmbeddedStore({ folder });
    expect(await store.listSweeps()).toEqual([]);
    await store.close();
  });

  it('that is empty, from a start that broke off, is no obstacle', async () => {
    const folder = storeFolder();
    const file = join(folder, 'data', 'postmaster.pid');
    writeFileSync(file, '');
    const before = new Date(Date.now() - 60_000);
    utimesSync(file, before, before);
    const store = await openEmbeddedStore({ folder });
    expect(await store.listSweeps()).toEqual([]);
    await store.close();
  });
});

it('data that cannot be started tell what the server says', async () => {
  const folder = storeFolder();
  rmSync(join(folder, 'data', 'global', 'pg_control'));
  await expect(openEmbeddedStore({ folder })).rejects.toMatchObject({
    code: 'store.embedded',
    details: { found: expect.stringContaining('pg_control') },
  });
});

const mountable = (): boolean => {
  if (process.getuid?.() !== 0) return false;
  const folder = makeStoreFolder();
  const mounted = spawnSync('mount', ['-t', 'tmpfs', '-o', 'size=1m', 'tmpfs', folder]).status === 0;
  if (mounted) spawnSync('umount', [folder]);
  rmSync(folder, { recursive: true, force: true });
  return mounted;
};
const canMount = mountable();
if (!canMount) console.warn('full-disk tests of the embedded store are skipped: this user may not mount a file system');

describe.runIf(canMount)('full disk (a small file system in memory)', () => {
  const mounted = (megabytes: number): string => {
    const folder = join(emptyFolder(), 'disk');
    mkdirSync(folder);
    const { status, stderr } = spawnSync('mount', ['-t', 'tmpfs', '-o', `size=${megabytes}m`, 'tmpfs', folder], { encoding: 'utf8' });
    if (status !== 0) throw new Error(`mount: ${stderr}`);
    chmodSync(folder, 0o755);
    mounts.push(folder);
    return folder;
  };
  const mounts: string[] = [];
  afterEach(() => {
    for (const folder of mounts.splice(0)) spawnSync('umount', ['-l', folder]);
  });

  it('while the store is made', async () => {
    await expect(openEmbeddedStore({ folder: join(mounted(8), 'store') })).rejects.toMatchObject({ code: 'store.full', retryable: false });
  });

  it('while rows are saved: says so, keeps what was acknowledged, goes on when there is room', async () => {
    const disk = mounted(100);
    const folder = join(disk, 'store');
    const store = await openEmbeddedStore({ folder });
    writeFileSync(join(disk, 'ballast'), Buffer.alloc(16 << 20));
    const acknowledged: string[] = [];
    const levels = Array.from({ length: 20_000 }, (_, j) => Math.sin(j + 0.1));
    const fill = async (): Promise<void> => {
      for (let i = 0; i < 1000; i++) {
        const grid = gridPoint(i, `full ${i}`);
        await store.save({ points: [pointResult(grid, measured(returnMeasure(levels, levels)))], cells: [], failures: [] });
        acknowledged.push(grid.id);
      }
    };
    const error: unknown = await fill().catch((reason: unknown) => reason);
    expect(error).toBeInstanceOf(WindrowError);
    expect(error).toMatchObject({ code: 'store.full', retryable: false });
    expect(acknowledged.length).toBeGreaterThan(3);

    rmSync(join(disk, 'ballast'));
    await store.close();
    const again = await openEmbeddedStore({ folder });
    expect((await again.measures(acknowledged)).size).toBe(acknowledged.length);
    await again.save({ points: [pointResult(gridPoint(0, 'after'))], cells: [], failures: [] });
    await again.close();
    expect(readFileSync(join(folder, 'server.log'), 'utf8')).toContain('No space left on device');
  }, 180_000);
});

function tryKill(pid: number): void {
  try {
    process.kill(pid, 'SIGKILL');
  } catch {
    // It ended with the server.
  }
}
