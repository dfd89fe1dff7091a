/**
 * The data folder of the embedded server: found, checked, or made by initdb.
 *
 * It is `data` in the store's folder. One exception: a server started by root runs as another user, and where that user cannot enter the
 * store's folder (a clone below a 0700 home), the data lie in a folder of their own below /var/lib/windrow, and `data` is a link
 * there. The place is found through the link only, so a store that is deleted and made anew starts empty.
 *
 * A data folder appears under its name only when it is complete, so any number of processes may make one at once: the first wins, the
 * others use it.
 */
import { spawn } from 'node:child_process';
import { chown, lstat, mkdir, mkdtemp, readFile, readdir, realpath, rename, rm, stat, symlink } from 'node:fs/promises';
import { basename, join } from 'node:path';
import { WindrowError } from '../../core/errors.js';
import type { Binaries } from './binaries.js';
import { fileError, programError } from './embedded-errors.js';
import { isAlive, pause } from './processes.js';
import { canRead, isRoot, newServerUser, spawnAs, type ServerUser } from './server-user.js';

export interface DataFolder {
  readonly path: string;
  readonly user: ServerUser;
}

/** The only role of an embedded server; its folder's permissions say who may be it. */
export const ROLE = 'windrow';

export interface DataFolderOptions {
  readonly folder: string;
  /** where data go that cannot lie in `folder` */
  readonly elsewhere: string;
  /** the programs, once it is known who will run them */
  readonly binaries: (user: ServerUser) => Promise<Binaries>;
  readonly onNotice: (message: string) => void;
}

/** @throws store.embedded, store.full */
export async function ensureDataFolder(options: DataFolderOptions): Promise<DataFolder> {
  const { folder } = options;
  try {
    await mkdir(folder, { recursive: true });
  } catch (error) {
    throw fileError(error, 'make the folder of the store', folder);
  }
  const path = join(folder, 'data');
  if (!(await exists(path))) await create(path, options);
  return existing(path, options);
}

async function existing(name: string, { binaries }: DataFolderOptions): Promise<DataFolder> {
  // The server's user may be able to enter the data, but not the folder with the link to them.
  const path = await realpath(name).catch((error: unknown) => {
    throw fileError(error, 'find the data that the store links to', name);
  });
  const owner = await stat(path);
  if (!isRoot() && owner.uid !== process.getuid?.())
    throw new WindrowError('store.embedded', 'the store belongs to another user; run windrow as that user or as root', {
      where: path,
      found: `user ${owner.uid}`,
      allowed: `user ${process.getuid?.()}`,
    });
  const user = isRoot() ? { uid: owner.uid, gid: owner.gid } : null;
  const version = await readFile(join(path, 'PG_VERSION'), 'utf8').catch((error: unknown) => {
    throw fileError(error, 'read the version of the store: the folder is not a store, or damaged', path);
  });
  const { major } = await binaries(user);
  if (version.trim() !== major)
    throw new WindrowError('store.embedded', 'the store was made by another version of PostgreSQL; use the windrow that made it', {
      where: path,
      found: `PostgreSQL ${version.trim()}`,
      allowed: `PostgreSQL ${major}`,
    });
  return { path, user };
}

async function create(path: string, { folder, elsewhere, binaries, onNotice }: DataFolderOptions): Promise<void> {
  const user = newServerUser();
  const { initdb } = await binaries(user);
  const here = user === null || canRead(folder, user);
  const parent = here ? folder : elsewhere;
  let draft: string | null = null;
  try {
    if (!here) await mkdir(parent, { recursive: true, mode: 0o755 });
    draft = await mkdtemp(join(parent, `${DRAFT}${process.pid}-`));
    if (await isMadeByAnother(path, parent, draft)) {
      await rm(draft, { recursive: true });
      return;
    }
    if (user !== null) await chown(draft, user.uid, user.gid);
    await runInitdb(initdb, draft, user);
    if (here) {
      await rename(draft, path);
    } else {
      const data = join(parent, `store-${basename(draft).slice(-6)}`);
      await rename(draft, data);
      draft = data;
      await symlink(data, path);
      onNotice(`the data of the store are in ${data}, because the database server, which never runs as root, cannot enter ${folder}`);
    }
  } catch (error) {
    if (draft !== null) await rm(draft, { recursive: true, force: true });
    // Another process was faster; its folder is complete.
    if (await exists(path)) return;
    throw error instanceof WindrowError ? error : fileError(error, 'make the data folder of the store', parent);
  }
}

/** Name of a folder that initdb is filling; the id of its process follows. */
const DRAFT = 'initialising-';
/** When the draft of a process that cannot be seen is nobody's any more. */
const ABANDONED_MS = 600_000;

/**
 * Of processes that come at once one makes the data and the others wait for it, since each initdb takes seconds; true when it is done.
 * Removes drafts of processes that were killed on the way.
 */
async function isMadeByAnother(path: string, parent: string, own: string): Promise<boolean> {
  for (;;) {
    let wait = false;
    for (const name of await readdir(parent)) {
      const draft = join(parent, name);
      if (!name.startsWith(DRAFT) || draft === own) continue;
      const found = await stat(draft).catch(() => null);
      if (found === null) continue;
      if (isAlive(parseInt(name.slice(DRAFT.length)))) wait ||= draft < own;
      else if (Date.now() - found.mtimeMs > ABANDONED_MS) await rm(draft, { recursive: true, force: true });
    }
    if (await exists(path)) return true;
    if (!wait) return false;
    await pause(50);
  }
}

function runInitdb(initdb: string, folder: string, user: ServerUser): Promise<void> {
  const options = ['-D', folder, '-U', ROLE, '--locale=C', '-E', 'UTF8', '--auth=trust', '--no-instructions'];
  return new Promise((resolve, reject) => {
    const child = spawn(initdb, options, { ...spawnAs(user), stdio: ['ignore', 'pipe', 'pipe'] });
    let output = '';
    for (const stream of [child.stdout, child.stderr]) stream.on('data', (chunk: Buffer) => (output += chunk.toString()));
    child.on('error', (error) => reject(cannotRun(error, initdb)));
    child.on('close', (status) => (status === 0 ? resolve() : reject(programError('initdb', output, folder))));
  });
}

/** A program of another C library, or of a file system mounted without 'exec', is there but cannot be run. */
export function cannotRun(cause: Error, program: string): WindrowError {
  return new WindrowError('store.embedded', 'the database programs cannot be run on this system; set DATABASE_URL to use a server', {
    where: program,
    found: cause.message,
    allowed: 'a system with the GNU C library, or macOS',
    cause,
  });
}

const exists = async (path: string): Promise<boolean> => (await lstat(path).catch(() => null)) !== null;
