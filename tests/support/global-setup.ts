/**
 * Once a run: offers PostgreSQL to the test files. The server is started when the first file asks for it, so a run of pure tests
 * starts none; what is used is printed. Each run has its own migrated template, which the databases of the files are cloned from.
 */
import { randomBytes } from 'node:crypto';
import { createServer, type Server } from 'node:http';
import type { AddressInfo } from 'node:net';
import pg from 'pg';
import type { TestProject } from 'vitest/node';
import { openPostgresStore } from '../../src/store/postgres/postgres-store.js';
import { startPostgres, type PostgresForTests } from './services.js';

declare module 'vitest' {
  interface ProvidedContext {
    /** answers with `DatabaseOffer` as JSON */
    databaseOffer: string;
  }
}

export interface DatabaseOffer {
  /** of a user who may create databases */
  readonly url: string;
  readonly template: string;
}

interface Offered extends DatabaseOffer {
  readonly server: PostgresForTests;
}

let offered: Promise<Offered> | null = null;
let listener: Server | null = null;

export async function setup(project: TestProject): Promise<void> {
  const server = createServer((_request, response) => {
    offered ??= offer();
    offered.then(
      ({ url, template }) => response.end(JSON.stringify({ url, template } satisfies DatabaseOffer)),
      (error: unknown) => response.writeHead(500).end(String(error)),
    );
  });
  await new Promise<void>((resolve) => server.listen(0, '127.0.0.1', resolve));
  project.provide('databaseOffer', `http://127.0.0.1:${(server.address() as AddressInfo).port}`);
  listener = server;
}

export async function teardown(): Promise<void> {
  listener?.closeAllConnections();
  listener?.close();
  const made = await offered?.catch(() => null);
  if (!made) return;
  try {
    await administer(made.url, `drop database ${made.template} with (force)`);
  } finally {
    await made.server.stop();
  }
}

async function offer(): Promise<Offered> {
  const server = await startPostgres();
  console.log(`PostgreSQL for tests: ${server.source}`);
  const template = `windrow_template_${randomBytes(6).toString('hex')}`;
  await administer(server.url, `create database ${template}`);
  const url = new URL(server.url);
  url.pathname = `/${template}`;
  const store = await openPostgresStore({ url: url.href });
  await store.migrate();
  await store.close();
  return { url: server.url, template, server };
}

async function administer(url: string, statement: string): Promise<void> {
  const client = new pg.Client({ connectionString: url });
  await client.connect();
  try {
    await client.query(statement);
  } finally {
    await client.end();
  }
}
