import { cpSync, mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import pg from 'pg';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { migrate, schemaState } from '../../src/store/migrate.js';
import { openPostgresStore } from '../../src/store/postgres/postgres-store.js';
import { createDatabase, type TestDatabase } from '../support/database.js';
import { describeSchema } from '../support/describe-schema.js';

const OWN = fileURLToPath(new URL('../../migrations', import.meta.url));

describe('migrations', () => {
  let database: TestDatabase;
  let folder: string;
  beforeAll(async () => {
    folder = mkdtempSync(join(tmpdir(), 'windrow-migrations-'));
    cpSync(OWN, folder, { recursive: true });
    database = await createDatabase({ empty: true });
  });
  afterAll(async () => {
    await database.drop();
    rmSync(folder, { recursive: true, force: true });
  });

  const connected = async <T>(work: (client: pg.Client) => Promise<T>): Promise<T> => {
    const client = new pg.Client({ connectionString: database.url });
    await client.connect();
    try {
      return await work(client);
    } finally {
      await client.end();
    }
  };

  it('are asked for by a store that needs them', async () => {
    const store = await database.open();
    await expect(store.listSweeps()).rejects.toMatchObject({
      code: 'store.schema-older',
      message: expect.stringContaining('windrow migrate'),
    });
    for (const read of [() => store.measures([]), () => store.cells({ sweep: 'x' })[Symbol.asyncIterator]().next()])
      await expect(read()).rejects.toMatchObject({ code: 'store.schema-older' });
  });

  it('succeed in twenty installations at once', async () => {
    const stores = await Promise.all(Array.from({ length: 20 }, () => openPostgresStore({ url: database.url, connections: 1 })));
    try {
      await Promise.all(stores.map((store) => store.migrate()));
      expect(await stores[0].listSweeps()).toEqual([]);
    } finally {
      await Promise.all(stores.map((store) => store.close()));
    }
    const names = await database.query<{ name: string }>('select name from windrow.migration');
    expect(new Set(names.map(({ name }) => name)).size).toBe(names.length);
  });

  it('leave the search path of their connection as it was', async () => {
    await connected(async (client) => {
      const path = async () => (await client.query<{ search_path: string }>('show search_path')).rows[0].search_path;
      const before = await path();
      writeFileSync(join(folder, '0900_addition.sql'), 'create table windrow.addition (x integer);');
      await migrate(client, 'test', folder);
      expect(await path()).toBe(before);
      expect(await schemaState(client, folder)).toEqual({ pending: [], newer: [] });
    });
  });

  it('of a newer program do not matter to an older one when they only add', async () => {
    const store = await database.open();
    expect(await store.listSweeps()).toEqual([]);
    await store.migrate();
  });

  it('that fail leave nothing behind', async () => {
    const before = await describeSchema(database);
    writeFileSync(join(folder, '0901_good.sql'), 'create table windrow.good (x integer);');
    writeFileSync(join(folder, '0902_bad.sql'), 'create table windrow.bad (x no_such_type);');
    await connected((client) => expect(migrate(client, 'test', folder)).rejects.toThrow('no_such_type'));
    expect(await describeSchema(database)).toBe(before);
    rmSync(join(folder, '0902_bad.sql'));
    rmSync(join(folder, '0901_good.sql'));
  });

  it('that break the schema make an older program refuse the store', async () => {
    const open = await database.open();
    writeFileSync(join(folder, '0903_renamed.breaking.sql'), 'alter table windrow.addition rename to renamed;');
    await connected((client) => migrate(client, 'test', folder));
    const refusal = { code: 'store.schema-newer', details: { found: '0903_renamed.breaking' } };
    await expect(database.open()).rejects.toMatchObject(refusal);
    await expect(open.migrate()).rejects.toMatchObject(refusal);
    await expect(open.listSweeps()).rejects.toMatchObject(refusal);
  });

  it('need no right to create schemas where the schema is there already', async () => {
    const guest = await createDatabase({ empty: true });
    const role = `guest_${Math.random().toString(36).slice(2)}`;
    try {
      await guest.query(`create role ${role}`);
      await guest.query(`create schema windrow authorization ${role}`);
      const client = new pg.Client({ connectionString: guest.url });
      await client.connect();
      await client.query(`set role ${role}`);
      await migrate(client, 'test');
      await client.end();
      expect(await (await guest.open()).listSweeps()).toEqual([]);
    } finally {
      await guest.drop();
      await database.query(`drop role ${role}`);
    }
  });
});
