/** The embedded store among processes and users. Tests of users run as root only, where other users can be had. */
import {
  chmodSync,
  chownSync,
  cpSync,
  lstatSync,
  mkdirSync,
  readFileSync,
  readdirSync,
  readlinkSync,
  rmSync,
  statSync,
  writeFileSync,
} from 'node:fs';
import { dirname, join } from 'node:path';
import { setTimeout as sleep } from 'node:timers/promises';
import { describe, expect, it } from 'vitest';
import { findPackage, prepareBinaries } from '../../src/store/embedded/binaries.js';
import { openEmbeddedStore } from '../../src/store/embedded/embedded-store.js';
import { isServing, readPostmaster } from '../../src/store/embedded/postmaster.js';
import { sweepOf } from '../support/results.js';
import { storeFolders } from '../support/store-folders.js';
import { startStoreProcess } from '../support/store-process.js';

const asRoot = process.getuid?.() === 0;
const NOBODY = { uid: 65534, gid: 65534 };

const { storeFolder, emptyFolder } = storeFolders();

const serving = async (folder: string): Promise<boolean> => {
  const data = join(folder, 'data');
  const postmaster = await readPostmaster(data);
  return postmaster !== null && (await isServing(postmaster, data));
};

describe('embedded store', () => {
  it('is shared by processes: the first starts the server, the last stops it', async () => {
    const folder = storeFolder();
    const [one, two] = [startStoreProcess(), startStoreProcess()];
    await one.call('open', { folder });
    await one.call('register', sweepOf('of one', 1, []));
    await two.call('open', { folder });
    expect(await two.call('sweeps')).toEqual(['of one']);
    await one.call('close');
    expect(await serving(folder)).toBe(true);
    await two.call('register', sweepOf('of two', 1, []));
    await two.call('close');
    expect(await serving(folder)).toBe(false);
    const three = await openEmbeddedStore({ folder });
    expect((await three.listSweeps()).map(({ name }) => name)).toEqual(['of one', 'of two']);
    await three.close();
  });

  it('is made once when many processes come at once, and survives any coming and going', async () => {
    const folder = emptyFolder();
    const round = async (number: number): Promise<void> => {
      await sleep((number * 97) % 400);
      const store = await openEmbeddedStore({ folder });
      await store.registerSweep(sweepOf(`round ${number}`, 1, []));
      await store.close();
    };
    await Promise.all(Array.from({ length: 8 }, (_, number) => round(number)));
    expect(await serving(folder)).toBe(false);
    const store = await openEmbeddedStore({ folder });
    expect((await store.listSweeps()).length).toBe(8);
    await store.close();
    expect(readdirSync(folder).sort()).toEqual(['data', 'server.log']);
  });

  it('leaves no socket folder behind', async () => {
    const folder = storeFolder();
    const store = await openEmbeddedStore({ folder });
    const { sockets } = (await readPostmaster(join(folder, 'data')))!;
    expect(statSync(sockets!).mode & 0o777).toBe(0o700);
    await store.close();
    expect(() => statSync(sockets!)).toThrow('ENOENT');
  });

  it('takes no connection settings from PG* variables', async () => {
    const folder = storeFolder();
    const foreign = startStoreProcess({
      env: { PGHOST: '192.0.2.1', PGPORT: '1', PGUSER: 'x', PGPASSWORD: 'x', PGDATABASE: 'x', PGSSLMODE: 'require', PGDATA: '/nowhere' },
    });
    await foreign.call('open', { folder });
    expect(await foreign.call('sweeps')).toEqual([]);
    await foreign.call('close');
  });

  it('refuses data of another PostgreSQL', async () => {
    const folder = storeFolder();
    const file = join(folder, 'data', 'PG_VERSION');
    const own = readFileSync(file, 'utf8');
    writeFileSync(file, '12\n');
    await expect(openEmbeddedStore({ folder })).rejects.toMatchObject({
      code: 'store.embedded',
      details: { found: 'PostgreSQL 12', allowed: `PostgreSQL ${own.trim()}` },
    });
  });

  it('refuses a folder that holds something else', async () => {
    const folder = emptyFolder();
    mkdirSync(join(folder, 'data'));
    writeFileSync(join(folder, 'data', 'letter.txt'), 'mine');
    await expect(openEmbeddedStore({ folder })).rejects.toMatchObject({
      code: 'store.embedded',
      message: expect.stringContaining('not a store'),
    });
    expect(readFileSync(join(folder, 'data', 'letter.txt'), 'utf8')).toBe('mine');
  });

  it('refuses a platform without programs and names those with', async () => {
    await expect(findPackage('sunos-sparc')).rejects.toMatchObject({
      code: 'store.embedded',
      message: expect.stringContaining('DATABASE_URL'),
      details: { found: 'sunos-sparc', allowed: expect.stringContaining('linux-x64') },
    });
  });

  it('keeps the path of its socket short where that of TMPDIR is long', async () => {
    const folder = storeFolder();
    const long = startStoreProcess({ env: { TMPDIR: join(folder, 'x'.repeat(90)) } });
    await long.call('open', { folder });
    const { sockets } = (await readPostmaster(join(folder, 'data')))!;
    expect(dirname(sockets!)).toBe('/tmp');
    await long.call('close');
  });

  it('recreates library links that an installation without scripts leaves out', async () => {
    const found = await findPackage();
    const folder = join(emptyFolder(), 'package');
    cpSync(found.folder, folder, { recursive: true, verbatimSymlinks: true });
    const links = (JSON.parse(readFileSync(join(folder, 'native/pg-symlinks.json'), 'utf8')) as { target: string }[]).map(({ target }) =>
      join(folder, target),
    );
    for (const link of links) rmSync(link, { force: true });
    const binaries = await prepareBinaries({ ...found, folder }, asRoot ? NOBODY : null);
    expect(binaries.postgres).toBe(join(folder, 'native/bin/postgres'));
    for (const link of links) {
      expect(lstatSync(link).isSymbolicLink()).toBe(true);
      expect(statSync(link).isFile()).toBe(true);
    }
  });

  it('copies the programs where the server cannot read them, or a shell would misread their path', async () => {
    const found = await findPackage();
    const parent = emptyFolder();
    const folder = join(parent, 'a $HOME "package"');
    cpSync(found.folder, folder, { recursive: true, verbatimSymlinks: true });
    const cache = join(parent, 'cache');
    const [first, second] = await Promise.all([0, 1].map(() => prepareBinaries({ ...found, folder }, asRoot ? NOBODY : null, cache)));
    expect(first).toEqual(second);
    expect(readdirSync(cache)).toEqual([`postgresql-${found.version}`]);
    expect(first.postgres.startsWith(cache)).toBe(true);
    expect(statSync(first.postgres).mode & 0o555).toBe(0o555);
  });
});

