/**
 * One PostgreSQL server a data folder, shared by every windrow process that uses the folder: the first starts it, the last stops it.
 *
 * Who is there is known to the server itself. Each process holds one session with a shared advisory lock; when a process closes, it lets
 * go of its lock and asks for the exclusive one, which it gets exactly when nobody else is there, and then stops the server while
 * holding it. The operating system closes the sessions of a process that was killed, so a lock cannot outlive its holder: what a killed
 * process left running is taken over by the next process and stopped when that one closes. A newcomer that meets the exclusive lock
 * waits, loses its session as the server goes down, and starts the server again.
 *
 * The session also watches: when the server dies, it ends, and the next use starts the server again (crash recovery included).
 */
import { open, rename, stat } from 'node:fs/promises';
import { join, resolve } from 'node:path';
import pg from 'pg';
import { WindrowError } from '../../core/errors.js';
import { createPool, type Server } from '../postgres/database.js';
import { isConnectionLoss, toStoreError } from '../postgres/postgres-errors.js';
import { findPackage, prepareBinaries, type Binaries } from './binaries.js';
import { ensureDataFolder, ROLE, type DataFolder } from './data-folder.js';
import { isFull, programError } from './embedded-errors.js';
import {
  clearAway,
  clearEmpty,
  endStuck,
  isServing,
  PORT,
  readPostmaster,
  startPostmaster,
  stopPostmaster,
  type Started,
} from './postmaster.js';
import { isAlive, pause } from './processes.js';
import type { ServerUser } from './server-user.js';

export interface EmbeddedOptions {
  readonly folder: string;
  /** connections kept at most by this process; 10 when absent */
  readonly connections?: number;
  /** where data go when a server started by root cannot enter `folder`; /var/lib/windrow when absent */
  readonly elsewhere?: string;
  /** told once what a user should know, such as data that lie elsewhere */
  readonly onNotice?: (message: string) => void;
}

interface Attachment {
  readonly presence: pg.Client;
  readonly pool: pg.Pool;
  readonly data: DataFolder;
}

/** Advisory lock of presence; the two-number form shares no key with the one-number locks of the store. */
const PRESENCE = '1463899218, 1';
/** Application name of such a session; the id of its process follows. */
const PRESENCE_NAME = 'windrow process ';
/** How long the sessions of dead processes may take to end. */
const LEAVE_MS = 5_000;
/**
 * How long a server may neither accept a connection nor say that it is on its way. One that was killed leaves processes that keep the
 * data folder for a moment; one that recovers from a crash says so, and may take its time.
 */
const QUIET_MS = 60_000;
const LARGE_LOG = 4 << 20;
/** SQLSTATE while the server recovers, starts or stops. */
const CANNOT_CONNECT_NOW = '57P03';

export class EmbeddedServer implements Server {
  readonly where: string;
  readonly #options: EmbeddedOptions;
  readonly #log: string;
  #attachment: Promise<Attachment> | null = null;
  #binaries: Promise<Binaries> | null = null;
  /** length of the server's log when this process came to it */
  #logged = 0;
  /** why there was no connection, the last time */
  #refusal = 'no answer';

  constructor(options: EmbeddedOptions) {
    this.#options = options;
    this.where = resolve(options.folder);
    this.#log = join(this.where, 'server.log');
  }

