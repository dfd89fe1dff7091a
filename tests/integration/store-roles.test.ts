/** `windrow migrate --grant` on a server of its own, since roles belong to a whole server: what each role may do, and what not. */
import { rmSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import pg from 'pg';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { openPostgresStore } from '../../src/store/postgres/postgres-store.js';
import type { ResultStore } from '../../src/store/types.js';
import { cellResult, failureOf, gridPoint, pointResult, questionRecord, sweepOf } from '../support/results.js';
import { ownPostgres, type OwnPostgres } from '../support/services.js';
import { makeStoreFolder } from '../support/store-folder.js';
import { runCli, TWO_LEVEL_SWEEP } from './cli/small-store.js';

const INSUFFICIENT_PRIVILEGE = '42501'; // PostgreSQL documentation, appendix A

let server: OwnPostgres;
let folder: string;

const urlOf = (user: string): string => {
  const url = new URL(server.url);
  url.username = user;
  return url.href;
};

async function ask(user: string, statement: string): Promise<pg.QueryResult> {
  const client = new pg.Client({ connectionString: urlOf(user) });
  await client.connect();
  try {
    return await client.query(statement);
  } finally {
    await client.end();
  }
}

async function withStore<T>(user: string, work: (store: ResultStore) => Promise<T>): Promise<T> {
  const store = await openPostgresStore({ url: urlOf(user) });
  try {
    return await work(store);
  } finally {
    await store.close();
  }
}

const as = (user: string, ...args: string[]) => runCli(args, { DATABASE_URL: urlOf(user) });

beforeAll(async () => {
  folder = makeStoreFolder();
  server = await ownPostgres();
  const migrated = await as('windrow', 'migrate', '--grant', '--format', 'json');
  expect(migrated).toMatchObject({ status: 0, err: '' });
  expect(JSON.parse(migrated.out)).toMatchObject({ schema: 'up to date', writer: 'windrow_writer', reader: 'windrow_reader' });
  await ask('windrow', 'create role computing login in role windrow_writer; create role looking login in role windrow_reader');
  await ask('windrow', 'create role stranger login');
  writeFileSync(join(folder, 'line.yaml'), TWO_LEVEL_SWEEP);
});
afterAll(async () => {
  await server?.stop();
  rmSync(folder, { recursive: true, force: true });
});

describe('the writer', () => {
  it('computes a sweep, finds it again, and stops it', async () => {
    const file = join(folder, 'line.yaml');
    expect(await as('computing', 'sweep', file)).toMatchObject({ status: 0, out: expect.stringMatching(/computed +30\n/) });
    expect(await as('computing', 'sweep', file)).toMatchObject({ status: 0, out: expect.stringMatching(/reused +30\n/) });
    expect(await as('computing', 'stop', 'two-level-line')).toMatchObject({ status: 0 });
  });

  it('keeps failures and clears them, sets states, and finds nothing to migrate', async () => {
    await withStore('computing', async (store) => {
      await store.migrate();
      const [question] = [questionRecord(0)];
      const grid = [gridPoint(0), gridPoint(1)];
      await store.registerSweep(sweepOf('failing', grid.length, [question]));
      await store.enrol('failing', grid);
      await store.save({ points: [], cells: [], failures: grid.map((point) => failureOf(point)) });
      await store.save({ points: [pointResult(grid[0])], cells: [cellResult(grid[0], question)], failures: [] });
      expect(await store.progress('failing')).toMatchObject({ storedPoints: 1, failedPoints: 1 });
      expect(await store.clearFailures('failing')).toBe(1);
      await store.setSweepState('failing', 'done');
      expect(await store.findSweep('failing')).toMatchObject({ state: 'done' });
    });
  });

  it.each([
    'update windrow.cell set decay_rate = 0',
    'delete from windrow.cell',
    'delete from windrow.point',
    "update windrow.sweep set document = '{}'",
    'drop table windrow.cell',
    'alter table windrow.cell add column mine text',
    'create table windrow.mine ()',
    'truncate windrow.failure',
    'insert into windrow.migration (name, run_on) values ($$x$$, now())',
  ])('cannot: %s', async (statement) => {
    await expect(ask('computing', statement)).rejects.toMatchObject({ code: INSUFFICIENT_PRIVILEGE });
  });
});

describe('the reader', () => {
  it.each([
    ['status', 'two-level-line'],
    ['map', 'two-level-line', '--field', 'recurrent_weight'],
    ['boundary', 'two-level-line'],
    ['export', 'two-level-line', '--format', 'csv'],
  ])('%s %s shows what the owner sees', async (...args) => {
    const [seen, owned] = [await as('looking', ...args), await as('windrow', ...args)];
    expect(seen).toEqual(owned);
    expect(seen.status).toBe(0);
    expect(seen.out.length).toBeGreaterThan(50);
  });

  it.each(['phase_cell', 'boundary_input'])('sees the view %s', async (view) => {
    expect((await ask('looking', `select * from windrow.${view} where sweep = 'two-level-line'`)).rowCount).toBe(30);
  });

  it('cannot compute, and is told why', async () => {
    writeFileSync(join(folder, 'other.yaml'), TWO_LEVEL_SWEEP.replace('two-level-line', 'another-line'));
    const refused = await as('looking', 'sweep', join(folder, 'other.yaml'));
    expect(refused).toMatchObject({ status: 1, err: expect.stringContaining('lacks a right') });
    expect((await ask('windrow', `select from windrow.sweep where name = 'another-line'`)).rowCount).toBe(0);
  });

  it.each([
    "insert into windrow.failure (point_id, code, message) select id, 'x', 'x' from windrow.point",
    "update windrow.sweep set state = 'stopping'",
    'delete from windrow.failure',
    'drop view windrow.boundary_input',
  ])('cannot: %s', async (statement) => {
    await expect(ask('looking', statement)).rejects.toMatchObject({ code: INSUFFICIENT_PRIVILEGE });
  });
});

describe('granting', () => {
  it('can be repeated, by many processes at once', async () => {
    await ask('windrow', 'create database second');
    const url = new URL(server.url);
    url.pathname = '/second';
    const stores = await Promise.all(Array.from({ length: 6 }, () => openPostgresStore({ url: url.href })));
    try {
      await Promise.all(stores.map((store) => store.migrate()));
      const roles = await Promise.all(stores.map((store) => store.grant()));
      expect(new Set(roles.map((role) => JSON.stringify(role))).size).toBe(1);
    } finally {
      await Promise.all(stores.map((store) => store.close()));
    }
  });

  it('reaches the tables of later migrations', async () => {
    await ask('windrow', 'create table windrow.later (x integer)');
    try {
      expect((await ask('looking', 'select * from windrow.later')).rowCount).toBe(0);
    } finally {
      await ask('windrow', 'drop table windrow.later');
    }
  });

  it('is refused to a user who may not, and to the embedded store', async () => {
    expect(await as('stranger', 'migrate', '--grant')).toMatchObject({ status: 1, err: expect.stringContaining('refuse') });
    const embedded = await runCli(['migrate', '--grant'], { WINDROW_STORE: join(folder, 'store') });
    expect(embedded).toMatchObject({ status: 2, err: expect.stringContaining('DATABASE_URL') });
  });

  it('gives nothing to logins outside the roles', async () => {
    await expect(ask('stranger', 'select * from windrow.sweep')).rejects.toMatchObject({ code: INSUFFICIENT_PRIVILEGE });
  });
});
