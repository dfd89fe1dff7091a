/**
 * Connections and transactions for the store: everything that talks to the driver.
 *
 * Guarantees: a connection goes back to its pool on every path, destroyed after a failure that leaves it unusable; a broken connection
 * never becomes an unhandled 'error' event; every failure leaves as a WindrowError (postgres-errors.ts). Nothing is tried again here:
 * operations are idempotent, and callers retry what is `retryable`.
 */
import pg from 'pg';
import { WindrowError } from '../../core/errors.js';
import { typeParsers } from './encoding.js';
import { isConnectionLoss, toStoreError } from './postgres-errors.js';

/** Where connections come from: one server for good, or one that is started again when it has died. */
export interface Server {
  /** for messages; without a password */
  readonly where: string;
  /** A usable pool. @throws store.unreachable and others when there is none */
  pool(): Promise<pg.Pool>;
  /** A better explanation of a lost connection, where the server left one. */
  explain?(error: WindrowError): Promise<WindrowError>;
  /** Ends the pool. */
  close(): Promise<void>;
}

/** Connections kept at most by one process. */
export const DEFAULT_CONNECTIONS = 10;

/** @param config where to connect; windrow's own settings are added */
export function createPool(config: pg.PoolConfig): pg.Pool {
  const pool = new pg.Pool({
    max: DEFAULT_CONNECTIONS,
    connectionTimeoutMillis: 10_000,
    idleTimeoutMillis: 10_000,
    allowExitOnIdle: true,
    keepAlive: true,
    application_name: 'windrow',
    types: typeParsers,
    ...config,
  });
  // An idle connection that breaks is replaced at the next use, which reports what is wrong.
  pool.on('error', () => undefined);
  // A connection may break at any moment, also between two uses or in the same breath as it was made, when nobody listens yet or any
  // more; whoever uses it next is told by the failing request.
  pool.on('connect', (client) => client.on('error', () => undefined));
  return pool;
}

interface Loan {
  readonly client: pg.PoolClient;
  /** Notes that the work failed and says how. */
  failed(error: unknown): Promise<WindrowError>;
  end(): void;
}

export class Database {
  readonly #server: Server;
  #closed = false;

  constructor(server: Server) {
    this.#server = server;
  }

  get where(): string {
    return this.#server.where;
  }

  /** Lends a connection to `work`. */
  async session<T>(work: (client: pg.PoolClient) => Promise<T>): Promise<T> {
    const loan = await this.#lend();
    try {
      return await work(loan.client);
    } catch (error) {
      throw await loan.failed(error);
    } finally {
      loan.end();
    }
  }

  /** One transaction, committed when `work` resolves, of the default isolation (read committed). */
  transaction<T>(work: (client: pg.PoolClient) => Promise<T>): Promise<T> {
    return this.session(async (client) => {
      await client.query('begin');
      let result: T;
      try {
        result = await work(client);
      } catch (error) {
        await rollback(client);
        throw error;
      }
      await client.query('commit');
      return result;
    });
  }

  /**
   * What `work` yields while it reads one snapshot. The connection is held until the iteration ends, also early. Doubles arrive with
   * all their digits whatever the server's settings.
   */
  async *snapshot<T>(work: (client: pg.PoolClient) => AsyncIterable<T>): AsyncGenerator<T, void, undefined> {
    const loan = await this.#lend();
    try {
      await loan.client.query('begin isolation level repeatable read read only; set local extra_float_digits = 1');
      try {
        yield* work(loan.client);
      } finally {
        await rollback(loan.client);
      }
    } catch (error) {
      throw await loan.failed(error);
    } finally {
      loan.end();
    }
  }

  async close(): Promise<void> {
    if (this.#closed) return;
    this.#closed = true;
    await this.#server.close();
  }

  async #lend(): Promise<Loan> {
    if (this.#closed) throw new WindrowError('internal.invariant', 'the store is closed', { where: this.where });
    let client: pg.PoolClient;
    try {
      client = await (await this.#server.pool()).connect();
    } catch (error) {
      throw await this.#explained(error);
    }
    let unusable = false;
    return {
      client,
      failed: (error) => {
        unusable ||= !(error instanceof WindrowError) && isConnectionLoss(error);
        return this.#explained(error);
      },
      end: () => client.release(unusable),
    };
  }

  async #explained(error: unknown): Promise<WindrowError> {
    const failure = toStoreError(error, this.where);
    return failure.code === 'store.unreachable' && this.#server.explain !== undefined ? this.#server.explain(failure) : failure;
  }
}

/** On a broken connection the server rolls back by itself, and the first error is the one that tells. */
async function rollback(client: pg.PoolClient): Promise<void> {
  await client.query('rollback').catch(() => undefined);
}
