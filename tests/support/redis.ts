/**
 * Redis for tests: real servers only. A test file asks for one when it is loaded and skips its tests, aloud, where none can be had.
 *
 * Found in this order: TEST_REDIS_URL; a container, where a container engine answers; redis-server on the PATH; on Debian and Ubuntu
 * the distribution's package, unpacked without root into a cache folder and run from there. Servers started here listen on loopback
 * on a free port, keep their files in a folder of their own, and end with the test process. Every caller gets a key prefix of its
 * own, so that files share a server without meeting.
 */
import { spawn, spawnSync, type ChildProcess } from 'node:child_process';
import { randomBytes } from 'node:crypto';
import { accessSync, constants, mkdtempSync, rmSync } from 'node:fs';
import { createServer, type AddressInfo } from 'node:net';
import { tmpdir } from 'node:os';
import { delimiter, join } from 'node:path';
import { setTimeout as sleep } from 'node:timers/promises';
import { Redis } from 'ioredis';
import { unpackRedis, type RedisProgram } from './redis-package.js';

export interface RedisForTests {
  readonly url: string;
  /** own to the caller; ends without a colon */
  readonly prefix: string;
  /** Deletes the keys under the prefix and ends a server started for the caller. */
  stop(): Promise<void>;
}

/** A server of the caller's own, to be killed, frozen or filled up. */
export interface OwnRedis extends RedisForTests {
  readonly process: () => ChildProcess;
  /** kill -9, as a power cut would */
  kill(): Promise<void>;
  /** Starts it again on the same port and folder. */
  restart(): Promise<void>;
}

export interface OwnRedisOptions {
  /** keep an append-only file, synced at every write; else nothing survives the process */
  readonly persistent?: boolean;
  /** further settings, e.g. { maxmemory: '4mb' } */
  readonly settings?: Readonly<Record<string, string>>;
}

function programOnPath(): RedisProgram | null {
  for (const folder of (process.env.PATH ?? '').split(delimiter)) {
    const path = join(folder, 'redis-server');
    try {
      accessSync(path, constants.X_OK);
      return { path, env: {} };
    } catch {
      // not in this folder
    }
  }
  return null;
}

let program: RedisProgram | null | undefined;
const redisProgram = (): RedisProgram | null => {
  program ??= programOnPath() ?? unpackRedis();
  return program;
};

function aloud(text: string): void {
  process.stderr.write(`tests: ${text}\n`);
}

const newPrefix = (): string => `test-${randomBytes(6).toString('hex')}`;

async function freePort(): Promise<number> {
  const server = createServer();
  await new Promise<void>((resolve) => server.listen(0, '127.0.0.1', resolve));
  const { port } = server.address() as AddressInfo;
  await new Promise((resolve) => server.close(resolve));
  return port;
}

/** One connection that gives up instead of trying on. */
function probe(url: string): Redis {
  const client = new Redis(url, { lazyConnect: true, retryStrategy: () => null, maxRetriesPerRequest: 0 });
  client.on('error', () => undefined);
  return client;
}

async function waitUntilReady(url: string, child: ChildProcess): Promise<void> {
  const deadline = Date.now() + 10_000;
  for (;;) {
    if (child.exitCode !== null) throw new Error(`redis-server ended with status ${child.exitCode}`);
    const client = probe(url);
    try {
      await client.connect();
      // While it reads its append-only file a server answers LOADING.
      await client.ping();
      return;
    } catch (error) {
      if (Date.now() > deadline) throw error;
      await sleep(25);
    } finally {
      client.disconnect();
    }
  }
}

async function deleteKeys(url: string, prefix: string): Promise<void> {
  const client = probe(url);
  try {
    await client.connect();
    for await (const keys of client.scanStream({ match: `${prefix}*`, count: 1000 })) {
      if ((keys as string[]).length > 0) await client.unlink(...(keys as string[]));
    }
  } finally {
    client.disconnect();
  }
}

/** Whether a server of one's own can be had here; says aloud when not. */
export function canStartRedis(): boolean {
  if (redisProgram() !== null) return true;
  aloud('no redis-server can be had on this machine; tests that need one of their own are SKIPPED');
  return false;
}

/** A server that the caller may kill; null, said aloud, where no program can be had. */
export async function ownRedis(options: OwnRedisOptions = {}): Promise<OwnRedis | null> {
  const found = redisProgram();
  if (!canStartRedis() || found === null) return null;
  const folder = mkdtempSync(join(tmpdir(), 'windrow-redis-'));
  const port = await freePort();
  const url = `redis://127.0.0.1:${String(port)}`;
  const settings: Record<string, string> = {
    bind: '127.0.0.1',
    port: String(port),
    dir: folder,
    save: '',
    appendonly: options.persistent === true ? 'yes' : 'no',
    appendfsync: 'always',
    'maxmemory-policy': 'noeviction',
    ...options.settings,
  };
  let child: ChildProcess;
  const start = async (): Promise<void> => {
    child = spawn(
      found.path,
      Object.entries(settings).flatMap(([key, value]) => [`--${key}`, value]),
      {
        env: { ...process.env, ...found.env },
        stdio: 'ignore',
      },
    );
    await waitUntilReady(url, child);
  };
  const end = async (signal: NodeJS.Signals): Promise<void> => {
    if (child.exitCode !== null || child.signalCode !== null) return;
    const ended = new Promise((resolve) => child.once('exit', resolve));
    child.kill(signal);
    await ended;
  };
  const atExit = (): void => {
    child.kill('SIGKILL');
  };
  await start();
  process.once('exit', atExit);
  return {
    url,
    prefix: newPrefix(),
    process: () => child,
    kill: () => end('SIGKILL'),
    restart: start,
    async stop() {
      child.kill('SIGCONT');
      await end('SIGKILL');
      process.removeListener('exit', atExit);
      rmSync(folder, { recursive: true, force: true });
    },
  };
}

async function inContainer(): Promise<RedisForTests | null> {
  if (spawnSync('docker', ['info'], { stdio: 'ignore', timeout: 10_000 }).status !== 0) return null;
  const { GenericContainer } = await import('testcontainers');
  const container = await new GenericContainer('redis:7-alpine').withExposedPorts(6379).start();
  return {
    url: `redis://${container.getHost()}:${String(container.getMappedPort(6379))}`,
    prefix: newPrefix(),
    async stop() {
      await container.stop();
    },
  };
}

/** A server with a prefix of the caller's own; null, said aloud, where none can be had. */
export async function redisForTests(): Promise<RedisForTests | null> {
  const url = process.env.TEST_REDIS_URL;
  if (url !== undefined && url !== '') {
    const prefix = newPrefix();
    return { url, prefix, stop: () => deleteKeys(url, prefix) };
  }
  return (await inContainer()) ?? (await ownRedis());
}
