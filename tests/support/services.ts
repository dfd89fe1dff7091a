/**
 * PostgreSQL for tests: real servers only.
 *
 * Found in this order: TEST_DATABASE_URL (its user must be allowed to create databases); a container, where a container engine answers;
 * the programs of the embedded store, started here on a free port of the loopback interface. A server started here keeps its files in
 * a folder of its own and ends with the run; what a killed run left is cleared away by the next.
 */
import { spawnSync } from 'node:child_process';
import { chmod, mkdtemp, readFile, readdir, rm, writeFile } from 'node:fs/promises';
import { createServer, type AddressInfo } from 'node:net';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { setTimeout as sleep } from 'node:timers/promises';
import { findPackage, prepareBinaries } from '../../src/store/embedded/binaries.js';
import { ensureDataFolder } from '../../src/store/embedded/data-folder.js';
import { readPostmaster, SETTINGS, startPostmaster, stopPostmaster } from '../../src/store/embedded/postmaster.js';
import { isAlive } from '../../src/store/embedded/processes.js';

export interface PostgresForTests {
  /** of a user who may create databases */
  readonly url: string;
  /** where it comes from, for people */
  readonly source: string;
  stop(): Promise<void>;
}

export async function startPostgres(): Promise<PostgresForTests> {
  const url = process.env.TEST_DATABASE_URL;
  if (url !== undefined && url !== '') return { url, source: 'TEST_DATABASE_URL', stop: () => Promise.resolve() };
  return (await inContainer()) ?? (await ownPostgres());
}

async function inContainer(): Promise<PostgresForTests | null> {
  if (spawnSync('docker', ['info'], { stdio: 'ignore', timeout: 10_000 }).status !== 0) return null;
  const { GenericContainer, Wait } = await import('testcontainers');
  try {
    const container = await new GenericContainer('postgres:17-alpine')
      .withEnvironment({ POSTGRES_PASSWORD: 'windrow' })
      .withExposedPorts(5432)
      .withWaitStrategy(Wait.forLogMessage(/ready to accept connections/, 2))
      .start();
    return {
      url: `postgresql://postgres:windrow@${container.getHost()}:${String(container.getMappedPort(5432))}/postgres`,
      source: 'a container of postgres:17-alpine',
      stop: async () => {
        await container.stop();
      },
    };
  } catch (error) {
    console.warn(`PostgreSQL for tests: the container engine answers but starts no container (${String(error)})`);
    return null;
  }
}

export interface OwnPostgresOptions {
  /** lines put before the server's own access rules (pg_hba.conf) */
  readonly access?: string;
  readonly settings?: Readonly<Record<string, string>>;
}

export interface OwnPostgres extends PostgresForTests {
  readonly port: number;
  /** kill -9 of the whole server, as when the machine's memory runs out */
  kill(): Promise<void>;
  /** Starts it again on the same port and folder. */
  restart(): Promise<void>;
}

/** A server of the caller's own, to be killed or configured. */
export async function ownPostgres({ access = '', settings = {} }: OwnPostgresOptions = {}): Promise<OwnPostgres> {
  await clearAbandoned();
  const folder = await mkdtemp(join(tmpdir(), `${FOLDER}${process.pid}-`));
  // As root, the server runs as another user, who must be able to enter.
  await chmod(folder, 0o755);
  const binaries = prepared();
  const data = await ensureDataFolder({ folder, elsewhere: folder, binaries, onNotice: () => undefined });
  const rules = join(data.path, 'pg_hba.conf');
  await writeFile(rules, `${access}\n${await readFile(rules, 'utf8')}`);
  const { postgres } = await binaries(data.user);
  const log = join(folder, 'server.log');
  const port = await freePort();
  // Tests that look at durability use the embedded store, which does sync.
  const own = { ...SETTINGS, listen_addresses: '127.0.0.1', port: String(port), fsync: 'off', ...settings };
  /** the server that was killed; its file may still say that it is ready */
  let killed = 0;
  const isReady = async (): Promise<boolean> => {
    const running = await readPostmaster(data.path);
    return running !== null && running.status === 'ready' && running.pid !== killed;
  };
  /** @returns whether it came up */
  const start = async (): Promise<boolean> => {
    const started = await startPostmaster(postgres, data, log, own);
    while (!(await isReady())) if ((await Promise.race([started.ended, sleep(20)])) === 'ended') return false;
    started.release();
    return true;
  };
  if (!(await start())) throw new Error(`PostgreSQL for tests does not start: ${await readFile(log, 'utf8')}`);
  return {
    url: `postgresql://windrow@127.0.0.1:${String(port)}/postgres`,
    source: 'the programs of the embedded store',
    port,
    async kill() {
      killed = (await readPostmaster(data.path))!.pid;
      process.kill(killed, 'SIGKILL');
      while (isAlive(killed)) await sleep(10);
    },
    async restart() {
      // Until the orphaned sessions have ended, a new server refuses the folder.
      for (let attempt = 0; !(await start()); attempt++) {
        if (attempt === 100) throw new Error(`PostgreSQL for tests does not start again: ${await readFile(log, 'utf8')}`);
        await sleep(100);
      }
    },
    stop: async () => {
      await stopPostmaster(data.path);
      await rm(folder, { recursive: true, force: true });
    },
  };
}

function prepared() {
  const found = findPackage();
  return async (user: Parameters<typeof prepareBinaries>[1]) => prepareBinaries(await found, user);
}

const FOLDER = 'windrow-postgres-';

async function clearAbandoned(): Promise<void> {
  for (const name of await readdir(tmpdir())) {
    const pid = Number(new RegExp(`^${FOLDER}(\\d+)-`).exec(name)?.[1] ?? NaN);
    if (!Number.isInteger(pid) || isAlive(pid)) continue;
    const folder = join(tmpdir(), name);
    await stopPostmaster(join(folder, 'data'));
    await rm(folder, { recursive: true, force: true });
  }
}

export function freePort(): Promise<number> {
  return new Promise((resolve, reject) => {
    const server = createServer();
    server.once('error', reject);
    server.listen(0, '127.0.0.1', () => {
      const { port } = server.address() as AddressInfo;
      server.close(() => resolve(port));
    });
  });
}