describe.runIf(asRoot)('embedded store and users (as root)', () => {
  it('runs for a user without rights below a home that only that user can enter', async () => {
    const home = join(emptyFolder(), 'home');
    mkdirSync(home, { mode: 0o700 });
    chownSync(home, NOBODY.uid, NOBODY.gid);
    const user = startStoreProcess({ user: NOBODY, env: { HOME: home } });
    const folder = join(home, 'project', '.windrow', 'store');
    expect(await user.call('open', { folder })).toEqual([]);
    await user.call('register', sweepOf('mine', 1, []));
    await user.call('close');
    expect(statSync(join(folder, 'data')).uid).toBe(NOBODY.uid);
    // Root may use it too, and leaves it usable for its owner.
    const store = await openEmbeddedStore({ folder });
    expect((await store.listSweeps()).map(({ name }) => name)).toEqual(['mine']);
    await store.close();
    const again = startStoreProcess({ user: NOBODY, env: { HOME: home } });
    await again.call('open', { folder });
    await again.call('close');
  });

  it('lies elsewhere, and says so once, where the server of root cannot enter the folder', async () => {
    const parent = emptyFolder();
    const home = join(parent, 'home');
    mkdirSync(home, { mode: 0o700 });
    const options = { folder: join(home, 'store'), elsewhere: join(parent, 'elsewhere') };
    const notices: string[] = [];
    const store = await openEmbeddedStore({ ...options, onNotice: (message) => notices.push(message) });
    await store.registerSweep(sweepOf('kept', 1, []));
    await store.close();
    const data = readlinkSync(join(options.folder, 'data'));
    expect(dirname(data)).toBe(options.elsewhere);
    expect(notices).toEqual([expect.stringContaining(data)]);
    const again = await openEmbeddedStore({ ...options, onNotice: (message) => notices.push(message) });
    expect(await again.findSweep('kept')).not.toBeNull();
    await again.close();
    expect(notices.length).toBe(1);
    // Deleted and made anew, it is empty.
    rmSync(options.folder, { recursive: true });
    const fresh = await openEmbeddedStore(options);
    expect(await fresh.listSweeps()).toEqual([]);
    await fresh.close();
  });

  it('says who owns a store of another user', async () => {
    const folder = storeFolder();
    chownSync(join(folder, 'data'), 12345, 12345);
    const user = startStoreProcess({ user: NOBODY });
    await expect(user.call('open', { folder })).rejects.toMatchObject({
      code: 'store.embedded',
      message: expect.stringContaining('another user'),
      found: 'user 12345',
    });
    await user.kill();
  });

  it('says which folder cannot be written', async () => {
    const folder = emptyFolder();
    chmodSync(folder, 0o555);
    const user = startStoreProcess({ user: NOBODY });
    await expect(user.call('open', { folder: join(folder, 'store') })).rejects.toMatchObject({
      code: 'store.embedded',
      where: join(folder, 'store'),
      found: expect.stringContaining('EACCES'),
    });
    await user.kill();
  });
});
