/**
 * The server process of a data folder: found by its postmaster.pid, started, stopped.
 *
 * PostgreSQL itself keeps a second server away from a data folder (postmaster.pid and a shared memory segment), so two processes may
 * start one at once: one of the two servers ends at once and its starter uses the other. What PostgreSQL cannot see is a
 * postmaster.pid whose process id now belongs to something else, or to a dead process that nobody has reaped; such a file is taken
 * away here.
 *
 * The server gets its own session, so that Ctrl-C in a terminal does not reach it; no TCP port; and a socket in a folder only its user
 * can enter. That folder has a short path, since a socket's path is limited to about 100 bytes.
 */
import { execFile, spawn } from 'node:child_process';
import { randomBytes } from 'node:crypto';
import { chown, link, lstat, mkdtemp, open, readFile, rename, rm, stat, unlink } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { basename, join } from 'node:path';
import { promisify } from 'node:util';
import { WindrowError } from '../../core/errors.js';
import { cannotRun, type DataFolder } from './data-folder.js';
import { fileError } from './embedded-errors.js';
import { isAlive, pause } from './processes.js';
import { canRead, spawnAs, type ServerUser } from './server-user.js';

/** Names the socket file; nothing listens on it. */
export const PORT = 5432;

export interface Postmaster {
  readonly pid: number;
  /** folder of the socket; null while the server has not written it yet */
  readonly sockets: string | null;
  /** as the server writes it: 'starting', 'ready', 'stopping', … */
  readonly status: string | null;
}

/** What postmaster.pid says; null where there is none. */
export async function readPostmaster(data: string): Promise<Postmaster | null> {
  const text = await readFile(join(data, 'postmaster.pid'), 'utf8').catch(() => '');
  return parsePostmaster(text);
}

/** Lines of the file: pid, data folder, start time, port, socket folder, address, shared memory, status. */
function parsePostmaster(text: string): Postmaster | null {
  const lines = text.split('\n');
  const pid = Number(lines[0]);
  if (!Number.isInteger(pid) || pid <= 0) return null;
  return { pid, sockets: lines.length > 5 && lines[4] !== '' ? lines[4] : null, status: lines[7]?.trim() ?? null };
}

/** Whether the process is a living PostgreSQL of the folder's owner. */
export async function isServing({ pid }: Postmaster, data: string): Promise<boolean> {
  const { uid } = await stat(data);
  if (process.platform !== 'linux') {
    const ps = await promisify(execFile)('ps', ['-o', 'uid=,stat=,comm=', '-p', String(pid)]).catch(() => null);
    const [owner, state, ...command] = (ps?.stdout ?? '').trim().split(/\s+/);
    return Number(owner) === uid && !state.startsWith('Z') && basename(command.join(' ')) === 'postgres';
  }
  const text = await readFile(`/proc/${pid}/stat`, 'utf8').catch(() => '');
  const owner = await stat(`/proc/${pid}`).catch(() => null);
  const [, command, state] = /^\d+ \((.*)\) (\S)/s.exec(text) ?? [];
  return command === 'postgres' && state !== 'Z' && state !== 'X' && owner?.uid === uid;
}

/** How long a starting server may take between making its postmaster.pid and writing into it. */
const EMPTY_MS = 5_000;

/** Takes away an empty postmaster.pid: what is left when a start broke off between making and writing it. */
export async function clearEmpty(data: string): Promise<void> {
  const file = join(data, 'postmaster.pid');
  const found = await stat(file).catch(() => null);
  if (found?.size === 0 && Date.now() - found.mtimeMs > EMPTY_MS) await rm(file, { force: true });
}

/**
 * Clears away what a dead server left. Its postmaster.pid stays where PostgreSQL itself sees that the process is gone (it then also
 * looks for processes of that server that still run); a file whose process id is somebody else's goes. It is renamed first and
 * read again, so that a file which another process has put there in the meantime goes back.
 */
export async function clearAway({ pid, sockets }: Postmaster, data: string): Promise<void> {
  if (sockets !== null) await removeSockets(sockets);
  if (!isAlive(pid)) return;
  const file = join(data, 'postmaster.pid');
  const aside = `${file}.${randomBytes(6).toString('hex')}`;
  try {
    await rename(file, aside);
  } catch {
    return;
  }
  const taken = parsePostmaster(await readFile(aside, 'utf8'));
  if (taken?.pid !== pid) await link(aside, file).catch(() => undefined);
  await unlink(aside);
}

const SOCKETS = 'windrow-';

/** Removes a socket folder, if it is one of ours. */
export async function removeSockets(folder: string): Promise<void> {
  if (!new RegExp(`^${SOCKETS}[A-Za-z0-9]{6}$`).test(basename(folder))) return;
  if ((await lstat(folder).catch(() => null))?.isDirectory() === true) await rm(folder, { recursive: true, force: true });
}