  async pool(): Promise<pg.Pool> {
    this.#attachment ??= this.#attach().catch((error: unknown) => {
      this.#attachment = null;
      throw error;
    });
    return (await this.#attachment).pool;
  }

  /** A full disk shows as a lost connection, and its reason in the server's log. */
  async explain(error: WindrowError): Promise<WindrowError> {
    const output = await readFrom(this.#log, this.#logged);
    return isFull(output) ? programError('the embedded server', output, this.where) : error;
  }

  async close(): Promise<void> {
    const attachment = await this.#attachment?.catch(() => null);
    this.#attachment = null;
    if (attachment === null || attachment === undefined) return;
    const { presence, pool, data } = attachment;
    await pool.end();
    try {
      if (await isLast(presence)) await stopPostmaster(data.path);
    } catch (error) {
      // The server is gone already: nothing is left to stop.
      if (!isConnectionLoss(error)) throw toStoreError(error, this.where);
    } finally {
      await presence.end().catch(() => undefined);
    }
  }

  async #attach(): Promise<Attachment> {
    // Since the last sign that the server comes or goes.
    let quiet: number | null = null;
    let before: string | null = null;
    for (;;) {
      const data = await this.#dataFolder();
      quiet ??= Date.now();
      const logged = await sizeOf(this.#log);
      const sockets = await this.#serving(data, quiet);
      const presence = sockets === null ? 'away' : await this.#present(sockets);
      if (sockets !== null && presence instanceof pg.Client) {
        this.#logged = logged;
        return this.#watch({ presence, data, pool: this.#createPool(sockets) });
      }
      if (presence === 'starting' || (sockets !== null && sockets !== before)) quiet = Date.now();
      before = sockets ?? before;
      if (Date.now() - quiet > QUIET_MS) {
        if (!(await endStuck(data.path)))
          throw new WindrowError('store.locked', 'the embedded server is there but accepts no connection', {
            where: this.where,
            found: this.#refusal,
          });
        quiet = Date.now();
      }
      await pause(20);
    }
  }

  #dataFolder(): Promise<DataFolder> {
    return ensureDataFolder({
      folder: this.where,
      elsewhere: this.#options.elsewhere ?? '/var/lib/windrow',
      onNotice: this.#options.onNotice ?? (() => undefined),
      binaries: (user) => this.#programs(user),
    });
  }

  async #programs(user: ServerUser): Promise<Binaries> {
    this.#binaries ??= findPackage().then((found) => prepareBinaries(found, user));
    return this.#binaries;
  }

  /** The socket folder of the running server, which is started where there is none; null: ask again. */
  async #serving(data: DataFolder, quiet: number): Promise<string | null> {
    const found = await readPostmaster(data.path);
    if (found !== null && (await isServing(found, data.path))) return found.sockets;
    await (found === null ? clearEmpty(data.path) : clearAway(found, data.path));
    await rotate(this.#log);
    const before = await sizeOf(this.#log);
    const started = await startPostmaster((await this.#programs(data.user)).postgres, data, this.#log);
    if (await isUp(started, data.path)) {
      started.release();
      return (await readPostmaster(data.path))?.sockets ?? null;
    }
    const output = await readFrom(this.#log, before);
    if (!isFull(output) && OCCUPIED.test(output) && Date.now() - quiet < QUIET_MS) {
      this.#refusal = output.trim();
      return null;
    }
    throw programError('the embedded server', output, this.where);
  }

  /** A session that shows this process is there, or why there is none: a server on its way up, or on its way down or gone. */
  async #present(sockets: string): Promise<pg.Client | 'starting' | 'away'> {
    const presence = new pg.Client({
      ...connection(sockets),
      application_name: `${PRESENCE_NAME}${process.pid}`,
      connectionTimeoutMillis: 10_000,
    });
    presence.on('error', () => undefined);
    try {
      await presence.connect();
      await presence.query(`select pg_advisory_lock_shared(${PRESENCE})`);
      return presence;
    } catch (error) {
      await presence.end().catch(() => undefined);
      this.#refusal = (error as Error).message;
      // The code is the same for a server on its way down, which is waited for less long.
      if (error instanceof pg.DatabaseError && error.code === CANNOT_CONNECT_NOW && !/shutting down/.test(error.message)) return 'starting';
      if (isConnectionLoss(error)) return 'away';
      throw toStoreError(error, this.where);
    }
  }

  #createPool(sockets: string): pg.Pool {
    const { connections } = this.#options;
    return createPool({ ...connection(sockets), ...(connections === undefined ? {} : { max: connections }) });
  }

  #watch(attachment: Attachment): Attachment {
    attachment.presence.once('end', () => {
      // After close() there is nothing to forget.
      if (this.#attachment === null) return;
      this.#attachment = null;
      void attachment.pool.end().catch(() => undefined);
    });
    return attachment;
  }
}

/** Another server has the data folder, or the processes of a killed one are still ending. */
const OCCUPIED = /lock file "postmaster\.pid" already exists|shared memory block .* is still in use|lock file "postmaster\.pid" is empty/;

/** Gives up the presence and takes the exclusive lock, if nobody else is there. */
async function isLast(presence: pg.Client): Promise<boolean> {
  await presence.query(`select pg_advisory_unlock_shared(${PRESENCE})`);
  const begun = Date.now();
  for (;;) {
    const { rows } = await presence.query<{ alone: boolean }>(`select pg_try_advisory_lock(${PRESENCE}) as alone`);
    if (rows[0].alone) return true;
    // Sessions of a process that was killed a moment ago are about to end; others may stay.
    const others = await presence.query<{ name: string }>(
      `select a.application_name as name from pg_locks l join pg_stat_activity a using (pid)
       where l.locktype = 'advisory' and (l.classid, l.objid) = (${PRESENCE}) and a.pid <> pg_backend_pid()`,
    );
    if (others.rows.some(({ name }) => isAlive(Number(name.slice(PRESENCE_NAME.length))))) return false;
    if (Date.now() - begun > LEAVE_MS) return false;
    await pause(20);
  }
}

/** Explicit in everything the driver would otherwise take from PG* variables. */
const connection = (sockets: string): pg.ClientConfig => ({
  host: sockets,
  port: PORT,
  user: ROLE,
  database: 'postgres',
  password: '',
  ssl: false,
});

/** Waits until a server of the data folder, this one or a faster one, accepts connections; false when this one has ended. */
async function isUp(started: Started, data: string): Promise<boolean> {
  for (;;) {
    const outcome = await Promise.race([started.ended, pause(10)]);
    if (outcome === 'ended') return false;
    const running = await readPostmaster(data);
    if (running?.status === 'ready' && (await isServing(running, data))) return true;
  }
}

async function sizeOf(file: string): Promise<number> {
  return (await stat(file).catch(() => null))?.size ?? 0;
}

async function rotate(log: string): Promise<void> {
  if ((await sizeOf(log)) > LARGE_LOG) await rename(log, `${log}.old`).catch(() => undefined);
}

async function readFrom(file: string, position: number): Promise<string> {
  const handle = await open(file).catch(() => null);
  if (handle === null) return '';
  try {
    const { size } = await handle.stat();
    // The end tells; a log can be long.
    const start = Math.max(position, size - 65_536);
    const { buffer, bytesRead } = await handle.read(Buffer.alloc(Math.max(0, size - start)), 0, null, start);
    return buffer.toString('utf8', 0, bytesRead);
  } finally {
    await handle.close();
  }
}
