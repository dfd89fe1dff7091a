/** A database of a test file's own, cloned from the migrated template; dropping it finds connections that were not given back. */
import { randomBytes } from 'node:crypto';
import { setTimeout as sleep } from 'node:timers/promises';
import pg from 'pg';
import { inject } from 'vitest';
import { openPostgresStore } from '../../src/store/postgres/postgres-store.js';
import type { ResultStore } from '../../src/store/types.js';
import type { DatabaseOffer } from './global-setup.js';

export interface TestDatabase {
  readonly url: string;
  /** A store on it; closed by `drop` when it still is open. */
  open(): Promise<ResultStore>;
  /** Runs one statement beside the store. */
  query<Row extends pg.QueryResultRow = pg.QueryResultRow>(text: string, parameters?: unknown[]): Promise<Row[]>;
  /** @throws where connections are left that no open store holds */
  drop(): Promise<void>;
}

export interface DatabaseOptions {
  /** without windrow's schema */
  readonly empty?: boolean;
}

export async function createDatabase({ empty = false }: DatabaseOptions = {}): Promise<TestDatabase> {
  const response = await fetch(inject('databaseOffer'));
  if (!response.ok) throw new Error(`no PostgreSQL for tests: ${await response.text()}`);
  const offer = (await response.json()) as DatabaseOffer;
  const name = `windrow_test_${randomBytes(6).toString('hex')}`;
  await statement(offer.url, `create database ${name} template ${empty ? 'template0' : offer.template}`);
  const url = new URL(offer.url);
  url.pathname = `/${name}`;
  const stores: ResultStore[] = [];
  const beside = new pg.Pool({ connectionString: url.href, max: 1 });
  beside.on('error', () => undefined);
  return {
    url: url.href,
    async open() {
      const store = await openPostgresStore({ url: url.href });
      stores.push(store);
      return store;
    },
    query: async <Row extends pg.QueryResultRow>(text: string, parameters: unknown[] = []) =>
      (await beside.query<Row>(text, parameters)).rows,
    async drop() {
      await Promise.all([beside.end(), ...stores.map((store) => store.close())]);
      const left = await connectionsTo(offer.url, name);
      await statement(offer.url, `drop database ${name} with (force)`);
      if (left.length > 0) throw new Error(`connections left to the test database: ${left.join('; ')}`);
    },
  };
}

/** What is connected to a database, after the second that a closed connection may take to end. */
async function connectionsTo(url: string, database: string): Promise<string[]> {
  for (let attempt = 0; ; attempt++) {
    const rows = await statement<{ what: string }>(
      url,
      `select application_name || ': ' || state || ' ' || query as what from pg_stat_activity where datname = $1`,
      [database],
    );
    if (rows.length === 0 || attempt === 20) return rows.map(({ what }) => what);
    await sleep(50);
  }
}

async function statement<Row extends pg.QueryResultRow>(url: string, text: string, parameters: unknown[] = []): Promise<Row[]> {
  const client = new pg.Client({ connectionString: url });
  await client.connect();
  try {
    return (await client.query<Row>(text, parameters)).rows;
  } finally {
    await client.end();
  }
}
