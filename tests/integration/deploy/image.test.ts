/** The image without an engine: what its instructions copy is laid out in a folder and run. */
import { spawnSync } from 'node:child_process';
import { cpSync, existsSync, mkdirSync, mkdtempSync, rmSync, symlinkSync } from 'node:fs';
import { hostname, tmpdir } from 'node:os';
import { dirname, join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { METHOD_VERSION } from '../../../src/sweep/identity.js';
import { connect } from '../../../src/queue/bullmq/redis-connection.js';
import { redisWorkerRegistry } from '../../../src/queue/bullmq/worker-registry.js';
import { createDatabase, type TestDatabase } from '../../support/database.js';
import { redisForTests } from '../../support/redis.js';
import { freePort } from '../../support/services.js';
import { at, read, readDockerfile } from './read-deploy.js';

const redis = await redisForTests();
const stages = readDockerfile('deploy', 'Dockerfile');
const last = stages.at(-1)!;
const valueOf = (name: string): string => last.filter((one) => one.name === name).at(-1)!.value;
const copies = (stage: typeof last) =>
  stage
    .filter(({ name, value }) => name === 'COPY' && !value.startsWith('--from'))
    .map(({ value }) => ({ sources: value.split(' ').slice(0, -1), target: value.split(' ').at(-1)! }));

/** Patterns of the ignore file, of the few forms it uses: `*`, `!path`, and a path with a `*` at its end; the last match decides. */
const rules = read('deploy', 'Dockerfile.dockerignore')
  .split('\n')
  .filter((line) => line !== '' && !line.startsWith('#'));
function admitted(path: string): boolean {
  let inside = true;
  for (const rule of rules) {
    const name = rule.replace(/^!/, '');
    const matches =
      name === '*' || (name.endsWith('*') ? path.startsWith(name.slice(0, -1)) : path === name || path.startsWith(`${name}/`));
    if (matches) inside = rule.startsWith('!');
  }
  return inside;
}

let root: string;
let database: TestDatabase;
const inside = (path: string): string => join(root, path);

/** Runs what the image runs, with the folder in place of its root. */
function run(args: readonly string[], environment: Readonly<Record<string, string>>) {
  const [program, ...rest] = args.map((arg) => (arg.startsWith('/') ? inside(arg) : arg));
  const { DATABASE_URL: _database, REDIS_URL: _redis, ...inherited } = process.env;
  const env = { ...inherited, WINDROW_LOG_LEVEL: 'silent', ...environment };
  const { status, stdout, stderr } = spawnSync(program === 'node' ? process.execPath : program, rest, { env, encoding: 'utf8', cwd: root });
  return { status, stdout, stderr };
}
const ENTRY = JSON.parse(valueOf('ENTRYPOINT')) as string[];
const HEALTH = JSON.parse(/CMD (\[.*\])$/.exec(valueOf('HEALTHCHECK'))![1]) as string[];

beforeAll(async () => {
  database = await createDatabase({ empty: true });
  root = mkdtempSync(join(tmpdir(), 'windrow-image-'));
  mkdirSync(inside('windrow'));
  symlinkSync(at('node_modules'), inside('windrow/node_modules'));
  cpSync(at('dist'), inside('windrow/dist'), { recursive: true });
  for (const { sources, target } of copies(last)) {
    for (const source of sources) {
      const to = target.endsWith('/') ? join(inside(target), source.split('/').at(-1)!) : inside(target);
      mkdirSync(dirname(to), { recursive: true });
      cpSync(at(source), to, { recursive: true });
    }
  }
});
afterAll(async () => {
  rmSync(root, { recursive: true, force: true });
  await redis?.stop();
  await database?.drop();
});

describe('the Dockerfile', () => {
  it('copies what exists and what the builder gets', () => {
    const sources = stages.flatMap(copies).flatMap((one) => one.sources);
    expect(sources.length).toBeGreaterThan(8);
    for (const source of sources)
      expect({ source, exists: existsSync(at(source)), admitted: admitted(source) }).toEqual({ source, exists: true, admitted: true });
  });

  it('keeps secrets, results and history from the builder', () => {
    for (const path of ['.env', '.git', '.windrow', 'node_modules', 'out', 'tests', 'src/linalg/wasm/binary.ts'])
      expect(admitted(path)).toBe(false);
  });

  it('installs from the lock file without install scripts, and builds with the script of package.json', () => {
    const runs = stages.map((stage) => stage.filter(({ name }) => name === 'RUN').map(({ value }) => value.replace(/^--mount=\S+ /, '')));
    const { scripts } = JSON.parse(read('package.json')) as { scripts: Record<string, string> };
    expect(runs[0]).toEqual(['npm ci --ignore-scripts', 'npm run build']);
    expect(scripts.build).toBeDefined();
    expect(runs[1][0]).toMatch(/^npm ci --omit=dev --ignore-scripts/);
    expect(runs[2]).toEqual([]);
  });

  it('runs as a user other than root, by number, with a health check', () => {
    expect(Number.parseInt(valueOf('USER'))).toBeGreaterThan(0);
    expect(last.findIndex(({ name }) => name === 'USER')).toBeLessThan(last.findIndex(({ name }) => name === 'ENTRYPOINT'));
    expect(HEALTH).toHaveLength(2);
  });

  it('takes a Node that package.json allows', () => {
    const [, major] = /NODE_IMAGE=node:(\d+)/.exec(read('deploy', 'Dockerfile')) ?? [];
    expect(Number(major)).toBeGreaterThan(20);
  });
});

describe('what the image holds', () => {
  it('runs: the program, its migrations and the examples are found', () => {
    expect(run([...ENTRY, 'migrate'], { DATABASE_URL: database.url })).toMatchObject({ status: 0, stderr: '' });
    const example = `${valueOf('WORKDIR')}/double-well.yaml`;
    expect(run([...ENTRY, 'sweep', example, '--estimate'], { DATABASE_URL: database.url })).toMatchObject({ status: 0, stderr: '' });
  });

  it('is a worker where nothing else is said', () => {
    const command = JSON.parse(valueOf('CMD')) as string[];
    const { status, stderr } = run([...ENTRY, ...command], {});
    expect({ status, stderr }).toEqual({ status: 2, stderr: expect.stringContaining('REDIS_URL') });
  });
});

describe('the health check', () => {
  it('holds a worker healthy whose Redis is away: it waits for it', async () => {
    const url = `redis://:secret@127.0.0.1:${await freePort()}`;
    const { status, stdout } = run(HEALTH, { REDIS_URL: url });
    expect({ status, stdout }).toEqual({ status: 0, stdout: expect.stringContaining('cannot be reached') });
    expect(stdout).not.toContain('secret');
  });

  it('has nothing to say without a cluster, and refuses wrong settings', () => {
    expect(run(HEALTH, {}).status).toBe(0);
    expect(run(HEALTH, { WINDROW_REDIS: 'x' }).status).toBe(2);
  });

  it.skipIf(redis === null)('tells whether the worker of this host reports', async () => {
    const { url, prefix } = redis!;
    const environment = { REDIS_URL: url, WINDROW_REDIS_PREFIX: prefix };
    const client = connect({ url }, 'a-moment');
    const registry = redisWorkerRegistry(client, prefix, url);
    const report = {
      id: 'one',
      pid: 1,
      threads: 1,
      memory: 2 ** 29,
      lanes: ['small'],
      methodVersion: METHOD_VERSION,
      state: 'working' as const,
      started: '2026-01-01T00:00:00Z',
      jobs: 0,
      points: 0,
      current: [],
    };
    try {
      await registry.report({ ...report, host: 'another-host' });
      expect(run(HEALTH, environment)).toMatchObject({ status: 1, stdout: expect.stringContaining('no worker') });
      await registry.report({ ...report, id: 'two', host: hostname() });
      expect(run(HEALTH, environment)).toMatchObject({ status: 0 });
      // A report that the server is to forget in 20 s is 40 s old.
      await client.pexpire(`${prefix}:worker:two`, 20_000);
      expect(run(HEALTH, environment)).toMatchObject({ status: 1, stdout: expect.stringMatching(/(39|4\d)\.\d s old/) });
    } finally {
      client.disconnect();
    }
  });
});