/** Longest path of a socket that every system accepts (sun_path of macOS has 104 bytes with the final NUL). */
const LONGEST_SOCKET = 103;

async function makeSockets(user: ServerUser): Promise<string> {
  const fits = (folder: string): boolean =>
    Buffer.byteLength(join(folder, `${SOCKETS}XXXXXX`, `.s.PGSQL.${PORT}`)) <= LONGEST_SOCKET && canRead(folder, user);
  const parent = [tmpdir(), '/tmp'].find(fits);
  if (parent === undefined)
    throw new WindrowError('store.embedded', 'no folder for the socket of the embedded server; set TMPDIR to a short path', {
      where: tmpdir(),
      allowed: `a folder that the server's user can enter, with a path of at most ${LONGEST_SOCKET - 29} bytes`,
    });
  try {
    const folder = await mkdtemp(join(parent, SOCKETS));
    if (user !== null) await chown(folder, user.uid, user.gid);
    return folder;
  } catch (error) {
    throw fileError(error, 'make the folder of the socket', parent);
  }
}

export const SETTINGS: Readonly<Record<string, string>> = {
  listen_addresses: '',
  unix_socket_permissions: '0700',
  port: String(PORT),
  max_connections: '200',
  // Containers often have too little shared memory for parallel queries.
  max_parallel_workers_per_gather: '0',
  // No replication: less is written.
  wal_level: 'minimal',
  max_wal_senders: '0',
  max_logical_replication_workers: '0',
  max_wal_size: '512MB',
  logging_collector: 'off',
  log_checkpoints: 'off',
  timezone: 'UTC',
  log_timezone: 'UTC',
};

/** A server that was started and may still be on its way up. */
export interface Started {
  /** settles when the process ends; never rejects */
  readonly ended: Promise<'ended'>;
  /** lets this process end before the server does */
  release(): void;
}

/**
 * Starts a server; whether it comes up shows by connecting.
 * @param log file that gets what the server prints
 * @throws store.embedded, store.full
 */
export async function startPostmaster(
  postgres: string,
  { path, user }: DataFolder,
  log: string,
  settings: Readonly<Record<string, string>> = SETTINGS,
): Promise<Started> {
  const sockets = await makeSockets(user);
  const output = await open(log, 'a').catch((error: unknown) => {
    throw fileError(error, 'write the log of the embedded server', log);
  });
  try {
    const options = Object.entries(settings).flatMap(([name, value]) => ['-c', `${name}=${value}`]);
    // Without a shell and pg_ctl in between: no path needs quoting, and the end of the process is seen at once.
    const child = spawn(postgres, ['-D', path, '-k', sockets, ...options], {
      ...spawnAs(user),
      detached: true,
      stdio: ['ignore', output.fd, output.fd],
    });
    await new Promise<void>((resolve, reject) => {
      child.once('spawn', resolve);
      child.once('error', (error) => reject(cannotRun(error, postgres)));
    });
    const ended = new Promise<'ended'>((resolve) => child.once('exit', () => void removeSockets(sockets).then(() => resolve('ended'))));
    return { ended, release: () => child.unref() };
  } catch (error) {
    await removeSockets(sockets);
    throw error;
  } finally {
    await output.close();
  }
}

/**
 * How long the server may take to write everything; then it stops at once, and recovers at its next start. A server that is asked to
 * stop while it recovers from a crash may never end (seen with PostgreSQL 18.4 after a full disk).
 */
const STOP_MS = 15_000;
const STOP_AT_ONCE_MS = 10_000;

/** Fast shutdown: sessions end, everything is written. Resolves when the data folder is free. */
export async function stopPostmaster(data: string): Promise<void> {
  const running = await readPostmaster(data);
  if (running === null || !(await isServing(running, data))) return;
  if (!(await endsBy('SIGINT', running, data, STOP_MS))) await endsBy('SIGQUIT', running, data, STOP_AT_ONCE_MS);
  if (running.sockets !== null) await removeSockets(running.sockets);
}

/** Ends a server that has been stopping for too long, because whoever stopped it has gone; false where there is none. */
export async function endStuck(data: string): Promise<boolean> {
  const running = await readPostmaster(data);
  if (running?.status !== 'stopping' || !(await isServing(running, data))) return false;
  return endsBy('SIGQUIT', running, data, STOP_AT_ONCE_MS);
}

async function endsBy(signal: NodeJS.Signals, running: Postmaster, data: string, limit: number): Promise<boolean> {
  const begun = Date.now();
  try {
    process.kill(running.pid, signal);
  } catch {
    return true;
  }
  while (Date.now() - begun < limit) {
    if ((await readPostmaster(data))?.pid !== running.pid || !(await isServing(running, data))) return true;
    await pause(10);
  }
  return false;
}
