/** Shell scripts, systemd units, and the SQL that the compose file hands to PostgreSQL. */
import { spawn, spawnSync } from 'node:child_process';
import { chmodSync, existsSync, mkdirSync, mkdtempSync, readdirSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import pg from 'pg';
import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import { readSettings } from '../../../src/core/settings.js';
import { ownPostgres } from '../../support/services.js';
import { at, available, read } from './read-deploy.js';

const SCRIPTS = ['deploy/batch/workers.sh', '.ci/run', '.ci/demonstrate'];
const WORKERS = at('deploy', 'batch', 'workers.sh');

describe('shell scripts', () => {
  it.each(SCRIPTS)('%s is read by bash without complaint', (script) => {
    const { status, stderr } = spawnSync('bash', ['-n', at(script)], { encoding: 'utf8' });
    expect({ status, stderr }).toEqual({ status: 0, stderr: '' });
  });

  it('please the linter, where it is at hand', () => {
    if (!available('shell scripts', 'shellcheck', '--version')) return;
    const { status, stdout } = spawnSync('shellcheck', ['--severity=warning', ...SCRIPTS.map((script) => at(script))], {
      encoding: 'utf8',
    });
    expect({ status, stdout }).toEqual({ status: 0, stdout: '' });
  });
});

describe('the job array', () => {
  let folder: string;
  let environment: Record<string, string>;
  beforeEach(() => {
    folder = mkdtempSync(join(tmpdir(), 'windrow-batch-'));
    const file = join(folder, 'environment');
    // Would print a line of its own if the file were run.
    writeFileSync(file, '# of the group\nDATABASE_URL=postgresql://writer:a$(echo b)c@db/windrow\n\nREDIS_URL=rediss://:x@redis:6379');
    chmodSync(file, 0o600);
    const program = join(folder, 'program.mjs');
    writeFileSync(
      program,
      `console.log(JSON.stringify({ args: process.argv.slice(2), env: process.env }));
       if (process.env.STAY) { process.on('SIGTERM', () => process.exit(7)); setInterval(() => {}, 1000); }`,
    );
    environment = { PATH: process.env.PATH!, HOME: folder, WORKER_ENVIRONMENT: file, WORKER_PROGRAM: program };
  });
  afterEach(() => rmSync(folder, { recursive: true, force: true }));

  const run = (more: Readonly<Record<string, string>> = {}) =>
    spawnSync('bash', [WORKERS], { env: { ...environment, ...more }, encoding: 'utf8', cwd: folder });
  const started = (more: Readonly<Record<string, string>>): { args: string[]; env: Record<string, string> } => JSON.parse(run(more).stdout);

  it('takes secrets from the file as they stand, and gives windrow settings it accepts', () => {
    const { args, env } = started({ SLURM_CPUS_PER_TASK: '8', SLURM_MEM_PER_NODE: '10240' });
    expect(args).toEqual(['worker']);
    expect(readSettings(env)).toMatchObject({
      database: 'postgresql://writer:a$(echo b)c@db/windrow',
      redis: 'rediss://:x@redis:6379',
      threads: 8,
      memory: 640 * 2 ** 20,
      grace: 90,
    });
  });

  it.each([
    [
      { SLURM_CPUS_PER_TASK: '4', SLURM_MEM_PER_CPU: '2048' },
      { threads: 4, memory: 2 ** 30 },
    ],
    [{ NCPUS: '16' }, { threads: 16, memory: null }],
    [{ WORKER_GRACE: '5' }, { threads: null, memory: null, grace: 5 }],
  ])('allocation %j gives %j', (allocation, settings) => {
    expect(readSettings(started(allocation).env)).toMatchObject(settings);
  });

  it('finds the build where it was submitted', () => {
    mkdirSync(join(folder, 'dist/src/cli'), { recursive: true });
    writeFileSync(join(folder, 'dist/src/cli/main.js'), 'console.log("built")');
    expect(run({ WORKER_PROGRAM: '', SLURM_SUBMIT_DIR: folder }).stdout).toBe('built\n');
    expect(run({ WORKER_PROGRAM: '', PBS_O_WORKDIR: '/' })).toMatchObject({ status: 2, stderr: expect.stringContaining('WORKER_PROGRAM') });
  });

  it('refuses a file of secrets that is missing, open to others or not made of settings', () => {
    expect(run({ WORKER_ENVIRONMENT: join(folder, 'none') })).toMatchObject({
      status: 2,
      stderr: expect.stringContaining('no environment file'),
    });
    writeFileSync(environment.WORKER_ENVIRONMENT, 'echo hello');
    expect(run()).toMatchObject({ status: 2, stdout: '', stderr: expect.stringContaining('NAME=value') });
    chmodSync(environment.WORKER_ENVIRONMENT, 0o640);
    expect(run()).toMatchObject({ status: 2, stderr: expect.stringContaining('chmod 600') });
  });

  it("passes the scheduler's SIGTERM on to the worker", async () => {
    const child = spawn('bash', [WORKERS], { env: { ...environment, STAY: '1' }, stdio: ['ignore', 'pipe', 'inherit'] });
    await new Promise((resolve) => child.stdout.once('data', resolve));
    await new Promise((resolve) => setTimeout(resolve, 200));
    child.kill('SIGTERM');
    expect(await new Promise((resolve) => child.once('exit', resolve))).toBe(7);
  });

  it('is warned longer before the end than the worker drains', () => {
    const [, warned] = /--signal=B:TERM@(\d+)/.exec(read('deploy/batch/workers.sh')) ?? [];
    expect(Number(warned)).toBeGreaterThan(90);
  });
});

describe('systemd units', () => {
  const units = readdirSync(at('deploy', 'systemd'));
  const values = (unit: string, key: string): string[] =>
    read('deploy', 'systemd', unit)
      .split('\n')
      .filter((line) => line.startsWith(`${key}=`))
      .map((line) => line.slice(key.length + 1));

  it.each(units)('%s starts the built program, with secrets from a file, as nobody', (unit) => {
    const [start] = values(unit, 'ExecStart');
    const [, program] = /\/opt\/windrow\/(\S+)/.exec(start) ?? [];
    expect(program).toBe((JSON.parse(read('package.json')) as { bin: { windrow: string } }).bin.windrow);
    expect(values(unit, 'EnvironmentFile')[0]).toMatch(/^\/etc\/windrow\/\w+\.env$/);
    expect(values(unit, 'DynamicUser')).toEqual(['yes']);
    expect(read('deploy', 'systemd', unit)).not.toContain('://');
  });

  it('the worker has settings that windrow accepts, and more time to end than the grace', () => {
    const pairs = values('windrow-worker.service', 'Environment').flatMap((line) => line.split(' ').map((pair) => pair.split('=')));
    expect(Number(values('windrow-worker.service', 'TimeoutStopSec')[0])).toBeGreaterThan(readSettings(Object.fromEntries(pairs)).grace);
  });

  it('please systemd, where it is at hand', () => {
    if (!available('systemd units', 'systemd-analyze', '--version')) return;
    const paths = units.map((unit) => at('deploy', 'systemd', unit));
    const { status, stderr } = spawnSync('systemd-analyze', ['verify', ...paths], { encoding: 'utf8' });
    // Other units of the machine are loaded too, and may have faults of their own.
    expect({ status, ours: stderr.split('\n').filter((line) => line.includes('windrow')) }).toEqual({ status: 0, ours: [] });
  });
});

describe('roles.sql', () => {
  it('makes logins that are in the roles of `migrate --grant`', async () => {
    const server = await ownPostgres();
    const client = new pg.Client({ connectionString: server.url });
    try {
      await client.connect();
      // \getenv and :'name' are psql's own; passwords with quotes in them are quoted by it.
      const sql = read('deploy', 'postgres', 'roles.sql');
      const fetched = new Map([...sql.matchAll(/^\\getenv (\w+) (\w+)$/gm)].map(([, variable, name]) => [variable, name]));
      expect([...fetched.values()]).toEqual(['WRITER_PASSWORD', 'READER_PASSWORD']);
      await client.query(
        sql.replace(/^\\.*$/gm, '').replace(/:'(\w+)'/g, (_all, variable: string) => pg.escapeLiteral(fetched.get(variable)!)),
      );
      const { rows } = await client.query<{ login: string; role: string }>(
        `select m.rolname as login, r.rolname as role from pg_auth_members a join pg_roles m on m.oid = a.member join pg_roles r on r.oid = a.roleid
         where r.rolname like 'windrow\\_%' order by 1`,
      );
      expect(rows).toEqual([
        { login: 'reader', role: 'windrow_reader' },
        { login: 'writer', role: 'windrow_writer' },
      ]);
      for (const [user, can] of [
        ['writer', true],
        ['reader', true],
        ['windrow_writer', false],
      ] as const)
        expect((await client.query('select rolcanlogin as can from pg_roles where rolname = $1', [user])).rows).toEqual([{ can }]);
    } finally {
      await client.end();
      await server.stop();
    }
  });

  it('is read by psql, where it is at hand', async () => {
    if (!available('roles.sql', 'psql', '--version')) return;
    const server = await ownPostgres();
    try {
      const env = { ...process.env, WRITER_PASSWORD: "it's", READER_PASSWORD: 'b' };
      const args = ['-v', 'ON_ERROR_STOP=1', '-q', '-f', at('deploy', 'postgres', 'roles.sql'), server.url];
      const { status, stderr } = spawnSync('psql', args, { env, encoding: 'utf8' });
      expect({ status, stderr }).toEqual({ status: 0, stderr: '' });
    } finally {
      await server.stop();
    }
  });
});

it('deploy/README.md names files that exist', () => {
  const names = [...read('deploy', 'README.md').matchAll(/^## .*?`([^`\n]+)`/gm)].map(([, name]) => name);
  expect(names).toHaveLength(5);
  for (const name of names) expect(existsSync(at('deploy', name)) || existsSync(at(name))).toBe(true);
});
